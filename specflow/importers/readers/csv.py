"""Delimited text (.csv, .tsv, .txt, .dat): one grid, cells as text as written, row numbers as the lines of the file."""

from __future__ import annotations

import csv
import io
import re
from collections.abc import Callable

from specflow.errors import FileError
from specflow.importers.readers.delimiter import (
    BLANKS,
    AmbiguousComma,
    Layout,
    find_layout,
    is_number,
    split,
    split_to_width,
)
from specflow.importers.readers.encoding import decode
from specflow.importers.readers.grid import Grid
from specflow.importers.readers.source import Source
from specflow.importers.readers.stores import Value

MAX_FIELDS = 16_000_000

COMMENT_MARKS = ("#", "!", "%", "//")

_WORKBOOK_HEADS = (b"PK\x03\x04", b"\xd0\xcf\x11\xe0")


def read_csv(source: Source) -> list[Grid]:
    """The table of a text file. Raises FileError for content that is no text or that nothing can be made of."""
    if source.content.startswith(_WORKBOOK_HEADS):
        raise FileError(
            "this is a workbook or archive with the ending of a text file",
            where=source.name,
            hint="give it its true ending (.xlsx)",
        )
    text, notes = decode(source)
    lines = text.split("\n")
    if not lines[-1]:
        lines.pop()
    if not any(map(str.strip, lines)):
        raise FileError("the file holds nothing but blanks", where=source.name, hint="export it again")
    comments = _comment_rows(lines)
    layout = _layout(source, lines, comments)
    rows = _rows(source, text, lines, layout, notes)
    _part_comments_and_headers(rows, lines, comments, layout)
    return [
        Grid(
            name=source.name,
            rows=rows,
            file=source.name,
            comment_rows=frozenset(comments),
            is_text=True,
            decimal=layout.decimal,
            notes=tuple(notes),
        )
    ]


def _comment_rows(lines: list[str]) -> set[int]:
    """Line numbers of comments: ``%`` only where the file begins with it, since ``% rms`` may be a unit."""
    first = next(line for line in lines if line.strip()).lstrip()
    found = {number for number, line in enumerate(lines, start=1) if _comment_text(line) is not None}
    if first.lower().startswith("sep=") and len(first.strip()) == len("sep=;"):
        found.add(1)
    if not first.startswith("%"):
        found = {number for number in found if not lines[number - 1].lstrip().startswith("%")}
    counted = {number for number in found if re.match(r"#[0-9]", lines[number - 1].lstrip())}
    if not counted:
        return found
    rows = sum(_is_data(line) for number, line in enumerate(lines, start=1) if number not in found)
    return found - counted if len(counted) > rows else found  # "#12", "#13" are names in the first column


def _comment_text(line: str) -> str | None:
    """The line without its comment mark, None if it has none; in ``#,Gain`` the mark is a title."""
    text = line.lstrip()
    if not text.startswith(COMMENT_MARKS):
        return None
    rest = text.lstrip("#!%/") if not text.startswith("//") else text.lstrip("/")
    return None if rest[:1] in (",", ";", "\t", "|") else rest


def _is_data(line: str) -> bool:
    fields = [field for field in line.replace(";", " ").replace(",", " ").split() if field]
    return len(fields) > 1 and sum(map(is_number, fields)) * 2 >= len(fields)


def _layout(source: Source, lines: list[str], comments: set[int]) -> Layout:
    if 1 in comments and lines[0].lower().startswith("sep="):
        delimiter = lines[0].strip()[-1]
        layout = find_layout([line.replace(delimiter, "\t") for line in lines[1:] if line.strip()])
        return Layout(delimiter, layout.width, layout.decimal if delimiter != "," else ".")
    table = [line for number, line in enumerate(lines, start=1) if line.strip() and number not in comments]
    try:
        return find_layout(table or [line for line in lines if line.strip()])
    except AmbiguousComma:
        raise FileError(
            "the comma seems to part both the fields and the decimals",
            where=source.name,
            hint="export with semicolons between the fields, or with decimal points",
        ) from None


def _rows(source: Source, text: str, lines: list[str], layout: Layout, notes: list[str]) -> list[list[Value]]:
    fields = text.count(layout.delimiter) + len(lines)
    if fields > MAX_FIELDS:
        raise FileError(
            f"the file has about {fields:,} fields, more than {MAX_FIELDS:,}",
            where=source.name,
            hint="split it",
        )
    if layout.delimiter == BLANKS:
        return [list(line.split()) for line in lines]
    if '"' in text:
        try:
            return _quoted_rows(text, layout.delimiter)
        except csv.Error:
            notes.append("the quotes are not in pairs; they were read as plain characters")
    strip = any(
        f"{layout.delimiter}{blank}" in text or f"{blank}{layout.delimiter}" in text for blank in " \t"
    )
    parted: Callable[[str], list[Value]] = (
        _parted_stripped(layout.delimiter) if strip else _parted(layout.delimiter)
    )
    return [parted(line) if line.strip() else [] for line in lines]


def _parted(delimiter: str) -> Callable[[str], list[Value]]:
    return lambda line: list(line.split(delimiter))


def _parted_stripped(delimiter: str) -> Callable[[str], list[Value]]:
    return lambda line: [field.strip() for field in line.split(delimiter)]


def _quoted_rows(text: str, delimiter: str) -> list[list[Value]]:
    """Rows with quoted fields; a row that goes over several lines stands at its first, the others are empty."""
    rows: list[list[Value]] = []
    reader = csv.reader(
        io.StringIO(text, newline=""), delimiter=delimiter, skipinitialspace=True, strict=True
    )
    for fields in reader:
        cells: list[Value] = [field.strip() for field in fields]
        rows.append(cells if any(cells) or len(cells) > 1 else [])
        rows.extend([] for _ in range(reader.line_num - len(rows)))
    return rows


def _part_comments_and_headers(
    rows: list[list[Value]], lines: list[str], comments: set[int], layout: Layout
) -> None:
    """Part comment lines without their mark, and header lines that use other separators than the body."""
    for number in comments:
        text = (_comment_text(lines[number - 1]) or "").strip()
        fields = split(text, layout.delimiter) if layout.delimiter != BLANKS else [text]
        rows[number - 1] = list(_at_width(fields, text, layout.width)) if text else []
    if layout.width < 2:
        return
    for place, row in enumerate(rows):
        if row and len(row) != layout.width and place + 1 not in comments:
            line = lines[place].strip()
            if layout.delimiter == BLANKS:
                rows[place] = list(
                    split_to_width(line, layout.width, single_blanks=True) or _words(line, row)
                )
            elif len(row) == 1 and '"' not in line:
                rows[place] = list(_at_width([line], line, layout.width))


def _at_width(fields: list[str], line: str, width: int) -> list[str]:
    return fields if len(fields) > 1 or width < 2 else (split_to_width(line, width) or fields)


def _words(line: str, row: list[Value]) -> list[str]:
    """A line of another width among runs of blanks: a row of numbers stays parted, prose is one cell."""
    fields = [str(field) for field in row]
    return fields if all(map(is_number, fields)) else [line]
