"""Set-ups: every point once, and slow conditions that change as rarely as they can."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise, permutations

from hypothesis import given
from hypothesis import strategies as st

from specflow.model.bench_sheet import BenchCondition, BenchPoint
from specflow.model.requirement import Method, Stage
from specflow.reports.set_ups import SetUp, is_slow, merged, set_ups
from tests.builders import a_quantity

SLOW = (("temperature_ambient", "°C"), ("humidity", "%"), ("supply_voltage", "V"))
VALUE = st.sampled_from([-40.0, 5.0, 23.0, 85.0])


def point(*conditions: tuple[str, float, str], **fields: object) -> BenchPoint:
    return BenchPoint.model_validate(
        {
            "block": "LNA",
            "quantity": a_quantity(),
            "method": Method.TEST,
            "stage": Stage.QUALIFICATION,
            "unit": "dB",
            "u_unit": "dB",
            "conditions": tuple(BenchCondition(dimension=n, value=v, unit=u) for n, v, u in conditions),
            "requirements": ("R-1",),
            "limits": ("at least 20 dB",),
            "why": ("no evidence",),
        }
        | fields
    )


@st.composite
def benches(draw: st.DrawFn) -> list[BenchPoint]:
    """Points of one block with up to three slow conditions and a fast one."""
    names = draw(st.lists(st.sampled_from(SLOW), unique=True, max_size=3))
    rows = draw(
        st.lists(st.tuples(st.tuples(*[VALUE for _ in names]), VALUE), min_size=1, max_size=40, unique=True)
    )
    points = []
    for slow, fast in rows:
        said = [(name, value, unit) for (name, unit), value in zip(names, slow, strict=True)]
        points.append(point(*said, ("frequency", fast, "GHz")))
    return points


def values_of(found: Sequence[SetUp], name: str) -> list[float | None]:
    def value(one: SetUp) -> float | None:
        return next((c.value for c in one.points[0].conditions if c.dimension == name), None)

    return [value(one) for one in found]


def changes(values: Sequence[object]) -> int:
    return sum(first != second for first, second in pairwise(values))


@given(benches())
def test_every_point_is_in_one_set_up_that_shares_what_is_slow(points: list[BenchPoint]) -> None:
    found = set_ups(points)
    assert sorted(one.model_dump_json() for s in found for one in s.points) == sorted(
        one.model_dump_json() for one in points
    )
    shared = [{tuple(c for c in one.conditions if is_slow(c.dimension)) for one in s.points} for s in found]
    assert all(len(one) == 1 for one in shared)
    assert len({next(iter(one)) for one in shared}) == len(found)


def slow_values(found: Sequence[SetUp]) -> list[tuple[float | None, ...]]:
    """The slow conditions of set-ups, slowest first."""
    names = [name for name, _ in SLOW if any(c.dimension == name for c in found[0].points[0].conditions)]
    return list(zip(*(values_of(found, name) for name in names), strict=True)) if names else [()] * len(found)


def costs(order: Sequence[tuple[float | None, ...]]) -> tuple[int, ...]:
    """How often each slow condition changes, the slowest first."""
    return tuple(changes([row[place] for row in order]) for place in range(len(order[0])))


@given(benches())
def test_what_is_slowest_changes_as_rarely_as_it_must_and_the_rest_no_more_than_in_plain_order(
    points: list[BenchPoint],
) -> None:
    values = slow_values(set_ups(points))
    assert costs(values) <= costs(sorted(values, key=lambda row: [one or 0.0 for one in row]))
    if values[0]:
        assert costs(values)[0] == len({row[0] for row in values}) - 1


@given(benches())
def test_no_order_with_the_slowest_rising_has_fewer_changes_of_the_next(points: list[BenchPoint]) -> None:
    values = slow_values(set_ups(points))
    if len(values) > 6 or len(values[0]) < 2:
        return
    slowest = [row[0] for row in values]
    same = (order for order in permutations(values) if [row[0] for row in order] == slowest)
    assert costs(values)[:2] == min(costs(order)[:2] for order in same)


def test_it_runs_there_and_back() -> None:
    points = [
        point(("temperature_ambient", t, "°C"), ("supply_voltage", v, "V"), ("frequency", 30.0, "GHz"))
        for t in (85.0, -40.0, 25.0)
        for v in (20.0, 24.0)
    ]
    assert [one.words for one in set_ups(points)] == [
        "-40 °C ambient, supply 20 V",
        "-40 °C ambient, supply 24 V",
        "+25 °C ambient, supply 24 V",
        "+25 °C ambient, supply 20 V",
        "+85 °C ambient, supply 20 V",
        "+85 °C ambient, supply 24 V",
    ]
    assert [one.words for one in set_ups([point()])] == ["no slow condition is asked for"]


def test_requirements_that_one_value_serves_stand_in_one_row() -> None:
    at = ("frequency", 30.0, "GHz")
    first = point(at)
    second = point(at, requirements=("R-2",), limits=("at most 25 dB",), why=("fails",))
    elsewhere = point(("frequency", 29.0, "GHz"), requirements=("R-2",))
    on_an_item = point(at, requirements=("R-3",), item="LNA-1", must_be_item=True)
    found = merged([first, second, elsewhere, on_an_item])
    assert [(one.requirements, one.limits, one.why) for one in found] == [
        (("R-1", "R-2"), ("at least 20 dB", "at most 25 dB"), ("no evidence", "fails")),
        (("R-2",), ("at least 20 dB",), ("no evidence",)),
        (("R-3",), ("at least 20 dB",), ("no evidence",)),
    ]
