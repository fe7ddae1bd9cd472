"""Columns of words: items, modes, dates, remarks; numbers in them are written as their digits."""

from __future__ import annotations

from datetime import date, datetime, time, timedelta

import numpy as np

from specflow.importers.measured.cells import Rows
from specflow.importers.measured.day import read_day
from specflow.importers.measured.rejects import Rejects
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import OddKind, Value
from specflow.model.columns import TextColumn

_NOTHING = frozenset(("", "-", "—", "–", "n/a", "N/A", "na", "NA"))


def read_words(table: FoundTable, column: int, rows: Rows, rejects: Rejects | None = None) -> TextColumn:
    """Read a column as words; dashes are nothing. Error cells are rejected where ``rejects`` is given."""
    cells = table.cells(column)
    if bool in set(map(type, cells.distinct)):  # True is 1 to a dictionary
        words = [_word(value) for value in cells.at(rows)]
    else:
        spelled = {value: _word(value) for value in cells.distinct}
        words = [spelled[value] for value in cells.at(rows)]
    if rejects is not None:
        for run in table.grid.odd.in_column(column, table.first_row, table.stop_row):
            if run.cell.kind in (OddKind.ERROR, OddKind.NO_VALUE):
                for place in np.flatnonzero((rows >= run.first) & (rows <= run.last)).tolist():
                    rejects.add(
                        int(rows[place]), column, "", f"{run.cell.kind}: {run.cell.detail}".rstrip(": ")
                    )
                    words[place] = ""
    return TextColumn.of(words)


def read_dates(table: FoundTable, column: int, rows: Rows, rejects: Rejects) -> TextColumn:
    """Read a column of dates as ISO text; a date with two readings is rejected."""
    found: dict[Value, str] = {}
    texts = []
    for place, value in enumerate(table.cells(column).at(rows)):
        if value not in found:
            found[value] = _day(value)
        if not found[value] and str(value).strip() not in _NOTHING:
            rejects.add(int(rows[place]), column, value, "no date with one meaning: write it as YYYY-MM-DD")
        texts.append(found[value])
    return TextColumn.of(texts)


def fill_down(words: TextColumn) -> TextColumn:
    """Give a blank cell the word above it."""
    codes = words.codes.copy()
    last = np.maximum.accumulate(np.where(codes >= 0, np.arange(len(codes)), -1))
    return TextColumn(np.where(last >= 0, codes[np.maximum(last, 0)], codes).astype(np.int32), words.labels)


def _word(value: Value) -> str:
    if isinstance(value, str):
        text = (
            value
            if value.isascii() and "  " not in value and value == value.strip()
            else " ".join(value.split())
        )
        return "" if text in _NOTHING else text
    if isinstance(value, float):
        return str(int(value)) if value.is_integer() else f"{value:.15g}"
    if isinstance(value, datetime | date | time):
        return value.isoformat()
    return str(value)


def _day(value: Value) -> str:
    if isinstance(value, datetime):
        return value.date().isoformat()
    if isinstance(value, date):
        return value.isoformat()
    if isinstance(value, time | timedelta | bool):
        return ""
    day = read_day(str(int(value)) if isinstance(value, float) and value.is_integer() else str(value))
    return day.isoformat() if day else ""
