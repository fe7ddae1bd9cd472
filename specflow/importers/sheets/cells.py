"""One cell of a project workbook, read as text, number, date or word, or refused with what would help."""

from __future__ import annotations

import math
import unicodedata
from datetime import date, datetime, time, timedelta

from specflow.errors import UnitError
from specflow.importers.readers.grid import Grid
from specflow.importers.readers.odd_cells import OddCell, OddKind
from specflow.units import parse_number

_BLANKS = str.maketrans(
    {"\u00a0": " ", "\u202f": " ", "\u2007": " ", "\u200b": None, "\ufeff": None, "\u2060": None, "\0": None}
)

_DASHES = frozenset("-–—−")


class CellFault(Exception):
    """A cell that cannot be taken: what is wrong, and what to do."""

    def __init__(self, message: str, remedy: str) -> None:
        super().__init__(message)
        self.message = message
        self.remedy = remedy


def clean(text: str) -> str:
    """Return text as it is kept: NFC, no-break spaces as blanks, outer blanks and invisible characters removed."""
    if text.isascii() and "\0" not in text:
        return text.strip()
    return unicodedata.normalize("NFC", text).translate(_BLANKS).strip()


def cell_text(grid: Grid, row: int, column: int, *, dates: bool = False) -> str:
    """Return what a cell says, as text: "12" for the number 12, "10 %" for 0.1 shown as a percentage.

    A lone dash is an empty cell. Numbers have the 15 digits that spreadsheet programs show: 0.3, not the
    0.30000000000000004 that a formula may leave.

    A date is text only with ``dates`` (ISO form); elsewhere it is what a spreadsheet made of an id or a number.
    Raises CellFault.
    """
    value = grid.value(row, column)
    odd = grid.odd.at(row, column)
    if odd is not None:
        _refuse_unreadable(odd)
    if isinstance(value, str):
        text = clean(value)
        return "" if text in _DASHES else text
    if isinstance(value, datetime | date | time | timedelta):
        return _date_text(value, dates)
    if isinstance(value, bool):
        return "yes" if value else "no"
    return _number_text(float(value), odd)


def cell_number(grid: Grid, row: int, column: int) -> float | None:
    """Return a plain number, None where the cell is empty. Raises CellFault."""
    text = cell_text(grid, row, column)
    if not text:
        return None
    value = grid.value(row, column)
    if isinstance(value, bool):
        raise CellFault(f"{'TRUE' if value else 'FALSE'} stands where a number belongs", "write a number")
    if isinstance(value, int | float):
        if text.endswith("%") or " " in text:
            raise CellFault(
                f"the cell shows {text}, and a plain number belongs here", "format the cell as a number"
            )
        return float(value)
    return text_number(text, grid.decimal)


def text_number(text: str, decimal: str = ".") -> float:
    """Return the finite number that a text writes. Raises CellFault."""
    try:
        number = parse_number(text, decimal_comma=True if decimal == "," else None, grouped=False)
    except UnitError as error:
        raise CellFault(f"{text!r} is not a number", "write a plain number") from error
    if not math.isfinite(number):
        raise CellFault(f"{text!r} is not a finite number", "write a plain number")
    return number


def cell_date(grid: Grid, row: int, column: int) -> date | None:
    """Return a calendar date, None where the cell is empty: a date cell, or text as 2026-03-31. Raises CellFault."""
    value = grid.value(row, column)
    if isinstance(value, datetime):
        return value.date()
    if isinstance(value, date):
        return value
    text = cell_text(grid, row, column)
    if not text:
        return None
    try:
        return date.fromisoformat(text)
    except ValueError as error:
        raise CellFault(
            f"{text!r} is not a date that has one reading only", "write it as year-month-day: 2026-03-31"
        ) from error


def _refuse_unreadable(odd: OddCell) -> None:
    if odd.kind is OddKind.ERROR:
        raise CellFault(
            f"the cell holds the error {odd.detail or '#ERROR'}", "repair the formula or type the value"
        )
    if odd.kind is OddKind.NO_VALUE:
        raise CellFault(
            "the cell holds a formula without a stored value",
            "open the file in a spreadsheet program and save it, or type the value",
        )
    if odd.kind is OddKind.SCALED:
        raise CellFault(
            f"the cell shows another number than it holds (number format {odd.detail})",
            "set the number format to General and check the number",
        )


def _date_text(value: datetime | date | time | timedelta, dates: bool) -> str:
    if dates and isinstance(value, datetime):
        return value.date().isoformat()
    if dates and isinstance(value, date):
        return value.isoformat()
    shown = value.date().isoformat() if isinstance(value, datetime) else str(value)
    raise CellFault(
        f"the cell holds a date or time ({shown}), probably made by the spreadsheet program out of what was typed",
        "format the cell as text and type it again",
    )


def _number_text(value: float, odd: OddCell | None) -> str:
    if odd is not None and odd.kind is OddKind.PERCENT:
        return f"{value * 100:.12g} %"
    text = str(int(value)) if value.is_integer() and abs(value) < 1e15 else f"{value:.15g}"
    if odd is not None and odd.kind is OddKind.UNIT_FORMAT and odd.unit:
        return f"{text} {odd.unit}"
    return text
