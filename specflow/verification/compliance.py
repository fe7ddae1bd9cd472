"""Compliance: does what was built meet the limit? From what counts, never from what is missing.

Non-compliant: at least one governing verdict is a fail. Partially compliant: the same, where people declared the
split and everything that fails lies within it. Compliant: every required activity has all its points proved. A waiver
changes nothing here.
"""

from __future__ import annotations

from dataclasses import dataclass

from specflow.model.verdict import Compliance, Verdict
from specflow.verification.waiving import NO_WAIVER, Waiving


@dataclass(frozen=True, slots=True)
class StatusFacts:
    """What the axes, the label and the close-out of a requirement are derived from.

    ``counted``: something counts; ``in_progress``: there are readings, which may not. ``not_representative`` are the
    items on which a qualification was proved that are no hardware to be qualified.
    """

    applicable: bool = True
    to_be_defined: bool = False
    to_be_reviewed: bool = False
    unallocated: bool = False
    planned: bool = True
    counted: bool = False
    in_progress: bool = False
    complete: bool = False
    verdicts: frozenset[Verdict] = frozenset({Verdict.NONE})
    some_proved: bool = False
    split_declared: bool = False
    split_remarks: tuple[str, ...] = ()
    conflicting: bool = False
    stale: bool = False
    marginal: bool = False
    waiving: Waiving = NO_WAIVER
    approved: bool = False
    nonconformances: tuple[str, ...] = ()
    not_representative: tuple[str, ...] = ()
    open_children: tuple[str, ...] = ()
    not_applicable_reason: str = ""

    @property
    def fails(self) -> bool:
        """Whether any governing verdict is a fail, conditional or not."""
        return bool(self.verdicts & {Verdict.FAIL, Verdict.CONDITIONAL_FAIL})


def compliance(facts: StatusFacts) -> Compliance:
    """Return the compliance that the facts come to."""
    if not facts.applicable:
        return Compliance.NOT_APPLICABLE
    if facts.to_be_defined:
        return Compliance.NOT_DETERMINED
    if facts.fails:
        split = facts.split_declared and facts.some_proved
        return Compliance.PARTIALLY_COMPLIANT if split else Compliance.NON_COMPLIANT
    return Compliance.COMPLIANT if facts.complete else Compliance.NOT_DETERMINED
