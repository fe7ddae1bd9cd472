"""Where a grid keeps its cells when they are many: column by column in arrays instead of row by row in lists.

A Python list of a million rows of twelve numbers takes most of a gigabyte; the same numbers in arrays take 96 MB. A
store is a sequence of rows, so that whoever walks over rows may, and answers for whole columns without making a Python
object of each cell.
"""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import date, datetime, time, timedelta
from typing import TypeVar, overload

import numpy as np
from numpy.typing import NDArray

Value = str | float | int | bool | datetime | date | time | timedelta
"""What a cell can hold; an empty cell is ``""``."""

T = TypeVar("T", bound=np.generic)
Floats = NDArray[np.float64]
Codes = NDArray[np.int32]
Flags = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Coded:
    """A column of words: ``codes`` (n,) int32 into ``words``; -1 is an empty cell."""

    codes: Codes
    words: Sequence[Value]

    def value(self, code: int) -> Value:
        """The cell that a code stands for."""
        return "" if code < 0 else self.words[code]

    def is_blank(self) -> Flags:
        """Which cells hold nothing but blanks."""
        blank = [isinstance(word, str) and not word.strip() for word in self.words]
        return np.array([*blank, True])[self.codes]


class CellStore(Sequence[list[Value]]):
    """Rows of cells; ``row`` and ``place`` count from 0. ``width`` is the number of cells of the longest row."""

    width: int

    @abstractmethod
    def __len__(self) -> int: ...

    @abstractmethod
    def cells_of(self, row: int) -> list[Value]:
        """The cells of one row."""

    @abstractmethod
    def value(self, row: int, place: int) -> Value:
        """One cell; ``""`` behind the end of the row."""

    @abstractmethod
    def column(self, place: int, start: int, stop: int) -> list[Value]:
        """The cells of rows ``start`` up to, not including, ``stop`` in one column; all inside the store."""

    @abstractmethod
    def numbers(self, place: int, start: int, stop: int) -> tuple[Floats, Flags] | None:
        """The plain numbers of a column, NaN elsewhere, and which cells hold something else; None where the store does
        not know without looking at each cell. The arrays may be the store's own: they are not to be changed."""

    @abstractmethod
    def has_numbers(self, place: int, start: int, stop: int) -> bool:
        """Whether a cell of these rows may be something else than text."""

    def coded(self, place: int, start: int, stop: int) -> Coded | None:
        """The words of a column that holds no numbers; None where the store keeps none, or they are not coded."""
        return None

    def cut(self, first_row: int, stop_row: int, first: int, stop: int) -> CellStore:
        """The cells of rows ``first_row`` up to ``stop_row`` in columns ``first`` up to ``stop``, not copied."""
        return CutStore(self, first_row, stop_row, first, stop)

    def __iter__(self) -> Iterator[list[Value]]:
        return map(self.cells_of, range(len(self)))

    @overload
    def __getitem__(self, index: int) -> list[Value]: ...
    @overload
    def __getitem__(self, index: slice) -> list[list[Value]]: ...
    def __getitem__(self, index: int | slice) -> list[Value] | list[list[Value]]:
        if isinstance(index, slice):
            return [self.cells_of(row) for row in range(*index.indices(len(self)))]
        row = index + len(self) if index < 0 else index
        if not 0 <= row < len(self):
            raise IndexError("no such row")
        return self.cells_of(row)


class CutStore(CellStore):
    """A part of another store, seen through it."""

    def __init__(self, whole: CellStore, first_row: int, stop_row: int, first: int, stop: int) -> None:
        self._whole = whole
        self._top, self._left = min(first_row, len(whole)), min(first, whole.width)
        self._rows = max(min(stop_row, len(whole)) - self._top, 0)
        self.width = max(min(stop, whole.width) - self._left, 0)

    def __len__(self) -> int:
        return self._rows

    def cells_of(self, row: int) -> list[Value]:
        return self._whole.cells_of(row + self._top)[self._left : self._left + self.width]

    def value(self, row: int, place: int) -> Value:
        return self._whole.value(row + self._top, place + self._left) if place < self.width else ""

    def column(self, place: int, start: int, stop: int) -> list[Value]:
        if place >= self.width:
            return [""] * (stop - start)
        return self._whole.column(place + self._left, start + self._top, stop + self._top)

    def numbers(self, place: int, start: int, stop: int) -> tuple[Floats, Flags] | None:
        if place >= self.width:
            return np.full(stop - start, np.nan), np.zeros(stop - start, bool)
        return self._whole.numbers(place + self._left, start + self._top, stop + self._top)

    def coded(self, place: int, start: int, stop: int) -> Coded | None:
        return (
            self._whole.coded(place + self._left, start + self._top, stop + self._top)
            if place < self.width
            else None
        )

    def has_numbers(self, place: int, start: int, stop: int) -> bool:
        return place < self.width and self._whole.has_numbers(
            place + self._left, start + self._top, stop + self._top
        )


@dataclass(frozen=True, slots=True)
class TypedColumn:
    """One column: ``numbers`` with NaN where a cell is no number (None: there is none), ``codes`` into the words of the
    store, -1 where a cell is no word (None: there is none). A cell that is neither is empty. ``codes`` may end above
    the last row of a column of numbers; below there are no words. Most such columns have one alone, in their header."""

    numbers: Floats | None
    codes: Codes | None


class TypedColumns(CellStore):
    """Cells of a sheet in typed columns; ``words`` are all cells that are no numbers, each once."""

    def __init__(self, columns: Sequence[TypedColumn], rows: int, words: Sequence[Value]) -> None:
        self.width = len(columns)
        self._columns = columns
        self._rows = rows
        self._words = words
        self._objects = np.empty(len(words) + 1, object)
        self._objects[:] = [*words, ""]
        self._blank = np.array([isinstance(word, str) and not word.strip() for word in words] + [True])
        self._text = np.array([isinstance(word, str) for word in words] + [True])

    def __len__(self) -> int:
        return self._rows

    def cells_of(self, row: int) -> list[Value]:
        return [self.value(row, place) for place in range(self.width)]

    def value(self, row: int, place: int) -> Value:
        if place >= self.width:
            return ""
        column = self._columns[place]
        if column.codes is not None and row < len(column.codes) and (code := int(column.codes[row])) >= 0:
            return self._words[code]
        if column.numbers is None:
            return ""
        number = float(column.numbers[row])
        return "" if number != number else number

    def column(self, place: int, start: int, stop: int) -> list[Value]:
        if place >= self.width:
            return [""] * (stop - start)
        column = self._columns[place]
        codes = None if column.codes is None else column.codes[start:stop]
        if column.numbers is None:
            # code -1 takes the last of the objects, which is the empty cell
            return [""] * (stop - start) if codes is None else self._objects[codes].tolist()
        numbers = column.numbers[start:stop]
        cells: list[Value] = numbers.tolist()
        for empty in np.flatnonzero(np.isnan(numbers)).tolist():
            cells[empty] = ""
        if codes is not None:
            for here in np.flatnonzero(codes >= 0).tolist():
                cells[here] = self._words[codes[here]]
        return cells

    def numbers(self, place: int, start: int, stop: int) -> tuple[Floats, Flags]:
        count = stop - start
        column = self._columns[place] if place < self.width else TypedColumn(None, None)
        numbers = np.full(count, np.nan) if column.numbers is None else locked(column.numbers[start:stop])
        other = np.isinf(numbers)
        if column.codes is not None:
            codes = column.codes[start:stop]
            other[: len(codes)] |= ~self._blank[codes]
        return numbers, other

    def coded(self, place: int, start: int, stop: int) -> Coded | None:
        column = self._columns[place] if place < self.width else TypedColumn(None, None)
        if column.codes is None or (
            column.numbers is not None and not np.isnan(column.numbers[start:stop]).all()
        ):
            return None
        codes = column.codes[start:stop]
        if len(codes) < stop - start:
            codes = np.pad(codes, (0, stop - start - len(codes)), constant_values=-1)
        return Coded(locked(codes), self._words)

    def has_numbers(self, place: int, start: int, stop: int) -> bool:
        column = self._columns[place] if place < self.width else TypedColumn(None, None)
        if column.numbers is not None and not np.isnan(column.numbers[start:stop]).all():
            return True
        return column.codes is not None and not bool(self._text[column.codes[start:stop]].all())


def locked(array: NDArray[T]) -> NDArray[T]:
    """A view that nobody can write into."""
    view = array.view()
    view.flags.writeable = False
    return view
