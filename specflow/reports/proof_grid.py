"""Proof grids as data: every required point of an activity and item as a cell, with what governs it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import Points, conditions_words, known_dimension
from specflow.model.card import PointState, ProofCell, ProofGrid
from specflow.model.columns import Columns
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import ActivityResult, PointResults, RequirementStatus, Verdict
from specflow.reports.figures import interval, margin, share
from specflow.reports.lacking import Lacking
from specflow.reports.origins import OriginFinder
from specflow.reports.points import points_of, record_at, shown_items, words_of

MOST_CELLS = 3000  # more cannot be looked at; an export has them all
SPARSE = 3  # a table of rows and columns of which most cells are empty says less than a list

STATES = (PointState.FAILING, PointState.WITHOUT_EVIDENCE, PointState.UNDECIDED, PointState.PROVED)
FAILING = (Verdict.FAIL, Verdict.CONDITIONAL_FAIL)


@dataclass(frozen=True, slots=True)
class Sheet:
    """One grid in the making: the points of one item."""

    requirement: Requirement
    status: RequirementStatus
    points: Points | None
    count: int
    found: PointResults | None
    lacking: Lacking
    finder: OriginFinder

    def states(self) -> NDArray[np.int8]:
        """Return the state of every point, as codes into STATES."""
        if self.found is None:
            return np.full(self.count, STATES.index(PointState.WITHOUT_EVIDENCE), np.int8)
        states = np.full(self.count, STATES.index(PointState.UNDECIDED), np.int8)
        states[(self.found.table < 0) | (self.found.verdict == Verdict.NONE)] = STATES.index(
            PointState.WITHOUT_EVIDENCE
        )
        states[self.found.proved] = STATES.index(PointState.PROVED)
        states[np.isin(self.found.verdict, FAILING)] = STATES.index(PointState.FAILING)
        return states

    def cell(self, place: int, state: PointState) -> ProofCell:
        """Return one point as a cell."""
        found = self.found
        words = words_of(self.points, place)
        lacks = (
            self.lacking.words(place, found)
            if state in (PointState.WITHOUT_EVIDENCE, PointState.UNDECIDED)
            else ""
        )
        if found is None:
            return ProofCell(words=words, state=state, verdict="no evidence", lacks=lacks)
        record = record_at(found, place, self.finder)
        origin = self.finder.origin(record)
        low, high = float(found.value_low[place]), float(found.value_high[place])
        guarded, plain = float(found.guarded_margin[place]), float(found.margin[place])
        return ProofCell(
            words=words,
            state=state,
            verdict=verdict_words(Verdict(int(found.verdict[place])), state),
            value=interval(low, high, self.requirement.limit.unit) if record else "",
            margin=margin(plain if np.isnan(guarded) else guarded, self.status.unit).text,
            item=found.item,
            origin=str(origin or ""),
            lacks=lacks,
        )


def verdict_words(verdict: Verdict, state: PointState) -> str:
    """Say a verdict; one that passes and does not prove its point says so."""
    if verdict is Verdict.NONE:
        return "no evidence"
    unproved = state is PointState.UNDECIDED and verdict <= Verdict.CONDITIONAL_PASS
    return f"{verdict.words}, but not proved" if unproved else verdict.words


def proof_grids(
    requirement: Requirement, status: RequirementStatus, snapshot: Snapshot, finder: OriginFinder
) -> tuple[ProofGrid, ...]:
    """Return one grid for each activity and each item that must prove it, or that fails somewhere.

    Where any one item will do, that is the one shown.
    """
    points = points_of(snapshot, requirement)
    lacking = Lacking(requirement, status, points, snapshot, finder)
    grids = []
    for activity in status.activities:
        for item, found, places in shown_items(requirement, activity, snapshot):
            whole = found is None or len(places) == len(found.verdict)
            if found is not None and not whole and not np.isin(found.verdict, FAILING).any():
                continue
            if found is not None:
                finder.fetch(set(found.tables))
            count = len(found.verdict) if found is not None else len(places)
            sheet = Sheet(requirement, status, points, count, found, lacking, finder)
            grids.append(_grid(sheet, _title(activity, item, sheet, len(status.activities))))
    return tuple(grids)


def _title(activity: ActivityResult, item: str, sheet: Sheet, activities: int) -> str:
    proved = sheet.found.k if sheet.found is not None else 0
    names = [activity.activity] if activities > 1 or not item else []
    names += [f"item {item}"] if item else []
    return f"{', '.join(names)}: {share(proved, sheet.count)} proved"


def _grid(sheet: Sheet, title: str) -> ProofGrid:
    states = sheet.states()
    if sheet.count > MOST_CELLS:
        worst = np.sort(np.argsort(states, kind="stable")[:MOST_CELLS])
        note = f"the {MOST_CELLS} worst of {sheet.count} points; the points table of an export has all"
        return ProofGrid(title=title, cells=(_cells(sheet, states, worst.tolist()),), note=note)
    layout = grid_layout(sheet.points) if sheet.points is not None else None
    if layout is None:
        return ProofGrid(title=title, cells=(_cells(sheet, states, range(sheet.count)),))
    cells = _cells(sheet, states, range(sheet.count))
    return ProofGrid(
        title=title,
        row_dimension=layout.row_dimension,
        column_dimension=layout.column_dimension,
        row_titles=layout.row_titles,
        column_titles=layout.column_titles,
        cells=tuple(
            tuple(cells[place] if place >= 0 else None for place in row) for row in layout.places.tolist()
        ),
    )


def _cells(sheet: Sheet, states: NDArray[np.int8], places: Sequence[int]) -> tuple[ProofCell, ...]:
    return tuple(sheet.cell(place, STATES[int(states[place])]) for place in places)


@dataclass(frozen=True, slots=True)
class GridLayout:
    """Which point stands in which cell: ``places`` (rows, columns), -1 where the combination is not required."""

    row_dimension: str
    column_dimension: str
    row_titles: tuple[str, ...]
    column_titles: tuple[str, ...]
    places: NDArray[np.int64]


def grid_layout(points: Points) -> GridLayout | None:
    """Lay points out with the dimension of most values as columns and all others as rows.

    None where nothing varies, or where most cells would be empty (listed rows).
    """
    codes = _varying(points)
    if not codes:
        return None
    across = max(codes, key=lambda name: int(codes[name].max()))
    down = [name for name in codes if name != across]
    column, column_first = _numbered([codes[across]], points.size)
    row, row_first = _numbered([codes[name] for name in down], points.size)
    if len(row_first) * len(column_first) > SPARSE * points.size:
        return None
    places = np.full((len(row_first), len(column_first)), -1, np.int64)
    places[row, column] = np.arange(points.size)
    return GridLayout(
        ", ".join(_dimension_words(name) for name in down),
        _dimension_words(across),
        _titles(points, down, row_first),
        _titles(points, [across], column_first),
        places,
    )


def _varying(points: Points) -> dict[str, NDArray[np.int64]]:
    """Return the dimensions with several required values, as codes in rising order of value."""
    low = points.columns_lo
    found: dict[str, NDArray[np.int64]] = {}
    for name, values in low.numeric.items():
        unique, codes = np.unique(values, return_inverse=True)
        if len(unique) > 1:
            found[name] = codes.astype(np.int64)
    for name, column in low.text.items():
        if len(np.unique(column.codes)) > 1:
            found[name] = column.codes.astype(np.int64)
    return found


def _numbered(codes: Sequence[NDArray[np.int64]], size: int) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return for each point the number of its combination of codes, and for each combination its first point."""
    if not codes:
        return np.zeros(size, np.int64), np.zeros(1, np.int64)
    _, first, number = np.unique(np.stack(codes), axis=1, return_index=True, return_inverse=True)
    return np.asarray(number, np.int64).reshape(-1), np.asarray(first, np.int64)


def _titles(points: Points, names: Sequence[str], first: NDArray[np.int64]) -> tuple[str, ...]:
    low, high = (_only(columns, names) for columns in (points.columns_lo, points.columns_hi))
    return tuple(conditions_words(low, int(place), high) for place in first)


def _only(columns: Columns, names: Sequence[str]) -> Columns:
    return Columns(
        columns.size,
        {name: values for name, values in columns.numeric.items() if name in names},
        {name: column for name, column in columns.text.items() if name in names},
        columns.units,
    )


def _dimension_words(name: str) -> str:
    known = known_dimension(name)
    return known.title if known else name.replace("_", " ")
