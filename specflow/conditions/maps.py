"""Condition maps: system conditions told as a block's own, and back.

    if_frequency = frequency - 24.5 GHz
    temperature_baseplate = temperature_ambient + 18 K
    input_level [dBm] = power_level + 20 dB
    supply_voltage = 5 V

Every entry is linear: Σ factor · source + offset. Dimensions that a map does not speak of pass through as
they are.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.cells import is_number, plain, read_number
from specflow.conditions.dimensions import find_dimension
from specflow.conditions.recorded import conversion
from specflow.conditions.setting import difference_in
from specflow.errors import ConditionsError
from specflow.model.columns import Columns, Spans, TextColumn
from specflow.model.conditions import ConditionMap, MapEntry, MapTerm
from specflow.units import Converter

Floats = NDArray[np.float64]

_SIGNS = re.compile(r"(?<!\d[eE])([+-])")
_NAME = re.compile(r"^[^\W\d][\w ]*$")


def parse_map_entry(text: str) -> MapEntry:
    """Read one line of a condition map. ConditionsError names the part that is not linear or has no unit."""
    target, equals, formula = plain(text).partition("=")
    bracket = re.search(r"[\[(](.+?)[\])]", target)
    name = re.sub(r"[\[(].*?[\])]", " ", target).strip()
    if not equals or not formula.strip() or not _NAME.match(name):
        raise ConditionsError(
            f"'{text}' is no line of a condition map",
            hint="write it as 'temperature_baseplate = temperature_ambient + 18 K'",
        )
    factors: dict[str, float] = {}
    offset, offset_unit = 0.0, ""
    for sign, part in _signed_parts(formula, text):
        term = _term(part)
        if term is not None:
            factors[term.dimension] = factors.get(term.dimension, 0.0) + sign * term.factor
            continue
        number = read_number(part)
        if offset_unit and number.unit != offset_unit:
            raise ConditionsError(
                f"'{text}' adds {offset_unit} and {number.unit or 'a plain number'}", hint="use one unit"
            )
        offset, offset_unit = offset + sign * number.value, number.unit
    terms = tuple(MapTerm(dimension=source, factor=factor) for source, factor in factors.items() if factor)
    return MapEntry(
        target=_canonical(name),
        terms=terms,
        offset=offset,
        offset_unit=offset_unit,
        unit=bracket[1].strip() if bracket else "",
        text=text.strip(),
    )


def map_columns(condition_map: ConditionMap, columns: Columns) -> Columns:
    """Return a block's own conditions from system conditions.

    A target whose sources are not stated is unstated; it never keeps the system's value of the same name.
    ConditionsError where units do not fit.
    """
    numeric = dict(columns.numeric)
    units = dict(columns.units)
    text = dict(columns.text)
    for entry in condition_map.entries:
        for part in (numeric, units, text):
            part.pop(entry.target, None)
    for entry in condition_map.entries:
        mapped = _mapped(entry, columns, str(condition_map.id))
        if mapped is not None:
            numeric[entry.target], units[entry.target] = mapped
    return Columns(columns.size, numeric, text, units)


def unmap_columns(condition_map: ConditionMap, columns: Columns) -> Columns:
    """Return the system conditions that a block's own conditions imply, so that its evidence can serve system
    points.

    Each entry is solved for its one source that is not stated; what a row states itself is kept. A constant
    entry (supply_voltage = 5 V) implies nothing about the system. ConditionsError where units do not fit.
    """
    numeric = dict(columns.numeric)
    units = dict(columns.units)
    for entry in condition_map.entries:
        source = _source_to_solve(entry, columns)
        if source is None:
            continue
        solved, unit = _solved(entry, source, columns, str(condition_map.id))
        stated = None if source.dimension == entry.target else columns.numeric.get(source.dimension)
        if stated is not None:
            step = _step(units.get(source.dimension, ""), unit, str(condition_map.id))
            kept = stated if step is None else np.asarray(step(stated))
            solved = np.where(np.isnan(kept), solved, kept)
        numeric[source.dimension], units[source.dimension] = solved, unit
    spans = _unmapped_spans(condition_map, columns) if columns.spans else {}
    return Columns(columns.size, numeric, _without_numbers(columns.text, numeric), units, spans)


def _unmapped_spans(condition_map: ConditionMap, columns: Columns) -> dict[str, Spans]:
    """Return the ranges that rows speak for in the terms of the system: both ends and the gap, solved as values are."""
    targets = {entry.target for entry in condition_map.entries}
    found = {name: spans for name, spans in columns.spans.items() if name not in targets}
    for entry in condition_map.entries:
        spans = columns.spans.get(entry.target)
        if spans is None:
            continue
        ends = []
        for end in (spans.low, spans.high, spans.low + spans.gap):
            numeric = {**columns.numeric, entry.target: end}
            units = {**columns.units, entry.target: spans.unit}
            placed = Columns(columns.size, numeric, columns.text, units)
            source = _source_to_solve(entry, placed)
            if source is None:
                break
            ends.append(_solved(entry, source, placed, str(condition_map.id)))
        else:
            (low, unit), (high, _), (next_one, _) = ends
            assert source is not None
            found[source.dimension] = replace(
                spans,
                low=np.minimum(low, high),
                high=np.maximum(low, high),
                gap=np.abs(next_one - low),
                unit=unit,
            )
    return found


def _signed_parts(formula: str, text: str) -> list[tuple[int, str]]:
    pieces = [piece.strip() for piece in _SIGNS.split(formula.strip())]
    if pieces[0] == "":
        pieces = pieces[1:]
    else:
        pieces = ["+", *pieces]
    parts = [(1 if sign == "+" else -1, part) for sign, part in zip(pieces[0::2], pieces[1::2], strict=False)]
    if not parts or any(not part for _, part in parts):
        raise ConditionsError(f"'{text}' has a sign with nothing behind it")
    return parts


def _term(part: str) -> MapTerm | None:
    """Return ``name``, ``2 * name`` or ``name * 2``; None for a plain quantity."""
    if is_number(part):
        return None
    factors = [piece.strip() for piece in re.split(r"[*·×]", part)]
    names = [piece for piece in factors if _NAME.match(piece)]
    numbers = [piece for piece in factors if is_number(piece) and not read_number(piece).unit]
    if len(names) != 1 or len(names) + len(numbers) != len(factors):
        raise ConditionsError(
            f"'{part}' is neither a condition, a condition times a number, nor a value with its unit",
            hint="a condition map is linear: sums of conditions, each perhaps times a number, and an offset",
        )
    factor = float(np.prod([read_number(number).value for number in numbers]))
    return MapTerm(dimension=_canonical(names[0]), factor=factor)


def _canonical(name: str) -> str:
    known = find_dimension(name)
    return known.name if known else re.sub(r"\W+", "_", name.strip().casefold())


def _unit(entry: MapEntry, columns: Columns) -> str:
    if entry.unit or not entry.terms:
        return entry.unit or entry.offset_unit
    return columns.units.get(entry.terms[0].dimension, "")


def _offset(entry: MapEntry, unit: str, where: str) -> float:
    if not entry.terms:
        step = _step(entry.offset_unit, unit, where)
        return entry.offset if step is None else float(np.asarray(step(entry.offset)))
    if entry.offset == 0:
        return 0.0
    return difference_in(entry.offset, entry.offset_unit, unit, entry.target)


def _step(source: str, target: str, where: str) -> Converter | None:
    if source == target:
        return None
    step = conversion(source, target)
    if isinstance(step, str):
        raise ConditionsError(step.replace("recorded", "stated").replace("required", "mapped"), where=where)
    return step


def _mapped(entry: MapEntry, columns: Columns, where: str) -> tuple[Floats, str] | None:
    if any(term.dimension not in columns.numeric for term in entry.terms):
        return None
    unit = _unit(entry, columns)
    total = np.full(columns.size, _offset(entry, unit, where))
    for term in entry.terms:
        total = total + term.factor * _stated(term, columns, unit, where)
    return total, unit


def _stated(term: MapTerm, columns: Columns, unit: str, where: str) -> Floats:
    """Return the values of a source that the columns state, in the unit of the sum."""
    step = _step(columns.units.get(term.dimension, ""), unit, where)
    values = columns.numeric[term.dimension]
    return values if step is None else np.asarray(step(values))


def _source_to_solve(entry: MapEntry, columns: Columns) -> MapTerm | None:
    """Return the one source that the other sources and the target determine."""
    if entry.target not in columns.numeric:
        return None
    for term in entry.terms:
        others = [one.dimension for one in entry.terms if one is not term]
        is_open = term.dimension == entry.target or _has_gaps(columns, term.dimension)
        if is_open and all(other in columns.numeric and other != entry.target for other in others):
            return term
    return None


def _has_gaps(columns: Columns, name: str) -> bool:
    return name not in columns.numeric or bool(np.isnan(columns.numeric[name]).any())


def _solved(entry: MapEntry, source: MapTerm, columns: Columns, where: str) -> tuple[Floats, str]:
    unit = entry.unit or columns.units.get(entry.target, "")
    step = _step(columns.units.get(entry.target, ""), unit, where)
    target = columns.numeric[entry.target]
    rest = (target if step is None else np.asarray(step(target))) - _offset(entry, unit, where)
    for term in entry.terms:
        if term is not source:
            rest = rest - term.factor * _stated(term, columns, unit, where)
    return rest / source.factor, unit


def _without_numbers(text: Mapping[str, TextColumn], numeric: Mapping[str, Floats]) -> dict[str, TextColumn]:
    return {name: column for name, column in text.items() if name not in numeric}
