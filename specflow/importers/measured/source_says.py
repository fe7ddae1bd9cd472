"""Limits and verdicts that stand beside the readings: which column is which, and of which values it speaks."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from typing import Literal

from specflow.importers.measured.column import ColumnMeaning
from specflow.importers.measured.header_text import header_key, known_unit
from specflow.importers.measured.result import Role
from specflow.importers.measured.values import column_name
from specflow.importers.measured.work import TableWork
from specflow.model.source_statement import StatedColumn
from specflow.parameters.headers import tokens
from specflow.units import format_unit

_MARGIN = re.compile(r"\b(?:margin|headroom)\b", re.IGNORECASE)
_LOWER = frozenset(["lower", "min", "minimum", "lsl", "ll", "low"])
_UPPER = frozenset(["upper", "max", "maximum", "usl", "ul", "high"])
_OF_LIMITS = frozenset(
    [
        "limit",
        "limits",
        "spec",
        "specification",
        "requirement",
        "target",
        "goal",
        "threshold",
        "pass",
        "fail",
        "verdict",
        "result",
    ]
)


def stated_columns(work: TableWork) -> tuple[StatedColumn, ...]:
    """Return the columns of limits and verdicts of a table; margins are computed and not compared."""
    return tuple(_stated(work))


def _stated(work: TableWork) -> Iterator[StatedColumn]:
    values = work.of(Role.VALUE)
    for meaning in work.of(Role.STATED_VERDICT):
        yield StatedColumn(name=column_name(meaning), kind="verdict", of=_value_of(meaning, values))
    for meaning in work.of(Role.STATED_LIMIT):
        if _MARGIN.search(meaning.header.text):
            continue
        of = _value_of(meaning, values)
        yield StatedColumn(
            name=column_name(meaning),
            kind="limit",
            side=side_of(meaning.header.text),
            unit=_unit(meaning, values, of),
            of=of,
        )


def side_of(header: str) -> Literal["lower", "upper", ""]:
    """Which side of a limit a header names, "" where it names none or both."""
    words = set(tokens(header))
    lower, upper = bool(words & _LOWER), bool(words & _UPPER)
    if lower == upper:
        return ""
    return "lower" if lower else "upper"


def _unit(meaning: ColumnMeaning, values: Sequence[ColumnMeaning], of: str) -> str:
    """The unit of a limit: its own, else that of the values it speaks of."""
    own = known_unit(meaning.parts.unit or meaning.header.unit or "")
    if own is not None:
        return format_unit(own)
    return next((one.unit for one in values if column_name(one) == of), "")


def _value_of(meaning: ColumnMeaning, values: Sequence[ColumnMeaning]) -> str:
    """The values that a limit speaks of: the only ones, those named in its header, else the nearest to its left."""
    if len(values) == 1:
        return column_name(values[0])
    rest = [word for word in tokens(meaning.parts.name) if word not in _OF_LIMITS | _LOWER | _UPPER]
    named = [one for one in values if rest and set(rest) <= set(tokens(one.parts.name))]
    if rest and not named:
        named = [one for one in values if header_key(one.parts.name) == header_key(" ".join(rest))]
    if len(named) == 1:
        return column_name(named[0])
    before = [one for one in values if one.column < meaning.column]
    return column_name(before[-1]) if before and not rest else ""
