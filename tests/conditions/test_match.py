"""Which record serves which point: worked cases, and every random set against plain loops."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specflow.conditions import expand, match, proves, unstated_conditions
from specflow.model.columns import Columns, TextColumn
from specflow.model.conditions import Clause, Combination, ConditionsSet, Dimension, Exclusion, MatchingRule
from tests.conditions.make import a_set, everything, rows
from tests.conditions.second_route import serving


def served(conditions: ConditionsSet, records: Columns) -> dict[int, int]:
    matching = match(expand(conditions), records)
    return dict(zip(matching.record.tolist(), matching.point.tolist(), strict=True))


def test_an_actual_condition_serves_within_the_setting_tolerance_and_not_beyond() -> None:
    conditions = a_set("temperature_ambient: -40, 25, 85 °C ± 2 K")
    records = rows(temperature_ambient=[-42, -42.001, 23, 27.000001, 85, 90])
    assert served(conditions, records) == {0: 0, 2: 1, 4: 2}


def test_decimals_are_compared_as_written() -> None:
    assert 0.1 + 0.2 != 0.3
    assert served(a_set("frequency: 0.3 GHz"), rows(frequency=[0.1 + 0.2, 0.31])) == {0: 0}
    assert served(a_set("frequency: 28.75 GHz ± 10 MHz"), rows(frequency=[28.76, 28.74, 28.7600001])) == {
        0: 0,
        1: 0,
    }


def test_one_hertz_at_thirty_gigahertz_is_told_apart() -> None:
    conditions = a_set("frequency: 30 GHz ± 1 Hz")
    assert served(conditions, rows(frequency=[30 + 1e-9, 30 + 2e-9, 30 - 1e-9])) == {0: 0, 2: 0}


def test_23_degrees_is_not_55_degrees() -> None:
    assert served(a_set("temperature_ambient: 55 °C ± 3 K"), rows(temperature_ambient=[23.0])) == {}


def test_unlike_temperatures_do_not_match() -> None:
    records = rows(temperature_ambient=[85.0])
    points = expand(a_set("temperature_baseplate: 85 °C ± 2 K"))
    assert len(match(points, records).record) == 0
    assert unstated_conditions(points, records)["temperature_baseplate"].tolist() == [0]


def test_an_unstated_condition_never_matches() -> None:
    conditions = a_set("frequency: 28, 30 GHz", "polarisation: H, V")
    records = rows(frequency=[28, None, 30], polarisation=["H", "H", None])
    assert served(conditions, records) == {0: 0}
    unstated = unstated_conditions(expand(conditions), records)
    assert {name: found.tolist() for name, found in unstated.items()} == {
        "frequency": [1],
        "polarisation": [2],
    }


def test_every_record_within_tolerance_counts_for_its_point() -> None:
    matching = match(expand(a_set("frequency: 28, 30 GHz ± 0.1 GHz")), rows(frequency=[28.05, 30, 27.95, 28]))
    assert matching.record.tolist() == [0, 2, 3, 1]
    assert matching.point.tolist() == [0, 0, 0, 1]


def test_a_record_near_several_points_serves_the_nearest_and_is_reported() -> None:
    conditions = a_set("frequency: 28, 28.1, 28.2 GHz ± 0.08 GHz")
    matching = match(expand(conditions), rows(frequency=[28.06, 28.0, 28.2]))
    assert dict(zip(matching.record.tolist(), matching.point.tolist(), strict=True)) == {0: 1, 1: 0, 2: 2}
    assert matching.ambiguous.tolist() == [0]


def test_the_nearest_combination_may_be_excluded() -> None:
    conditions = a_set(
        "frequency: 28, 28.1 GHz ± 0.08 GHz",
        "temperature_ambient: 25, 85 °C ± 2 K",
        exclusions="frequency = 28.1 GHz and temperature_ambient = 85 °C",
    )
    matching = match(expand(conditions), rows(frequency=[28.06, 28.06], temperature_ambient=[25, 85]))
    assert matching.record.tolist() == [1, 0] or matching.record.tolist() == [0, 1]
    assert dict(zip(matching.record.tolist(), matching.point.tolist(), strict=True)) == {0: 2, 1: 1}
    assert matching.ambiguous.tolist() == [0]


@pytest.mark.parametrize(
    ("text", "actual", "points"),
    [
        ("input_level: at or above -10 dBm ± 0.5 dB", [-10.5, -10.6, 3.0], {0: 0, 2: 0}),
        ("input_level: <= -10 dBm", [-10.0, -9.99, -80.0], {0: 0, 2: 0}),
    ],
)
def test_beyond_counts_only_where_it_is_declared(
    text: str, actual: list[float], points: dict[int, int]
) -> None:
    assert served(a_set(text), rows(input_level=actual)) == points


def test_outward_lets_the_extremes_be_exceeded_and_only_them() -> None:
    read = a_set("temperature_ambient: -40, 25, 85 °C ± 2 K").dimensions[0]
    outward = ConditionsSet(id="X", dimensions=(read.model_copy(update={"rule": MatchingRule.OUTWARD}),))
    assert served(outward, rows(temperature_ambient=[-55, 40, 100, 25])) == {0: 0, 2: 2, 3: 1}


def test_anywhere_in_the_range_is_one_point() -> None:
    # 3GPP TS 38.176-1 B.2: the normal test environment is 15 to 30 degC.
    conditions = a_set("temperature_ambient: 15 to 30 °C anywhere")
    assert expand(conditions).size == 1
    assert served(conditions, rows(temperature_ambient=[14.9, 15, 23.4, 30, 30.1])) == {1: 0, 2: 0, 3: 0}


def test_a_percentage_is_of_each_required_value() -> None:
    # 3GPP TS 37.141 B.6 gives the accuracy of a direct supply voltage as 1.0 %.
    conditions = a_set("supply_voltage: 5, 48 V ± 1 %")
    assert served(conditions, rows(supply_voltage=[5.05, 5.06, 48.48, 48.5])) == {0: 0, 2: 1}


def test_units_are_converted_and_said() -> None:
    matching = match(
        expand(a_set("frequency: 27.5, 30 GHz ± 1 MHz")),
        rows({"frequency": "MHz"}, frequency=[27500.5, 30002]),
    )
    assert matching.record.tolist() == [0]
    assert len(matching.notes) == 1 and "MHz read as GHz" in matching.notes[0]


def test_kelvin_serve_degrees_celsius() -> None:
    records = rows({"temperature_ambient": "K"}, temperature_ambient=[358.15, 298.15])
    assert served(a_set("temperature_ambient: 25, 85 °C"), records) == {0: 1, 1: 0}


def test_a_unit_of_another_kind_or_none_at_all_never_matches() -> None:
    points = expand(a_set("frequency: 27.5 GHz ± 1 MHz"))
    for unit in ("dBm", ""):
        matching = match(points, rows({"frequency": unit}, frequency=[27.5]))
        assert len(matching.record) == 0
        assert len(matching.notes) == 1


def test_words_are_compared_by_meaning_not_spelling() -> None:
    conditions = a_set("polarisation: H, V", "channel: low, mid, high")
    records = rows(polarisation=["horizontal", " v ", "h", "x"], channel=["B", "Mid", "T", "T"])
    assert served(conditions, records) == {0: 0, 1: 4, 2: 2}


def test_numbers_in_a_text_dimension_are_read_as_their_digits() -> None:
    assert served(a_set("band: 257, 258"), rows(band=[258.0, 257.0, 260.0])) == {0: 1, 1: 0}


def test_dont_care_and_not_required_add_no_points_and_ask_nothing() -> None:
    for silent in ("humidity: not required", "humidity: any"):
        conditions = a_set("frequency: 27.5, 30 GHz", silent)
        assert expand(conditions).size == 2
        assert served(conditions, rows(frequency=[30.0])) == {0: 1}


def test_an_excused_value_is_no_point() -> None:
    conditions = a_set("environment: normal; extreme not required")
    assert served(conditions, rows(environment=["NTNV", "extreme"])) == {0: 0}


def test_angles_go_round() -> None:
    conditions = a_set("phi: 0, 90, 350 deg ± 5 deg")
    assert served(conditions, rows(phi=[358, -12, 95, 720, 346])) == {0: 0, 1: 2, 2: 1, 3: 0, 4: 2}


def test_a_set_without_required_dimensions_is_one_point_that_any_record_serves() -> None:
    conditions = ConditionsSet(id="ANY")
    records = rows(frequency=[1.0, None])
    points = expand(conditions)
    assert points.size == 1
    assert proves(points, match(points, records), everything(records)).tolist() == [True]


def test_records_that_lack_the_dimension_altogether_serve_nothing() -> None:
    points = expand(a_set("frequency: 1, 2 GHz", "supply_voltage: 5 V"))
    matching = match(points, rows(frequency=[1.0]))
    assert len(matching.record) == 0
    assert not proves(points, matching, np.ones(1, np.bool_)).any()


def test_no_records_prove_nothing() -> None:
    points = expand(a_set("frequency: 1, 2 GHz"))
    records = rows(frequency=[])
    assert not proves(points, match(points, records), everything(records)).any()


def spread_rows(count: int, dimensions: int) -> ConditionsSet:
    """Rows whose dimensions hold many different values each, so that few of their combinations are required."""
    rng = np.random.default_rng(dimensions)
    made = tuple(
        Dimension(name=f"d{axis}", values=tuple(rng.permutation(count).tolist()), tolerance=0.6)
        for axis in range(dimensions)
    )
    return ConditionsSet(id="SPREAD", dimensions=made, combination=Combination.LISTED)


@pytest.mark.parametrize("dimensions", [2, 3, 5])
def test_listed_rows_are_found_however_many_combinations_there_would_be(dimensions: int) -> None:
    # 3000 values in 2, 3 or 5 dimensions: 9e6, 2.7e10 and 2.4e17 combinations, of which 3000 are required.
    points = expand(spread_rows(3000, dimensions))
    rng = np.random.default_rng(1)
    asked = rng.permutation(3000)
    records = points.columns_lo.take(asked)
    shifted = {name: values + rng.uniform(-0.3, 0.3, 3000) for name, values in records.numeric.items()}
    matching = match(points, Columns(3000, shifted, units=records.units))
    assert matching.record[np.argsort(asked[matching.record])].tolist() == np.argsort(asked).tolist()
    assert matching.point.tolist() == list(range(3000))
    assert len(matching.ambiguous) == 0


# A lattice of eighths: distances are exact in binary, so ties and tolerances are met exactly in both routes.
eighths = st.integers(-40, 40).map(lambda number: number / 8)
tolerances = st.sampled_from([0.0, 0.125, 0.25, 0.5, 1.0, 2.5])
rules = st.sampled_from(
    [MatchingRule.WITHIN, MatchingRule.WITHIN, MatchingRule.AT_OR_ABOVE, MatchingRule.AT_OR_BELOW]
)


@st.composite
def numeric_dimensions(draw: st.DrawFn, name: str, least: int = 1, most: int = 6) -> Dimension:
    values = draw(st.lists(eighths, min_size=least, max_size=most))
    percent = draw(st.booleans()) and all(values)
    tolerance = draw(st.sampled_from([12.5, 50.0])) if percent else draw(tolerances)
    rule = draw(rules)
    if rule is MatchingRule.WITHIN and len(set(values)) > 1 and draw(st.booleans()):
        rule = MatchingRule.OUTWARD
    return Dimension(
        name=name,
        unit="V",
        values=tuple(values),
        tolerance=tolerance,
        tolerance_is_percent=percent,
        rule=rule,
    )


@st.composite
def random_sets(draw: st.DrawFn) -> ConditionsSet:
    listed = draw(st.booleans())
    count = draw(st.integers(1, 8))
    size = {"least": count, "most": count} if listed else {}
    dimensions = [
        draw(numeric_dimensions(name, **size)) for name in ("x", "y", "z")[: draw(st.integers(1, 3))]
    ]
    if draw(st.booleans()):
        words = st.lists(
            st.sampled_from(["A", "B", "C"]), min_size=size.get("least", 1), max_size=size.get("most", 3)
        )
        dimensions.append(Dimension(name="mode", words=tuple(draw(words))))
    exclusions = ()
    if draw(st.booleans()):
        bound = draw(eighths)
        exclusions = (Exclusion(clauses=(Clause(dimension="x", low=bound + 1e-3, high=bound + 1.001),)),)
    combination = (
        Combination.LISTED if listed else draw(st.sampled_from([Combination.ALL, Combination.CORNERS]))
    )
    return ConditionsSet(id="R", dimensions=tuple(dimensions), combination=combination, exclusions=exclusions)


@st.composite
def random_records(draw: st.DrawFn) -> Columns:
    count = draw(st.integers(1, 12))
    numeric = {
        name: np.array(draw(st.lists(eighths | st.just(np.nan), min_size=count, max_size=count)))
        for name in ("x", "y", "z")
    }
    words = draw(st.lists(st.sampled_from(["a", "B", "c", "d", None]), min_size=count, max_size=count))
    return Columns(count, numeric, {"mode": TextColumn.of(words)}, dict.fromkeys(numeric, "V"))


@settings(max_examples=300, deadline=None)
@given(random_sets(), random_records())
def test_matching_agrees_with_every_record_against_every_point(
    conditions: ConditionsSet, records: Columns
) -> None:
    from specflow.errors import ConditionsError

    try:
        points = expand(conditions)
    except ConditionsError:
        return
    matching = match(points, records)
    assert np.all(np.diff(matching.point) >= 0)
    pairs = dict(zip(matching.record.tolist(), matching.point.tolist(), strict=True))
    assert len(pairs) == len(matching.record), "a record serves one point at most"
    ambiguous = set(matching.ambiguous.tolist())
    for record, candidates in enumerate(serving(points, records)):
        assert (record in pairs) == bool(candidates)
        assert (record in ambiguous) == (len(candidates) > 1)
        if candidates:
            chosen = dict(candidates)[pairs[record]]
            assert chosen <= min(distance for _, distance in candidates) * (1 + 1e-6) + 1e-12
