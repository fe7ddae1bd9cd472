"""Headers that name specimens: "SN 1", "SN 2" under a quantity, or "Gain SN 1 (dB)" beside "Gain SN 2 (dB)"."""

from __future__ import annotations

import re
from collections import defaultdict
from collections.abc import Sequence
from dataclasses import replace

from specflow.importers.measured.context import Context
from specflow.importers.measured.found_table import OverColumns
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.header_text import header_key, read_header
from specflow.importers.measured.items import item_in
from specflow.importers.measured.mapping_parts import PivotMapping
from specflow.importers.measured.quantity_text import NamedQuantity, name_quantity
from specflow.importers.measured.result import Question
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import is_blank
from specflow.parameters import suits

_ROWS_ABOVE = 3


def item_pivots(table: FoundTable, context: Context) -> tuple[tuple[PivotMapping, ...], tuple[Question, ...]]:
    """Return one pivot for each quantity that several columns hold of different specimens; or what has to be asked."""
    found: dict[str, list[int]] = defaultdict(list)
    for place, header in enumerate(table.headers):
        item = item_in(header.text, context)
        if item:
            found[header.text.replace(item, "{item}", 1)].append(place)
    pivots, doubts = [], []
    for template, places in found.items():
        keys = {header_key(table.headers[place].text) for place in places}
        if len(places) < 2 or len(keys) < len(places) or "{" in template.replace("{item}", ""):
            continue
        bare = " ".join(template.replace("{item}", " ").split()).strip(" ,;:-_")
        named = (
            _quantity(bare, table.headers[places[0]].unit, context)
            if bare
            else _quantity(_words_above(table, places[-1]), "", context)
        )
        if named is not None:
            words = "" if bare else _words_above(table, places[-1])
            pivots.append(replace(_pivot(table, template, places, named), over=words))
        elif not bare:
            doubts.append(_question(table, places))
    return tuple(pivots), tuple(doubts)


def _quantity(text: str, unit: str, context: Context) -> tuple[NamedQuantity, str] | None:
    parts = read_header(text)
    unit = unit or parts.unit
    named = name_quantity(parts, unit, context.dictionary, context.planes)
    parameter = named.parameter
    if parameter is None or named.doubt or not unit or not suits(parameter, unit):
        return None
    return named, unit


def said_over_items(
    table: FoundTable, headers: Sequence[HeaderCell], context: Context
) -> tuple[OverColumns, ...]:
    """What is written over columns that are headed by items alone."""
    words = _words_above(table, table.headers.index(headers[-1]))
    quantity, unit = _quantity(words, "", context) or (None, "")
    columns = tuple(header.column for header in headers)
    return (OverColumns(columns, quantity, unit, words if quantity else ""),)


def _words_above(table: FoundTable, place: int) -> str:
    """The nearest row above, where one text is all that is written over the table up to its header ``place``."""
    first, last = table.headers[0].column, table.headers[place].column
    for row in range(table.header_row - 1, max(table.top, table.header_row - _ROWS_ABOVE) - 1, -1):
        cells = [table.grid.value(row, column) for column in range(first, last + 1)]
        filled = [value for value in cells if not is_blank(value)]
        if filled:
            return " ".join(str(filled[0]).split()) if len(filled) == 1 else ""
    return ""


def _pivot(
    table: FoundTable, template: str, places: list[int], named: tuple[NamedQuantity, str]
) -> PivotMapping:
    quantity, unit = named
    assert quantity.parameter is not None  # quantities without one were left out before
    ends = table.headers[places[0]].letter, table.headers[places[-1]].letter
    return PivotMapping(
        header=template,
        parameter=quantity.parameter.key,
        unit=unit,
        plane=quantity.plane,
        statistic=quantity.statistic,
        polarisation=quantity.polarisation,
        columns=":".join(ends) if re.fullmatch(r"\s*\{item\}\s*", template) else "",
    )


def _question(table: FoundTable, places: list[int]) -> Question:
    headers = [table.headers[place] for place in places]
    shown = ", ".join(header.text for header in headers[:4])
    ends = f"{headers[0].letter} to {headers[-1].letter}"
    what = f"columns {ends} are named by items ({shown}); of which quantity, nothing says"
    remedy = (
        f'in a mapping: [table.pivot] header = "{{item}}", columns = "{headers[0].letter}:{headers[-1].letter}", '
        "parameter, unit; or write the quantity with its unit over them"
    )
    return Question("", headers[0].cell, what, remedy)
