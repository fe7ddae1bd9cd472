"""Tables of the same headers that only their titles tell apart: "28 GHz" over one, "29 GHz" over the next."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import replace

from specflow.conditions import find_dimension
from specflow.importers.measured.context import Context
from specflow.importers.measured.facts import Fact, read_facts, states_something
from specflow.importers.measured.groups import fact_of
from specflow.importers.measured.header_text import read_header
from specflow.importers.measured.layout import layout_key
from specflow.importers.measured.result import Question
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import is_blank

_ROWS_ABOVE = 4


def with_titles(tables: Sequence[FoundTable], context: Context) -> list[FoundTable]:
    """Give tables of one layout what their titles say, where all titles say the same kind of thing; else ask."""
    alike: Mapping[str, list[int]] = _alike(tables)
    result = list(tables)
    for places in alike.values():
        titles = [_title(tables[place]) for place in places]
        texts = [text for text, _, _ in titles]
        if len(places) < 2 or not all(texts) or len(set(texts)) < 2:
            continue
        facts = [fact_of(text, cell, row, context) for text, cell, row in titles]
        keys = {fact.key for fact in facts if fact is not None}
        for place, fact, (text, cell, row) in zip(places, facts, titles, strict=True):
            table = tables[place]
            if fact is not None and len(keys) == 1 and all(facts):
                if not _has_column(table, fact):
                    facts_of = (fact, *table.facts)
                    result[place] = replace(table, facts=facts_of, title_rows=(*table.title_rows, row))
            elif states_something(text):
                result[place] = replace(table, doubts=(*table.doubts, _question(text, cell, places, tables)))
    return result


def _alike(tables: Sequence[FoundTable]) -> dict[str, list[int]]:
    found: dict[str, list[int]] = defaultdict(list)
    for place, table in enumerate(tables):
        if not table.grid.turned:
            found[layout_key(table)].append(place)
    return found


def _title(table: FoundTable) -> tuple[str, str, int]:
    """The nearest lone text above the headers (text, cell, row), "" where facts or nothing stand there."""
    first, last = table.headers[0].column, table.headers[-1].column
    for row in range(table.header_row - 1, max(table.top, table.header_row - _ROWS_ABOVE) - 1, -1):
        filled = [column for column in range(first, last + 1) if not is_blank(table.grid.value(row, column))]
        if not filled:
            continue
        value = table.grid.value(row, filled[0])
        if len(filled) > 1 or not isinstance(value, str) or read_facts(table.grid, row):
            return "", "", 0
        return " ".join(value.split()), table.grid.address(row, filled[0]), row
    return "", "", 0


def _has_column(table: FoundTable, fact: Fact) -> bool:
    """Whether a column gives row by row what a title says of all."""
    names = [read_header(header.text).name for header in table.headers]
    found = [dimension.name for name in names if (dimension := find_dimension(name)) is not None]
    return any(name == fact.key or name.startswith(f"{fact.key}_") for name in found)


def _question(text: str, cell: str, places: Sequence[int], tables: Sequence[FoundTable]) -> Question:
    others = ", ".join(tables[place].place for place in places)
    what = f"{text[:60]!r} stands over one of {len(places)} tables of the same headers ({others}); its meaning is open"
    remedy = (
        'write it as a key with its value ("Frequency: 28 GHz", "DUT: SN 7"), or let a mapping take it: [table.stated] '
        'frequency = "above"'
    )
    return Question("", cell, what, remedy)
