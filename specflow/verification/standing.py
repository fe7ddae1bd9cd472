"""Standing: may a record count? Withdrawn, superseded, stale, provisional or accepted; the first that applies.

*Withdrawn*: found wrong. *Superseded*: replaced by named rows of another table; a failing reading stays open until
the supersession names it *and* an accepted reading of the successor decides the same point (see ``grid``). *Stale*: a
change record took effect after the reading was taken, or what a derived value was made from does not stand any more
(see ``outdated``). *Provisional*: not accepted yet, dated after the day of judgement, or taken with an instrument whose
calibration had run out; without a date, if that was before the reading was accepted.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from datetime import date

import numpy as np
from numpy.typing import NDArray

from specflow.model.base import code_key
from specflow.model.block import Item
from specflow.model.columns import TextColumn
from specflow.model.evidence import EvidenceTable, Supersession, Withdrawal
from specflow.model.requirement import Method
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import Standing
from specflow.parameters.relations import parameters_telling
from specflow.verification.changed import Touch, touched
from specflow.verification.dates import day_of, is_after
from specflow.verification.outdated import outdated_tables

Codes = NDArray[np.int8]
#: Rows that were replaced by name, and the keys of the tables that replace them (and of those that replace these).
Replacement = tuple[NDArray[np.bool_], frozenset[str]]

ACCEPTED, PROVISIONAL, STALE, SUPERSEDED, REPLACED, WITHDRAWN = range(6)
#: Standing by code. REPLACED is superseded by a record that names the fail: nothing of it stays open once that record
#: has decided the point.
STANDINGS = (
    Standing.ACCEPTED,
    Standing.PROVISIONAL,
    Standing.STALE,
    Standing.SUPERSEDED,
    Standing.SUPERSEDED,
    Standing.WITHDRAWN,
)

_OBSERVED = frozenset({Method.TEST, Method.DEMONSTRATION, Method.INSPECTION})
_REASONED = frozenset({Method.ANALYSIS, Method.SIMILARITY})
#: Which evidence a change of one aspect touches; every other aspect touches all evidence of its subject.
_TOUCHED = {"procedure": _OBSERVED, "calibration": _OBSERVED, "model": _REASONED}


@dataclass(frozen=True, slots=True)
class RowStanding:
    """Standing of each row of a table for one parameter: ``codes`` (rows,) int8, with ``reasons``.

    ``replaced``: the rows whose fail a supersession names, and by which tables it may be settled.
    """

    codes: Codes
    all_accepted: bool
    reasons: tuple[str, ...] = ()
    replaced: tuple[Replacement, ...] = ()

    def outdated(self, reason: str) -> RowStanding:
        """Return the same rows, stale for a reason that concerns all of them."""
        return RowStanding(
            np.maximum(self.codes, np.int8(STALE)), False, (*self.reasons, reason), self.replaced
        )


@dataclass(frozen=True)
class StandingRegister:
    """What people recorded about evidence, by the table or block it is about, as seen on one date."""

    as_of: date
    withdrawals: Mapping[str, list[Withdrawal]]
    supersessions: Mapping[str, list[Supersession]]
    changes: Mapping[str, Sequence[Touch]]
    items: Mapping[str, Item] = field(default_factory=dict)
    outdated: Mapping[str, str] = field(default_factory=dict)

    @classmethod
    def of(cls, snapshot: Snapshot, as_of: date) -> StandingRegister:
        """Collect the records of a snapshot; what was recorded or takes effect later than ``as_of`` does not count."""
        withdrawals: dict[str, list[Withdrawal]] = defaultdict(list)
        supersessions: dict[str, list[Supersession]] = defaultdict(list)
        for withdrawal in snapshot.all(Withdrawal):
            if not is_after(withdrawal.at, as_of):
                withdrawals[code_key(withdrawal.table)].append(withdrawal)
        for supersession in snapshot.all(Supersession):
            if not is_after(supersession.at, as_of):
                supersessions[code_key(supersession.earlier)].append(supersession)
        return cls(
            as_of,
            dict(withdrawals),
            dict(supersessions),
            touched(snapshot, as_of),
            snapshot.items_by_name,
            outdated_tables(snapshot, withdrawals, supersessions),
        )

    def standing(
        self, table: EvidenceTable, parameter: str, items: TextColumn, dates: TextColumn | None
    ) -> RowStanding:
        """Return the standing of every row of ``table`` as evidence of ``parameter``."""
        codes = np.zeros(table.rows, np.int8)
        if self._nothing_recorded(table, dates):
            return RowStanding(codes, True)
        reasons: list[str] = []
        for reason, rows in self._provisional(table, dates):
            _mark(codes, rows, PROVISIONAL, reason, reasons)
        for reason, rows in self._stale(table, parameter, items, dates):
            _mark(codes, rows, STALE, reason, reasons)
        if outdated := self.outdated.get(code_key(table.id)):
            _mark(codes, np.ones(table.rows, bool), STALE, outdated, reasons)
        replaced: list[Replacement] = []
        for supersession in self.supersessions.get(code_key(table.id), ()):
            code = REPLACED if supersession.names_fail else SUPERSEDED
            reason = f"superseded by {supersession.later}" + _because(supersession.reason)
            rows = _rows(table, supersession.rows)
            _mark(codes, rows, code, reason, reasons)
            if supersession.names_fail:
                replaced.append((rows, self._successors(supersession.later)))
        for withdrawal in self.withdrawals.get(code_key(table.id), ()):
            reason = "withdrawn" + _because(withdrawal.reason)
            _mark(codes, _rows(table, withdrawal.rows), WITHDRAWN, reason, reasons)
        named = tuple(f"{table.id}: {reason}" for reason in reasons)
        return RowStanding(codes, not codes.any(), named, tuple(replaced))

    def _successors(self, table: str) -> frozenset[str]:
        """Return the keys of a table and of all that took its place since."""
        found, queue = set[str](), [code_key(table)]
        while queue:
            key = queue.pop()
            if key not in found:
                found.add(key)
                queue += [code_key(one.later) for one in self.supersessions.get(key, ())]
        return frozenset(found)

    def _nothing_recorded(self, table: EvidenceTable, dates: TextColumn | None) -> bool:
        """Whether a table is accepted, taken on one day that has come, and nobody recorded anything about it."""
        key = code_key(table.id)
        taken = table.performed_on is not None and dates is None and table.performed_on <= self.as_of
        plain = taken and bool(table.accepted_by) and not table.provisional and not table.equipment
        recorded = key in self.supersessions or key in self.withdrawals or key in self.outdated
        known = recorded or code_key(table.block) in self.changes
        return plain and not known

    def _provisional(
        self, table: EvidenceTable, dates: TextColumn | None
    ) -> Iterable[tuple[str, NDArray[np.bool_]]]:
        every = np.ones(table.rows, bool)
        if table.provisional or not table.accepted_by:
            yield "not accepted yet", every
        taken = _dated(table, dates)
        undated = every if taken is None else ~taken
        if taken is not None:
            late = ~_before_date(table, dates, self.as_of.isoformat(), inclusive=True) & taken
            yield f"dated after the day of judgement ({self.as_of})", late
        for instrument in table.equipment:
            due = instrument.calibration_due
            if due is not None and taken is not None:
                expired = taken & ~_before_date(table, dates, due.isoformat(), inclusive=True)
                yield f"the calibration of {instrument.asset} had run out on {due}", expired
            if due is not None and due < (day_of(table.accepted_at) or self.as_of):
                yield f"without a date, and the calibration of {instrument.asset} ran out on {due}", undated

    def _stale(
        self, table: EvidenceTable, parameter: str, items: TextColumn, dates: TextColumn | None
    ) -> Iterable[tuple[str, NDArray[np.bool_]]]:
        for touch in self.changes.get(code_key(table.block), ()):
            change = touch.change
            if change.parameters and parameters_telling(parameter).isdisjoint(
                map(code_key, change.parameters)
            ):
                continue
            if table.method not in _TOUCHED.get(change.aspect, frozenset(Method)):
                continue
            rows = _before_date(table, dates, change.effective.isoformat())
            dated = _dated(table, dates)
            rows = rows | ~dated if dated is not None else np.ones(table.rows, bool)
            if touch.item is not None:
                rows = rows & self._may_be_of(table, items, touch.item)
            yield touch.words, rows

    def _may_be_of(self, table: EvidenceTable, items: TextColumn, item: str) -> NDArray[np.bool_]:
        """Return which rows may be of an item: those that name it, and observations that name none."""
        wanted = self._id(item)
        hits = [self._id(label) == wanted for label in items.labels]
        return np.array([*hits, table.method in _OBSERVED])[items.codes]

    def _id(self, name: str) -> str:
        found = self.items.get(code_key(name))
        return code_key(name if found is None else found.id)


def _mark(codes: Codes, rows: NDArray[np.bool_], code: int, reason: str, reasons: list[str]) -> None:
    if rows.any():
        codes[rows] = np.maximum(codes[rows], code)
        count = int(np.count_nonzero(rows))
        reasons.append(reason if count == len(codes) else f"{count} of {len(codes)} rows {reason}")


def _rows(table: EvidenceTable, rows: tuple[int, ...] | None) -> NDArray[np.bool_]:
    if rows is None:
        return np.ones(table.rows, bool)
    marked = np.zeros(table.rows, bool)
    marked[[row for row in rows if 0 <= row < table.rows]] = True
    return marked


def _because(reason: str) -> str:
    return f": {reason}" if reason else ""


def _dated(table: EvidenceTable, dates: TextColumn | None) -> NDArray[np.bool_] | None:
    """Return which rows have a date at all; None where none has."""
    if table.performed_on is not None:
        return np.ones(table.rows, bool)
    return None if dates is None else dates.codes >= 0


def _before_date(
    table: EvidenceTable, dates: TextColumn | None, day: str, *, inclusive: bool = False
) -> NDArray[np.bool_]:
    """Return which rows were taken before ``day`` (ISO dates compare as text); False where no date is known."""

    def earlier(text: str) -> bool:
        return text[:10] <= day if inclusive else text[:10] < day

    whole = table.performed_on is not None and earlier(table.performed_on.isoformat())
    if dates is None:
        return np.full(table.rows, whole)
    return np.array([*map(earlier, dates.labels), whole])[dates.codes]
