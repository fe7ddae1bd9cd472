"""Which rows of a table are records: hidden rows and summary rows are left out, each with its reason."""

from __future__ import annotations

import re
from collections.abc import Collection, Iterator, Sequence

import numpy as np

from specflow.importers.measured.cells import Rows
from specflow.importers.measured.column import ColumnMeaning
from specflow.importers.measured.mapping import LayoutMapping
from specflow.importers.measured.rejects import Rejected, Rejects, cell_text
from specflow.importers.measured.result import Role
from specflow.importers.measured.statements import is_reading
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import is_blank

_SUMMARY = frozenset(
    [
        "mean",
        "average",
        "avg",
        "max",
        "maximum",
        "min",
        "minimum",
        "median",
        "worst",
        "best",
        "std",
        "stdev",
        "std.dev",
        "sd",
        "sigma",
        "total",
        "totals",
        "sum",
        "summe",
        "subtotal",
        "worst-case",
        "spread",
        "range",
        "count",
        "p-p",
        "mittelwert",
        "limit",
        "limits",
        "spec",
        "specification",
        "requirement",
        "target",
        "lsl",
        "usl",
        "upper",
        "lower",
        "tolerance",
    ]
)
#: Of these, the words of a row that is worked out from the others: it is left out and said, and rejects nothing.
_SUMS_UP = frozenset(
    ("mean", "average", "avg", "max", "maximum", "min", "minimum", "median", "std", "stdev", "sd", "sigma", "total",
     "totals", "sum", "subtotal", "count", "spread", "range", "mittelwert", "summe")
)  # fmt: skip
_SUM = "a summary of the others, no reading (keep_summary_rows = true in a mapping reads it)"
_SUMMARY_PHRASES = (
    "std dev",
    "standard deviation",
    "worst case",
    "upper limit",
    "lower limit",
    "spec limit",
    "sub total",
)


def select_rows(
    table: FoundTable, meanings: Sequence[ColumnMeaning], mapping: LayoutMapping, rejects: Rejects
) -> tuple[Rows, list[str]]:
    """Return the rows that are read, and notes about those that are not."""
    rows, notes = table.rows, []
    hidden = (
        np.isin(rows, list(table.grid.hidden_rows)) if table.grid.hidden_rows else np.zeros(len(rows), bool)
    )
    if hidden.any() and mapping.include_hidden_rows:
        notes.append(f"{int(hidden.sum())} hidden rows were read, as the mapping says")
    elif hidden.any():
        reason = (
            "the row is hidden (filtered or collapsed): show it, or include_hidden_rows = true in a mapping"
        )
        rejects.cells += _left_out(table, rows[hidden], reason)
        rows = rows[~hidden]
    if not mapping.keep_summary_rows:
        summary = _summary_rows(table, meanings, rows)
        if summary:
            modes = {one.column for one in meanings if one.role is Role.CONDITION and one.is_text}
            certain = [row for row in summary if _is_certain(table, row, modes)]
            if 2 * len(certain) > len(rows):
                certain = []  # then these words are what the table is about
            if certain:
                notes.append(_summary_note(table, certain))
            marked = np.isin(rows, certain)
            rejects.sums += _left_out(table, rows[marked], _SUM)
            rows = rows[~marked]
            marked = np.isin(rows, summary)
            reason = "a summary, limit or note, no reading (keep_summary_rows = true in a mapping reads it)"
            rejects.cells += _left_out(table, rows[marked], reason)
            rows = rows[~marked]
    return rows, notes


def _is_certain(table: FoundTable, row: int, modes: Collection[int]) -> bool:
    """Whether the label of a row says that it sums up the others ("Mean", "Subtotal"), and cannot be a mode "Max"."""
    column, first = next(
        (place, value) for place, value in enumerate(table.grid.row(row), start=1) if not is_blank(value)
    )
    if not any(map(is_reading, table.grid.row(row))):
        return False  # words alone ("min", "max" below the headers) say something of the columns
    plain = re.sub(r"[:.\s]+", " ", str(first).casefold()).strip()
    return column not in modes and (
        plain in _SUMS_UP or plain in ("std dev", "standard deviation", "sub total")
    )


def _summary_note(table: FoundTable, rows: Sequence[int]) -> str:
    words = dict.fromkeys(
        cell_text(next(value for value in table.grid.row(row) if not is_blank(value))).strip() for row in rows
    )
    numbers = ", ".join(map(str, rows[:6])) + (" ..." if len(rows) > 6 else "")
    line = "column" if table.grid.turned else "row"
    return (
        f"left out as sums of the others ({', '.join(list(words)[:6])}): {line} {numbers}; "
        "keep_summary_rows = true in a mapping reads them"
    )


def _left_out(table: FoundTable, rows: Rows, reason: str) -> Iterator[Rejected]:
    first = table.headers[0].column
    for row in rows.tolist():
        text = " | ".join(cell_text(value) for value in table.grid.row(row) if not is_blank(value))
        yield Rejected(row, first, text, reason, whole_row=True)


def _summary_rows(table: FoundTable, meanings: Sequence[ColumnMeaning], rows: Rows) -> list[int]:
    """Rows whose first filled cell is a word like "Mean", unless it stands among words of its column."""
    found: list[int] = []
    before: list[ColumnMeaning] = []
    for meaning in meanings:
        cells = table.cells(meaning.column)
        texts = cells.distinct if cells.odd else ()
        words = {text for text in texts if isinstance(text, str) and is_summary(text)}
        for row in np.intersect1d(cells.odd, rows).tolist() if words else ():
            if cells.value(row) in words:
                first = all(is_blank(table.grid.value(row, one.column)) for one in before)
                if first and not _is_a_setting(table, meaning, meanings, row):
                    found.append(row)
        before.append(meaning)
    return found


def is_summary(text: str) -> bool:
    """Whether a word stands for a row that is no reading: "Mean", "Limit", "Std dev"."""
    if text.rstrip().endswith(":"):
        return True
    plain = re.sub(r"[:.\s]+", " ", text.casefold()).strip()
    return (plain.split(" ")[0] in _SUMMARY and len(plain) <= 24) or plain.startswith(_SUMMARY_PHRASES)


def _is_a_setting(
    table: FoundTable, meaning: ColumnMeaning, meanings: Sequence[ColumnMeaning], row: int
) -> bool:
    """A mode called "Max" in a row that is complete is a mode; a row "Max" without its conditions is a summary."""
    if not (meaning.role is Role.CONDITION and meaning.is_text):
        return False
    others = [one for one in meanings if one.role in (Role.CONDITION, Role.ITEM) and one is not meaning]
    return bool(others) and all(not is_blank(table.grid.value(row, one.column)) for one in others)
