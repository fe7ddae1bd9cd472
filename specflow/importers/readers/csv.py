"""Delimited text (.csv, .tsv, .txt, .dat): one grid, cells as text as written, row numbers as the lines of the file."""

from __future__ import annotations

from dataclasses import replace

from specflow.errors import FileError
from specflow.importers.readers.delimiter import AmbiguousComma, Layout, find_layout
from specflow.importers.readers.encoding import decode, without_nuls
from specflow.importers.readers.grid import Grid
from specflow.importers.readers.large_text import read_large_text
from specflow.importers.readers.source import Source
from specflow.importers.readers.text_rows import TextLines

MAX_FIELDS = 16_000_000
"""The most fields that are read one by one; plain columns of numbers may be longer (``large_text``)."""

LARGE_BYTES = 4 * 1024 * 1024
"""Larger files are read into columns of numbers where they can."""


MAX_COLUMNS = 16_384
"""As many as a sheet of a workbook has; a wider file is a matrix in one line, or no table."""

_LOOK_BACK = 1000


def read_csv(source: Source) -> list[Grid]:
    """The table of a text file. Raises FileError for content that is no text or that nothing can be made of."""
    grid = _read_grid(source)
    doubt = _cut_off(source.content, grid)
    return [replace(grid, notes=(*grid.notes, doubt)) if doubt else grid]


def _cut_off(content: bytes, grid: Grid) -> str:
    """What is said of a last line without an end whose last field is shorter than all above it: 20.6 may be 2 here."""
    if content.rstrip(b"\0\x1a")[-1:] in (b"\n", b"\r"):
        return ""
    row, column = grid.last_row, grid.first_column + len(grid.row(grid.last_row)) - 1
    above = grid.column(column, max(row - _LOOK_BACK, grid.first_row), row)
    lengths = [len(str(value)) for value in above if str(value).strip()]
    last = str(grid.value(row, column))
    if len(lengths) < 2 or len(last) >= min(lengths[1:]):
        return ""
    return (
        f"the file ends within line {row}, whose last field {last!r} is shorter than those above: if it was cut off, "
        f"{grid.where(row, column)} is not the number that was meant"
    )


def _read_grid(source: Source) -> Grid:
    if len(source.content) > LARGE_BYTES and (grid := read_large_text(source, _layout)) is not None:
        return grid
    written, notes = decode(source, keep_nuls=True)
    part, layout = _read_layout(source, without_nuls(written, True))
    if "\0" in written and layout.delimiter != ",":
        part, layout = _read_layout(source, without_nuls(written, False))
    _check_size(source, part, layout)
    return Grid(
        name=source.name,
        rows=part.rows(layout),
        file=source.name,
        comment_rows=frozenset(part.comments),
        is_text=True,
        decimal=layout.decimal,
        grouped=layout.grouped,
        notes=(*notes, *part.notes),
    )


def _read_layout(source: Source, text: str) -> tuple[TextLines, Layout]:
    lines = text.split("\n")
    if not lines[-1]:
        lines.pop()
    if not any(map(str.strip, lines)):
        raise FileError("the file holds nothing but blanks", where=source.name, hint="export it again")
    part = TextLines(text, lines)
    return part, _layout(source, lines, part.comments)


def _check_size(source: Source, part: TextLines, layout: Layout) -> None:
    if layout.width > MAX_COLUMNS:
        raise FileError(
            f"the lines have {layout.width:,} fields, more than {MAX_COLUMNS:,}",
            where=source.name,
            hint="split it, or write one value a line",
        )
    fields = part.count(layout.delimiter)
    if fields > MAX_FIELDS:
        raise FileError(
            f"the file has about {fields:,} fields, more than {MAX_FIELDS:,}",
            where=source.name,
            hint="split it",
        )


def _layout(source: Source, lines: list[str], comments: set[int]) -> Layout:
    if 1 in comments and lines[0].lower().startswith("sep="):
        delimiter = lines[0].rstrip("\r\n")[-1]
        layout = find_layout([line.replace(delimiter, "\t") for line in lines[1:] if line.strip()])
        return replace(layout, delimiter=delimiter) if delimiter != "," else Layout(",", layout.width, ".")
    table = [line for number, line in enumerate(lines, start=1) if line.strip() and number not in comments]
    try:
        return find_layout(table or [line for line in lines if line.strip()])
    except AmbiguousComma:
        raise FileError(
            "the comma seems to part both the fields and the decimals",
            where=source.name,
            hint="export with semicolons between the fields, or with decimal points",
        ) from None
