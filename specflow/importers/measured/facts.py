"""Facts stated above a table: ``DUT: SN 0007``, ``RBW | 1 MHz``, ``# Date = 2026-03-02``."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from datetime import date, datetime

from specflow.importers.measured.header_text import known_unit, read_header
from specflow.importers.readers import Grid, OddKind, Value, is_blank, looks_numeric

_PAIR_AMONG_OTHERS = re.compile(r"\s*(?P<key>[^\W\d][^:=]{0,40}?)\s*[:=]\s*(?P<value>[^:=]*\S)\s*")
_PAIR = re.compile(r"^\s*(?P<key>[^:=]{1,60}?)\s*[:=]\s*(?P<value>.*)$", re.DOTALL)


@dataclass(frozen=True, slots=True)
class Fact:
    """A key with its value as text, and the cell the value stands in."""

    key: str
    value: str
    cell: str
    row: int


@dataclass(frozen=True, slots=True)
class Preamble:
    """What stands above a table: its facts, and the first line that is none (the title)."""

    facts: tuple[Fact, ...]
    title: str = ""


def read_preamble(grid: Grid, top: int, header_row: int) -> Preamble:
    """Read the rows from ``top`` up to the header row."""
    facts: list[Fact] = []
    title = ""
    for row in range(top, header_row):
        cells = _filled(grid, row)
        found = list(_facts(grid, row, cells))
        facts += found
        if not found and not title and cells and isinstance(cells[0][1], str):
            title = " ".join(cells[0][1].split())
    return Preamble(tuple(facts), title)


def read_facts(grid: Grid, row: int) -> tuple[Fact, ...]:
    """Read the facts that one row states."""
    return tuple(_facts(grid, row, _filled(grid, row)))


def read_across(grid: Grid, key_row: int, value_row: int) -> tuple[Fact, ...]:
    """Read a row of keys with their values in a row below."""
    facts = []
    for column, key in enumerate(grid.row(key_row), start=1):
        value = grid.value(value_row, column)
        if isinstance(key, str) and not is_blank(key) and not is_blank(value):
            text = value_text(grid, value_row, column, value, key)
            facts.append(
                Fact(" ".join(key.split()).rstrip(":"), text, grid.address(value_row, column), value_row)
            )
    return tuple(facts)


def pair_in(text: str) -> tuple[str, str] | None:
    """Return the key and the value that one text states: "Supply voltage = 5 V"; None when it is none such."""
    found = _PAIR.match(text)
    return (found["key"].strip(), " ".join(found["value"].split())) if found and found["value"] else None


def states_something(text: str) -> bool:
    """Whether a line says a value of something: a key with a value, or a number with a unit."""
    pair = _PAIR.match(text)
    return bool(pair and pair["value"] and re.search(r"[0-9]", pair["value"])) or bool(
        re.search(r"[0-9]\s*(?:°|[kMG]?Hz\b|dBm?\b|V\b|K\b|deg)", text)
    )


def _filled(grid: Grid, row: int) -> list[tuple[int, Value]]:
    return [(column, value) for column, value in enumerate(grid.row(row), start=1) if not is_blank(value)]


def _facts(grid: Grid, row: int, cells: list[tuple[int, Value]]) -> Iterator[Fact]:
    place = 0
    while place < len(cells):
        column, value = cells[place]
        place += 1
        if not isinstance(value, str) or looks_numeric(value):
            continue
        pair = _PAIR.match(value)
        several = _several(value)
        if several:
            yield from (Fact(key, text, grid.address(row, column), row) for key, text in several)
        elif pair and pair["value"]:
            yield Fact(pair["key"].strip(), " ".join(pair["value"].split()), grid.address(row, column), row)
        elif place < len(cells) and (pair or _is_key(value, cells[place][1], len(cells))):
            key = pair["key"].strip() if pair else value.strip()
            there, beside = cells[place]
            place += 1
            text = value_text(grid, row, there, beside, key)
            if looks_numeric(text) and place < len(cells) and known_unit(str(cells[place][1])) is not None:
                text = f"{text} {cells[place][1]}"
                place += 1
            yield Fact(key, text, grid.address(row, there), row)


def _several(text: str) -> list[tuple[str, str]]:
    """The pairs of a line that states several: "Cut 1, elevation = 0 deg, frequency = 28 GHz"; [] of any other."""
    pairs = [_PAIR_AMONG_OTHERS.fullmatch(part) for part in re.split(r"[,;]\s+", text)]
    found = [(pair["key"], " ".join(pair["value"].split())) for pair in pairs if pair]
    return found if len(found) > 1 and all(pairs[1:]) else []


def _is_key(text: str, beside: Value, cells: int) -> bool:
    """Whether a text without a colon is the key of the cell beside it: in a row of pairs, or before a number."""
    return cells % 2 == 0 or not isinstance(beside, str) or looks_numeric(beside)


def value_text(grid: Grid, row: int, column: int, value: Value, key: str) -> str:
    """Return the value as text; a bare number takes the unit of its number format, or that of the key."""
    if isinstance(value, datetime):
        return value.date().isoformat()
    if isinstance(value, date):
        return value.isoformat()
    text = f"{value:.15g}" if isinstance(value, float) else " ".join(str(value).split())
    if not looks_numeric(text):
        return text
    odd = grid.odd.at(row, column)
    if odd is not None and odd.kind is OddKind.UNIT_FORMAT:
        return f"{text} {odd.unit}"
    unit = read_header(key).unit
    return f"{text} {unit}" if unit and known_unit(unit) is not None else text
