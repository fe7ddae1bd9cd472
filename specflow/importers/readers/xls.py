"""Workbooks of the old binary format (.xls): values and formats by xlrd.

xlrd alone knows the number formats, error cells, hidden and merged parts of this format, and being pure Python it
cannot take the process with it: python-calamine, which reads the other workbooks in bulk, reserves whatever a damaged
file of this format says it needs, and ends the whole process where there is not so much. The tests compare the two.
"""

from __future__ import annotations

import io
from typing import Any

import xlrd
from xlrd.biffh import XLRDError

from specflow.errors import FileError
from specflow.importers.readers.date_serials import from_serial, is_duration
from specflow.importers.readers.formula_records import formulas_never_calculated
from specflow.importers.readers.grid import Grid
from specflow.importers.readers.number_format import odd_format
from specflow.importers.readers.odd_cells import OddCell, OddKind
from specflow.importers.readers.odd_marks import OddMarks
from specflow.importers.readers.places import CellRange
from specflow.importers.readers.source import Source
from specflow.importers.readers.stores import Value

_DAMAGED = "copy the file again, or open it in a spreadsheet program and save it as .xlsx"

Cell = tuple[int, int]


def read_xls(source: Source) -> list[Grid]:
    """All worksheets, in their order. Raises FileError for whatever is not a readable workbook."""
    log = io.StringIO()  # xlrd prints what it doubts
    try:
        book = xlrd.open_workbook(
            file_contents=source.content, formatting_info=True, ragged_rows=True, logfile=log
        )
        never = formulas_never_calculated(source.content)
        sheets = [
            _Sheet(book, sheet, never.get(place, frozenset())) for place, sheet in enumerate(book.sheets())
        ]
    except XLRDError as error:
        raise _refused(source, str(error)) from error
    except MemoryError:
        raise
    except Exception as error:  # the library raises whatever the file provokes
        raise FileError(
            f"the workbook is damaged ({type(error).__name__}: {error})", where=source.name, hint=_DAMAGED
        ) from error
    if not any(map(any, (row for sheet in sheets for row in sheet.rows))):
        raise FileError(
            "no cell of the workbook holds anything",
            where=source.name,
            hint="check that it was saved with its data",
        )
    return [sheet.grid(source.name) for sheet in sheets]


def _refused(source: Source, message: str) -> FileError:
    if "encrypt" in message.lower():
        return FileError(
            "the workbook is protected by a password",
            where=source.name,
            hint="open it and save it without a password",
        )
    return FileError(f"the workbook cannot be read: {message}", where=source.name, hint=_DAMAGED)


class _Sheet:
    """One worksheet as xlrd gives it; ``rows[0]`` is row 1."""

    def __init__(self, book: Any, sheet: Any, never_calculated: frozenset[Cell]) -> None:
        self.name: str = sheet.name
        self._sheet = sheet
        self._book = book
        self._marks = OddMarks()
        self._formats: dict[int, OddCell | None] = {}
        self.rows: list[list[Value]] = [
            [self._value(row, column) for column in range(sheet.row_len(row))] for row in range(sheet.nrows)
        ]
        for row, column in never_calculated:
            self._marks.add_one(row + 1, column + 1, OddCell(OddKind.NO_VALUE))

    def grid(self, file: str) -> Grid:
        """The grid of the sheet."""
        sheet = self._sheet
        return Grid(
            name=self.name,
            rows=self.rows,
            file=file,
            odd=self._marks.cells(),
            hidden=sheet.visibility != 0,
            hidden_rows=frozenset(row + 1 for row, info in sheet.rowinfo_map.items() if info.hidden),
            hidden_columns=frozenset(column + 1 for column, info in sheet.colinfo_map.items() if info.hidden),
            merged=tuple(
                CellRange(top + 1, left + 1, bottom, right) for top, bottom, left, right in sheet.merged_cells
            ),
        )

    def _value(self, row: int, column: int) -> Value:
        kind, value = self._sheet.cell_type(row, column), self._sheet.cell_value(row, column)
        if kind in (xlrd.XL_CELL_EMPTY, xlrd.XL_CELL_BLANK):
            return ""
        if kind == xlrd.XL_CELL_TEXT:
            return str(value)
        if kind == xlrd.XL_CELL_BOOLEAN:
            return bool(value)
        if kind == xlrd.XL_CELL_ERROR:
            text = xlrd.error_text_from_code.get(value, f"error {value}")
            self._marks.add_one(row + 1, column + 1, OddCell(OddKind.ERROR, text))
            return ""
        return self._number(row, column, float(value))

    def _number(self, row: int, column: int, number: float) -> Value:
        odd = self._format(self._sheet.cell_xf_index(row, column))
        if odd is None:
            return number
        self._marks.add_one(row + 1, column + 1, odd)
        if odd.kind is not OddKind.DATE:
            return number
        return from_serial(number, is_duration(odd.detail), bool(self._book.datemode))

    def _format(self, style: int) -> OddCell | None:
        if style not in self._formats:
            key = self._book.xf_list[style].format_key
            known = self._book.format_map.get(key)
            self._formats[style] = odd_format(key, known.format_str if known else None)
        return self._formats[style]
