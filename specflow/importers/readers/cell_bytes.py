"""The cells of whole rows of sheet XML as byte arrays: a million cells in a tenth of a second.

A cell as spreadsheet programs write it is ``<c r="C17" s="4" t="n"><f>..</f><v>3.1</v></c>``: reference first, then
style, then type. In text and attributes ``<`` is always escaped, so every ``<`` begins a tag, and the two bytes after
it tell which. Positions of all ``<`` are found at once; reference, style, type and the following tags are then read at
the same offset of all cells together. Anything of another shape raises Irregular, and the sheet is read as events.
"""

from __future__ import annotations

import re

import numpy as np
from numpy.typing import NDArray

from specflow.importers.readers.cell_events import (
    MAX_COLUMN,
    MAX_ROW,
    NEVER_CALCULATED,
    SheetProblem,
)
from specflow.importers.readers.grid import OddCell, OddKind
from specflow.importers.readers.odd_marks import OddMarks
from specflow.importers.readers.styles import Styles

Bytes = NDArray[np.uint8]
Places = NDArray[np.int64]
Flags = NDArray[np.bool_]

_ROW = re.compile(rb"<row\b([^>]*)>")
_ROW_NUMBER = re.compile(rb' r="([0-9]{1,7})"')
_HIDDEN = re.compile(rb' hidden="(?:1|true)"')
_VALUE = re.compile(rb"<v[^>]*>([^<]*)</v>")

_PADDING = b" " * 64
_OPEN, _BLANK, _QUOTE, _EQUALS, _CLOSE, _SLASH = b'< "=>/'
_ZERO, _NINE, _A, _Z = b"09AZ"


class Irregular(Exception):
    """The rows are not written in the usual shape."""


def scan_rows(block: bytes, marks: OddMarks, styles: Styles) -> None:
    """Mark the odd cells of a block of whole rows; raises Irregular or SheetProblem."""
    if b"<!" in block or b"<?" in block:
        raise Irregular
    if b" hidden=" in block:
        _scan_hidden(block, marks)
    cells = _Cells(block)
    if len(cells.at):
        cells.mark(marks, styles)


def _scan_hidden(block: bytes, marks: OddMarks) -> None:
    for row in _ROW.finditer(block):
        if _HIDDEN.search(row[1]):
            if (number := _ROW_NUMBER.search(row[1])) is None:
                raise Irregular
            marks.hidden_rows.add(int(number[1]))


class _Cells:
    """All cells of one block, side by side in arrays."""

    def __init__(self, block: bytes) -> None:
        self._block = block
        self._bytes: Bytes = np.frombuffer(block + _PADDING, dtype=np.uint8)
        opens = np.flatnonzero(self._bytes == _OPEN)
        # four more tags behind the last one, in the padding, so that "the tag after the next" always exists
        self._opens: Places = np.concatenate((opens, np.full(4, len(block))))
        self._second: Bytes = self._bytes[self._opens + 1]
        self._order = np.flatnonzero(self._second == ord("c"))
        third = self._bytes[self._opens[self._order] + 2]
        if np.isin(third, np.frombuffer(b">/\t\r\n", dtype=np.uint8)).any():
            raise Irregular
        self._order = self._order[third == _BLANK]  # not <color ...> of rich text
        self.at = self._opens[self._order]
        self._after = self._read_reference()
        self.style = np.zeros(len(self.at), dtype=np.int64)
        self._read_style()
        self._read_type()
        self._read_value()

    def mark(self, marks: OddMarks, styles: Styles) -> None:
        """Add what is odd, and the extent of the cells that hold something."""
        no_value = self.formula & ~self.cached
        filled = self.valued | no_value
        self._extend(marks, filled)
        self._mark(marks, no_value & ~self.error, OddCell(OddKind.NO_VALUE))
        number = self.number & self.valued & ~no_value
        if styles.never_calculated:
            unset = number & self.formula & self._stored_zero()
            self._mark(marks, unset, NEVER_CALCULATED)
            number &= ~unset
        self._mark(marks, self.date & self.valued, OddCell(OddKind.DATE, "ISO 8601"))
        self._mark_formats(marks, number, styles)
        for place in np.flatnonzero(self.error).tolist():
            value = _VALUE.match(self._block, self._value_at[place])
            text = value[1].decode("utf-8", "replace") if value else ""
            marks.add_one(int(self.row[place]), int(self.column[place]), OddCell(OddKind.ERROR, text))

    def _extend(self, marks: OddMarks, filled: Flags) -> None:
        if filled.any():
            rows, columns = self.row[filled], self.column[filled]
            marks.extend(int(rows.min()), int(columns.min()), int(rows.max()), int(columns.max()))

    def _mark(self, marks: OddMarks, which: Flags, cell: OddCell) -> None:
        if which.any():
            codes = np.full(int(which.sum()), marks.code(cell))
            marks.add(self.row[which], self.column[which], codes)

    def _mark_formats(self, marks: OddMarks, number: Flags, styles: Styles) -> None:
        odd = [(style, cell) for style, cell in enumerate(styles.odd) if cell is not None]
        if not odd:
            return
        codes = np.full(max(len(styles.odd), int(self.style.max()) + 1), -1)
        for style, cell in odd:
            codes[style] = marks.code(cell)
        code = codes[self.style]
        which = number & (code >= 0)
        marks.add(self.row[which], self.column[which], code[which])

    def _is(self, at: Places, text: bytes) -> Flags:
        """At which of these places does ``text`` stand?"""
        found = self._bytes[at] == text[0]
        for offset, byte in enumerate(text[1:], start=1):
            found &= self._bytes[at + offset] == byte
        return found

    def _digits(self, at: Places, most: int) -> tuple[Places, Places]:
        """The numbers that stand at these places, and the places after them."""
        number, at = np.zeros(len(at), dtype=np.int64), at.copy()
        for _ in range(most):
            byte = self._bytes[at]
            digit = (byte >= _ZERO) & (byte <= _NINE)
            if not digit.any():
                break
            number = np.where(digit, number * 10 + byte - _ZERO, number)
            at += digit
        return number, at

    def _read_reference(self) -> Places:
        """Row and column of each cell; returns the places after the closing quote of the reference."""
        if not self._is(self.at, b'<c r="').all():
            raise Irregular
        at = self.at + len(b'<c r="')
        self.column = np.zeros(len(at), dtype=np.int64)
        for _ in range(3):
            byte = self._bytes[at]
            letter = (byte >= _A) & (byte <= _Z)
            self.column = np.where(letter, self.column * 26 + byte - (_A - 1), self.column)
            at += letter
        self.row, at = self._digits(at, 7)
        if not (self._bytes[at] == _QUOTE).all():
            raise Irregular
        if not (
            (self.row >= 1) & (self.row <= MAX_ROW) & (self.column >= 1) & (self.column <= MAX_COLUMN)
        ).all():
            raise SheetProblem("a cell lies outside the sheet")
        return at + 1

    def _read_style(self) -> None:
        styled = np.flatnonzero(self._is(self._after, b' s="'))
        number, after = self._digits(self._after[styled] + len(b' s="'), 6)
        if not (self._bytes[after] == _QUOTE).all():
            raise Irregular
        self.style[styled] = number
        self._after[styled] = after + 1

    def _read_type(self) -> None:
        """What each cell says it holds; a cell without a type holds a number."""
        byte = self._bytes[self._after]
        typed = self._is(self._after, b' t="')
        self.empty = byte == _SLASH
        letter, second = self._bytes[self._after + 4], self._bytes[self._after + 5]
        other = ~typed & (byte != _CLOSE) & ~self.empty
        named_number = typed & (letter == ord("n"))
        if other.any() or (named_number & (self._bytes[self._after + 6] != _CLOSE)).any():
            raise Irregular
        self.number = (byte == _CLOSE) | named_number
        self.error = typed & (letter == ord("e"))
        self.date = typed & (letter == ord("d"))
        self.shared = typed & (letter == ord("s")) & (second == _QUOTE)
        self.text = typed & ((letter == ord("s")) | (letter == ord("i")))

    def _read_value(self) -> None:
        """Which cells hold a formula, which a value, and where its tag is."""
        next_tag, second, third = (self._second[self._order + step] for step in (1, 2, 3))
        self.formula = (next_tag == ord("f")) & ~self.empty
        step = np.zeros(len(self.at), dtype=np.int64)
        step[(next_tag == ord("v")) & ~self.empty] = 1
        step[self.formula & (second == ord("v"))] = 2
        step[self.formula & (second == _SLASH) & (third == ord("v"))] = 3
        has_tag = step > 0
        self._value_at: Places = self._opens[self._order + step]
        plain_tag = self._bytes[self._value_at + 2] == _CLOSE
        blank = (self._bytes[self._value_at + 2] == _SLASH) | (
            plain_tag & (self._bytes[self._value_at + 3] == _OPEN)
        )
        inline = (next_tag == ord("i")) & ~self.empty
        self.valued = (has_tag & ~blank) | inline
        self.cached = has_tag & (self.text | ~blank)
        digit = self._bytes[self._value_at + 3]
        if (self.shared & self.valued & plain_tag & ~((digit >= _ZERO) & (digit <= _NINE))).any():
            raise SheetProblem("a cell names no shared text")

    def _stored_zero(self) -> Flags:
        return self._is(self._value_at + 2, b">0<")
