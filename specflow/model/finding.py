"""Findings: what a rule (or an import) reports: where, what, why, and what to do."""

from __future__ import annotations

from enum import StrEnum

from specflow.model.base import Document
from specflow.model.origin import Origin


class Severity(StrEnum):
    """How much a finding weighs; the order is that of ``RANKS``."""

    INFO = "info"
    WARNING = "warning"
    ERROR = "error"

    @property
    def rank(self) -> int:
        """Return the weight: greater is worse."""
        return ("info", "warning", "error").index(self.value)


class Finding(Document):
    """One report of one rule about one subject (the id of a document)."""

    rule: str
    severity: Severity
    subject: str
    subject_kind: str = "requirement"
    message: str
    why: str = ""
    remedy: str = ""
    origin: Origin | None = None
    related: tuple[str, ...] = ()


class RuleDescription(Document):
    """A rule as the catalogue shows it: what it reports, why it matters, one example of each kind, what to do."""

    code: str
    title: str
    severity: Severity
    noun: str
    why: str
    fails: str
    passes: str
    remedy: str
