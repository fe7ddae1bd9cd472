"""The cells of whole rows of sheet XML as byte arrays: a million cells in a fifth of a second.

A cell as spreadsheet programs write it is ``<c r="C17" s="4" t="n"><f>..</f><v>3.1</v></c>``: reference
first, then style, then type, then formula, then value. In text and attributes ``<`` is always escaped, so
``<c`` begins a cell wherever it stands. The places of all cells are found at once; reference, style, type
and the tag that follows are then read for all cells together. Anything of another shape raises Irregular,
and the sheet is read as events instead.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from specflow.importers.readers.cell_events import MAX_COLUMN, MAX_ROW, NEVER_CALCULATED, SheetProblem
from specflow.importers.readers.odd_cells import OddCell, OddKind
from specflow.importers.readers.odd_marks import OddMarks
from specflow.importers.readers.styles import Styles

Bytes = NDArray[np.uint8]
Places = NDArray[np.intp]
Flags = NDArray[np.bool_]

_ROW = re.compile(rb"<row\b([^>]*)>")
_ROW_NUMBER = re.compile(rb' r="([0-9]{1,7})"')
_HIDDEN = re.compile(rb' hidden="(?:1|true)"')
_METADATA = re.compile(rb'(?: (?:cm|vm|ph)="[0-9]+")+')
_VALUE = re.compile(rb"<v[^>]*>([^<]*)</v>")

_PADDING = b" " * 64
_ZERO, _NINE, _A, _Z = b"09AZ"

_TYPE_LENGTH = np.zeros(256, dtype=np.intp)
"""By the first letter of the type: how many bytes `` t="..."`` takes; ``s`` is told from ``str`` apart."""
for _name in (b"n", b"s", b"e", b"b", b"d", b"inlineStr"):
    _TYPE_LENGTH[_name[0]] = len(b' t=""') + len(_name)


class Irregular(Exception):
    """The rows are not written in the usual shape."""


def scan_rows(
    block: bytes, marks: OddMarks, styles: Styles, take: Callable[[Cells], None] | None = None
) -> None:
    """Mark the odd cells of a block of whole rows, and hand the cells on to ``take``; raises Irregular or
    SheetProblem."""
    # the single byte is looked for first because that is ten times as fast
    if (b"!" in block and b"<!" in block) or (b"?" in block and b"<?" in block):
        raise Irregular
    if b' hidden="' in block:
        _scan_hidden(block, marks)
    cells = Cells(block)
    if len(cells.at):
        cells.mark(marks, styles)
        if take is not None:
            take(cells)


def _scan_hidden(block: bytes, marks: OddMarks) -> None:
    for row in _ROW.finditer(block):
        if _HIDDEN.search(row[1]):
            if (number := _ROW_NUMBER.search(row[1])) is None:
                raise Irregular
            marks.hidden_rows.add(int(number[1]))


class Cells:
    """All cells of one block, side by side in arrays; ``_next`` is where the part not yet read begins.

    ``letter`` is the first letter of the type (``S`` for the text of a formula); ``value_at`` is where the tag of the
    value begins, in cells that are ``valued``.
    """

    def __init__(self, block: bytes) -> None:
        self._block = block
        self._bytes: Bytes = np.frombuffer(block + _PADDING, dtype=np.uint8)
        self.at = self._find()
        self._next = self.at
        self._read_reference()
        self._read_style()
        self._read_type()
        self._read_value()

    def mark(self, marks: OddMarks, styles: Styles) -> None:
        """Add what is odd, and the extent of the cells that hold something."""
        rows, columns = self.row, self.column
        marks.mention(int(rows.min()), int(columns.min()), int(rows.max()), int(columns.max()))
        no_value = self.formula & ~self.cached & ~self.error
        filled = self.valued | no_value
        if filled.any():
            rows, columns = self.row[filled], self.column[filled]
            marks.extend(int(rows.min()), int(columns.min()), int(rows.max()), int(columns.max()))
        self._mark(marks, no_value, OddCell(OddKind.NO_VALUE))
        number = self.number & self.valued
        if styles.never_calculated:
            unset = number & self.formula & self.stands(self.value_at + len(b"<v"), b">0<")
            self._mark(marks, unset, NEVER_CALCULATED)
            number &= ~unset
        self._mark(marks, self.date & self.valued, OddCell(OddKind.DATE, "ISO 8601"))
        self._mark_formats(marks, number, styles)
        self._mark_errors(marks)

    def _mark(self, marks: OddMarks, which: Flags, cell: OddCell) -> None:
        if which.any():
            marks.add(self.row[which], self.column[which], np.full(int(which.sum()), marks.code(cell)))

    def _mark_formats(self, marks: OddMarks, number: Flags, styles: Styles) -> None:
        for style in np.flatnonzero(np.bincount(self.style)).tolist():
            if (cell := styles.of(style)) is not None:
                self._mark(marks, number & (self.style == style), cell)

    def _mark_errors(self, marks: OddMarks) -> None:
        for place in np.flatnonzero(self.error).tolist():
            value = _VALUE.match(self._block, int(self.value_at[place]))
            text = value[1].decode("utf-8", "replace") if value else ""
            marks.add_one(int(self.row[place]), int(self.column[place]), OddCell(OddKind.ERROR, text))

    def _find(self) -> Places:
        """Where the cells begin. ``<color`` of rich text is none; ``<c>`` has no reference."""
        at: Places = np.flatnonzero((self._bytes[:-1] == ord("<")) & (self._bytes[1:] == ord("c")))
        third = self._bytes[at + 2]
        if np.isin(third, np.frombuffer(b">/\t\r\n", dtype=np.uint8)).any():
            raise Irregular
        cells: Places = at[third == ord(" ")]
        return cells

    def stands(self, at: Places, text: bytes) -> Flags:
        """At which of these places does ``text`` stand?"""
        found: Flags = self._bytes[at] == text[0]
        for offset, byte in enumerate(text[1:], start=1):
            found &= self._bytes[at + offset] == byte
        return found

    def _digits(self, at: Places, most: int) -> tuple[Places, Places]:
        """The numbers that stand at these places, and the places after them."""
        number, at = np.zeros(len(at), dtype=np.intp), at.copy()
        for _ in range(most):
            byte = self._bytes[at]
            digit = (byte >= _ZERO) & (byte <= _NINE)
            if not digit.any():
                break
            number = np.where(digit, number * 10 + byte - _ZERO, number)
            at += digit
        return number, at

    def _read_reference(self) -> None:
        """Row and column of each cell."""
        if not self.stands(self.at, b'<c r="').all():
            raise Irregular
        at = self.at + len(b'<c r="')
        self.column = np.zeros(len(at), dtype=np.intp)
        for _ in range(3):
            byte = self._bytes[at]
            letter = (byte >= _A) & (byte <= _Z)
            if not letter.any():
                break
            self.column = np.where(letter, self.column * 26 + byte - (_A - 1), self.column)
            at += letter
        self.row, at = self._digits(at, 7)
        if not (self._bytes[at] == ord('"')).all():
            raise Irregular
        outside = (self.row < 1) | (self.row > MAX_ROW) | (self.column < 1) | (self.column > MAX_COLUMN)
        if outside.any():
            raise SheetProblem("a cell lies outside the sheet")
        self._next = at + 1

    def _read_style(self) -> None:
        """The style of each cell; a cell without one has style 0."""
        self.style = np.zeros(len(self.at), dtype=np.intp)
        styled = np.flatnonzero(self.stands(self._next, b' s="'))
        number, after = self._digits(self._next[styled] + len(b' s="'), 5)
        if not (self._bytes[after] == ord('"')).all():
            raise Irregular
        self.style[styled] = number
        self._next[styled] = after + 1

    def _read_type(self) -> None:
        """What each cell says it holds; a cell without a type holds a number."""
        self._skip_metadata()
        typed = self.stands(self._next, b' t="')
        letter = np.where(typed, self._bytes[self._next + 4], ord("n"))
        string = typed & self.stands(self._next + 4, b'str"')
        self.letter = np.where(string, ord("S"), letter)
        self.number = letter == ord("n")
        self.error, self.date = letter == ord("e"), letter == ord("d")
        self.shared = (letter == ord("s")) & ~string
        self.text = (letter == ord("s")) | (letter == ord("i"))
        self._next = self._next + np.where(typed, _TYPE_LENGTH[letter] + 2 * string, 0)
        self._skip_metadata()
        closing = self._bytes[self._next]
        self.empty = closing == ord("/")
        if not (self.empty | (closing == ord(">"))).all():
            raise Irregular
        self._next += 1

    def _skip_metadata(self) -> None:
        """Cells of dynamic arrays and of rich values carry more attributes, before or after the type; they are few,
        and taken one by one."""
        more = (self._bytes[self._next] == ord(" ")) & ~self.stands(self._next, b' t="')
        for place in np.flatnonzero(more).tolist():
            metadata = _METADATA.match(self._block, int(self._next[place]))
            if metadata is None:
                raise Irregular
            self._next[place] = metadata.end()

    def _read_value(self) -> None:
        """Which cells hold a formula and which a value, and where the tag of the value is."""
        tag = np.where(self.empty, ord("/"), self._bytes[self._next + 1])
        self.formula, inline = tag == ord("f"), tag == ord("i")
        has_tag = tag == ord("v")
        if not (self.formula | inline | has_tag | (tag == ord("/"))).all():
            raise Irregular
        self.value_at = self._next.copy()
        if self.formula.any():
            self.value_at[self.formula] = self._behind_formula(self._next[self.formula])
            has_tag |= self.formula & self.stands(self.value_at, b"<v")
        after = self._bytes[self.value_at + len(b"<v")]
        first = self._bytes[self.value_at + len(b"<v>")]
        blank = (after == ord("/")) | ((after == ord(">")) & (first == ord("<")))
        # Some writers leave a blank before the slash.
        blank |= self.stands(self.value_at + len(b"<v"), b" />")
        self._check_one_value(has_tag, inline, after)
        self.valued = (has_tag & ~blank) | inline
        self.cached = has_tag & (self.text | ~blank)
        shared = self.shared & self.valued & ~inline
        if (after[shared] != ord(">")).any():
            raise Irregular
        self._check_shared_texts(shared)

    def _check_one_value(self, has_tag: Flags, inline: Flags, after: Bytes) -> None:
        """Behind the value the cell ends: of two values in one cell, readers take the first or the last."""
        open_tag = has_tag & (after == ord(">"))
        end = self._tags[np.searchsorted(self._tags, self.value_at[open_tag]) + 1]
        single = self.value_at[has_tag & ~open_tag]
        closed = self.stands(single, b"<v/></c>") | self.stands(single, b"<v /></c>")
        text = np.searchsorted(self._tags, self.value_at[inline]) + len((b"<is>", b"<t>", b"</t>"))
        text_end = self._tags[np.minimum(text, len(self._tags) - 1)]
        sound = self.stands(end, b"</v></c>").all() and self.stands(text_end, b"</is></c>").all()
        if not (sound and closed.all()):
            raise Irregular

    def _check_shared_texts(self, which: Flags) -> None:
        """The bulk reader takes whatever is no number for shared text 0."""
        _, end = self._digits(self.value_at[which] + len(b"<v>"), 10)
        if not (self._bytes[end] == ord("<")).all():
            raise SheetProblem("a cell names no shared text")

    def _behind_formula(self, at: Places) -> Places:
        """Where the tag after each formula begins; ``<f/>`` is one tag, ``<f>...</f>`` is two."""
        place = np.searchsorted(self._tags, at)
        second = self._tags[place + 1]
        return np.where(self._bytes[second + 1] == ord("/"), self._tags[place + 2], second)

    def next_tag(self, at: Places) -> Places:
        """Where the first tag at or behind each of these places begins."""
        return self._tags[np.searchsorted(self._tags, at)]

    def whole_numbers(self, at: Places) -> Places:
        """The whole numbers that stand at these places."""
        return self._digits(at, 10)[0]

    def cut(self, starts: Places) -> bytes:
        """What stands at these ascending places up to and with the ``<`` behind each, one after the other."""
        edges = np.zeros(len(self._bytes) + 1, np.int8)
        edges[starts] = 1
        edges[self.next_tag(starts) + 1] -= 1
        inside: Flags = np.cumsum(edges[:-1], dtype=np.int8).view(np.bool_)
        return self._bytes[inside].tobytes()

    @cached_property
    def _tags(self) -> Places:
        """Where all tags begin, with two more in the padding, so that each tag has two after it."""
        opens = np.flatnonzero(self._bytes == ord("<"))
        return np.concatenate((opens, np.full(2, len(self._block))))
