"""The values of the cells of whole rows, taken from the bytes of a sheet into typed columns.

Beside the marks of odd cells (``cell_bytes``) the places of all values of a block are known; numbers are cut out of the
block together and converted in one go, exactly as ``float`` converts each. What is written in a way that would need a
guess raises Irregular, and the sheet is read in the ordinary way.
"""

from __future__ import annotations

import html
import re
from collections.abc import Sequence
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray

from specflow.importers.readers.cell_bytes import Cells, Flags, Irregular, Places
from specflow.importers.readers.cell_events import SheetProblem
from specflow.importers.readers.date_serials import from_serial, is_duration
from specflow.importers.readers.odd_cells import OddKind
from specflow.importers.readers.places import CellRange
from specflow.importers.readers.shared_texts import plain_text
from specflow.importers.readers.stores import Codes, Floats, TypedColumn, TypedColumns, Value
from specflow.importers.readers.styles import Styles

_IN_NUMBERS = b"0123456789+-.eE "
_ENTITY = re.compile(r"&(?:amp|lt|gt|quot|apos|#[0-9]{1,7}|#x[0-9a-fA-F]{1,6});")
_INLINE, _INLINE_PRESERVED = b"<is><t>", b'<is><t xml:space="preserve">'


class _GrowingColumn:
    """The cells of one column by row number, while they come; whole arrays grow in place, so that nothing is copied."""

    __slots__ = ("_codes", "_last", "_numbers")

    def __init__(self) -> None:
        self._numbers: Floats = np.empty(0, np.float64)
        self._codes: Codes = np.empty(0, np.int32)
        self._last = 0

    def add(self, rows: Places, numbers: Floats, codes: Codes) -> None:
        """Cells with their numbers (NaN: none) and the codes of their words (-1: none), further and further down."""
        if (np.diff(rows) <= 0).any() or int(rows[0]) <= self._last:
            raise Irregular  # a cell that stands twice, or above the one before it
        self._last = int(rows[-1])
        if not np.isnan(numbers).all():
            self._numbers = _grown(self._numbers, self._last, np.nan)
            self._numbers[rows - 1] = numbers
        if (codes >= 0).any():
            self._codes = _grown(self._codes, self._last, -1)
            self._codes[rows - 1] = codes

    def finished(self, first_row: int, last_row: int) -> TypedColumn:
        """The column between two rows, both included."""
        numbers = _grown(self._numbers, last_row, np.nan, exact=True) if len(self._numbers) else None
        stop = last_row if numbers is None else min(last_row, len(self._codes))
        codes = _grown(self._codes, stop, -1, exact=True) if len(self._codes) else None
        return TypedColumn(
            None if numbers is None else numbers[first_row - 1 :],
            None if codes is None else codes[first_row - 1 :],
        )


def _grown(array: NDArray[Any], size: int, empty: float, exact: bool = False) -> NDArray[Any]:
    """The array with at least ``size`` elements, and with few to spare."""
    before = len(array)
    if exact or size > before:
        array.resize(size if exact else max(size + size // 16, 4096), refcheck=False)
        array[before:] = empty
    return array


class CellValues:
    """Takes the cells block by block; ``columns`` gives them when all have been taken."""

    def __init__(self, styles: Styles, shared: Sequence[str]) -> None:
        self._styles = styles
        self._words: list[Value] = list(shared)
        self._shared = len(shared)
        self._codes: dict[tuple[type, Value], int] = {}
        self._raw: dict[tuple[bytes, bool], int] = {}
        self._columns: dict[int, _GrowingColumn] = {}

    def take(self, cells: Cells) -> None:
        """The cells of one block. Raises Irregular and SheetProblem."""
        if (cells.date & cells.valued).any():
            raise Irregular
        numbers = np.full(len(cells.at), np.nan)
        codes = np.full(len(cells.at), -1, np.int32)
        which = cells.number & cells.valued
        numbers[which] = self._numbers(cells, which)
        self._dates(cells, which, numbers, codes)
        self._texts(cells, codes)
        self._split(cells, numbers, codes)

    def columns(self, extent: CellRange) -> TypedColumns:
        """All cells, in columns that span ``extent``."""
        rows = extent.last_row - extent.first_row + 1
        found = [
            self._columns.pop(column, _GrowingColumn()).finished(extent.first_row, extent.last_row)
            for column in range(extent.first_column, extent.last_column + 1)
        ]
        return TypedColumns(found, rows, self._words)

    def _numbers(self, cells: Cells, which: Flags) -> Floats:
        start = cells.value_at[which] + len(b"<v>")
        if not cells.stands(cells.value_at[which], b"<v>").all():
            raise Irregular
        text = cells.cut(start).replace(b"<", b" ")
        fields = text.split()
        if text.translate(None, _IN_NUMBERS) or len(fields) != len(start):
            raise Irregular
        try:
            return np.fromiter(map(float, fields), np.float64, len(fields))
        except ValueError:
            raise Irregular from None

    def _dates(self, cells: Cells, which: Flags, numbers: Floats, codes: Codes) -> None:
        """Numbers in a date format become what the format shows."""
        for style in np.flatnonzero(np.bincount(cells.style[which], minlength=1)).tolist():
            odd = self._styles.of(style)
            if odd is None or odd.kind is not OddKind.DATE:
                continue
            duration = is_duration(odd.detail)
            for place in np.flatnonzero(which & (cells.style == style)).tolist():
                value = from_serial(float(numbers[place]), duration, self._styles.from_1904)
                if not isinstance(value, float):
                    numbers[place], codes[place] = np.nan, self._code(value)

    def _texts(self, cells: Cells, codes: Codes) -> None:
        shared = np.flatnonzero(cells.shared & cells.valued)
        if len(shared):
            number = cells.whole_numbers(cells.value_at[shared] + len(b"<v>"))
            if (number >= self._shared).any():
                raise SheetProblem("a cell names a shared text that is not there")
            codes[shared] = number
        for letter, read in (
            (ord("b"), self._truth),
            (ord("i"), self._inline),
            (ord("S"), self._formula_text),
        ):
            which = np.flatnonzero((cells.letter == letter) & cells.valued)
            if len(which):
                codes[which] = read(cells, which)

    def _truth(self, cells: Cells, which: Places) -> Codes:
        yes = cells.stands(cells.value_at[which], b"<v>1<")
        if not (yes | cells.stands(cells.value_at[which], b"<v>0<")).all():
            raise Irregular
        return np.where(yes, self._code(True), self._code(False)).astype(np.int32)

    def _inline(self, cells: Cells, which: Places) -> Codes:
        at = cells.value_at[which]
        kept = cells.stands(at, _INLINE_PRESERVED)
        if not (kept | cells.stands(at, _INLINE)).all():
            raise Irregular
        start = at + np.where(kept, len(_INLINE_PRESERVED), len(_INLINE))
        if not cells.stands(cells.next_tag(start), b"</t></is></c>").all():
            raise Irregular
        return self._cut_texts(cells, start, kept)

    def _formula_text(self, cells: Cells, which: Places) -> Codes:
        at = cells.value_at[which]
        if not cells.stands(at, b"<v>").all():
            raise Irregular
        return self._cut_texts(cells, at + len(b"<v>"), np.ones(len(at), bool))

    def _cut_texts(self, cells: Cells, start: Places, kept: Flags) -> Codes:
        raw = cells.cut(start).split(b"<")[:-1]
        known, found = self._raw, []
        for text, keep in zip(raw, kept.tolist(), strict=True):
            code = known.get((text, keep))
            if code is None:
                code = known[text, keep] = self._code(_decoded(text, keep))
            found.append(code)
        return np.array(found, np.int32)

    def _code(self, value: Value) -> int:
        key = (type(value), value)
        if key not in self._codes:
            self._codes[key] = len(self._words)
            self._words.append(value)
        return self._codes[key]

    def _split(self, cells: Cells, numbers: Floats, codes: Codes) -> None:
        """The cells of the block by column."""
        filled = np.flatnonzero(~np.isnan(numbers) | (codes >= 0))
        order = filled[np.argsort(cells.column[filled], kind="stable")]
        columns, rows = cells.column[order], cells.row[order]
        cuts = [0, *(np.flatnonzero(np.diff(columns)) + 1).tolist(), len(order)]
        for start, stop in pairwise(cuts):
            if start < stop:
                part = order[start:stop]
                column = self._columns.setdefault(int(columns[start]), _GrowingColumn())
                column.add(rows[start:stop], numbers[part], codes[part])


def _decoded(raw: bytes, keep: bool) -> str:
    try:
        text = raw.decode()
    except UnicodeDecodeError:
        raise SheetProblem("a text in it is not UTF-8") from None
    if "\r" in text:
        raise Irregular
    if "&" in text:
        if "&" in _ENTITY.sub("", text):
            raise Irregular
        text = _ENTITY.sub(lambda entity: html.unescape(entity[0]), text)
    return plain_text(text, keep)
