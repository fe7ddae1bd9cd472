"""What is asked of a law, and what it gave: the columns it reads, what was said, the arrays and words of the result."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from specflow.conditions.words import difference_words, range_words
from specflow.derive.law import Law
from specflow.model.derivation import Covered
from specflow.model.evidence import EvidenceColumns, EvidenceTable
from specflow.model.parameter import Parameter


@dataclass(frozen=True, slots=True)
class Role:
    """A value column that a law reads: its table and arrays, its name, and the rows of it that are meant."""

    name: str
    table: EvidenceTable
    columns: EvidenceColumns
    column: str
    where: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Request:
    """A law, the columns that it reads, what was said to it (settings complete), and the parameter that it gives."""

    law: Law
    roles: tuple[Role, ...]
    settings: Mapping[str, str]
    gives: Parameter
    over: tuple[str, ...] = ()
    where: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Refused:
    """A group of rows from which the law could not be made: which one, why, and what would help."""

    group: str
    why: str
    remedy: str


@dataclass(frozen=True, slots=True)
class Result:
    """One derived row in words and figures, for a preview."""

    group: str
    value: float
    high: float
    u: float
    at: str
    readings: int


@dataclass(frozen=True)
class Derived:
    """What a law made: the arrays of the derived table with its unit, and what is to be told.

    ``covers``: the range that the values speak for. ``u_rule``: where u comes from, "" where the law knows no rule.
    """

    columns: EvidenceColumns
    name: str
    unit: str
    u_rule: str
    covers: tuple[Covered, ...]
    results: tuple[Result, ...]
    refused: tuple[Refused, ...] = ()
    notes: tuple[str, ...] = ()


def covered_words(covers: Sequence[Covered]) -> str:
    """Say what derived values speak for: "17.7 to 20.2 GHz, largest gap 0.1 GHz"."""
    return "; ".join(
        f"{range_words(one.dimension, one.low, one.high, one.unit)}, largest gap "
        f"{difference_words(one.largest_gap, one.unit)}"
        for one in covers
    )
