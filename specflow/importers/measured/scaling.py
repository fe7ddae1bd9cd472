"""Factors that a header states, or a mapping: applied where the direction is certain, else asked about."""

from __future__ import annotations

import re
from dataclasses import replace

from specflow.importers.measured.column import ColumnMeaning
from specflow.importers.measured.mapping import ColumnMapping
from specflow.importers.measured.result import Role
from specflow.importers.measured.scale_text import without_factor
from specflow.importers.measured.work import TableWork

_SCALED = re.compile(r"^(?P<number>\d+(?:\.\d+)?(?:[eE][+\-]?\d+)?)\s*(?P<unit>[^\d\s].*)$")
_NUMERIC = (Role.VALUE, Role.CONDITION, Role.UNCERTAINTY, Role.PIVOT)


def scaled_unit(text: str) -> tuple[float | None, str]:
    """Take "20 A" apart, as in ``column B=supply_current in 20 A``: the factor (None without one) and the unit."""
    found = _SCALED.match(text)
    if found is None or float(found["number"]) == 0:
        return None, text
    return float(found["number"]), found["unit"]


def ask_about_title(work: TableWork, title: str) -> None:
    """Ask about a factor in the line above a table: "All levels x 0.1 dBm"."""
    factor = without_factor(title)[1]
    if factor is None or re.search(r"\d\s*[x×*]", title) or work.stated.text("scaled"):
        return
    what = f"{title[:60]!r} stands above the table; it does not say whether the readings hold {factor.text!r} already"
    remedy = "--state scaled=yes takes them as they stand; else scale = ... for the columns in a mapping, and that, too"
    work.ask("", work.table.place, what, remedy)


def with_scale(meaning: ColumnMeaning, entry: ColumnMapping) -> ColumnMeaning:
    """Return the column with the factor of its readings; a factor that may have been applied already is a question."""
    stated = meaning.parts.scale
    if meaning.question is not None or meaning.role not in _NUMERIC or meaning.is_text:
        return meaning
    if entry.scale is not None:
        return replace(meaning, scale=entry.scale)
    if stated is None or stated.figure == "1":
        return meaning
    if stated.factor is not None:
        return replace(meaning, scale=stated.factor, reason=f"{meaning.reason}; in units of {stated.text}")
    what = f"{stated.text!r} in the header: it does not say whether readings are to be multiplied, or were"
    unit, figure = meaning.unit or "1", stated.figure
    inverse = f"{1 / float(figure):.6g}" if figure not in ("N", "0") else "1/N"
    remedy = (
        f"scale = what a reading is multiplied by to be in {unit} ({figure}, {inverse}, or 1 where it is in {unit} as "
        f"it stands), for column {meaning.letter} in a mapping"
    )
    if meaning.role is Role.VALUE and meaning.quantity is not None:
        remedy += f'; or --state "column {meaning.letter}={meaning.quantity.parameter} in {figure} {unit}"'
    return replace(meaning, role=Role.UNRESOLVED, question=meaning.asks(what, remedy))
