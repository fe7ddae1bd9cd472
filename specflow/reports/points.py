"""Every required point: what proves it, fails it, or that nothing is known of it."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from specflow.conditions import Points, compile_points, point_words
from specflow.errors import ConditionsError
from specflow.model.base import code_key
from specflow.model.conditions import ConditionsSet
from specflow.model.report import Align, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Results, Snapshot
from specflow.model.verdict import ActivityResult, PointResults, RecordRef, RequirementStatus, Verdict
from specflow.reports.figures import DASH, margin, number, reading, text, verdict_tone
from specflow.reports.origins import OriginFinder

POINT_COLUMNS = (
    ReportColumn(key="requirement", title="Requirement", width=16),
    ReportColumn(key="activity", title="Activity", width=18),
    ReportColumn(key="item", title="Item", width=14),
    ReportColumn(key="point", title="Required point", width=44),
    ReportColumn(key="proved", title="Proved", width=9),
    ReportColumn(key="verdict", title="Verdict", width=16),
    ReportColumn(
        key="value", title="Value", align=Align.RIGHT, width=16, explains="in the unit of the limit"
    ),
    ReportColumn(key="u", title="U (k = 2)", align=Align.RIGHT, width=12),
    ReportColumn(key="lower", title="Lower limit", align=Align.RIGHT, width=14),
    ReportColumn(key="upper", title="Upper limit", align=Align.RIGHT, width=14),
    ReportColumn(key="margin", title="Margin", align=Align.RIGHT, width=12),
    ReportColumn(key="guarded_margin", title="Guarded margin", align=Align.RIGHT, width=12),
    ReportColumn(key="recorded", title="As recorded", align=Align.RIGHT, width=16),
    ReportColumn(key="cell", title="Cell", width=44),
)
POINTS_INTRO = (
    "The record that governs each required point: all points for the item that is shown (the one with credit and the "
    "most points), then what other items have. 'As recorded' is what stands in the cell, before any conversion or "
    "correction; what was derived stands in none: its cell is that of the raw reading that governs."
)


def points_table(snapshot: Snapshot, results: Results, requirements: Sequence[Requirement]) -> ReportTable:
    """Return one row a required point, activity and item."""
    finder = OriginFinder(snapshot)
    rows: list[ReportRow] = []
    for requirement in requirements:
        points = points_of(snapshot, requirement)
        status = results.of(requirement.id)
        for activity in status.activities:
            for item, found, places in shown_items(requirement, activity, snapshot):
                if found is not None:
                    finder.fetch(set(found.tables))
                rows.extend(
                    _point_row(requirement, activity, status, item, points, place, found, finder)
                    for place in places
                )
    return ReportTable(
        key="points", title="Required points", intro=POINTS_INTRO, columns=POINT_COLUMNS, rows=tuple(rows)
    )


def points_count(results: Results, requirements: Sequence[Requirement]) -> int:
    """Return how many required points there are, before any table of them is made."""
    return sum(results.of(requirement.id).n for requirement in requirements)


def shown_items(
    requirement: Requirement, activity: ActivityResult, snapshot: Snapshot
) -> Iterator[tuple[str, PointResults | None, Sequence[int]]]:
    """Give the items of an activity with the places to list: all of the item shown, evidence only of others."""
    shown = shown_points(activity)
    absent = absent_provers(requirement, activity, snapshot)
    every = range(points_per_item(requirement, activity, snapshot))
    each = requirement.provers.rule == "each of"
    ordered = sorted(activity.items.items(), key=lambda pair: pair[1] is not shown)
    for item, found in ordered:
        whole = is_prover(requirement, item, snapshot) if each else found is shown
        yield item, found, every if whole else np.flatnonzero(found.table >= 0).tolist()
    for item in absent or (() if ordered else ("",)):
        yield item, None, every


def points_per_item(requirement: Requirement, activity: ActivityResult, snapshot: Snapshot) -> int:
    """Return the number of required points that one item has to prove."""
    found = next(iter(activity.items.values()), None)
    if found is not None:
        return len(found.verdict)
    return activity.n // max(len(absent_provers(requirement, activity, snapshot)), 1)


def absent_provers(requirement: Requirement, activity: ActivityResult, snapshot: Snapshot) -> tuple[str, ...]:
    """Return the items that must prove a requirement and have no evidence at all."""
    if requirement.provers.rule != "each of":
        return ()
    present = {_item_key(name, snapshot) for name in activity.items}
    named = {_item_key(name, snapshot): name for name in requirement.provers.items}
    return tuple(name for key, name in named.items() if key not in present)


def is_prover(requirement: Requirement, item: str, snapshot: Snapshot) -> bool:
    """Whether an item is one of those that each must prove the requirement."""
    if requirement.provers.rule != "each of":
        return False
    named = {_item_key(name, snapshot) for name in requirement.provers.items}
    return _item_key(item, snapshot) in named


def _item_key(name: str, snapshot: Snapshot) -> str:
    item = snapshot.items_by_name.get(code_key(name))
    return code_key(item.id if item is not None else name)


def points_of(snapshot: Snapshot, requirement: Requirement) -> Points | None:
    """Return the required points; None without a conditions set, or where it cannot be had (the status says why)."""
    conditions = snapshot.find(ConditionsSet, requirement.conditions)
    if conditions is None:
        return None
    try:
        return compile_points(conditions)
    except ConditionsError:
        return None


def shown_points(activity: ActivityResult) -> PointResults | None:
    """Return the results by the item that is shown, or None where there is no evidence at all."""
    return activity.items.get(activity.shown_item)


def words_of(points: Points | None, place: int) -> str:
    """Return a required point in words; a requirement without conditions has one, at any conditions."""
    return point_words(points, place) if points is not None else "any conditions"


def record_at(found: PointResults | None, place: int, finder: OriginFinder) -> RecordRef | None:
    """Return the record that governs a point, or None."""
    source = found.source_at(place) if found is not None else None
    if source is None:
        return None
    table, column, row = source
    return RecordRef(table, finder.table(table).values[column].name, row)


def _point_row(
    requirement: Requirement,
    activity: ActivityResult,
    status: RequirementStatus,
    item: str,
    points: Points | None,
    place: int,
    found: PointResults | None,
    finder: OriginFinder,
) -> ReportRow:
    head = (
        ReportCell(text=requirement.id, link=f"matrix/{requirement.id}"),
        text(activity.activity),
        text(item),
        text(words_of(points, place)),
    )
    if found is None:
        none = text(Verdict.NONE.words, verdict_tone(Verdict.NONE))
        return ReportRow(id=requirement.id, cells=(*head, text("no"), none, *[text("")] * 8))
    verdict = Verdict(int(found.verdict[place]))
    record = record_at(found, place, finder)
    origin = finder.origin(record)
    unit, tolerance = requirement.limit.unit, status.unit
    return ReportRow(
        id=requirement.id,
        cells=(
            *head,
            text("yes" if found.proved[place] else "no"),
            text(verdict.words, verdict_tone(verdict)),
            reading(float(found.value_low[place]), float(found.value_high[place]), unit),
            number(2 * float(found.u[place]), tolerance),
            number(float(found.lower[place]), unit),
            number(float(found.upper[place]), unit),
            margin(float(found.margin[place]), tolerance),
            margin(float(found.guarded_margin[place]), tolerance),
            finder.recorded(record),
            ReportCell(text=str(origin or DASH), origin=origin),
        ),
    )
