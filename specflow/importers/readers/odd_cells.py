"""What is odd about single cells: the oddities a bare value does not show, kept as runs down a column."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from enum import StrEnum


class OddKind(StrEnum):
    """Why a cell is not simply the number or text that it seems to be."""

    PERCENT = "percent format"  # value 0.031 is shown as 3.1 %
    SCALED = "scaled format"  # value 12000 is shown as 12
    UNIT_FORMAT = "unit in the number format"  # value 45 is shown as 45 dBm, or as 45 €
    DATE = "date or time"
    ERROR = "error cell"  # the grid holds ""
    NO_VALUE = "formula without a stored value"  # the grid holds "" or a placeholder 0
    TEXT_NUMBER = "number stored as text"
    HIDDEN = "hidden row or column"
    MERGED = "part of a merged range"


@dataclass(frozen=True, slots=True)
class OddCell:
    """One oddity of one cell; ``detail`` is the format code, the error text or the anchor, ``unit`` the text that
    the number format writes beside the number."""

    kind: OddKind
    detail: str = ""
    unit: str = ""


@dataclass(frozen=True, slots=True)
class OddRun:
    """The same oddity in rows ``first`` to ``last`` (both included) of one column."""

    column: int
    first: int
    last: int
    cell: OddCell


class OddCells:
    """Odd cells of a sheet, kept as runs down a column: a percent-formatted column is one run, not 100,000 entries."""

    __slots__ = ("_columns",)

    def __init__(self, runs: Iterable[OddRun] = ()) -> None:
        self._columns: dict[int, list[OddRun]] = {}
        for run in sorted(runs, key=lambda run: (run.column, run.first)):
            self._columns.setdefault(run.column, []).append(run)

    def at(self, row: int, column: int) -> OddCell | None:
        """The oddity of one cell, if it has one."""
        runs = self._columns.get(column, [])
        place = bisect_right(runs, row, key=lambda run: run.first) - 1
        return runs[place].cell if place >= 0 and row <= runs[place].last else None

    def in_column(self, column: int, start: int, stop: int) -> list[OddRun]:
        """The runs of ``column`` that touch rows ``start`` up to, not including, ``stop``."""
        return [run for run in self._columns.get(column, []) if run.first < stop and run.last >= start]

    def __iter__(self) -> Iterator[OddRun]:
        for runs in self._columns.values():
            yield from runs

    def __len__(self) -> int:
        return sum(run.last - run.first + 1 for run in self)
