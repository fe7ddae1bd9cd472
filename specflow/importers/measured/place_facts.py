"""Conditions that a mapping takes from a cell: ``frequency = "cell B3"``, ``"cell B3 in GHz"``, ``"above"``."""

from __future__ import annotations

import re
from collections.abc import Iterable

from specflow.conditions import Comparison, find_dimension, known_dimension
from specflow.errors import UnitError
from specflow.importers.measured.area import read_cell
from specflow.importers.measured.facts import Fact, value_text
from specflow.importers.measured.header_text import known_unit, read_header
from specflow.importers.measured.mapping_parts import LayoutMapping
from specflow.importers.measured.result import Question
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import Grid, is_blank, looks_numeric
from specflow.units import compatible, parse_unit

_REFERENCE = re.compile(
    r"^(?:cell\s+(?P<cell>\$?[A-Za-z]{1,3}\$?[0-9]+)|(?P<above>above))(?:\s+in\s+(?P<unit>\S+))?$"
)
_AMOUNT = re.compile(r"[+\-−]?\s?[0-9]+(?:[.,][0-9]+)?(?:[eE][+\-]?[0-9]+)?\s?(?P<unit>°?\s?[A-Za-zµμΩ%/]+)")


def is_reference(text: str) -> bool:
    """Whether what is stated is a place, where the value is to be taken from."""
    return _REFERENCE.match(text.strip()) is not None


def stated_here(mapping: LayoutMapping) -> dict[str, str]:
    """What a mapping states in words, without what it takes from cells."""
    return {key: text for key, text in mapping.stated.items() if not is_reference(text)}


def facts_of_cells(
    grid: Grid, table: FoundTable, mapping: LayoutMapping
) -> tuple[tuple[Fact, ...], tuple[Question, ...]]:
    """What a mapping takes from cells, as facts; a cell that does not say it is a question."""
    facts, doubts = [], []
    for key, text in mapping.stated.items():
        found = _REFERENCE.match(text.strip())
        if found is None:
            continue
        place = read_cell(found["cell"]) if found["cell"] else _above(table)
        source = grid if found["cell"] else table.grid
        said = "" if place is None else _text_at(source, *place, key, found["unit"] or "")
        if place is None or not said or (_is_numeric(key) and not re.search(r"[0-9]", said)):
            where = source.address(*place) if place else table.place
            what = f"the mapping takes {key} from {text!r}; {said or 'nothing'} is written there"
            doubts.append(Question(key, where, what, f"correct {key} = ... of [table.stated] in the mapping"))
            continue
        facts.append(Fact(key, said, source.address(*place), place[0]))
    return tuple(facts), tuple(doubts)


def _is_numeric(key: str) -> bool:
    dimension = known_dimension(key) or find_dimension(key)
    return dimension is not None and dimension.comparison is not Comparison.TEXT


def _above(table: FoundTable) -> tuple[int, int] | None:
    """The nearest cell above the headers, in the columns of the table, in which something is written."""
    first, last = min(one.column for one in table.headers), max(one.column for one in table.headers)
    for row in range(table.header_row - 1, table.grid.first_row - 1, -1):
        for column in range(first, last + 1):
            if not is_blank(table.grid.value(row, column)):
                return row, column
    return None


def _text_at(grid: Grid, row: int, column: int, key: str, unit: str) -> str:
    value = grid.value(row, column)
    if is_blank(value):
        return ""
    text = value_text(grid, row, column, value, "")
    if looks_numeric(text):
        return f"{text} {unit or _unit_beside(grid, row, column)}".strip()
    return _amount_in(text, key) or text


def _unit_beside(grid: Grid, row: int, column: int) -> str:
    """The unit to the right of a number, or in the words to its left."""
    right = grid.value(row, column + 1)
    if (
        isinstance(right, str)
        and right.strip()
        and known_unit(right.strip()) is not None
        and not looks_numeric(right)
    ):
        return right.strip()
    left = grid.value(row, column - 1) if column > 1 else ""
    return read_header(left).unit if isinstance(left, str) else ""


def _amount_in(text: str, key: str) -> str:
    """The one amount in a text that can be of this dimension: "Results at 28 GHz, SN 7" says 28 GHz."""
    dimension = known_dimension(key) or find_dimension(key)
    if dimension is None or not dimension.unit:
        return ""
    return (
        next(iter(amounts_of(text, [dimension.unit])), "")
        if len(amounts_of(text, [dimension.unit])) == 1
        else ""
    )


def amounts_of(text: str, units: Iterable[str]) -> list[str]:
    """The amounts in a text whose unit is like one of these."""
    wanted = [parse_unit(unit) for unit in units]
    found = []
    for match in _AMOUNT.finditer(text):
        try:
            unit = parse_unit(match["unit"].strip())
        except UnitError:
            continue
        if any(compatible(unit, one) for one in wanted):
            found.append(" ".join(match[0].split()))
    return found
