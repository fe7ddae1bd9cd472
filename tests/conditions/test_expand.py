"""Expansion into required points."""

from __future__ import annotations

import itertools
import tracemalloc

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specflow.conditions import compile_points, expand, point_count, point_words
from specflow.errors import ConditionsError
from specflow.model.conditions import Combination, ConditionsSet, Dimension
from tests.conditions.make import a_set


def test_all_combinations_in_the_order_of_the_dimensions() -> None:
    points = expand(a_set("frequency: 30, 27.5 GHz", "temperature_ambient: -40, 85 °C"))
    assert [point_words(points, point) for point in range(points.size)] == [
        "27.5 GHz, -40 °C ambient",
        "27.5 GHz, +85 °C ambient",
        "30 GHz, -40 °C ambient",
        "30 GHz, +85 °C ambient",
    ]
    assert points.columns_lo is points.columns_hi


def test_corners_take_the_ends_of_numbers_and_every_word() -> None:
    conditions = a_set(
        "frequency: 27.5, 28.75, 30 GHz",
        "temperature_ambient: -40 to 85 °C",
        "polarisation: H, V",
        combination="corners",
    )
    points = expand(conditions)
    assert points.size == 8
    assert set(points.columns_lo.numeric["frequency"]) == {27.5, 30}
    assert set(points.columns_lo.numeric["temperature_ambient"]) == {-40, 85}
    assert points.step == {}


def test_listed_rows_belong_together_and_equal_rows_are_one() -> None:
    conditions = a_set("frequency: 27.5; 28; 27.5 GHz", "mode: A; B; A", combination="listed rows")
    points = expand(conditions)
    assert [point_words(points, point) for point in range(points.size)] == [
        "27.5 GHz, mode A",
        "28 GHz, mode B",
    ]


def test_some_dimensions_listed_and_the_others_combined() -> None:
    # The environments of 3GPP TS 36.521-1: normal and the four corners of temperature and voltage, as rows; with
    # low, mid and high channel and, here, three bandwidths: 5 x 3 x 3 initial conditions. Values of the rows invented.
    conditions = a_set(
        "temperature_ambient: 23; -10; -10; 55; 55 °C ± 2 K",
        "supply_voltage: 3.8; 3.4; 4.2; 3.4; 4.2 V ± 1 %",
        "channel: low, mid, high",
        "channel_bandwidth: 5, 10, 20 MHz",
        combination="listed rows: temperature_ambient, supply_voltage",
    )
    points = expand(conditions)
    assert points.size == point_count(conditions) == 5 * 3 * 3
    pairs = set(
        zip(
            points.columns_lo.numeric["temperature_ambient"],
            points.columns_lo.numeric["supply_voltage"],
            strict=True,
        )
    )
    assert pairs == {(23, 3.8), (-10, 3.4), (-10, 4.2), (55, 3.4), (55, 4.2)}


def test_environments_as_words() -> None:
    # 3GPP TS 36.521-1: normal, TL/VL, TL/VH, TH/VL, TH/VH, each at low, mid and high channel.
    points = expand(a_set("environment: normal; TL/VL; TL/VH; TH/VL; TH/VH", "channel: low; mid; high"))
    assert points.size == 15
    assert point_words(points, 5) == "TL/VL environment, high channel"


def test_exclusions_take_points_away_and_are_counted() -> None:
    conditions = a_set(
        "frequency: 27.5, 28.75, 30 GHz",
        "temperature_ambient: -40, 25, 85 °C",
        exclusions="temperature_ambient = 85 °C and frequency > 28 GHz; frequency = 26 GHz",
    )
    points = expand(conditions)
    assert points.size == 7
    assert points.excluded == (2, 0)


def test_exclusions_may_not_leave_nothing() -> None:
    with pytest.raises(ConditionsError, match="leave no point"):
        a_set("frequency: 27.5, 30 GHz", exclusions="frequency >= 27.5 GHz")


def test_a_range_takes_no_exclusion() -> None:
    with pytest.raises(ConditionsError, match="no listed values"):
        a_set("frequency: 27.5 to 30 GHz step 1 GHz", "mode: A, B", exclusions="frequency < 28 GHz")


def test_a_billion_points_are_refused_before_anything_is_allocated() -> None:
    sizes = {"a": 5, "b": 7, "c": 1000, "d": 1000, "e": 30}
    dimensions = tuple(Dimension(name=name, values=tuple(range(size))) for name, size in sizes.items())
    conditions = ConditionsSet(id="BIG", dimensions=dimensions)
    tracemalloc.start()
    with pytest.raises(ConditionsError, match=r"5 × 7 × 1,000 × 1,000 × 30 = 1,050,000,000 points") as caught:
        expand(conditions)
    _, peak = tracemalloc.get_traced_memory()
    tracemalloc.stop()
    assert peak < 1_000_000
    assert caught.value.where == "BIG" and caught.value.hint


def test_the_largest_number_can_be_chosen() -> None:
    conditions = a_set("frequency: 1, 2, 3 GHz")
    assert expand(conditions, most=3).size == 3
    with pytest.raises(ConditionsError, match="more than 2"):
        expand(conditions, most=2)


def test_a_set_is_expanded_once_and_forgotten_with_it() -> None:
    from specflow.conditions.expand import _compiled

    conditions = a_set("frequency: 1, 2 GHz")
    key = id(conditions)
    points = compile_points(conditions)
    assert compile_points(conditions) is points
    del conditions, points
    assert key not in _compiled


counts = st.lists(st.integers(1, 5), min_size=1, max_size=5)


@given(counts, st.booleans())
def test_counts_agree_with_the_product_of_values(sizes: list[int], corners: bool) -> None:
    values = [tuple(float(7 * place - 3 * axis) for place in range(size)) for axis, size in enumerate(sizes)]
    dimensions = tuple(Dimension(name=f"d{axis}", values=numbers) for axis, numbers in enumerate(values))
    combination = Combination.CORNERS if corners else Combination.ALL
    points = expand(ConditionsSet(id="P", dimensions=dimensions, combination=combination))
    chosen = [sorted({min(numbers), max(numbers)}) if corners else numbers for numbers in values]
    expected = list(itertools.product(*chosen))
    columns = [points.columns_lo.numeric[dimension.name].tolist() for dimension in dimensions]
    assert list(zip(*columns, strict=True)) == expected


@settings(max_examples=50)
@given(st.lists(st.tuples(st.integers(0, 3), st.integers(0, 3)), min_size=1, max_size=20))
def test_listed_rows_keep_their_order_without_repetition(typed: list[tuple[int, int]]) -> None:
    first, second = zip(*typed, strict=True)
    dimensions = (Dimension(name="x", values=first), Dimension(name="y", values=second))
    points = expand(ConditionsSet(id="L", dimensions=dimensions, combination=Combination.LISTED))
    x, y = (points.columns_lo.numeric[name].tolist() for name in ("x", "y"))
    assert list(zip(x, y, strict=True)) == list(dict.fromkeys(typed))


pieces = st.sampled_from(
    ["frequency", "mode", "=", "<", ">=", "in", "is", "30 GHz", "27.5", "28000 MHz", "3 dB", "A", "B", "or", "to", ";",
     "and", "because", ""]
)  # fmt: skip


@given(st.lists(pieces, max_size=9))
def test_whatever_exclusion_is_typed_is_read_or_refused_in_words(typed: list[str]) -> None:
    try:
        points = expand(a_set("frequency: 27.5, 28, 30 GHz", "mode: A, B", exclusions=" ".join(typed)))
    except ConditionsError as error:
        assert str(error)
    else:
        assert 1 <= points.size <= 6
