"""The sheet of budget lines: one row a figure of a position; what belongs to the position is said once."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

from specflow.importers.sheets.budget_line_layout import LAYOUT, SHARED, SIDEBANDS
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.line_tolerances import line_tolerance, tolerance_words
from specflow.importers.sheets.line_values import CellContext, read_line_value, value_words
from specflow.importers.sheets.parameters import known_parameter
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import Sheet
from specflow.model.base import code_key
from specflow.model.block import Block, Maturity
from specflow.model.budget import Budget, BudgetLine, BudgetPosition
from specflow.model.conditions import ConditionMap, ConditionsSet


@dataclass(slots=True)
class _Place:
    """A position as its rows describe it."""

    row: SheetRow
    block: str
    said: dict[str, object] = field(default_factory=dict)


@dataclass(slots=True)
class _Lines:
    """What the rows of one budget gave so far."""

    budget: str
    rows: list[SheetRow] = field(default_factory=list)
    places: dict[int, _Place] = field(default_factory=dict)
    lines: list[BudgetLine] = field(default_factory=list)
    words: list[str] = field(default_factory=list)


def read(rows: Sequence[SheetRow], intake: Intake) -> None:
    """Give every budget named on the sheet the positions and lines of its rows, in place of those it had."""
    groups: dict[str, _Lines] = {}
    budget, order, block = "", "", ""
    for row in rows:
        named = row.text("budget") or budget
        if code_key(named) != code_key(budget):
            order, block = "", ""
        position = row.text("position") or order
        own = row.text("block") or (block if position == order else "")
        budget, order, block = named, position, own
        if not named:
            row.needed("budget")
            continue
        group = groups.setdefault(code_key(named), _Lines(intake.link(row, "budget", Budget, named)))
        group.rows.append(row)
        _row(row, group, position, own, intake)
    for group in groups.values():
        _finish(group, intake)


def _row(row: SheetRow, group: _Lines, position: str, block: str, intake: Intake) -> None:
    row.subject = f"{group.budget} position {position}"
    order = _order(row, position)
    if not block:
        row.needed("block")
        return
    code = intake.link(row, "block", Block, block)
    if order is None:
        return
    place = group.places.setdefault(order, _Place(row, code))
    if code_key(place.block) != code_key(code):
        row.fault(
            "block", f"position {order} is {place.block} above", "give the other block a position of its own"
        )
    _say(row, place, intake)
    line = _line(row, order, code, group, intake)
    if line is None:
        return
    if any(
        one.position == order and code_key(one.parameter) == code_key(line.parameter) for one in group.lines
    ):
        row.fault("parameter", f"{line.place} is given above", "keep one of the two rows")
        return
    group.lines.append(line)


def _order(row: SheetRow, text: str) -> int | None:
    if not text:
        row.needed("position")
        return None
    if not text.isdecimal():
        row.fault("position", f"{text!r} is no position", "count from the input: 1, 2 ...")
        return None
    return int(text)


def _say(row: SheetRow, place: _Place, intake: Intake) -> None:
    """Note what a row says of its position; another statement on a later row is refused."""
    said: dict[str, object] = {}
    for column in ("name", "path"):
        if row.text(column):
            said[column] = row.text(column)
    if row.text("count"):
        said["count"] = row.whole("count", 1, least=1)
    if row.text("passive"):
        said["passive"] = row.yes("passive", False)
    if row.text("condition_map"):
        said["condition_map"] = intake.reference(row, "condition_map", ConditionMap)
    for name, value in said.items():
        if place.said.setdefault(name, value) != value:
            row.fault(name, f"position {row.subject} says {place.said[name]} above", "say it once a position")


def _line(row: SheetRow, order: int, block: str, group: _Lines, intake: Intake) -> BudgetLine | None:
    named, text = known_parameter(row, "parameter", intake), row.needed("value")
    unit = row.text("unit") or row.units.get("value", "")
    context = _context(group.budget, block, unit, intake)
    found = row.attempt("value", lambda: read_line_value(text, context)) if text else None
    if found is None or named is None:
        return None
    notes = list(found.notes)
    tolerance = line_tolerance(row, found.unit, notes)
    growth = row.number_or("growth", 0.0)
    if growth < 0:
        row.fault(
            "growth", f"{growth:g} is no allowance", "write how much worse it may get, as a positive number"
        )
    convention = named.plane if named.plane in SIDEBANDS else ""
    line = row.build(
        BudgetLine,
        position=order,
        block=block,
        parameter=named.parameter.key,
        value=found.value,
        unit=found.unit,
        drifts=found.drifts,
        tolerance=tolerance,
        correlation_group=row.text("correlation_group"),
        shared=row.one_of("shared", SHARED, "common"),
        growth=growth,
        sideband=_sideband(row, convention),
        plane=row.text("plane") or ("" if convention else named.plane),
        statistic=row.text("statistic") or named.statistic,
        maturity=row.choice("maturity", Maturity, Maturity.ESTIMATED),
        source=row.prose("source"),
    )
    if line is not None:
        intake.place(group.budget, line.place, row.origin("value"))
        intake.place(group.budget, f"position {order}", row.origin("block"))
        words = f"{line.block} {line.parameter} {value_words(line.value, line.unit, line.drifts)}"
        words += f" {tolerance_words(tolerance, line.unit)}" if tolerance is not None else ""
        group.words.append("; ".join((words, *notes)))
    return line


def _sideband(row: SheetRow, named: str) -> str:
    """Return of which sidebands a noise figure is; a name that says it ("NF DSB") must not be lost or contradicted."""
    written = row.one_of("sideband", SIDEBANDS, "")
    if named and written and named != ("DSB" if written == "both" else written):
        row.fault(
            "sideband",
            f"the name {row.text('parameter')!r} says {named}, this column says {written}",
            "say of which sidebands the figure is, the same in both",
        )
    return written or named


def _context(budget: str, block: str, unit: str, intake: Intake) -> CellContext:
    """The conditions that the block meets: what its map makes, then what the conditions set of the budget states."""
    maps = [
        one
        for one in intake.all(ConditionMap)
        if one.block is not None and code_key(one.block) == code_key(block)
    ]
    names = [entry.target for one in maps for entry in one.entries]
    found = intake.find(Budget, budget)
    conditions = intake.find(ConditionsSet, found.conditions if found is not None else None)
    stated = [one.name for one in conditions.dimensions] if conditions is not None else []

    def of(kind: str) -> tuple[str, ...]:
        own = tuple(name for name in names if kind in name)
        return own or tuple(name for name in stated if kind in name)

    return CellContext(unit, of("temperature"), of("frequency"), intake.folder)


def _finish(group: _Lines, intake: Intake) -> None:
    budget = intake.find(Budget, group.budget)
    if budget is None or not all(row.sound for row in group.rows):
        return
    positions = tuple(
        BudgetPosition.model_validate({"order": order, "block": place.block, **place.said})
        for order, place in sorted(group.places.items())
    )
    row = group.rows[0]
    fields = {name: getattr(budget, name) for name in Budget.model_fields}
    document = row.build(Budget, **fields | {"positions": positions, "lines": tuple(group.lines)})
    if document is not None:
        intake.add(document, set(Budget.model_fields))
        count = f"{len(positions)} position{'s' if len(positions) != 1 else ''}, {len(group.lines)} lines"
        intake.echo(document.id, "; ".join((count, *group.words)))


SHEET = Sheet(LAYOUT, Budget, read, lambda row, intake: "", is_further=True)
