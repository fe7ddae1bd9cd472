"""The header row of a sheet: where it is, and which column is which."""

from __future__ import annotations

import re
from dataclasses import dataclass, field

from specflow.importers.readers.grid import Grid
from specflow.importers.sheets.cells import clean
from specflow.model.sheet import SheetLayout, header_key

HEADER_ROWS = 50
_BRACKET = re.compile(r"^(?P<name>.*?)\s*[\[(](?P<inside>[^\[\]()]*)[\])]\s*$")


@dataclass(frozen=True, slots=True)
class Doubled:
    """A header that says the same as the one in column ``first``; ``certain`` when that one says it more plainly."""

    place: int
    text: str
    first: int
    certain: bool


@dataclass(frozen=True, slots=True)
class Header:
    """The header row: its number, column numbers and units by column key, and headers not known or doubled."""

    row: int
    columns: dict[str, int]
    units: dict[str, str] = field(default_factory=dict)
    unknown: tuple[tuple[int, str], ...] = ()
    doubled: tuple[Doubled, ...] = ()


def find_header(grid: Grid, layout: SheetLayout) -> Header | None:
    """Return the first row that holds every required header, None when there is none in the first rows."""
    for row in range(grid.first_row, min(grid.last_row, grid.first_row + HEADER_ROWS) + 1):
        header = read_header(grid, layout, row)
        if not layout.lacking(header.columns):
            return header
    return None


def read_header(grid: Grid, layout: SheetLayout, row: int) -> Header:
    """Match the cells of one row with the columns of the layout.

    Titles go before aliases, so that "ID" beside "Number" is the id; a header that is left over may still be what a
    column is ``also`` called ("Requirement" beside "ID" is the statement).
    """
    left = {
        place: text
        for place, value in enumerate(grid.row(row), start=1)
        if isinstance(value, str) and (text := clean(value))
    }
    columns: dict[str, int] = {}
    units: dict[str, str] = {}
    taken: dict[str, int] = {}
    tables = _name_tables(layout)
    for level, known in enumerate(tables):
        for place, text in list(left.items()):
            key, unit = _match(text, known)
            if key is not None and key not in columns:
                del left[place]
                columns[key], taken[key] = place, level
                if unit:
                    units[key] = unit
    unknown: list[tuple[int, str]] = []
    doubled: list[Doubled] = []
    for place, text in left.items():
        level, key = next(
            ((level, key) for level, known in enumerate(tables) if (key := _match(text, known)[0])), (0, "")
        )
        if key:
            doubled.append(Doubled(place, text, columns[key], certain=taken[key] < level))
        else:
            unknown.append((place, text))
    return Header(row, columns, units, tuple(unknown), tuple(doubled))


def _name_tables(layout: SheetLayout) -> tuple[dict[str, str], ...]:
    """Header key → column key: of titles, of aliases, and of what columns are also called."""
    return (
        {header_key(column.title): column.key for column in layout.columns},
        {
            header_key(name): column.key
            for column in layout.columns
            for name in column.aliases
            if header_key(name)
        },
        {header_key(name): column.key for column in layout.columns for name in column.also},
    )


def _match(text: str, known: dict[str, str]) -> tuple[str | None, str]:
    """The column of a header, with the unit in its brackets; a star that marks a required column does not count."""
    key = known.get(header_key(text))
    if key is not None:
        return key, ""
    parts = _BRACKET.match(text.rstrip("* "))
    if parts is None:
        return None, ""
    return known.get(header_key(parts["name"])), parts["inside"].strip()
