"""Reading a budget: from the document to a chain whose lines have values at every place of evaluation."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain, Overrides, ReadLine, line_key, overridden
from specflow.budgets.checks import check_line, check_readable
from specflow.budgets.levels import Levels
from specflow.budgets.line_values import line_values
from specflow.budgets.own_conditions import (
    DRIVE,
    DRIVEN,
    own_conditions,
    physical_temperature,
    position_maps,
    with_levels,
)
from specflow.budgets.physical import physical_ends
from specflow.budgets.required import Required, required_conditions
from specflow.budgets.roles import role_of, to_role
from specflow.conditions.recorded import recorded_numbers
from specflow.errors import CalculationError, ConditionsError, UnitError
from specflow.model.base import code_key
from specflow.model.budget import Budget, BudgetLine, Law
from specflow.model.budget_line import ConditionTable, Trace
from specflow.model.columns import Columns
from specflow.model.conditions import ConditionMap
from specflow.model.parameter import Better
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.units import convert, parse_unit

Floats = NDArray[np.float64]


def read_budget(
    budget: Budget, snapshot: Snapshot, dictionary: Dictionary, *, values: Overrides | None = None
) -> Chain:
    """Return the budget with every line read at its block's own conditions.

    ``values`` replaces the values of lines (see ``LineKey``), in the unit of the line, at each place of evaluation or
    one for all; NaN keeps the line's own. Raises SpecflowError with place and remedy for everything that is not right.
    """
    check_readable(budget, dictionary, values)
    required = required_conditions(budget, snapshot)
    maps = position_maps(budget, snapshot)
    plain = [own_conditions(one, required.columns) for one in maps]
    reader = _Reader(budget, snapshot, dictionary, required, values)
    levels = Levels(budget.chain, _input_level(budget, required, reader))
    own: list[Columns] = []
    lines: list[ReadLine] = []
    for row, (condition_map, columns) in enumerate(zip(maps, plain, strict=True)):
        here, read = _position(reader, row, condition_map, columns, levels.before(row))
        own.append(here)
        lines.extend(read)
        levels.passed(row, _gain(read, required.size))
    temperatures, notes = _temperatures(budget, own)
    return Chain(
        budget,
        required,
        budget.chain,
        tuple(lines),
        temperatures,
        tuple(own),
        levels.start,
        (*notes, *_line_notes(budget)),
    )


class _Reader:
    """What is needed to read one line."""

    def __init__(
        self,
        budget: Budget,
        snapshot: Snapshot,
        dictionary: Dictionary,
        required: Required,
        values: Overrides | None,
    ) -> None:
        self.budget = budget
        self.snapshot = snapshot
        self.dictionary = dictionary
        self.required = required
        self.values = values
        self.rows = {position.order: row for row, position in enumerate(budget.chain)}

    def of(self, row: int) -> list[BudgetLine]:
        """Return the lines of one position."""
        return [line for line in self.budget.lines if self.rows[line.position] == row]

    def read(self, line: BudgetLine, own: Columns) -> ReadLine:
        """Return one line with its values."""
        where = f"budget {self.budget.id}, {line.place}"
        role = role_of(self.budget, line, self.dictionary)
        convert = to_role(line, role, self.dictionary, where)
        given = overridden(line, self.values)
        if given is not None and len(given) not in (1, self.required.size):
            raise CalculationError(
                f"{len(given)} values are given, {self.required.size} places are evaluated",
                where=where,
                hint="give one value for each place, or one for all",
            )
        if given is not None and not np.isnan(given).any():
            values = given
        else:
            values = line_values(line, own, self.snapshot, where)
            values = values if given is None else np.where(np.isnan(given), values, given)
        if line.growth:
            values = values + self._worse(line, where) * line.growth
        position = self.budget.chain[self.rows[line.position]]
        ends = physical_ends(line, role, convert, is_passive=position.passive)
        read = ReadLine(line, self.rows[line.position], role, convert, values, *ends)
        check_line(read, position, where)
        return read

    def _worse(self, line: BudgetLine, where: str) -> float:
        parameter = self.dictionary.get(line.parameter)
        better = parameter.better if parameter is not None else Better.NEITHER
        if better not in (Better.HIGHER, Better.LOWER):
            raise CalculationError(
                f"no direction of {line.parameter} is the worse one, so a growth allowance has none",
                where=where,
                hint="write the allowance into the value",
            )
        return -1.0 if better is Better.HIGHER else 1.0


def _position(
    reader: _Reader, row: int, condition_map: ConditionMap | None, columns: Columns, level: Floats | None
) -> tuple[Columns, list[ReadLine]]:
    """Read the lines of one position; gains first, because the level behind it depends on them."""
    lines = reader.of(row)
    if level is not None:  # figures are those of one element, which is fed by an equal share
        level = level - 10.0 * np.log10(reader.budget.chain[row].count)
    if reader.budget.law is not Law.CASCADE:
        return columns, [reader.read(line, columns) for line in lines]
    mapped = [entry.target for entry in condition_map.entries] if condition_map is not None else []
    roles = {line_key(line): role_of(reader.budget, line, reader.dictionary) for line in lines}
    gains = [line for line in lines if roles[line_key(line)].figure == "gain"]
    others = [line for line in lines if roles[line_key(line)].figure != "gain"]
    here = columns if level is None else with_levels(columns, mapped, **{DRIVE: level})
    for line in gains:
        if (
            DRIVEN in _asked(line)
            and DRIVEN not in mapped
            and (level is not None or DRIVEN not in columns.numeric)
        ):
            raise ConditionsError(
                f"the gain depends on {DRIVEN}, the level behind the block, which depends on the gain",
                where=f"budget {reader.budget.id}, {line.place}",
                hint=f"give the gain by {DRIVE}, the level in front of the block",
            )
    read = [reader.read(line, here) for line in gains]
    if level is not None:
        here = with_levels(here, mapped, **{DRIVEN: level + _gain(read, reader.required.size)})
    return here, read + [reader.read(line, here) for line in others]


def _asked(line: BudgetLine) -> set[str]:
    """Name the conditions that a line depends on."""
    names = {drift.dimension for drift in line.drifts}
    if isinstance(line.value, ConditionTable):
        names.add(line.value.dimension)
    if isinstance(line.value, Trace) and line.value.along:
        names.add(line.value.along)
    return names


def _gain(read: Sequence[ReadLine], size: int) -> Floats:
    total = np.zeros(size)
    for one in read:
        if one.role.figure == "gain":
            total = total + one.figure(one.values)
    return total


def _input_level(budget: Budget, required: Required, reader: _Reader) -> Floats | None:
    """Return the level that drives the chain: the budget's own, a source's line, or what the conditions set states."""
    if budget.law is not Law.CASCADE:
        return None
    if budget.input_level is not None:
        try:
            value = convert(budget.input_level, parse_unit(budget.input_level_unit), parse_unit("dBm"))
        except UnitError as error:
            raise UnitError(
                f"the input level: {error.message}",
                where=f"budget {budget.id}",
                hint=error.hint or "give it in dBm",
            ) from None
        return np.full(required.size, value)
    for line in budget.lines:
        if code_key(line.parameter) == "output_power" and reader.rows[line.position] == 0:
            source = reader.read(replace_drive(line), required.columns)
            level = source.figure(source.values) + 10.0 * np.log10(budget.chain[0].count)
            return np.broadcast_to(level, (required.size,))
    if DRIVE in required.columns.numeric:
        return recorded_numbers(required.columns, DRIVE, "dBm")
    return None


def replace_drive(line: BudgetLine) -> BudgetLine:
    """Return the line of a source, whose level is read before any level of the chain is known."""
    if {DRIVE, DRIVEN} & _asked(line):
        raise ConditionsError(
            "the level of the source depends on a level of the chain that it drives",
            where=line.place,
            hint="give it by frequency or temperature",
        )
    return line


def _temperatures(budget: Budget, own: Sequence[Columns]) -> tuple[Floats, list[str]]:
    size = own[0].size if own else 1
    temperatures = np.full((len(own), size), np.nan)
    notes: list[str] = []
    for row, (position, columns) in enumerate(zip(budget.chain, own, strict=True)):
        found, name = physical_temperature(columns)
        if found is not None and float(found.min()) < 0:
            raise ConditionsError(
                f"{name} is {float(found.min()):.4g} K, below 0 K",
                where=f"budget {budget.id}, {position.label} (position {position.order})",
                hint="correct the conditions set, or the condition map of the block",
            )
        if found is not None:
            temperatures[row] = found
        if position.passive and budget.law is Law.CASCADE:
            taken = (
                f"at {name.replace('_', ' of the ').replace('temperature of the ', '')} temperature"
                if name
                else ""
            )
            notes.append(
                f"{position.label}: noise of the loss {taken or 'at 290 K, no temperature is stated'}"
            )
    return temperatures, notes


def _line_notes(budget: Budget) -> list[str]:
    counts = {position.order: position.count for position in budget.chain}
    arrays = [
        f"{line.place}: the gain of one of {counts[line.position]} elements, which add in phase"
        for line in budget.lines
        if code_key(line.parameter) == "antenna_gain" and counts[line.position] > 1
    ]
    driven = [
        f"{line.place}: read at the level of one of {counts[line.position]} elements"
        for line in budget.lines
        if _asked(line) & {DRIVE, DRIVEN} and counts[line.position] > 1
    ]
    alike = {"per element": "as independent of each other", "common": "as the same in all"}
    added = [
        f"{line.place}: what {counts[line.position]} elements contribute is taken {alike[line.shared]}"
        for line in budget.lines
        if budget.law in (Law.ROOT_SUM_OF_SQUARES, Law.POWER_SUM) and counts[line.position] > 1
    ]
    return [*arrays, *driven, *added] + [
        f"{line.place}: growth allowance of {line.growth:g} taken off" for line in budget.lines if line.growth
    ]
