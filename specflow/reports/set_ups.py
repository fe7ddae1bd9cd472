"""Points to be measured in the fewest set-ups: those that share what is slow to change, in an order of few changes."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from specflow.conditions.words import value_words, word_words
from specflow.model.bench_sheet import BenchCondition, BenchPoint

#: What takes long to change on a bench, slowest first; common practice, no source. Names that begin so count, too.
SLOW = ("temperature", "humidity", "pressure", "environment", "supply_voltage")

#: What a set-up is known by: of each slow dimension its name, its value or word (None: not asked for), and its unit.
Key = tuple[tuple[str, float | str | None, str], ...]


@dataclass(frozen=True, slots=True)
class SetUp:
    """Points that are measured without changing anything slow, and what they share, in words."""

    words: str
    points: Sequence[BenchPoint]


def is_slow(dimension: str) -> bool:
    """Whether a condition takes long to change."""
    return any(dimension == slow or dimension.startswith(f"{slow}_") for slow in SLOW)


def merged(points: Sequence[BenchPoint]) -> list[BenchPoint]:
    """Return points with those brought together that one value serves: the same quantity, item and conditions.

    The unit is that of the first; the others' limits say theirs.
    """
    found: dict[tuple[object, ...], BenchPoint] = {}
    for point in points:
        conditions = frozenset(one.model_dump_json() for one in point.conditions)
        key = (
            point.block.casefold(),
            point.quantity.model_dump_json().casefold(),
            point.method,
            point.stage,
            point.item.casefold(),
            point.must_be_item,
            conditions,
        )
        known = found.get(key)
        if known is None:
            found[key] = point
            continue
        found[key] = known.model_copy(
            update={
                "requirements": (*known.requirements, *point.requirements),
                "limits": (*known.limits, *point.limits),
                "why": tuple(dict.fromkeys((*known.why, *point.why))),
            }
        )
    return list(found.values())


def set_ups(points: Sequence[BenchPoint]) -> list[SetUp]:
    """Return the set-ups of one block in an order with few changes.

    The slowest condition runs through its values once; the next one runs up and down in turn, so that it need not
    change where the first does. So there are as many changes of the slowest as it has values, less one.
    """
    slow = _slow_dimensions(points)
    groups: dict[Key, list[BenchPoint]] = {}
    for point in points:
        groups.setdefault(_key(point, slow), []).append(point)
    return [SetUp(_words(key), sorted(groups[key], key=_within)) for key in _there_and_back(list(groups))]


def _slow_dimensions(points: Sequence[BenchPoint]) -> list[str]:
    names = {one.dimension for point in points for one in point.conditions if is_slow(one.dimension)}
    return sorted(names, key=lambda name: (_slowness(name), name))


def _slowness(name: str) -> int:
    return next(place for place, slow in enumerate(SLOW) if name == slow or name.startswith(f"{slow}_"))


def _key(point: BenchPoint, slow: Sequence[str]) -> Key:
    said = {one.dimension: one for one in point.conditions}
    return tuple(_slow_value(name, said.get(name)) for name in slow)


def _slow_value(name: str, condition: BenchCondition | None) -> tuple[str, float | str | None, str]:
    if condition is None or condition.is_open:
        return name, None, ""
    return name, condition.word or condition.value, condition.unit


def _there_and_back(keys: Sequence[Key]) -> Iterator[Key]:
    """Give keys with the first value rising, and each of the others running up and down in turn."""
    upwards = [True] * (len(keys[0]) if keys else 0)

    def below(group: Sequence[Key], place: int) -> Iterator[Key]:
        if place == len(upwards):
            yield from group
            return
        values = sorted({key[place][1] for key in group}, key=_order, reverse=not upwards[place])
        upwards[place] = not upwards[place]
        for value in values:
            yield from below([key for key in group if key[place][1] == value], place + 1)

    yield from below(keys, 0)


def _order(value: float | str | None) -> tuple[int, float, str]:
    if value is None:
        return 0, 0.0, ""
    return (1, value, "") if isinstance(value, float) else (2, 0.0, value)


def _within(point: BenchPoint) -> tuple[object, ...]:
    """The order within a set-up: item by item, quantity by quantity, conditions rising."""
    conditions = tuple(
        (one.dimension, one.value if one.value is not None else one.low or 0.0, one.word)
        for one in point.conditions
        if not is_slow(one.dimension)
    )
    return point.item, point.quantity.parameter, point.quantity.model_dump_json(), point.stage, conditions


def _words(key: Key) -> str:
    said = [
        word_words(name, value) if isinstance(value, str) else value_words(name, value, unit)
        for name, value, unit in key
        if value is not None
    ]
    return ", ".join(said) or "no slow condition is asked for"
