"""Changes and documents as values of rows; everything that can be checked before the database is locked."""

from __future__ import annotations

import json
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from functools import reduce
from typing import Any

from specflow.errors import DocumentError
from specflow.exchange import payload_text, read_text
from specflow.model.base import Document, code_key
from specflow.model.change import Change
from specflow.model.nouns import NOUN_BY_NAME, Noun
from specflow.store.rows import ATTRIBUTES, holds_many

Key = tuple[str, str]
"""A document within the project: noun and code key."""


@dataclass(frozen=True, slots=True)
class Edit:
    """A change that was read: ``document`` (None when it is removed) and the ``body`` to be stored."""

    change: Change
    noun: Noun
    code: str
    document: Document | None
    body: str | None

    @property
    def key(self) -> Key:
        """The document it is about."""
        return self.noun.name, code_key(self.code)

    @property
    def title(self) -> str:
        """The document as messages call it: "requirement R-1"."""
        return f"{self.noun.title} {self.code}"

    def links(self) -> Iterable[tuple[str, str, Sequence[str]]]:
        """Give (field, noun it points to, codes) of every link field of the document."""
        for field, target in self.noun.links:
            value = getattr(self.document, field)
            yield field, target, value if isinstance(value, tuple) else () if value is None else (value,)


def read_edits(changes: Iterable[Change]) -> list[Edit]:
    """Return the changes with their documents read and validated.

    Raises DocumentError for an unreadable document, one with another id than its change, or an id that occurs twice.
    """
    edits: list[Edit] = []
    seen: dict[Key, str] = {}
    for change in changes:
        edit = _read_edit(change)
        if edit.key in seen:
            raise DocumentError(
                f"the id occurs twice among the changes (as {seen[edit.key]} and {edit.code})",
                where=edit.title,
                hint="ids are the same when they differ in case only; keep one of them",
            )
        seen[edit.key] = edit.code
        edits.append(edit)
    return edits


def _read_edit(change: Change) -> Edit:
    noun = NOUN_BY_NAME.get(change.noun)
    if noun is None:
        raise DocumentError(f"{change.noun!r} is no noun of a project", where=change.id)
    if change.action == "remove":
        return Edit(change, noun, change.id, None, None)
    if change.after is None:
        raise DocumentError(
            "the change does not say what the document becomes", where=f"{noun.title} {change.id}"
        )
    document = read_text(noun.name, change.after)
    code: str = getattr(document, noun.id_field)
    if code_key(code) != code_key(change.id):
        raise DocumentError(f"the change holds another document, {code}", where=f"{noun.title} {change.id}")
    return Edit(change, noun, code, document, payload_text(document))


def same_document(noun: str, one: str, other: str) -> bool:
    """Return whether two payload texts say the same, whatever their format version and spelling."""
    return one == other or read_text(noun, one) == read_text(noun, other)


def row_values(edit: Edit, targets: Mapping[Key, int]) -> dict[str, Any]:
    """Return the column values of an edit's row, but for its key; ``targets`` are the keys of linked rows."""
    values: dict[str, Any] = {
        "code": edit.code,
        "code_key": edit.key[1],
        "revision": getattr(edit.document, "revision", 1),
        "body": edit.body,
    }
    for field, target, codes in edit.links():
        if not holds_many(edit.noun, field):
            values[f"{field}_pk"] = targets[target, code_key(codes[0])] if codes else None
    for column, path, _ in ATTRIBUTES.get(edit.noun.name, ()):
        values[column] = str(reduce(getattr, path.split("."), edit.document))
    return values


def link_values(edit: Edit, field: str, targets: Mapping[Key, int], pk: int) -> list[dict[str, int]]:
    """Return the rows of a link field that holds several codes."""
    [(target, codes)] = [(target, codes) for name, target, codes in edit.links() if name == field]
    return [
        {"pk": pk, "position": position, "target_pk": targets[target, code_key(code)]}
        for position, code in enumerate(codes)
    ]


def fields_text(change: Change) -> str:
    """Return the differing fields of a change as JSON text."""
    return json.dumps([field.model_dump() for field in change.fields], ensure_ascii=False)
