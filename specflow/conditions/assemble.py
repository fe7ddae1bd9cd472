"""Making a conditions set from what a sheet says about it: its dimensions, how they combine, what is
excluded.
"""

from __future__ import annotations

import re
from collections.abc import Sequence

from pydantic import ValidationError

from specflow.conditions.cells import plain, read_number, split_range
from specflow.conditions.dimensions import find_dimension
from specflow.conditions.expand import expand
from specflow.conditions.parse import first_message
from specflow.conditions.recorded import conversion
from specflow.errors import ConditionsError
from specflow.model.conditions import Clause, Combination, ConditionsSet, Dimension, Exclusion
from specflow.model.origin import Origin

_CLAUSE = re.compile(r"^(?P<name>[^=<>]+?)\s*(?P<sign><=|>=|==|=|<|>|\bis\b|\bin\b)\s*(?P<value>.+)$")


def make_conditions_set(
    id: str,
    dimensions: Sequence[Dimension],
    *,
    title: str = "",
    combination: str = "",
    exclusions: str = "",
    source: str = "",
    note: str = "",
    revision: int = 1,
    origin: Origin | None = None,
) -> ConditionsSet:
    """Make a set and try that it expands. ConditionsError says what contradicts itself or is missing."""
    how, listed = read_combination(combination)
    try:
        made = ConditionsSet(
            id=id,
            revision=revision,
            title=title,
            dimensions=tuple(dimensions),
            combination=how,
            listed=listed,
            exclusions=read_exclusions(exclusions, dimensions),
            source=source,
            note=note,
            origin=origin,
        )
    except ValidationError as error:
        raise ConditionsError(first_message(error).removeprefix(f"{id}: "), where=id) from error
    expand(made)
    return made


def read_combination(text: str) -> tuple[Combination, tuple[str, ...]]:
    """Read "all combinations" (also when empty), "corners", "listed rows", "listed rows: frequency, band"."""
    head, _, names = plain(text).partition(":")
    how = {
        "": Combination.ALL,
        "all": Combination.ALL,
        "all combinations": Combination.ALL,
        "corners": Combination.CORNERS,
        "listed": Combination.LISTED,
        "listed rows": Combination.LISTED,
        "rows": Combination.LISTED,
    }.get(head.strip().casefold())
    if how is None:
        known = ", ".join(f"'{one.value}'" for one in Combination)
        raise ConditionsError(f"'{text.strip()}' is no way to combine dimensions", hint=f"use one of {known}")
    return how, tuple(_canonical(name) for name in names.split(",") if name.strip())


def read_exclusions(text: str, dimensions: Sequence[Dimension]) -> tuple[Exclusion, ...]:
    """Read "temperature_ambient = 85 °C and supply_voltage < 4.75 V because ...; band = n258".

    Exclusions are separated by semicolons or lines; within one, all clauses joined by "and" must be true.
    """
    parts = [part.strip() for part in re.split(r"[;\n]", text) if part.strip()]
    return tuple(_exclusion(part, dimensions) for part in parts)


def _exclusion(text: str, dimensions: Sequence[Dimension]) -> Exclusion:
    body, *reason = re.split(r"\s+because\s+", text, maxsplit=1)
    clauses = tuple(_clause(part, dimensions) for part in re.split(r"\s+and\s+|\s*&\s*", plain(body)))
    return Exclusion(clauses=clauses, reason=reason[0].strip() if reason else "", text=body.strip())


def _clause(text: str, dimensions: Sequence[Dimension]) -> Clause:
    match = _CLAUSE.match(text)
    if match is None:
        raise ConditionsError(
            f"'{text}' is no exclusion", hint="as in 'temperature_ambient = 85 °C and band = n258'"
        )
    name, sign, value = _canonical(match["name"]), match["sign"], match["value"].strip()
    dimension = next((one for one in dimensions if one.name == name), None)
    if dimension is None:
        known = ", ".join(one.name for one in dimensions)
        raise ConditionsError(
            f"'{text}' excludes by {name}, which the set does not have", hint=f"it has {known}"
        )
    if sign in ("=", "==", "is", "in"):
        return _equal(dimension, value)
    if dimension.words:
        raise ConditionsError(f"'{text}' orders words", hint=f"write {name} = {dimension.words[0]}")
    bound = _number(dimension, value)
    if sign.startswith(">"):
        return Clause(dimension=name, low=bound, low_is_open=sign == ">")
    return Clause(dimension=name, high=bound, high_is_open=sign == "<")


def _equal(dimension: Dimension, text: str) -> Clause:
    entries = [part.strip() for part in re.split(r"\s+or\s+|[|,]", text) if part.strip()]
    if dimension.words:
        return Clause(dimension=dimension.name, words=tuple(entries))
    ends = split_range(text)
    if ends is not None:
        low, high = (_number(dimension, end) for end in ends)
        return Clause(dimension=dimension.name, low=low, high=high)
    return Clause(dimension=dimension.name, values=tuple(_number(dimension, entry) for entry in entries))


def _number(dimension: Dimension, text: str) -> float:
    number = read_number(text)
    if not number.unit:
        return number.value
    step = conversion(number.unit, dimension.unit)
    if isinstance(step, str):
        raise ConditionsError(
            f"{text} cannot be told in {dimension.unit or 'plain numbers'}, the unit of {dimension.name}",
            where=dimension.name,
        )
    return float(step(number.value))


def _canonical(name: str) -> str:
    known = find_dimension(name)
    return known.name if known else re.sub(r"\W+", "_", name.strip().casefold())
