"""A column of one condition; a temperature must say whose it is."""

from __future__ import annotations

import re
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import (
    Comparison,
    KnownDimension,
    find_dimension,
    is_unlocated_temperature,
    known_dimension,
    unlocated_temperature_hint,
)
from specflow.importers.measured.cell_units import slip_of
from specflow.importers.measured.column import ColumnMeaning, Heading
from specflow.importers.measured.context import Context
from specflow.importers.measured.header_text import HeaderText, known_unit, read_header
from specflow.importers.measured.quantity_text import NamedQuantity, name_quantity
from specflow.importers.measured.result import Role
from specflow.importers.measured.stated import Stated
from specflow.importers.measured.tables import FoundTable
from specflow.importers.measured.unit_source import FoundUnit
from specflow.units import compatible, format_unit, parse_unit

_IN_CELSIUS = re.compile(r"temp(?:erature)?[_ ](?:deg[_ ]?)?c(?:elsius)?", re.IGNORECASE)
_LEVELS = ("power_level", "input_level")


def condition_of(heading: Heading, dimension: KnownDimension, unit: FoundUnit, reason: str) -> ColumnMeaning:
    """Read a column of a dimension that is known; a unit that is missing or of another kind is a question."""
    if dimension.comparison is Comparison.TEXT:
        return replace(heading.means(Role.CONDITION, reason), dimension=dimension.name, is_text=True)
    problem = unit.problem
    if not problem and not unit.unit and dimension.unit:
        problem = f"{dimension.title} without a unit"
    if not problem and not compatible(parse_unit(unit.unit or "1"), parse_unit(dimension.unit or "1")):
        problem = (
            f"{dimension.title} in {unit.unit or 'no unit'}; expected is a unit like {dimension.unit or '1'}"
        )
    if problem:
        return heading.ask_unit(
            problem, dimension.unit, "axis_unit" if _takes_axis_unit(dimension, unit) else ""
        )
    return replace(
        heading.means(Role.CONDITION, f"{reason}; unit from {unit.source}" if unit.source else reason),
        dimension=dimension.name,
        unit=unit.unit,
        unit_from=unit.source,
        by_row=unit.by_row,
        by_cell=unit.by_cell,
    )


def _takes_axis_unit(dimension: KnownDimension, unit: FoundUnit) -> bool:
    return not unit.unit and not unit.problem and dimension.name not in _LEVELS


def axis_unit(dimension: KnownDimension, unit: FoundUnit, stated: Stated) -> FoundUnit:
    """The unit of a column; where it has none that of the axis, as stated above the table, if it can be."""
    said = stated.text("axis_unit")
    spelled = known_unit(said) if said else None
    if unit.unit and spelled is not None and dimension.name == "frequency":
        own = known_unit(unit.unit)
        differs = own is not None and own != spelled and own.dimension == spelled.dimension
        where = stated.by("axis_unit").removeprefix("stated in ")
        return FoundUnit(problem=f"{unit.source} says {unit.unit}, {where} says {said}") if differs else unit
    if unit.unit or unit.problem or not said or not dimension.unit:
        return unit
    if spelled is None or not compatible(spelled, parse_unit(dimension.unit)):
        return unit
    slip = slip_of(format_unit(spelled))
    where = stated.by("axis_unit")
    return FoundUnit(problem=f"{slip}; {where}") if slip else FoundUnit(format_unit(spelled), where)


def mapped_condition(heading: Heading, unit: FoundUnit) -> ColumnMeaning:
    """Read a column that a mapping, or the person, calls a condition: one we know, or one of this project."""
    named = heading.hints.dimension
    known = known_dimension(named) or find_dimension(named or heading.parts.name)
    if known is not None:
        return condition_of(heading, known, unit, heading.said_by)
    if not named:
        return heading.ask("the mapping names no dimension", 'write dimension = "..."')
    if unit.problem:
        return heading.ask_unit(unit.problem, "")
    numeric = bool(heading.table.cells(heading.header.column).numeric.any())
    return replace(
        heading.means(Role.CONDITION, heading.said_by),
        dimension=named,
        unit=unit.unit,
        unit_from=unit.source,
        by_row=unit.by_row,
        by_cell=unit.by_cell,
        is_text=not (unit.unit and numeric),
    )


def is_temperature(parts: HeaderText, unit: FoundUnit) -> bool:
    """Whether a header says temperature without saying whose: "Temp (°C)", "T (°C)"."""
    if is_unlocated_temperature(parts.name):
        return True
    spelled = known_unit(unit.unit) if unit.unit else None
    return parts.name.casefold() in ("t", "θ") and spelled is not None and spelled.dimension == "temperature"


def temperature(heading: Heading, unit: FoundUnit, stated: Stated) -> ColumnMeaning:
    """Read such a column, where somebody stated the location; else it is a question."""
    if not unit.unit and not unit.problem and _IN_CELSIUS.fullmatch(heading.parts.text):
        unit = FoundUnit("°C", f"the header {heading.header.cell}")
    location = stated.text("temperature")
    dimension = find_dimension(f"{location} temperature") if location else None
    if dimension is None:
        remedy = (
            f"{unlocated_temperature_hint()}: --state temperature=ambient, "
            f'or dimension = "temperature_ambient" for column {heading.letter} in a mapping'
        )
        return heading.ask("a temperature that does not say whose", remedy)
    return condition_of(heading, dimension, unit, f"a temperature; {location} is {stated.by('temperature')}")


def is_condition(dimension: KnownDimension, quantity: NamedQuantity, context: Context) -> bool:
    """Whether a name that means a condition and a parameter is the condition, by what the project speaks of.

    Levels are as often a result as a setting, so they are a condition only where the project uses it as one; all
    others are a condition unless the project has a requirement on the parameter.
    """
    required = any(one.parameter.key in context.required for one in quantity.candidates)
    used = dimension.name in context.dimensions
    if dimension.name in _LEVELS:
        return used and not required
    return used or not required


def is_bare_level(
    dimension: KnownDimension, quantity: NamedQuantity, heading: Heading, context: Context
) -> bool:
    """Whether "Power (W)" or "Level (dBm)" may be a setting or a result: no project uses it, and no steps show it."""
    if dimension.name not in _LEVELS or quantity.candidates or dimension.name in context.dimensions:
        return False
    numbers = heading.table.cells(heading.header.column).numbers_at(heading.table.rows)
    known = numbers[np.isfinite(numbers)]
    return not len(known) or not _are_settings(known)


def _are_settings(numbers: NDArray[np.float64]) -> bool:
    """Whether numbers are those of a sweep in equal steps, or a few that return."""
    levels = np.unique(numbers)
    if 2 * len(levels) <= len(numbers):
        return True
    steps = np.diff(levels)
    return len(levels) > 2 and bool(np.ptp(steps) <= 1e-6 * np.abs(levels).max())


def is_open(dimension: KnownDimension, quantity: NamedQuantity, context: Context, table: FoundTable) -> bool:
    """Whether such a name stays ambiguous: other columns hold values, and the project does not decide."""
    required = any(one.parameter.key in context.required for one in quantity.candidates)
    if required and dimension.name not in context.dimensions:
        return False
    others = [read_header(header.text) for header in table.headers]
    return any(
        find_dimension(parts.name) is None and name_quantity(parts, "", context.dictionary, ()).candidates
        for parts in others
    )
