"""A change: the step from one document to the next. Import preview and baseline comparison are both lists of these."""

from __future__ import annotations

from typing import Literal

from specflow.model.base import Code, Document


class FieldChange(Document):
    """One field that differs, as text, with what it means ("tightened by 0.5 dB")."""

    field: str
    before: str
    after: str
    meaning: str = ""


class Change(Document):
    """Add, edit or remove one document of one noun.

    ``before`` and ``after`` are the document payloads (dicts as JSON text): the store applies ``after`` only when
    ``base_revision`` is still the revision stored.
    """

    noun: str
    id: Code
    action: Literal["add", "edit", "remove"]
    base_revision: int | None = None
    fields: tuple[FieldChange, ...] = ()
    before: str | None = None
    after: str | None = None
    reason: str = ""

    def sentence(self) -> str:
        """Say the change in one line."""
        verb = {"add": "added", "edit": "changed", "remove": "removed"}[self.action]
        details = "; ".join(
            change.meaning or f"{change.field}: {change.before} → {change.after}" for change in self.fields
        )
        return f"{self.noun} {self.id} {verb}" + (f": {details}" if details else "")
