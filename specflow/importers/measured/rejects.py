"""Cells that hold something which cannot be evidence: collected with address and reason, long runs as one entry."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, field
from datetime import date, datetime, time, timedelta

from specflow.importers.readers import Value, address
from specflow.model.evidence import LeftOut

_MOST_SINGLY = 40


@dataclass(frozen=True, slots=True)
class Rejected:
    """One cell (or, with ``whole_row``, one row) that is not read."""

    row: int
    column: int
    text: str
    reason: str
    whole_row: bool = False


@dataclass
class Rejects:
    """What one table has rejected, and blank cells by their reason.

    ``turned``: rows and columns of the table have changed places. ``keep_placeholders`` says that -999 and the like are
    readings of this table. ``sums`` are rows worked out from the others: the table records that they were left out, and
    they do not stand in the way of taking it.
    """

    sheet: str
    turned: bool = False
    cells: list[Rejected] = field(default_factory=list)
    sums: list[Rejected] = field(default_factory=list)
    blank: Counter[str] = field(default_factory=Counter)
    keep_placeholders: bool = False

    def apart(self) -> Rejects:
        """Return empty ones of the same table, for cells whose blanks are not counted."""
        return Rejects(self.sheet, self.turned, keep_placeholders=self.keep_placeholders)

    def add(self, row: int, column: int, value: Value, reason: str) -> None:
        """Reject one cell."""
        self.cells.append(Rejected(row, column, cell_text(value), reason))

    def rejected(self) -> tuple[LeftOut, ...]:
        """The rejected cells; of many with one reason below each other the first stands for the run."""
        return self._entries(self.cells)

    def left_out(self) -> tuple[LeftOut, ...]:
        """All that the table does not hold: the rejected cells, and the rows that sum up the others."""
        return self._entries([*self.cells, *self.sums])

    def _entries(self, cells: Sequence[Rejected]) -> tuple[LeftOut, ...]:
        if len(cells) <= _MOST_SINGLY:
            return tuple(
                self._entry(one, one) for one in sorted(cells, key=lambda one: (one.row, one.column))
            )
        entries = []
        run: list[Rejected] = []
        for one in sorted(cells, key=lambda one: (one.column, one.row)):
            if run and not _continues(run[-1], one):
                entries.append(self._entry(run[0], run[-1]))
                run = []
            run.append(one)
        entries.append(self._entry(run[0], run[-1]))
        return tuple(entries)

    def _address(self, one: Rejected) -> str:
        return address(one.column, one.row) if self.turned else address(one.row, one.column)

    def _entry(self, first: Rejected, last: Rejected) -> LeftOut:
        cell = self._address(first)
        if last.row != first.row:
            cell = f"{cell}:{self._address(last)}"
        return LeftOut(sheet=self.sheet, cell=cell, text=first.text[:200], reason=first.reason)


def cell_text(value: Value) -> str:
    """The value of a cell as a person would read it."""
    if isinstance(value, datetime | date | time):
        return value.isoformat()
    if isinstance(value, timedelta):
        return str(value)
    if isinstance(value, float):
        return f"{value:.15g}"
    return str(value)


def _continues(before: Rejected, after: Rejected) -> bool:
    return (before.column, before.reason, before.whole_row) == (
        after.column,
        after.reason,
        after.whole_row,
    ) and after.row - before.row <= 1
