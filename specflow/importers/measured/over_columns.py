"""What a sheet says over columns that a mapping stacks: another quantity there than the mapping names is asked about.

The words over the columns are no part of the layout: the same grid holds a gain today and a noise figure tomorrow. A
mapping that was made for the one would otherwise read the other under its name.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence

from specflow.importers.measured.context import Context
from specflow.importers.measured.found_table import OverColumns
from specflow.importers.measured.header_text import known_unit
from specflow.importers.measured.item_headers import said_over_items
from specflow.importers.measured.mapping_parts import UNLOCATED, PivotMapping
from specflow.importers.measured.result import Question
from specflow.importers.measured.tables import FoundTable


def ask_about_words_over(
    table: FoundTable, pivots: Sequence[PivotMapping], context: Context
) -> tuple[Question, ...]:
    """Questions about the pivots of a mapping that the sheet itself contradicts."""
    return tuple(question for pivot in pivots for question in _asked(table, pivot, context))


def _asked(table: FoundTable, pivot: PivotMapping, context: Context) -> Iterator[Question]:
    meant = [header for header in table.headers if pivot.is_about(header.text, header.letter)]
    if not meant:
        return
    columns = {header.column for header in meant}
    is_of_items = pivot.header.strip() == "{item}"
    over = said_over_items(table, meant, context) if is_of_items else table.over
    said = [one for one in over if columns & set(one.columns)]
    cell = meant[0].cell
    for one in said:
        if _differs(one, pivot) and one.words not in _meant_for(pivot):
            found = (
                f"{one.words!r} stands over the columns"
                if one.words
                else "no quantity stands over the columns"
            )
            made = f", and the mapping was made for {pivot.over!r}" if pivot.over else ""
            what = f"the mapping says {pivot.parameter} in {pivot.unit}; {found}{made}"
            remedy = _remedy(one.words)
            if not one.words:
                remedy = "write the quantity over the columns; or take over = ... out of the pivot"
            yield Question("", cell, what, remedy)
        if _is_of_another_condition(one, pivot) and one.across not in _meant_for(pivot):
            names = " and ".join(_conditions(pivot))
            what = f"the mapping says that the numbers over the columns are {names}; the sheet says {one.across!r}"
            remedy = _remedy(one.across)
            yield Question("", cell, what, remedy)


def _remedy(words: str) -> str:
    return (
        f'over = "{words}" in the pivot where it is meant for these words; else take the table out of the mapping, and '
        "the sheet is read by its own words"
    )


def _meant_for(pivot: PivotMapping) -> list[str]:
    return [words.strip() for words in pivot.over.split("|") if words.strip()]


def _differs(one: OverColumns, pivot: PivotMapping) -> bool:
    """Whether the quantity over the columns is another; one that is not said counts where the mapping knew one."""
    if one.quantity is None or one.quantity.parameter is None:
        return bool(pivot.over)
    if one.quantity.parameter.key != pivot.parameter or known_unit(one.unit) != known_unit(pivot.unit):
        return True
    pairs = (
        (one.quantity.plane, pivot.plane),
        (one.quantity.statistic, pivot.statistic),
        (one.quantity.polarisation, pivot.polarisation),
    )
    return any(said != mapped and (said or pivot.over) for said, mapped in pairs)


def _is_of_another_condition(one: OverColumns, pivot: PivotMapping) -> bool:
    """Whether the numbers are said to be of another condition, or in another unit."""
    if not one.dimension:
        return False
    units = _conditions(pivot)
    same = [
        name
        for name in units
        if name == one.dimension or (one.dimension == UNLOCATED and name.startswith(UNLOCATED))
        or (name == UNLOCATED and one.dimension.startswith(UNLOCATED))
    ]  # fmt: skip
    if not same:
        return True
    mapped = units[same[0]]
    return bool(mapped and one.dimension_unit) and known_unit(mapped) != known_unit(one.dimension_unit)


def _conditions(pivot: PivotMapping) -> dict[str, str]:
    return {name: pivot.units.get(name, "") for name in re.findall(r"\{(\w+)\}", pivot.header)}
