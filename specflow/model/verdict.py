"""Verdicts and the five axes of status. Definitions and order: see each docstring; codes are for arrays."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import IntEnum, StrEnum

import numpy as np
from numpy.typing import NDArray


class Verdict(IntEnum):
    """One record against one limit at one required point.

    Numbered in the order in which the worst governs: a greater number is worse, as rolled up within an activity
    (fail > conditional fail > undecidable > inconclusive > insufficient > none > conditional pass > pass;
    not triggered ranks as pass).
    """

    NOT_TRIGGERED = 0
    PASS = 1
    CONDITIONAL_PASS = 2
    NONE = 3
    INSUFFICIENT = 4
    INCONCLUSIVE = 5
    UNDECIDABLE = 6
    CONDITIONAL_FAIL = 7
    FAIL = 8

    @property
    def words(self) -> str:
        """Return the verdict as people say it."""
        return self.name.lower().replace("_", " ")


class Standing(StrEnum):
    """May this record count?"""

    ACCEPTED = "accepted"
    PROVISIONAL = "provisional"
    STALE = "stale"
    SUPERSEDED = "superseded"
    WITHDRAWN = "withdrawn"


class PointsState(StrEnum):
    """How far the required points of an activity are proved."""

    NOT_PLANNED = "not planned"
    PLANNED = "planned"
    IN_PROGRESS = "in progress"
    PARTIALLY_VERIFIED = "partially verified"
    FULLY_COVERED = "all points proved"


class Compliance(StrEnum):
    """Does what was built meet the limit?"""

    COMPLIANT = "compliant"
    NON_COMPLIANT = "non-compliant"
    PARTIALLY_COMPLIANT = "partially compliant"
    NOT_DETERMINED = "not determined"
    NOT_APPLICABLE = "not applicable"


class CloseOut(StrEnum):
    """Open or closed; the reason stands beside it."""

    OPEN = "open"
    CLOSED = "closed"


class Label(StrEnum):
    """The one label of a row; the first that applies, in this order, is shown."""

    NOT_APPLICABLE = "not applicable"
    WAIVER_EXCEEDED = "waiver lapsed or exceeded"
    FAILING = "failing"
    PARTIALLY_COMPLIANT = "partially compliant"
    CONFLICTING = "conflicting evidence"
    REVERIFY = "re-verification needed"
    TBD = "TBD"
    UNALLOCATED = "unallocated"
    NOT_PLANNED = "no verification planned"
    PLANNED = "planned"
    UNDECIDABLE = "undecidable"
    INSUFFICIENT = "insufficient"
    PARTIALLY_VERIFIED = "partially verified"
    INCONCLUSIVE = "inconclusive"
    MARGINAL = "marginal"
    TBR = "TBR"
    READY = "ready for close-out"
    CLOSED_WAIVED = "closed - waived"
    CLOSED_VERIFIED = "closed - verified"


@dataclass(frozen=True, slots=True)
class RecordRef:
    """One value: a row of one value column of one evidence table (``row`` is the position in the table)."""

    table: str
    column: str
    row: int


@dataclass(frozen=True, slots=True)
class PointResults:
    """What is known of each required point of one activity by one item (or by all, where they may complete it).

    All arrays have n entries, one a required point: ``verdict`` (int8, codes of Verdict), ``proved`` (bool: a
    governing verdict that passes, from evidence with credit), ``counted`` (bool: the governing reading weighs: it has
    credit, or it fails), ``margin`` and ``guarded_margin`` (float64 in ``unit``,
    NaN without evidence), ``table`` (int32 into ``tables``, -1 without evidence), ``column`` (int32 into the value
    columns of that table) and ``row`` (int32): the governing record.
    """

    item: str
    verdict: NDArray[np.int8]
    proved: NDArray[np.bool_]
    counted: NDArray[np.bool_]
    margin: NDArray[np.float64]
    guarded_margin: NDArray[np.float64]
    value_low: NDArray[np.float64]
    value_high: NDArray[np.float64]
    u: NDArray[np.float64]
    lower: NDArray[np.float64]
    upper: NDArray[np.float64]
    table: NDArray[np.int32]
    column: NDArray[np.int32]
    row: NDArray[np.int32]
    tables: tuple[str, ...]

    @property
    def k(self) -> int:
        """Return the number of points proved."""
        return int(np.count_nonzero(self.proved))

    def source_at(self, point: int) -> tuple[str, int, int] | None:
        """Return table, place of the value column and row of the governing record at a point; None without one."""
        table = int(self.table[point])
        if table < 0:
            return None
        return self.tables[table], int(self.column[point]), int(self.row[point])

    def points_with(self, *verdicts: Verdict) -> list[int]:
        """Return the points whose governing verdict is one of these."""
        return np.flatnonzero(np.isin(self.verdict, verdicts)).tolist()

    @property
    def unproved(self) -> list[int]:
        """The points that are not proved and do not fail either."""
        return np.flatnonzero(~self.proved & (self.verdict < Verdict.CONDITIONAL_FAIL)).tolist()

    @property
    def without_credit(self) -> list[int]:
        """The points at which a reading passes and may not prove them, whatever else may be lacking."""
        passing = self.verdict <= Verdict.CONDITIONAL_PASS
        return np.flatnonzero(passing & ~self.counted & (self.table >= 0)).tolist()

    @property
    def without_uncertainty(self) -> list[int]:
        """The points whose governing reading has no known uncertainty."""
        return np.flatnonzero((self.table >= 0) & np.isnan(self.u)).tolist()


@dataclass(frozen=True, slots=True)
class GoverningPoint:
    """The worst verdict, then the smallest guarded margin: the point that decides."""

    point: int
    words: str
    verdict: Verdict
    margin: float
    guarded_margin: float
    unit: str
    item: str
    record: RecordRef | None


@dataclass(frozen=True, slots=True)
class ActivityResult:
    """One activity: k of n points proved, by the item that is shown, and by each item.

    Of the points of those who must prove it, ``n_missing`` have nothing that counts; apart from those that fail,
    ``n_without_evidence`` have no reading at all and ``n_undecided`` have readings that neither prove nor fail.
    """

    activity: str
    state: PointsState
    verdict: Verdict
    k: int
    n: int
    n_failing: int
    n_missing: int
    shown_item: str
    items: Mapping[str, PointResults]
    governing: GoverningPoint | None
    smallest_margin: GoverningPoint | None
    marginal: bool
    why: tuple[str, ...] = ()
    n_without_evidence: int = 0
    n_undecided: int = 0


@dataclass(frozen=True, slots=True)
class RequirementStatus:
    """The five axes of one requirement, its label and what governs it.

    ``unit`` is the unit of margins (the tolerance unit of the limit). ``remarks`` are plain sentences, most
    important first. ``ambiguous``, ``conflicts``, ``mismatches``, ``stale`` (an unproved point has stale evidence),
    ``unallocated``, ``waived_by`` (waivers that cover all that fails) and ``waivers_exceeded`` (why an approved waiver
    does not help) feed the rules: the label shows only one of them.
    """

    requirement: str
    activities: tuple[ActivityResult, ...]
    standing: Mapping[Standing, int]
    k: int
    n: int
    n_failing: int
    n_missing: int
    verdict: Verdict
    compliance: Compliance
    close_out: CloseOut
    close_out_reason: str
    label: Label
    governing: GoverningPoint | None
    smallest_margin: GoverningPoint | None
    unit: str
    marginal: bool
    remarks: tuple[str, ...] = ()
    ambiguous: tuple[RecordRef, ...] = ()
    conflicts: tuple[Conflict, ...] = ()
    mismatches: tuple[Mismatch, ...] = ()
    stale: bool = False
    unallocated: bool = False
    waived_by: tuple[str, ...] = ()
    waivers_exceeded: tuple[str, ...] = ()

    @property
    def n_without_evidence(self) -> int:
        """Points that do not fail and have no reading at all."""
        return sum(activity.n_without_evidence for activity in self.activities)

    @property
    def n_undecided(self) -> int:
        """Points that have readings which neither prove them nor fail."""
        return sum(activity.n_undecided for activity in self.activities)


@dataclass(frozen=True, slots=True)
class Conflict:
    """Two records of the same item and build at one point that differ by more than their uncertainties allow."""

    point: int
    words: str
    item: str
    first: RecordRef
    second: RecordRef
    difference: float
    allowed: float
    unit: str


@dataclass(frozen=True, slots=True)
class Mismatch:
    """Evidence of the right block and parameter that may not be compared: what differs, and what would help."""

    table: str
    column: str
    rows: int
    what: str
    remedy: str
    kind: str = "quantity"
