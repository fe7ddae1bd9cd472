"""Points to be measured in the fewest set-ups: those that share what is slow to change, in an order of few changes."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from specflow.conditions.words import value_words, word_words
from specflow.model.bench_sheet import BenchCondition, BenchPoint

#: What takes long to change on a bench, slowest first; common practice, no source. Names that begin so count, too.
SLOW = ("temperature", "humidity", "pressure", "environment", "supply_voltage")

#: A value or a word of a slow dimension; None: not asked for.
SlowValue = float | str | None

#: The first and the last value of a run.
Ends = tuple[SlowValue, SlowValue]

#: What a set-up is known by: of each slow dimension its name, its value or word (None: not asked for), and its unit.
Key = tuple[tuple[str, SlowValue, str], ...]


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

    The slowest condition runs through its values once, so it changes as often as it has values, less one; the next one
    need not change where the first does.
    """
    slow = _slow_dimensions(points)
    groups: dict[Key, list[BenchPoint]] = {}
    for point in points:
        groups.setdefault(_key(point, slow), []).append(point)
    return [SetUp(_words(key), sorted(groups[key], key=_within)) for key in _fewest_changes(list(groups))]


def _slow_dimensions(points: Sequence[BenchPoint]) -> list[str]:
    names = {one.dimension for point in points for one in point.conditions if is_slow(one.dimension)}
    return sorted(names, key=lambda name: (_slowness(name), name))


def _slowness(name: str) -> int:
    return next(place for place, slow in enumerate(SLOW) if name == slow or name.startswith(f"{slow}_"))


def _key(point: BenchPoint, slow: Sequence[str]) -> Key:
    said = {one.dimension: one for one in point.conditions}
    return tuple(_slow_value(name, said.get(name)) for name in slow)


def _slow_value(name: str, condition: BenchCondition | None) -> tuple[str, SlowValue, str]:
    if condition is None or condition.is_open:
        return name, None, ""
    return name, condition.word or condition.value, condition.unit


def _fewest_changes(keys: Sequence[Key]) -> list[Key]:
    """Return keys in an order in which the slowest dimension changes as rarely as it can, then the next one, and so on.

    What the slower ones have in common is a run; the order of values within each run is free, so it is chosen such that
    as many runs as possible begin with the value that the one before ended with.
    """
    runs = [list(keys)]
    for place in range(len(keys[0]) if keys else 0):
        values = [sorted({key[place][1] for key in run}, key=_order) for run in runs]
        runs = [
            [key for key in run if key[place][1] == value]
            for run, chosen in zip(runs, _joined_ends(values), strict=True)
            for value in chosen
        ]
    return [key for run in runs for key in run]


def _joined_ends(runs: Sequence[Sequence[SlowValue]]) -> list[list[SlowValue]]:
    """Return the values of each run in an order that lets the fewest runs begin with another value than the last one's.

    By dynamic programming over the first and last value of each run; of equal orders those that rise or fall.
    """
    steps: list[dict[Ends, tuple[float, Ends | None]]] = []
    best: dict[
        SlowValue, tuple[float, Ends]
    ] = {}  # of the runs so far: what ending with a value costs, and how
    for values in runs:
        found: dict[Ends, tuple[float, Ends | None]] = {}
        cheapest = min(best.values(), key=lambda one: one[0], default=None)
        for ends in [(a, b) for a in values for b in values if a != b] or [(values[0], values[0])]:
            cost, last = (0.0, None) if cheapest is None else (cheapest[0] + 1, cheapest[1])
            if ends[0] in best and best[ends[0]][0] <= cost:
                cost, last = best[ends[0]]
            found[ends] = cost + _awkwardness(ends, values), last
        best = {}
        for ends, (cost, _) in found.items():
            if ends[1] not in best or cost < best[ends[1]][0]:
                best[ends[1]] = cost, ends
        steps.append(found)
    orders: list[list[SlowValue]] = []
    chosen = min(steps[-1], key=lambda one: steps[-1][one][0]) if steps else None
    for values, found in zip(reversed(runs), reversed(steps), strict=True):
        if chosen is not None:
            orders.insert(0, _between(chosen, values))
            chosen = found[chosen][1]
    return orders


def _awkwardness(ends: Ends, values: Sequence[SlowValue]) -> float:
    """What decides between orders with as many changes: through all values is better, and upwards."""
    return (0.0 if {*ends} == {values[0], values[-1]} else 1e-6) + (0.0 if ends[0] == values[0] else 1e-9)


def _between(ends: Ends, values: Sequence[SlowValue]) -> list[SlowValue]:
    """All values, from the first of two ends to the last."""
    inner = [value for value in values if value not in ends]
    rising = values.index(ends[0]) <= values.index(ends[1])
    return list(dict.fromkeys([ends[0], *(inner if rising else reversed(inner)), ends[1]]))


def _order(value: SlowValue) -> tuple[int, float, str]:
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
