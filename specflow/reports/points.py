"""Every required point: what proves it, fails it, or that nothing is known of it."""

from __future__ import annotations

from collections.abc import Sequence

from specflow.conditions import Points, expand, point_words
from specflow.model.conditions import ConditionsSet
from specflow.model.report import Align, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Results, Snapshot
from specflow.model.verdict import ActivityResult, PointResults, RecordRef, Verdict
from specflow.reports.figures import interval, margin, number, text, verdict_tone, with_unit
from specflow.reports.origins import OriginFinder

POINT_COLUMNS = (
    ReportColumn(key="requirement", title="Requirement", width=16),
    ReportColumn(key="activity", title="Activity", width=18),
    ReportColumn(key="item", title="Item", width=14),
    ReportColumn(key="point", title="Required point", width=44),
    ReportColumn(key="proved", title="Proved", width=9),
    ReportColumn(key="verdict", title="Verdict", width=16),
    ReportColumn(key="value", title="Value", align=Align.RIGHT, width=16),
    ReportColumn(key="u", title="U (k = 2)", align=Align.RIGHT, width=12),
    ReportColumn(key="lower", title="Lower limit", align=Align.RIGHT, width=14),
    ReportColumn(key="upper", title="Upper limit", align=Align.RIGHT, width=14),
    ReportColumn(key="margin", title="Margin", align=Align.RIGHT, width=12),
    ReportColumn(key="guarded_margin", title="Guarded margin", align=Align.RIGHT, width=12),
    ReportColumn(key="cell", title="Cell", width=44),
)


def points_table(snapshot: Snapshot, results: Results, requirements: Sequence[Requirement]) -> ReportTable:
    """Return one row a required point and activity, for the item that is shown."""
    finder = OriginFinder(snapshot)
    rows: list[ReportRow] = []
    for requirement in requirements:
        points = points_of(snapshot, requirement)
        for activity in results.of(requirement.id).activities:
            found = shown_points(activity)
            if found is not None:
                finder.fetch(set(found.tables))
            rows.extend(
                _point_row(requirement, activity, points, place, found, finder)
                for place in range(activity.n if found is None else len(found.verdict))
            )
    return ReportTable(
        key="points",
        title="Required points",
        intro="The record that governs each required point, by the item with credit and the most points.",
        columns=POINT_COLUMNS,
        rows=tuple(rows),
    )


def points_of(snapshot: Snapshot, requirement: Requirement) -> Points | None:
    """Return the required points of a requirement; None where it has no conditions set (one point: as it is)."""
    conditions = snapshot.find(ConditionsSet, requirement.conditions)
    return expand(conditions) if conditions is not None else None


def shown_points(activity: ActivityResult) -> PointResults | None:
    """Return the results by the item that is shown, or None where there is no evidence at all."""
    return activity.items.get(activity.shown_item)


def words_of(points: Points | None, place: int) -> str:
    """Return a required point in words."""
    return point_words(points, place) if points is not None else "no conditions stated"


def record_at(found: PointResults, place: int, finder: OriginFinder) -> RecordRef | None:
    """Return the record that governs a point, or None."""
    table = int(found.table[place])
    if table < 0:
        return None
    name = found.tables[table]
    placeholder = RecordRef(name, "", 0)
    column = finder.table(placeholder).values[int(found.column[place])].name
    return RecordRef(name, column, int(found.row[place]))


def _point_row(
    requirement: Requirement,
    activity: ActivityResult,
    points: Points | None,
    place: int,
    found: PointResults | None,
    finder: OriginFinder,
) -> ReportRow:
    head = (
        ReportCell(text=requirement.id),
        text(activity.activity),
        text(activity.shown_item),
        text(words_of(points, place)),
    )
    if found is None:
        nothing = text("")
        none = text(Verdict.NONE.words, verdict_tone(Verdict.NONE))
        return ReportRow(id=requirement.id, cells=(*head, text("no"), none, *[nothing] * 7))
    verdict = Verdict(int(found.verdict[place]))
    record = record_at(found, place, finder)
    unit = finder.column(record).unit if record else requirement.limit.unit
    tolerance = requirement_margin_unit(activity)
    origin = finder.origin(record)
    value = interval(float(found.value_low[place]), float(found.value_high[place]), unit)
    return ReportRow(
        id=requirement.id,
        cells=(
            *head,
            text("yes" if found.proved[place] else "no"),
            text(verdict.words, verdict_tone(verdict)),
            ReportCell(text=value, number=_finite(float(found.value_low[place]))),
            text(with_unit(2 * float(found.u[place]), tolerance)),
            number(float(found.lower[place]), unit),
            number(float(found.upper[place]), unit),
            margin(float(found.margin[place]), tolerance),
            margin(float(found.guarded_margin[place]), tolerance),
            ReportCell(text=str(origin or "–"), origin=origin),
        ),
    )


def requirement_margin_unit(activity: ActivityResult) -> str:
    """Return the unit of margins of an activity, "" where nothing was judged."""
    return activity.governing.unit if activity.governing else ""


def _finite(value: float) -> float | None:
    return value if abs(value) < float("inf") else None
