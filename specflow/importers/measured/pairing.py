"""Columns seen together: no two of one meaning, and of which values each uncertainty is."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import replace

from specflow.importers.measured.column import ColumnMeaning, Heading
from specflow.importers.measured.header_text import header_key
from specflow.importers.measured.result import Role
from specflow.importers.measured.roles import UncertaintyWords
from specflow.importers.measured.unit_source import FoundUnit
from specflow.parameters.headers import tokens


def uncertainty_column(heading: Heading, words: UncertaintyWords, unit: FoundUnit) -> ColumnMeaning:
    """Read a column of uncertainties; an expanded one without its coverage factor is a question."""
    written, below = heading.parts.k, heading.header.k
    if not heading.hints.k and written and below and written != below:
        what = f"the header says k = {written:g}, the units row k = {below:g}"
        return heading.ask(what, "correct one of them, or k = 2 (or what it is) for the column in a mapping")
    k = heading.hints.k or written or below or (1.0 if words.is_standard else None)
    if not unit.unit:
        return heading.ask_unit(unit.problem or "an uncertainty without a unit", "dB")
    if k is None:
        what = "an expanded uncertainty U without its coverage factor k"
        remedy = "write k=2 (or what it is) into the header, or k = 2 for the column in a mapping"
        return heading.ask("± without its coverage factor k" if words.is_bare else what, remedy)
    return replace(
        heading.means(Role.UNCERTAINTY, f"the header names an uncertainty; unit from {unit.source}"),
        unit=unit.unit,
        unit_from=unit.source,
        by_row=unit.by_row,
        by_cell=unit.by_cell,
        of=heading.hints.of or words.of,
        k=k,
    )


def without_doubles(meanings: Sequence[ColumnMeaning]) -> list[ColumnMeaning]:
    """Two columns of one quantity, or of one condition: neither is believed."""
    seen = Counter(_identity(one) for one in meanings)
    result = []
    for one in meanings:
        key = _identity(one)
        if key and seen[key] > 1:
            others = [other.header.cell for other in meanings if _identity(other) == key and other is not one]
            remedy = (
                'tell them apart in a mapping (plane, statistic, polarisation), or mark one role = "not read"'
            )
            question = one.asks(f"{one.words()}, as is {', '.join(others)}", remedy)
            one = replace(one, role=Role.UNRESOLVED, question=question)
        result.append(one)
    return result


def of_their_values(meanings: Sequence[ColumnMeaning]) -> list[ColumnMeaning]:
    """Say of which value column each uncertainty is: by name, else the only one, else the one to its left."""
    values = [one for one in meanings if one.role is Role.VALUE]
    spreads = [one for one in meanings if one.role is Role.UNCERTAINTY]
    result = []
    for place, one in enumerate(meanings):
        if one.role is not Role.UNCERTAINTY:
            result.append(one)
            continue
        of = _named(one.of, values)
        before = meanings[place - 1] if place else None
        if of is None and not one.of and len(values) == len(spreads) == 1:
            of = values[0]
        elif of is None and not one.of and len(spreads) == len(values) and before in values:
            of = before
        if of is not None:
            result.append(replace(one, of=of.header.cell))
        else:
            remedy = (
                'say of = "HEADER" for the column in a mapping, or name it in the header: U Gain (dB), k=2'
            )
            question = one.asks("of which column is this the uncertainty", remedy)
            result.append(replace(one, role=Role.UNRESOLVED, question=question))
    return result


def _identity(meaning: ColumnMeaning) -> str:
    if meaning.role is Role.VALUE and meaning.quantity is not None:
        return meaning.quantity.model_dump_json().casefold()
    if meaning.role is Role.CONDITION:
        return f"condition {meaning.dimension}"
    return str(meaning.role) if meaning.role in (Role.ITEM, Role.DATE) else ""


def _named(name: str, values: Sequence[ColumnMeaning]) -> ColumnMeaning | None:
    key = header_key(name)
    found = [
        one
        for one in values
        if key and key in (header_key(one.header.text), header_key(one.parts.name), *_spellings(one))
    ]
    if not found and name:
        words = set(tokens(name))
        found = [one for one in values if words <= set(tokens(one.header.text))]
    return found[0] if len(found) == 1 else None


def _spellings(value: ColumnMeaning) -> list[str]:
    parameter = value.parameter
    if parameter is None:
        return []
    return [header_key(spelling) for spelling in (parameter.key, parameter.title, *parameter.aliases)]
