"""Large text tables: numbers converted block by block into columns, the text itself kept as the bytes it came in.

Ten million fields as Python strings take most of a gigabyte. Here a block of lines that holds nothing but plain numbers
goes through numpy's reader, which converts each field as ``float`` does; every other block is parted line by line, as a
small file is. What a cell was written as is cut from the bytes when somebody asks for it.
"""

from __future__ import annotations

import io
import re
from collections.abc import Callable, Iterator

import numpy as np
from numpy.typing import NDArray

from specflow.errors import FileError
from specflow.importers.readers.delimiter import BLANKS, SAMPLE_LINES, Layout, split_blanks
from specflow.importers.readers.grid import Grid, text_floats
from specflow.importers.readers.source import Source
from specflow.importers.readers.stores import CellStore, Flags, Floats, Value, locked
from specflow.importers.readers.text_rows import TextLines

FindLayout = Callable[[Source, list[str], set[int]], Layout]

MAX_FIELDS = 64_000_000

BLOCK = 1024 * 1024
_HEAD = 64 * 1024
_ROWS_AT_ONCE = 20_000
_UTF8_MARK = b"\xef\xbb\xbf"
_COUNTED = re.compile(rb"^\s*#[0-9]", re.MULTILINE)


def read_large_text(source: Source, find_layout: FindLayout) -> Grid | None:
    """The grid of a text file, or None where it has to be read line by line: quotes behind the head, NUL characters,
    another encoding than UTF-8, line ends of another kind, names that look like comments (``#12``)."""
    content = source.content.removeprefix(_UTF8_MARK)
    head = content[: content.find(b"\n", _HEAD) + 1]
    if not head or not _is_plain(content, head):
        return None
    try:
        return _Reading(source, content, len(head), find_layout).grid()
    except (_NotPlain, UnicodeDecodeError):
        return None


def _is_plain(content: bytes, head: bytes) -> bool:
    if content.startswith((b"\xff\xfe", b"\xfe\xff")) or b"\0" in content or _UTF8_MARK in content:
        return False
    if content.find(b'"', len(head)) >= 0 or (b"#" in content and _COUNTED.search(content)):
        return False
    return b"\r" not in content or content.count(b"\r") == content.count(b"\r\n")


class _NotPlain(Exception):
    """The file has to be read line by line."""


class _Reading:
    """One file on its way into columns."""

    def __init__(self, source: Source, content: bytes, head: int, find_layout: FindLayout) -> None:
        self._source = source
        self._content = content
        ends = _line_ends(content)
        after = ends + 1 if content.endswith(b"\n") else np.append(ends + 1, len(content) + 1)
        self._starts: NDArray[np.int64] = np.concatenate(([0], after))
        self._head = head
        sample = self._sample()
        self._first = next((line for line in sample if line.strip()), "")
        if not self._first:
            raise _NotPlain
        comments = TextLines("", sample, self._first).comments
        self._layout = find_layout(source, sample, comments)
        self._check_size()

    def grid(self) -> Grid:
        """Read all blocks."""
        count, width = len(self._starts) - 1, self._layout.width
        numbers: Floats = np.empty((width, count), np.float64)
        other = np.zeros((width, count), bool)
        rows: dict[int, list[Value]] = {}
        comments: set[int] = set()
        store = TextColumns(self._content, self._starts, self._layout.delimiter, numbers, other, rows)
        for first, stop in self._blocks():
            if (plain := self._plain_numbers(first, stop)) is not None:
                numbers[:, first:stop] = plain.T
                continue
            part = self._text_lines(first, stop)
            comments.update(number + first for number in part.comments)
            parted = part.rows(self._layout)
            if part.notes:
                raise _NotPlain  # quotes that are not in pairs
            for place in range(width):
                cells = [row[place] if place < len(row) else "" for row in parted]
                floats = text_floats(cells, self._layout.decimal)
                numbers[place, first:stop] = floats
                other[place, first:stop] = [
                    bool(str(cell).strip()) and not known
                    for cell, known in zip(cells, np.isfinite(floats).tolist(), strict=True)
                ]
            store.width = max(store.width, *map(len, parted))
            as_written = store.fields(first, stop)
            rows.update(
                (first + place, row)
                for place, (row, fields) in enumerate(zip(parted, as_written, strict=True))
                if row != fields
            )
        return Grid(
            name=self._source.name,
            rows=store,
            file=self._source.name,
            comment_rows=frozenset(comments),
            is_text=True,
            decimal=self._layout.decimal,
            grouped=self._layout.grouped,
        )

    def _sample(self) -> list[str]:
        """Lines to judge the layout from: all of a short file, else those of the head and as many from the middle."""
        count, half = len(self._starts) - 1, SAMPLE_LINES // 2
        if count <= SAMPLE_LINES:
            return self._lines(0, count)
        head = self._lines(0, max(half, int(np.searchsorted(self._starts, self._head))))
        middle = max(count // 2, len(head))
        return head + self._lines(middle, min(middle + half, count))

    def _lines(self, first: int, stop: int) -> list[str]:
        text = self._content[self._starts[first] : self._starts[stop] - 1].decode()
        return [line.removesuffix("\r") for line in text.split("\n")]

    def _text_lines(self, first: int, stop: int) -> TextLines:
        lines = self._lines(first, stop)
        return TextLines("\n".join(lines), lines, self._first)

    def _check_size(self) -> None:
        fields = len(self._starts) * self._layout.width
        if fields > MAX_FIELDS:
            raise FileError(
                f"the file has about {fields:,} fields, more than {MAX_FIELDS:,}",
                where=self._source.name,
                hint="split it",
            )

    def _blocks(self) -> Iterator[tuple[int, int]]:
        """The head, then blocks of whole lines: the first line of each and the one after its last."""
        last = len(self._starts) - 1
        first, stop = 0, int(np.searchsorted(self._starts, self._head))
        while first < last:
            yield first, min(stop, last)
            first = stop
            stop = max(int(np.searchsorted(self._starts, self._starts[min(first, last)] + BLOCK)), first + 1)

    def _plain_numbers(self, first: int, stop: int) -> Floats | None:
        """The numbers of a block whose lines all hold ``width`` plain numbers; shape (lines, width)."""
        if not self._layout.decimal:
            return None
        block = self._content[self._starts[first] : self._starts[stop] - 1]
        delimiter = None if self._layout.delimiter == BLANKS else self._layout.delimiter
        if self._layout.decimal == ",":
            if b"." in block:
                return None
            block = block.replace(b",", b".")
        allowed = b"0123456789+-.eE \r\n" + (b"\t" if delimiter is None else delimiter.encode())
        if block.translate(None, allowed) or not block.strip():
            return None
        try:
            numbers = np.loadtxt(
                io.BytesIO(block), np.float64, comments=None, delimiter=delimiter, ndmin=2, encoding="latin-1"
            )
        except ValueError:
            return None
        fits = numbers.shape == (stop - first, self._layout.width) and bool(np.isfinite(numbers).all())
        return numbers if fits else None


def _line_ends(content: bytes) -> NDArray[np.int64]:
    """Where the line ends stand; found piece by piece, so that no array of the size of the file is made."""
    whole = np.frombuffer(content, np.uint8)
    places = [
        np.flatnonzero(whole[start : start + BLOCK] == ord("\n")) + start
        for start in range(0, len(whole), BLOCK)
    ]
    return np.concatenate(places)


class TextColumns(CellStore):
    """Cells of a text file. ``numbers`` and ``other`` have shape (width, lines): the plain numbers, NaN elsewhere, and
    which cells hold something else. ``kept`` are rows that are not the fields of their line."""

    def __init__(
        self,
        content: bytes,
        starts: NDArray[np.int64],
        delimiter: str,
        numbers: Floats,
        other: Flags,
        kept: dict[int, list[Value]],
    ) -> None:
        self._content = content
        self._starts = starts
        self._delimiter = None if delimiter == BLANKS else delimiter
        self._numbers = numbers
        self._other = other
        self._kept = kept
        self.width = len(numbers)

    def __len__(self) -> int:
        return len(self._starts) - 1

    def cells_of(self, row: int) -> list[Value]:
        kept = self._kept.get(row)
        return list(self.fields(row, row + 1)[0]) if kept is None else kept

    def value(self, row: int, place: int) -> Value:
        cells = self.cells_of(row)
        return cells[place] if place < len(cells) else ""

    def column(self, place: int, start: int, stop: int) -> list[Value]:
        found: list[Value] = []
        for first in range(start, stop, _ROWS_AT_ONCE):
            fields = self.fields(first, min(first + _ROWS_AT_ONCE, stop))
            found += [cells[place] if place < len(cells) else "" for cells in fields]
        for row in self._kept.keys() & range(start, stop) if self._kept else ():
            cells = self._kept[row]
            found[row - start] = cells[place] if place < len(cells) else ""
        return found

    def numbers(self, place: int, start: int, stop: int) -> tuple[Floats, Flags] | None:
        if place >= len(self._numbers):
            return None
        return locked(self._numbers[place, start:stop]), self._other[place, start:stop]

    def has_numbers(self, place: int, start: int, stop: int) -> bool:
        return False

    def fields(self, start: int, stop: int) -> list[list[str]]:
        """The fields of lines as they are parted in a plain table."""
        text = self._content[self._starts[start] : self._starts[stop] - 1].decode()
        if self._delimiter is None:
            return [split_blanks(line) for line in text.split("\n")]
        return [[field.strip() for field in line.split(self._delimiter)] for line in text.split("\n")]
