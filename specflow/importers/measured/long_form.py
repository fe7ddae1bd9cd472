"""Tables with the quantity in the rows (long form): a column of names, a column of values, perhaps one of units.

Each quantity becomes a table of its own, made of its rows; every cell keeps its place.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

import numpy as np

from specflow.conditions import find_dimension
from specflow.importers.measured.context import Context
from specflow.importers.measured.facts import Fact
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.header_text import header_key, known_unit, read_header
from specflow.importers.measured.mapping_parts import ColumnMapping, LayoutMapping, LongMapping
from specflow.importers.measured.quantity_text import name_quantity
from specflow.importers.measured.rejects import cell_text
from specflow.importers.measured.result import Question
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import is_blank, looks_numeric

_NAMES = frozenset(
    ("parameter", "parameters", "quantity", "measurement", "measurand", "characteristic", "property", "metric", "param",
     "measuredparameter", "parametername", "testparameter", "messgröße", "kenngröße")
)  # fmt: skip
#: Words over names of quantities as often as over names of other things: what the rows say decides.
_PERHAPS_NAMES = frozenset(
    ("item", "description", "name", "contribution", "element", "test", "entry", "line")
)
_VALUES = frozenset(
    ("value", "values", "result", "results", "measured", "reading", "measuredvalue", "measuredresult", "testresult",
     "messwert", "wert")
)  # fmt: skip
_UNITS = frozenset(("unit", "units", "uom", "einheit"))


def find_long(table: FoundTable, mapping: LayoutMapping, context: Context) -> LongMapping | None:
    """Recognise the long form: by its headers, and by names of quantities in the rows."""
    if any(entry.role or entry.parameter or entry.dimension for entry in mapping.columns) or mapping.pivots:
        return None
    names, values, units = (_only(table, words) for words in (_NAMES, _VALUES, _UNITS))
    perhaps = None if names else _only(table, _PERHAPS_NAMES)
    names = names or perhaps
    if names is None or values is None or (perhaps is not None and units is None):
        return None
    known = named = 0
    for row in table.rows.tolist():
        text = table.grid.value(row, names.column)
        unit = table.grid.value(row, units.column) if units else ""
        if isinstance(text, str) and not is_blank(text):
            named += 1
            known += _is_quantity(text, str(unit).strip(), context)
        if known and perhaps is None:
            break
    if not known or (perhaps is not None and 2 * known < named):
        return None
    return LongMapping(names.letter, values.letter, units.letter if units else "")


def long_parts(
    table: FoundTable, long: LongMapping, read_as: LayoutMapping, context: Context
) -> list[tuple[FoundTable, LayoutMapping]]:
    """Return one table for each quantity (and unit); rows that name a condition once hold for all."""
    read_as = replace(read_as, long=None)
    names, values = _column(table, long.parameter), _column(table, long.value)
    units = _column(table, long.unit) if long.unit else None
    if names is None or values is None or (long.unit and units is None):
        return [(replace(table, doubts=(*table.doubts, _no_column(table, long))), read_as)]
    all_groups, nameless = _groups(table, names, values, units, read_as)
    wanted = {header_key(one) for one in long.only}
    groups = {one: rows for one, rows in all_groups.items() if not wanted or header_key(one[0]) in wanted}
    left = [
        f"{one[0]}: {len(rows)} rows, not read, as the mapping says"
        for one, rows in all_groups.items()
        if one not in groups
    ]
    common, doubts = _conditions_among(table, groups, names, values, context)
    if nameless:
        doubts.append(_nameless(table, nameless, names))
    parts = []
    for (name, unit), rows in groups.items():
        if _is_condition(name, unit, context):
            continue
        part = _part(table, long, name, unit, rows, (names, values, units))
        part = replace(
            part, facts=(*part.facts, *common), doubts=(*part.doubts, *doubts), notes=(*part.notes, *left)
        )
        parts.append((part, _settled(read_as, long, part, values)))
        left = []  # said once
    if wanted and not parts:
        doubts.append(_no_rows(table, all_groups, names))
    return parts or [(replace(table, doubts=(*table.doubts, *doubts)), read_as)]


def is_long_header(texts: Iterable[str]) -> bool:
    """Whether these are the headers of a table with the quantity in the rows: "Parameter", "Value", "Unit"."""
    keys = {header_key(text).replace(" ", "") for text in texts}
    return bool(keys & (_NAMES | _PERHAPS_NAMES)) and bool(keys & _VALUES)


def _only(table: FoundTable, words: frozenset[str]) -> HeaderCell | None:
    found = [header for header in table.headers if header_key(header.text).replace(" ", "") in words]
    return found[0] if len(found) == 1 else None


def _column(table: FoundTable, named: str) -> HeaderCell | None:
    """The header that a mapping means, by its text or its letter; a column without a header goes by its letter."""
    for header in table.headers:
        if header.letter == named.upper() or header_key(header.text) == header_key(named):
            return header
    for column in table.unnamed:
        if table.grid.column_name(column) == named.upper():
            return HeaderCell(column, table.header_row, named, turned=table.grid.turned)
    return None


def _is_quantity(text: str, unit: str, context: Context) -> bool:
    parts = read_header(text)
    unit = unit if unit and known_unit(unit) is not None and not looks_numeric(unit) else parts.unit
    return bool(name_quantity(parts, unit, context.dictionary, context.planes).candidates)


def _groups(
    table: FoundTable,
    names: HeaderCell,
    values: HeaderCell,
    units: HeaderCell | None,
    mapping: LayoutMapping,
) -> tuple[dict[tuple[str, str], list[int]], list[int]]:
    """Rows by name and unit, in the order of the sheet; and rows with a value and no name."""
    entry = mapping.column(names.text, names.letter)
    fills = entry is not None and entry.fill_down
    texts = [cell_text(value).strip() for value in table.cells(names.column).at(table.rows)]
    spelled = [""] * len(texts)
    if units is not None:
        spelled = [cell_text(value).strip() for value in table.cells(units.column).at(table.rows)]
    groups: dict[tuple[str, str], list[int]] = {}
    nameless = []
    before = ""
    for row, text, unit in zip(table.rows.tolist(), texts, spelled, strict=True):
        text = " ".join(text.split())
        text = before if fills and not text else text
        before = text
        if text:
            groups.setdefault((text, unit if unit not in ("-", "—", "–") else ""), []).append(row)
        elif not is_blank(table.grid.value(row, values.column)):
            nameless.append(row)
    return groups, nameless


def _conditions_among(
    table: FoundTable,
    groups: dict[tuple[str, str], list[int]],
    names: HeaderCell,
    values: HeaderCell,
    context: Context,
) -> tuple[list[Fact], list[Question]]:
    """Rows that name a condition: above all quantities it holds for them; elsewhere nobody can say for which."""
    facts, doubts = [], []
    conditions = {one: rows for one, rows in groups.items() if _is_condition(*one, context)}
    first = min((rows[0] for one, rows in groups.items() if one not in conditions), default=0)
    for (name, unit), rows in conditions.items():
        text = cell_text(table.grid.value(rows[0], values.column)).strip()
        cell = table.grid.address(rows[0], values.column)
        if len(rows) == 1 and rows[0] < first:
            facts.append(Fact(name, f"{text} {unit}".strip(), cell, rows[0]))
            continue
        what = f"{name!r} stands among the quantities ({cell}); for which rows it holds, nothing says"
        doubts.append(Question(name, cell, what, "give the condition a column of its own"))
    return facts, doubts


def _is_condition(name: str, unit: str, context: Context) -> bool:
    return find_dimension(read_header(name).name) is not None and not _is_quantity(name, unit, context)


def _part(
    table: FoundTable,
    long: LongMapping,
    name: str,
    unit: str,
    rows: list[int],
    columns: tuple[HeaderCell, HeaderCell, HeaderCell | None],
) -> FoundTable:
    """The rows of one quantity, with its name in the place of the header of the values."""
    names, values, units = columns
    aside = {header.column for header in (names, values, units) if header is not None}
    own = replace(values, text=name, unit_from="")
    if unit and units is not None:
        own = replace(own, unit=unit, unit_row=values.row, unit_from=f"the column of units, {units.letter}")
    headers = [header for header in table.headers if header.column not in aside]
    return replace(
        table,
        headers=tuple(sorted((*headers, own), key=lambda header: header.column)),
        rows=np.array(rows, np.int32),
        unnamed=tuple(column for column in table.unnamed if column not in aside),
        long=long,
        part=f"{name} ({unit})" if unit else name,
    )


def _settled(
    read_as: LayoutMapping, long: LongMapping, part: FoundTable, values: HeaderCell
) -> LayoutMapping:
    """The mapping of one part: what the person said the name means."""
    name = next(header.text for header in part.headers if header.column == values.column)
    meant = next((key for text, key in long.parameters.items() if header_key(text) == header_key(name)), "")
    if not meant:
        return read_as
    entry = ColumnMapping(header=name, column=values.letter, role="value", parameter=meant)
    return replace(read_as, columns=(entry, *read_as.columns))


def _no_column(table: FoundTable, long: LongMapping) -> Question:
    headers = ", ".join(f"{header.text!r}" for header in table.headers)
    named = ", ".join(filter(None, (long.parameter, long.value, long.unit)))
    what = f"the mapping reads the long form from the columns {named}; one of them is not there"
    return Question("", table.place, what, f"the headers are {headers}")


def _no_rows(table: FoundTable, groups: Iterable[tuple[str, str]], names: HeaderCell) -> Question:
    known = "; ".join(dict.fromkeys(name for name, _ in groups))
    what = "no row has one of the names that the mapping gives with only"
    return Question(names.text, names.cell, what, f"the names are: {known[:300]}")


def _nameless(table: FoundTable, rows: list[int], names: HeaderCell) -> Question:
    what = f"{len(rows)} rows have a value and no name of a quantity, the first is row {rows[0]}"
    remedy = f'write the name, or fill_down = true for column = "{names.letter}" in a mapping'
    return Question(names.text, table.grid.address(rows[0], names.column), what, remedy)
