"""The trail of one requirement: up to the system, down to allocations, evidence, file, sheet and cell; and back."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from specflow.limits import limit_words
from specflow.model.base import code_key
from specflow.model.budget import Allocation
from specflow.model.card import TrailStep
from specflow.model.evidence import EvidenceFile, EvidenceTable
from specflow.model.origin import Origin, column_letters
from specflow.model.report import CellTone
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Results, Snapshot
from specflow.model.verdict import ActivityResult, PointResults, RecordRef, RequirementStatus, Verdict
from specflow.parameters import Dictionary
from specflow.reports.figures import DASH, interval, label_tone, margin, share, verdict_tone
from specflow.reports.origins import OriginFinder
from specflow.reports.points import points_of, record_at, shown_points, words_of

MOST_POINTS = 400  # a trail is read by people; the points table of an export has them all


def requirement_trail(
    requirement: Requirement, snapshot: Snapshot, results: Results, dictionary: Dictionary
) -> tuple[TrailStep, ...]:
    """Return the trail, parents first (depth < 0), the requirement (0), then what is below it (> 0)."""
    return (
        *_upwards(requirement, snapshot, results, dictionary, -1, frozenset()),
        _requirement_step(requirement, results, dictionary, 0),
        *_allocations(requirement, snapshot, results, dictionary),
        *_evidence(requirement, snapshot, results),
    )


def _upwards(
    requirement: Requirement,
    snapshot: Snapshot,
    results: Results,
    dictionary: Dictionary,
    depth: int,
    seen: frozenset[str],
) -> Iterator[TrailStep]:
    for code in requirement.parents:
        parent = snapshot.find(Requirement, code)
        if parent is None or parent.id in seen:
            continue
        yield from _upwards(parent, snapshot, results, dictionary, depth - 1, seen | {parent.id})
        yield _requirement_step(parent, results, dictionary, depth)


def _requirement_step(
    requirement: Requirement, results: Results, dictionary: Dictionary, depth: int, kind: str = "requirement"
) -> TrailStep:
    status = results.of(requirement.id)
    words = limit_words(requirement.limit, dictionary.get(requirement.quantity.parameter))
    return TrailStep(
        depth=depth,
        kind=kind,
        id=requirement.id,
        text=f"{requirement.title}: {words} · {share(status.k, status.n)} points · {status.label.value}",
        tone=label_tone(status.label),
        origin=requirement.origin,
    )


def _allocations(
    requirement: Requirement, snapshot: Snapshot, results: Results, dictionary: Dictionary
) -> Iterator[TrailStep]:
    links = {
        code_key(link.child): link for link in snapshot.all(Allocation) if same(link.parent, requirement.id)
    }
    for child in snapshot.children_of.get(code_key(requirement.id), ()):
        link = links.get(code_key(child.id))
        step = _requirement_step(child, results, dictionary, 1, kind="allocation" if link else "child")
        yield step.model_copy(update={"text": f"{child.block}: {step.text}{_allocation_source(link)}"})


def same(first: str, second: str) -> bool:
    """Whether two codes name the same document."""
    return code_key(first) == code_key(second)


def _allocation_source(link: Allocation | None) -> str:
    if link is None:
        return ""
    if link.budget:
        return f" · from budget {link.budget} revision {link.budget_revision}"
    return f" · set by hand: {link.manual_reason}"


def _evidence(requirement: Requirement, snapshot: Snapshot, results: Results) -> Iterator[TrailStep]:
    finder = OriginFinder(snapshot)
    status = results.of(requirement.id)
    for activity in status.activities:
        yield _activity_step(activity, requirement, snapshot)
        found = shown_points(activity)
        if found is None:
            continue
        finder.fetch(set(found.tables))
        yield from _point_steps(requirement, activity, found, snapshot, finder)
    yield from _not_counted(status)


def _activity_step(activity: ActivityResult, requirement: Requirement, snapshot: Snapshot) -> TrailStep:
    planned = next(
        (
            one
            for one in snapshot.activities_of.get(code_key(requirement.id), ())
            if same(one.id, activity.activity)
        ),
        None,
    )
    how = (
        f"{planned.method.value}, {planned.stage.value}" if planned and planned.planned else "not planned yet"
    )
    shown = f", shown: item {activity.shown_item}" if activity.shown_item else ""
    return TrailStep(
        depth=1,
        kind="activity",
        id=activity.activity,
        text=f"{how} · {activity.state.value} · {share(activity.k, activity.n)} points{shown}",
        tone=verdict_tone(activity.verdict),
    )


def _point_steps(
    requirement: Requirement,
    activity: ActivityResult,
    found: PointResults,
    snapshot: Snapshot,
    finder: OriginFinder,
) -> Iterator[TrailStep]:
    points = points_of(snapshot, requirement)
    unit = activity.governing.unit if activity.governing else ""
    for place in range(min(len(found.verdict), MOST_POINTS)):
        record = record_at(found, place, finder)
        verdict = Verdict(int(found.verdict[place]))
        value = DASH
        if record is not None:
            column = finder.column(record)
            value = interval(float(found.value_low[place]), float(found.value_high[place]), column.unit)
        yield TrailStep(
            depth=2,
            kind="point",
            id=record.table if record else "",
            text=f"{words_of(points, place)}: {value} · {verdict.words} · margin "
            f"{margin(float(found.margin[place]), unit).text}",
            tone=verdict_tone(verdict),
            origin=finder.origin(record),
        )
    if len(found.verdict) > MOST_POINTS:
        yield TrailStep(
            depth=2,
            kind="point",
            text=f"... and {len(found.verdict) - MOST_POINTS} more points; the points table of an export has all",
        )


def _not_counted(status: RequirementStatus) -> Iterator[TrailStep]:
    for mismatch in status.mismatches:
        yield TrailStep(
            depth=1,
            kind="not counted",
            id=mismatch.table,
            text=f"{mismatch.rows} records of column {mismatch.column}: {mismatch.what}; {mismatch.remedy}",
            tone=CellTone.DOUBTFUL,
        )


def table_trail(
    table: EvidenceTable, snapshot: Snapshot, results: Results, served: Sequence[Requirement]
) -> tuple[TrailStep, ...]:
    """Return the way back: from a file and its table to the requirements that its records govern."""
    file = snapshot.find(EvidenceFile, table.file)
    name = file.name if file else table.file
    steps = [
        TrailStep(
            depth=-1,
            kind="file",
            id=table.file,
            text=f"{name}, SHA-256 {file.sha256[:16] if file else ''}…",
            origin=Origin(file=name, sha256=file.sha256 if file else "", sheet=table.sheet),
        ),
        TrailStep(
            depth=0,
            kind="table",
            id=table.id,
            text=f"{table.rows} rows for block {table.block}, accepted by {table.accepted_by or 'nobody yet'}",
        ),
    ]
    steps.extend(
        TrailStep(
            depth=1,
            kind="column",
            id=table.id,
            text=f"column {column_letters(column.column)}: {column.quantity.parameter} in {column.unit} "
            f"(unit from {column.unit_from})",
        )
        for column in table.values
    )
    for requirement in served:
        status = results.of(requirement.id)
        governed = sum(_points_governed(activity, table.id) for activity in status.activities)
        steps.append(
            TrailStep(
                depth=1,
                kind="requirement",
                id=requirement.id,
                text=f"{requirement.title}: governs {governed} of {status.n} points · {status.label.value}",
                tone=label_tone(status.label),
                origin=requirement.origin,
            )
        )
    return tuple(steps)


def requirements_served(table: EvidenceTable, snapshot: Snapshot, results: Results) -> list[Requirement]:
    """Return the requirements that have a point governed by a record of this table."""
    return [
        requirement
        for requirement in snapshot.requirements
        if any(_points_governed(activity, table.id) for activity in results.of(requirement.id).activities)
    ]


def _points_governed(activity: ActivityResult, table: str) -> int:
    return max((_governed_by(found, table) for found in activity.items.values()), default=0)


def _governed_by(found: PointResults, table: str) -> int:
    if table not in found.tables:
        return 0
    return int((found.table == found.tables.index(table)).sum())


def governing_record(status: RequirementStatus) -> RecordRef | None:
    """Return the record that governs a requirement, if there is one."""
    return status.governing.record if status.governing else None
