"""Columns of words: items, modes, dates, remarks; numbers in them are written as their digits."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import date, datetime, time, timedelta

import numpy as np

from specflow.importers.measured.cells import Codes, Rows
from specflow.importers.measured.day import read_day
from specflow.importers.measured.rejects import Rejects
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import OddKind, Value
from specflow.importers.readers.stores import Coded
from specflow.model.columns import TextColumn

_DAY_NUMBERS = (25_569, 73_050)  # 1970 to 2099, as workbooks count days
_NOTHING = frozenset(("", "-", "—", "–", "n/a", "N/A", "na", "NA"))


def read_words(table: FoundTable, column: int, rows: Rows, rejects: Rejects | None = None) -> TextColumn:
    """Read a column as words; dashes are nothing. Error cells are rejected where ``rejects`` is given."""
    cells = table.cells(column)
    errors = () if rejects is None else _error_places(table, column, rows, rejects)
    if cells.coded is not None:
        return _recoded(cells.codes_at(rows), cells.coded, errors)
    if bool in set(map(type, cells.distinct)):  # True is 1 to a dictionary
        words = [_word(value) for value in cells.at(rows)]
    else:
        spelled = {value: _word(value) for value in cells.distinct}
        words = [spelled[value] for value in cells.at(rows)]
    for place in errors:
        words[place] = ""
    return TextColumn.of(words)


def _error_places(table: FoundTable, column: int, rows: Rows, rejects: Rejects) -> list[int]:
    """The places of error cells, which are rejected."""
    found: list[int] = []
    for run in table.grid.odd.in_column(column, table.first_row, table.stop_row):
        if run.cell.kind in (OddKind.ERROR, OddKind.NO_VALUE):
            places = np.flatnonzero((rows >= run.first) & (rows <= run.last)).tolist()
            for place in places:
                rejects.add(int(rows[place]), column, "", f"{run.cell.kind}: {run.cell.detail}".rstrip(": "))
            found += places
    return found


def _recoded(codes: Codes, coded: Coded, errors: Sequence[int]) -> TextColumn:
    """Words that are coded already, as ``TextColumn.of`` codes them: in the order in which they occur."""
    if errors:
        codes = codes.copy()
        codes[list(errors)] = -1
    used, first = np.unique(codes, return_index=True)
    labels: dict[str, int] = {}
    own = np.full(len(coded.words) + 1, -1, np.int32)  # the last one is of code -1, the empty cell
    for code in used[np.argsort(first)].tolist():
        word = _word(coded.value(code))
        own[code] = labels.setdefault(word, len(labels)) if word else -1
    return TextColumn(own[codes], tuple(labels))


def read_dates(table: FoundTable, column: int, rows: Rows, rejects: Rejects) -> TextColumn:
    """Read a column of dates as ISO text; a date with two readings is rejected."""
    found: dict[Value, str] = {}
    texts = []
    for place, value in enumerate(table.cells(column).at(rows)):
        if value not in found:
            found[value] = _day(value)
        if not found[value] and str(value).strip() not in _NOTHING:
            rejects.add(int(rows[place]), column, value, f"no date with one meaning: {_remedy(value)}")
        texts.append(found[value])
    return TextColumn.of(texts)


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


def _remedy(value: Value) -> str:
    if isinstance(value, float) and _DAY_NUMBERS[0] <= value <= _DAY_NUMBERS[1]:
        return "a number; where it counts days, give the cells the format of a date"
    return "write it as YYYY-MM-DD"


def _day(value: Value) -> str:
    if isinstance(value, datetime):
        return value.date().isoformat()
    if isinstance(value, date):
        return value.isoformat()
    if isinstance(value, time | timedelta | bool):
        return ""
    day = read_day(str(int(value)) if isinstance(value, float) and value.is_integer() else str(value))
    return day.isoformat() if day else ""
