"""The lines of a text table as rows of cells: comments without their mark, fields without the blanks around them."""

from __future__ import annotations

import csv
import io
import re

from specflow.importers.readers.delimiter import (
    BLANKS,
    DELIMITERS,
    Layout,
    is_number,
    is_setting,
    split,
    split_blanks,
    split_preamble,
    split_to_width,
)
from specflow.importers.readers.stores import Value

COMMENT_MARKS = ("#", "!", "%", "//")

_RULE = frozenset("-=_*~")
_BESIDE_RULES = re.compile(r"[\s|+:;,]+")
_SETTING = re.compile(r"([A-Za-z][A-Za-z_]+)\s+([+\-−]?[0-9]+(?:\.[0-9]+)?)(?:\s+([A-Za-z°µ%/]{1,6}))?")
"""A line of a text in columns that states one number by its name: ``GAIN 14.2 dBd``."""

_KEY_LINE = re.compile(r"[^\W\d_][^:=,;0-9]{0,40}[:=]\s*\S")


class TextLines:
    """Some lines of a text table. ``first`` is the first line of the file that is not blank, by which the comment mark
    is known; ``comments`` are the numbers of the comment lines, counted from 1 in these lines."""

    def __init__(self, text: str, lines: list[str], first: str | None = None) -> None:
        self._text = text
        self._lines = lines
        self.notes: list[str] = []
        self.comments = _comment_rows(
            lines, next(line for line in lines if line.strip()) if first is None else first
        )

    def count(self, delimiter: str) -> int:
        """About how many fields there are."""
        return self._text.count(delimiter) + len(self._lines)

    def rows(self, layout: Layout) -> list[list[Value]]:
        """The cells of each line; blank lines are empty rows."""
        rows = self._parted(layout)
        for place, line in enumerate(self._lines):
            if rows[place] and _is_rule(line):
                rows[place] = []  # a line drawn under the headers
        self._part_comments(rows, layout)
        if layout.width >= 2:
            self._part_headers(rows, layout)
        return rows

    def _parted(self, layout: Layout) -> list[list[Value]]:
        if layout.delimiter == BLANKS:
            return [list(split_blanks(line)) for line in self._lines]
        if '"' in self._text:
            try:
                return _quoted_rows(self._text, layout.delimiter)
            except csv.Error:
                self.notes.append("the quotes are not in pairs; they were read as plain characters")
        return [
            [field.strip() for field in line.split(layout.delimiter)] if line.strip() else []
            for line in self._lines
        ]

    def _part_comments(self, rows: list[list[Value]], layout: Layout) -> None:
        """Part comment lines without their mark."""
        for number in self.comments:
            text = (_comment_text(self._lines[number - 1]) or "").strip()
            fields = split(text, layout.delimiter) if layout.delimiter != BLANKS else [text]
            rows[number - 1] = list(_at_width(fields, text, layout.width)) if text else []

    def _part_headers(self, rows: list[list[Value]], layout: Layout) -> None:
        """Part lines that use other separators than the body: headers, and settings above the table."""
        for place, row in enumerate(rows):
            if not row or place + 1 in self.comments:
                continue
            line = self._lines[place].strip()
            setting = _SETTING.fullmatch(line) if layout.delimiter == BLANKS else None
            if setting is not None:
                rows[place] = [part for part in setting.groups() if part]
            elif layout.delimiter == BLANKS and _KEY_LINE.match(line):
                rows[place] = [line]  # "DUT: SN 12" has as many words as the table has columns, by chance
            elif layout.delimiter == BLANKS:
                if len(row) != layout.width or any(str(field).endswith(",") for field in row):
                    parted = split_to_width(line, layout.width, single_blanks=True)
                    rows[place] = list(parted or _words(line, row))
            elif layout.delimiter == "," and is_setting(line, str(row[0])):
                rows[place] = [line]
            elif len(row) == 1 and layout.width > 1 and '"' not in line:
                rows[place] = list(_at_width([line], line, layout.width))
            elif (other := _other_section(line, row, layout.delimiter)) is not None:
                rows[place] = list(other)
        self._part_settings(rows)

    def _part_settings(self, rows: list[list[Value]]) -> None:
        """Settings in a format of their own, each line for itself."""
        for place, row in enumerate(rows):
            if len(row) == 1 and place + 1 not in self.comments:
                rows[place] = list(split_preamble(str(row[0])))


def _other_section(line: str, row: list[Value], delimiter: str) -> list[str] | None:
    """The fields of a row of numbers in a section that another delimiter parts: ``1,5;2`` below a table with commas,
    which cut at its comma would be 1 and ``5;2``."""
    for other in DELIMITERS:
        if other not in (delimiter, BLANKS) and other in line:
            fields = split(line, other)
            if all(map(is_number, fields)) and not all(is_number(str(field)) for field in row):
                return fields
    return None


def _comment_rows(lines: list[str], first: str) -> set[int]:
    """Line numbers of comments: ``%`` only where the file begins with it, since ``% rms`` may be a unit."""
    first = first.lstrip()
    found = {number for number, line in enumerate(lines, start=1) if _comment_text(line) is not None}
    if lines[0].lstrip() == first and is_separator_line(first):
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
    rest = text.lstrip("#!%/") if not text.startswith("//") else text.lstrip("/").lstrip().removeprefix(">>")
    return None if rest[:1] in (",", ";", "\t", "|") else rest


def _is_rule(line: str) -> bool:
    """Whether a line is drawn and not written: ``-----  -----``, ``|=====|=====|``."""
    if line.strip()[:1] not in "-=_*~|+":
        return False  # nearly all lines
    strokes = [stroke for stroke in _BESIDE_RULES.split(line) if stroke]
    return bool(strokes) and all(
        len(stroke) > 2 and stroke[0] in _RULE and not stroke.strip(stroke[0]) for stroke in strokes
    )


def is_separator_line(line: str) -> bool:
    """``sep=;`` at the head of a file says what parts its fields."""
    return line.lower().startswith("sep=") and len(line.rstrip("\r\n")) == len("sep=;")


def _is_data(line: str) -> bool:
    fields = [field for field in line.replace(";", " ").replace(",", " ").split() if field]
    return len(fields) > 1 and sum(map(is_number, fields)) * 2 >= len(fields)


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


def _at_width(fields: list[str], line: str, width: int) -> list[str]:
    return fields if len(fields) > 1 or width < 2 else (split_to_width(line, width) or fields)


def _words(line: str, row: list[Value]) -> list[str]:
    """A line of another width among runs of blanks: a row of numbers stays parted, prose is one cell."""
    fields = [str(field) for field in row]
    return fields if all(map(is_number, fields)) else [line]
