"""What people decide, with name and reason: waivers, nonconformances, dispositions, approvals, declared splits."""

from __future__ import annotations

from datetime import date
from typing import Literal

from specflow.model.base import Code, Document
from specflow.model.origin import Origin


class Waiver(Document):
    """A bounded, approved, expiring acceptance of a shortfall; it closes, it never makes compliant.

    ``permitted`` is the limit text that the governing value must still meet. ``deviation`` is before production,
    ``waiver`` after.
    """

    id: Code
    kind: Literal["waiver", "deviation"] = "waiver"
    requirement: Code
    requirement_revision: int = 1
    items: tuple[str, ...] = ()
    conditions: str = ""
    permitted: str
    reason: str
    effect: str = ""
    requester: str = ""
    approver: str = ""
    requested_on: date | None = None
    decided_on: date | None = None
    expires_on: date | None = None
    state: Literal["requested", "approved", "rejected", "lapsed", "closed"] = "requested"
    nonconformance: Code | None = None
    revision: int = 1
    origin: Origin | None = None


class Nonconformance(Document):
    """A record that something does not meet its limit, and what was decided about it."""

    id: Code
    requirement: Code | None = None
    table: Code | None = None
    description: str
    classification: Literal["minor", "major"] = "minor"
    disposition: Literal["", "return", "rework", "repair", "use as is", "scrap"] = ""
    decided_by: str = ""
    decided_on: date | None = None
    state: Literal["open", "closed"] = "open"
    reverify: bool = True
    revision: int = 1
    origin: Origin | None = None


class Disposition(Document):
    """A reasoned decision about a finding (conflicting evidence, an open child): who, when and why."""

    id: Code
    rule: str
    subject: str
    reason: str
    by: str
    on: date
    expires_on: date | None = None
    revision: int = 1
    origin: Origin | None = None


class Approval(Document):
    """The board's decision on a requirement, recorded on top of what is computed."""

    id: Code
    requirement: Code
    requirement_revision: int = 1
    decision: Literal["closed", "kept open"]
    computed_label: str = ""
    by: str
    role: str = ""
    on: date
    baseline: Code | None = None
    note: str = ""
    revision: int = 1
    origin: Origin | None = None


class DeclaredSplit(Document):
    """A known shortfall on part of the scope, declared: what makes a requirement partially compliant.

    ``scope_not_met`` is a condition (``frequency >= 29 GHz``, ``item == LNA-2``): what fails outside it is not
    declared.
    """

    id: Code
    requirement: Code
    scope_not_met: str
    reason: str
    by: str
    on: date
    revision: int = 1
    origin: Origin | None = None
