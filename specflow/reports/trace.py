"""The trail of one requirement: up to the system, down to allocations, evidence, file, sheet and cell; and back."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from specflow.limits import limit_words
from specflow.model.base import code_key
from specflow.model.block import Block
from specflow.model.budget import Allocation, Budget
from specflow.model.card import TrailStep
from specflow.model.evidence import EvidenceTable
from specflow.model.report import CellTone, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Results, Snapshot
from specflow.model.verdict import ActivityResult, PointResults, RecordRef, RequirementStatus, Verdict
from specflow.parameters.relations import parameters_telling, relation_between
from specflow.reports.budget_trail import budget_words, line_words
from specflow.reports.derivation_trail import derivation_steps, table_derivation_steps
from specflow.reports.figures import interval, label_tone, margin, share, verdict_tone
from specflow.reports.lacking import Lacking
from specflow.reports.origins import OriginFinder
from specflow.reports.points import points_of, record_at, shown_items, words_of
from specflow.reports.provenance import column_steps, file_step, reading_steps, received_step
from specflow.reports.serving import Served, governed_points

MOST_POINTS = 400  # a trail is read by people; the points table of an export has them all


def requirement_trail(
    requirement: Requirement,
    snapshot: Snapshot,
    results: Results,
    *,
    finder: OriginFinder | None = None,
    most_points: int = MOST_POINTS,
    how_read: bool = False,
) -> tuple[TrailStep, ...]:
    """Return the trail, parents first (depth < 0), the requirement (0), then what is below it (> 0).

    Of each item at most ``most_points`` points are listed, those that decide first. ``how_read`` adds below each file
    by what its tables were read, and the columns, and to each point what was converted.
    """
    return (
        *_upwards(requirement, snapshot, results, -1, frozenset()),
        _requirement_step(requirement, results, 0),
        *_allocations(requirement, snapshot, results),
        *_evidence(requirement, snapshot, results, finder or OriginFinder(snapshot), most_points, how_read),
        *_files(requirement, results.of(requirement.id), snapshot, how_read=how_read),
        *_not_counted(results.of(requirement.id)),
    )


def _upwards(
    requirement: Requirement,
    snapshot: Snapshot,
    results: Results,
    depth: int,
    seen: frozenset[str],
) -> Iterator[TrailStep]:
    for code in requirement.parents:
        parent = snapshot.find(Requirement, code)
        if parent is None or parent.id in seen:
            continue
        yield from _upwards(parent, snapshot, results, depth - 1, seen | {parent.id})
        yield _requirement_step(parent, results, depth)
        yield from _shared_by(parent, requirement, snapshot, depth)


def _shared_by(
    parent: Requirement, child: Requirement, snapshot: Snapshot, depth: int
) -> Iterator[TrailStep]:
    """Give the budget by which a parent was shared out, and the lines that the child answers for."""
    for link in snapshot.all(Allocation):
        if same(link.parent, parent.id) and same(link.child, child.id):
            budget = snapshot.find(Budget, link.budget)
            if budget is not None:
                yield _budget_step(budget, link, depth)
                yield _line_step(budget, child, snapshot, depth)


def _requirement_step(
    requirement: Requirement, results: Results, depth: int, kind: str = "requirement"
) -> TrailStep:
    status = results.of(requirement.id)
    words = limit_words(requirement.limit)
    return TrailStep(
        depth=depth,
        kind=kind,
        id=requirement.id,
        text=f"{requirement.title}: {words} · {share(status.k, status.n)} points · {status.label.value}",
        tone=label_tone(status.label),
        origin=requirement.origin,
    )


def _allocations(requirement: Requirement, snapshot: Snapshot, results: Results) -> Iterator[TrailStep]:
    """Give the children: those shared out by a budget under it, each below the lines that it answers for."""
    links = {
        code_key(link.child): link for link in snapshot.all(Allocation) if same(link.parent, requirement.id)
    }
    children = snapshot.children_of.get(code_key(requirement.id), ())
    told: set[str] = set()
    for child in children:
        link = links.get(code_key(child.id))
        budget = snapshot.find(Budget, link.budget) if link is not None else None
        step = _requirement_step(child, results, 1, kind="allocation" if link else "child")
        if link is None or budget is None:
            yield step.model_copy(update={"text": f"{child.block}: {step.text}{_allocation_source(link)}"})
            continue
        if code_key(budget.id) not in told:
            told.add(code_key(budget.id))
            yield _budget_step(budget, link, 1)
        yield _line_step(budget, child, snapshot, 2)
        text = f"{child.block}: {step.text} · {link.state}{_allocation_source(link)}"
        yield step.model_copy(update={"depth": 3, "text": text})


def _budget_step(budget: Budget, link: Allocation, depth: int) -> TrailStep:
    words, is_current = budget_words(budget, link), link.budget_revision == budget.revision
    tone = CellTone.PLAIN if is_current else CellTone.DOUBTFUL
    return TrailStep(depth=depth, kind="budget", id=budget.id, text=words, tone=tone, origin=budget.origin)


def _line_step(budget: Budget, child: Requirement, snapshot: Snapshot, depth: int) -> TrailStep:
    return TrailStep(depth=depth, kind="budget line", text=line_words(budget, child, snapshot))


def same(first: str, second: str) -> bool:
    """Whether two codes name the same document."""
    return code_key(first) == code_key(second)


def _allocation_source(link: Allocation | None) -> str:
    if link is None:
        return ""
    if link.budget:
        return f" · from budget {link.budget} revision {link.budget_revision}"
    return f" · set by hand: {link.manual_reason}"


def _evidence(
    requirement: Requirement,
    snapshot: Snapshot,
    results: Results,
    finder: OriginFinder,
    most: int,
    how_read: bool,
) -> Iterator[TrailStep]:
    status = results.of(requirement.id)
    points = points_of(snapshot, requirement)
    lacking = Lacking(requirement, status, points, snapshot, finder)
    for activity in status.activities:
        yield _activity_step(activity, requirement, snapshot)
        for item, found, places in shown_items(requirement, activity, snapshot):
            if found is not None:
                finder.fetch(set(found.tables))
            listed = deciding(found, places, most)
            for place in listed:
                record = record_at(found, place, finder)
                yield TrailStep(
                    depth=2,
                    kind="point",
                    id=record.table if record else "",
                    text=f"{words_of(points, place)}{f', item {item}' if item else ''}: "
                    f"{_point_words(found, place, requirement, status, lacking)}"
                    f"{_as_recorded(record, requirement, finder, how_read)}",
                    tone=verdict_tone(_verdict(found, place)),
                    origin=finder.origin(record),
                )
                if record is not None:
                    yield from derivation_steps(record, snapshot, finder, 3)
            if len(listed) < len(places):
                yield TrailStep(
                    depth=2, kind="point", text=f"... and {len(places) - len(listed)} more points"
                )


def _as_recorded(
    record: RecordRef | None, requirement: Requirement, finder: OriginFinder, how_read: bool
) -> str:
    """Say what stands in the cell where it is another quantity, was corrected, or (``how_read``) has another unit."""
    if record is None:
        return ""
    column = finder.column(record)
    relation = relation_between(column.quantity.parameter, requirement.quantity.parameter)
    if relation is not None:
        return f" · recorded as {relation.recorded.title} {finder.recorded(record).text}; {relation.words}"
    if finder.as_read(record):
        return f" · recorded as {finder.recorded(record).text}"
    if not how_read or column.unit == requirement.limit.unit:
        return ""
    return f" · recorded as {finder.recorded(record).text}, converted"


def _files(
    requirement: Requirement, status: RequirementStatus, snapshot: Snapshot, *, how_read: bool
) -> Iterator[TrailStep]:
    """Give the files that governing records stand in, with their hash, and below each how the tables were read."""
    found = [results for activity in status.activities for results in activity.items.values()]
    named = dict.fromkeys(table for results in found for table in governed_points(results))
    files: dict[str, list[EvidenceTable]] = {}
    for name in named:
        table = snapshot.find(EvidenceTable, name)
        if table is not None:
            files.setdefault(table.file, []).append(table)
    for tables in files.values():
        yield file_step(tables[0], snapshot).model_copy(update={"depth": 1, "origin": None})
        for table in tables if how_read else ():
            yield from reading_steps(table, snapshot, 2)
            yield from column_steps(
                table, snapshot, 3, parameters=parameters_telling(requirement.quantity.parameter)
            )


def deciding(found: PointResults | None, places: Sequence[int], most: int) -> Sequence[int]:
    """Return the points to list, in their order: all, or the worst by verdict and then by guarded margin."""
    if len(places) <= most:
        return places
    if found is None:
        return places[:most]
    among = np.asarray(places)
    margins = np.nan_to_num(found.guarded_margin[among], nan=np.inf)
    worst = np.lexsort((margins, -found.verdict[among].astype(int)))[:most]
    return [int(place) for place in np.sort(among[worst])]


def _verdict(found: PointResults | None, place: int) -> Verdict:
    return Verdict(int(found.verdict[place])) if found is not None else Verdict.NONE


def _point_words(
    found: PointResults | None,
    place: int,
    requirement: Requirement,
    status: RequirementStatus,
    lacking: Lacking,
) -> str:
    verdict = _verdict(found, place)
    if found is None or found.table[place] < 0:
        lacks = lacking.words(place, found)
        return f"no evidence{f' ({lacks})' if lacks else ''}" if verdict is Verdict.NONE else verdict.words
    value = interval(float(found.value_low[place]), float(found.value_high[place]), requirement.limit.unit)
    plain, guarded = float(found.margin[place]), float(found.guarded_margin[place])
    parts = [value, verdict.words, f"margin {margin(plain, status.unit).text}"]
    if not np.isnan(guarded) and guarded != plain:
        parts.append(f"guarded {margin(guarded, status.unit).text}")
    if verdict <= Verdict.CONDITIONAL_PASS and not found.proved[place]:
        parts.append(lacking.words(place, found) or "does not prove the point")
    return " · ".join(parts)


def _activity_step(activity: ActivityResult, requirement: Requirement, snapshot: Snapshot) -> TrailStep:
    known = snapshot.activities_of.get(code_key(requirement.id), ())
    planned = next((one for one in known if same(one.id, activity.activity)), None)
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
    table: EvidenceTable, snapshot: Snapshot, results: Results, served: Served
) -> tuple[TrailStep, ...]:
    """Return the way back: from a file and its table to the requirements that its records govern."""
    governed = served.get(code_key(table.id), {})
    received = received_step(table, snapshot)
    accepted = f"{table.accepted_by or 'nobody yet'} {table.accepted_at}".strip()
    titled = f" ({table.title})" if table.title else ""
    steps = [
        file_step(table, snapshot),
        *([received] if received else []),
        TrailStep(
            depth=0,
            kind="table",
            id=table.id,
            text=f"{table.rows} rows for block {table.block}{titled}, accepted by {accepted}",
        ),
        *reading_steps(table, snapshot, 1),
        *column_steps(table, snapshot, 1),
        *table_derivation_steps(table, snapshot, 1),
    ]
    for code, count in governed.items():
        requirement = snapshot.find(Requirement, code)
        if requirement is not None:
            steps.append(_served_step(requirement, count, results))
    if not governed:
        why = results.unmatched.get(table.id) or "no record of it governs a required point"
        steps.append(TrailStep(depth=1, kind="requirement", text=why, tone=CellTone.DOUBTFUL))
    return tuple(steps)


def _served_step(requirement: Requirement, governed: int, results: Results) -> TrailStep:
    status = results.of(requirement.id)
    return TrailStep(
        depth=1,
        kind="requirement",
        id=requirement.id,
        text=f"{requirement.title}: governs {governed} of {status.n} points · {status.label.value}",
        tone=label_tone(status.label),
        origin=requirement.origin,
    )


def block_trail(block: Block, snapshot: Snapshot, results: Results, served: Served) -> tuple[TrailStep, ...]:
    """Return a block with the blocks above it, its requirements, items and evidence."""
    steps = [*_blocks_above(block, snapshot), _block_step(block, 0)]
    steps.extend(_block_step(child, 1) for child in snapshot.blocks_below.get(code_key(block.id), ()))
    steps.extend(
        _requirement_step(requirement, results, 1)
        for requirement in snapshot.requirements_of_block.get(code_key(block.id), ())
    )
    steps.extend(
        TrailStep(depth=1, kind="item", id=item.id, text=f"serial {item.serial}, {item.hardware_type.value}")
        for item in snapshot.items
        if same(item.block, block.id)
    )
    for table in snapshot.tables_of_block.get(code_key(block.id), ()):
        governed = served.get(code_key(table.id), {})
        serves = ", ".join(governed) if governed else "no required point"
        step = file_step(table, snapshot)
        text = f"{table.rows} rows, governs points of {serves}"
        steps.append(step.model_copy(update={"depth": 1, "kind": "table", "id": table.id, "text": text}))
    return tuple(steps)


def _block_step(block: Block, depth: int) -> TrailStep:
    many = f", {block.quantity} used" if block.quantity > 1 else ""
    return TrailStep(
        depth=depth,
        kind="block",
        id=block.id,
        text=f"{block.name} ({block.tier.value}{many})",
        origin=block.origin,
    )


def _blocks_above(block: Block, snapshot: Snapshot) -> list[TrailStep]:
    above: list[Block] = []
    parent = snapshot.find(Block, block.parent)
    while parent is not None and parent not in above:
        above.insert(0, parent)
        parent = snapshot.find(Block, parent.parent)
    return [_block_step(one, place - len(above)) for place, one in enumerate(above)]


TRAIL_COLUMNS = (
    ReportColumn(key="kind", title="What", width=20),
    ReportColumn(key="id", title="Id", width=18),
    ReportColumn(key="text", title="Says", width=80),
    ReportColumn(key="origin", title="Where", width=44),
)


def trail_table(title: str, steps: Sequence[TrailStep]) -> ReportTable:
    """Return a trail as a table, what is above first; the depth of a row is its place below the top."""
    top = min((step.depth for step in steps), default=0)
    return ReportTable(
        key="trace",
        title=title,
        columns=TRAIL_COLUMNS,
        rows=tuple(
            ReportRow(
                id=step.id,
                depth=step.depth - top,
                cells=(
                    ReportCell(text=step.kind),
                    ReportCell(text=step.id),
                    ReportCell(text=step.text, tone=step.tone),
                    ReportCell(text=str(step.origin or ""), origin=step.origin),
                ),
            )
            for step in steps
        ),
    )
