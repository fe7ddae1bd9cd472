"""The condition of each row that no column holds: the axis of a matrix without headers."""

from __future__ import annotations

from specflow.conditions import Comparison, find_dimension, known_dimension
from specflow.errors import UnitError
from specflow.importers.measured.conditions import ReadConditions
from specflow.importers.measured.work import TableWork
from specflow.model.columns import Columns
from specflow.model.evidence import ConditionColumn
from specflow.units import compatible, format_unit, parse_unit


def add_axis(work: TableWork, conditions: ReadConditions) -> None:
    """Add the axis of the table to its conditions; one whose unit does not fit its dimension is a question."""
    axis = work.table.axis
    if axis is None:
        return
    known = known_dimension(axis.dimension) or find_dimension(axis.dimension)
    name = known.name if known else axis.dimension
    problem = _problem(axis.unit, "" if known is None else known.unit, name)
    if known is not None and known.comparison is Comparison.TEXT:
        problem = f"{name} is said in words, it has no start and step"
    if problem:
        work.ask("", work.table.place, problem, "correct rows = { ... } of [table.matrix] in the mapping")
        return
    unit = format_unit(parse_unit(axis.unit or "1"))
    had = conditions.columns
    conditions.columns = Columns(
        had.size,
        {**had.numeric, name: axis.at(work.rows)},
        had.text,
        {**had.units, **({} if unit == "1" else {name: unit})},
    )
    conditions.documents.append(
        ConditionColumn(
            dimension=name,
            kind="numeric",
            unit="" if unit == "1" else unit,
            stated_by=axis.by,
            unit_from="the mapping",
        )
    )


def _problem(unit: str, wanted: str, name: str) -> str:
    try:
        if not compatible(parse_unit(unit or "1"), parse_unit(wanted or unit or "1")):
            return f"{name} in {unit or 'no unit'}; expected is a unit like {wanted}"
    except UnitError as error:
        return error.message
    return ""
