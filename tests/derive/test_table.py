"""A law on stored tables: groups of rows, coverage of the range, what is refused, where results point."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from specflow.errors import CalculationError, DocumentError
from specflow.model.evidence import AT_COLUMN
from tests.derive.deriving import a_trace, derived_of

OVER = "frequency 17.7..20.2 GHz"


def swept(**fields: Any) -> Any:
    """Gain of two items at two temperatures, six frequencies each; item 2 is 1 dB worse, hot 2 dB."""
    frequency = [17.7, 18.2, 18.7, 19.2, 19.7, 20.2]
    gain = [22.0, 22.5, 23.0, 22.8, 22.2, 21.8]
    values, items, temperature = [], [], []
    for item, less in (("LNA-1", 0.0), ("LNA-2", 1.0)):
        for warm, off in ((25, 0.0), (85, 2.0)):
            values += [one - less - off for one in gain]
            items += [item] * 6
            temperature += [warm] * 6
    conditions = {"frequency": frequency * 4, "temperature_ambient": temperature}
    return a_trace(values={"Gain": values}, items=items, **conditions | fields)


def test_one_row_a_group_of_item_and_conditions() -> None:
    found = derived_of("worst", swept(), over=OVER)
    assert found.columns.values["gain"].low == pytest.approx([21.8, 19.8, 20.8, 18.8])
    assert [found.columns.items.word(row) for row in range(4)] == ["LNA-1", "LNA-1", "LNA-2", "LNA-2"]
    assert found.columns.conditions.numeric["temperature_ambient"].tolist() == [25, 85, 25, 85]
    assert "frequency" not in found.columns.conditions.names


def test_a_result_points_to_the_raw_row_and_says_where_on_the_axis() -> None:
    found = derived_of("worst", swept(), over=OVER)
    assert found.columns.source_rows.tolist() == [7, 13, 19, 25]
    assert [found.columns.extra[AT_COLUMN].word(row) for row in range(4)] == ["20.2 GHz"] * 4


def test_an_end_missed_within_the_tolerance_that_was_said_is_not_spoken_for() -> None:
    wide = derived_of("ripple", swept(), over="frequency 17.2..21.0 GHz ± 1 GHz", gives="gain_flatness")
    assert [(one.low, one.high) for one in wide.covers] == [(17.7, 20.2)]
    narrow = derived_of("ripple", swept(), over="frequency 18..20 GHz ± 0.3 GHz", gives="gain_flatness")
    assert [(one.low, one.high) for one in narrow.covers] == [(18.0, 20.0)]


def test_a_group_does_not_care_for_the_order_of_its_rows() -> None:
    document, columns = swept()
    order = np.random.default_rng(1).permutation(document.rows)
    mixed = type(columns)(
        columns.conditions.take(order),
        {name: type(one)(one.low[order], one.low[order]) for name, one in columns.values.items()},
        columns.source_rows[order],
        columns.items.take(order),
    )

    def results(found: Any) -> set[tuple[str, float, str]]:
        return {(one.group, round(one.value, 9), one.at) for one in found.results}

    for law, settings in (("worst", {}), ("ripple", {}), ("slope", {})):
        gives = {"worst": "gain", "ripple": "gain_flatness", "slope": "gain_slope"}[law]
        first = derived_of(law, (document, columns), over=OVER, gives=gives, **settings)
        assert results(first) == results(
            derived_of(law, (document, mixed), over=OVER, gives=gives, **settings)
        )


def test_the_range_may_be_said_in_another_unit() -> None:
    found = derived_of("slope", swept(), over="frequency 17700..20200 MHz", gives="gain_slope")
    wanted = derived_of("slope", swept(), over=OVER, gives="gain_slope")
    assert found.unit == "dB/MHz"
    assert found.columns.values["gain_slope"].low * 1000 == pytest.approx(
        wanted.columns.values["gain_slope"].low
    )


def test_a_part_of_the_range_is_derived_from_its_rows_only() -> None:
    found = derived_of("worst", swept(), over="frequency 18.2..19.7 GHz")
    assert found.columns.values["gain"].low[0] == 22.2
    (covered,) = found.covers
    assert (covered.low, covered.high, covered.largest_gap) == (18.2, 19.7, pytest.approx(0.5))


@pytest.mark.parametrize(
    ("over", "message"),
    [
        (
            "frequency 17..20.2 GHz",
            "the lower end is not reached: there is 17.7 to 20.2 GHz, needed is 17 to 20.2 GHz",
        ),
        ("frequency 17.7..21 GHz", "the upper end is not reached"),
        ("frequency 27..30 GHz", "neither end is reached"),
        (
            "frequency 17.7..20.2 GHz step 0.25 GHz",
            r"no value between 17\.7 and 18\.2 GHz; the step is 0\.25 GHz",
        ),
    ],
)
def test_a_range_that_is_not_covered_is_refused_with_what_there_is(over: str, message: str) -> None:
    with pytest.raises(CalculationError, match=message):
        derived_of("worst", swept(), over=over)


def test_an_end_between_two_readings_is_refused_with_its_neighbours() -> None:
    """The readings go past both ends: "not reached" would send the bench to measure what it has."""
    with pytest.raises(CalculationError) as caught:
        derived_of("worst", swept(), over="frequency 18..19.5 GHz")
    assert caught.value.message.startswith(
        "the readings go past 18 to 19.5 GHz, but none stands at 18 GHz (its neighbours are 17.7 and 18.2 GHz); "
        "none stands at 19.5 GHz (its neighbours are 19.2 and 19.7 GHz)"
    )


def test_a_reading_that_stands_twice_is_one_and_two_that_differ_are_refused() -> None:
    """Where two segments of a sweep meet the analyser writes the frequency twice; the mean is of four readings."""
    along = {"frequency": [1.0, 2, 2, 3, 4], "temperature_ambient": [25.0] * 5}
    over, of = "frequency 1..4 GHz", {"of": "dB"}
    found = derived_of("mean", a_trace(values={"Gain": [1.0, 5, 5, 3, 4]}, **along), over=over, **of)
    assert found.columns.values["gain"].low == pytest.approx([3.25])
    assert any("1 of the readings stand twice" in note for note in found.notes)
    with pytest.raises(CalculationError, match="several readings at 2 GHz"):
        derived_of("mean", a_trace(values={"Gain": [1.0, 5, 5.1, 3, 4]}, **along), over=over, **of)


def test_a_setting_tolerance_lets_an_end_be_near() -> None:
    found = derived_of("worst", swept(), over="frequency 17.695..20.205 GHz ± 10 MHz step 0.5 GHz")
    assert found.columns.values["gain"].low[0] == 21.8
    with pytest.raises(CalculationError, match="neither end is reached"):
        derived_of("worst", swept(), over="frequency 17.695..20.205 GHz ± 1 MHz")


def test_a_group_that_is_not_covered_is_refused_and_the_others_stand() -> None:
    document, columns = a_trace(
        values={"Gain": [1.0, 2, 3, 4, 5]},
        frequency=[1, 2, 3, 1, 2],
        temperature_ambient=[25, 25, 25, 85, 85],
    )
    found = derived_of("worst", (document, columns), over="frequency 1..3 GHz")
    assert [one.value for one in found.results] == [1]
    (refused,) = found.refused
    assert refused.group == "item LNA-1, +85 °C ambient"
    assert "upper end is not reached" in refused.why


def test_a_row_without_value_is_no_reading() -> None:
    holed = a_trace(values={"Gain": [1.0, np.nan, 3, 4]}, frequency=[1, 2, 3, 4])
    with pytest.raises(CalculationError, match="1 of 4 rows in the range have no value"):
        derived_of("worst", holed, over="frequency 1..4 GHz")
    assert derived_of("worst", holed, over="frequency 1..4 GHz step 2 GHz").covers[0].largest_gap == 2
    with pytest.raises(CalculationError, match="no value between 1 and 3 GHz"):
        derived_of("worst", holed, over="frequency 1..4 GHz step 1 GHz")


def test_bounds_enter_the_worst_only() -> None:
    bounded = a_trace(values={"Gain": [1.0, -np.inf, 3]}, high=[1.0, 2.0, 3.0], frequency=[1, 2, 3])
    found = derived_of("worst", bounded, over="frequency 1..3 GHz")
    assert (found.columns.values["gain"].low[0], found.columns.values["gain"].high[0]) == (-np.inf, 2)
    with pytest.raises(CalculationError, match="some readings are bounds"):
        derived_of("mean", bounded, over="frequency 1..3 GHz", of="dB")


def test_two_sweeps_under_one_set_of_conditions_are_refused_where_a_function_is_needed() -> None:
    twice = a_trace(values={"Gain": [0.0, 5, 0, 0, 6, 0]}, frequency=[1, 2, 3, 1, 2, 3])
    assert derived_of("worst", twice, over="frequency 1..3 GHz").results[0].readings == 6
    with pytest.raises(CalculationError, match="several readings at 2 GHz"):
        derived_of("bandwidth", twice, over="frequency 1..3 GHz", gives="bandwidth_3db", below="3 dB")


def test_an_interpolated_value_keeps_its_place_and_speaks_for_no_range() -> None:
    found = derived_of("interpolated", swept(), over=OVER, at="18 GHz")
    assert found.covers == ()
    assert found.columns.conditions.numeric["frequency"].tolist() == [18] * 4
    assert found.columns.values["gain"].low[0] == pytest.approx(22.3)


def test_interpolation_needs_its_ends_bracketed_only() -> None:
    found = derived_of("interpolated", swept(), over="frequency 17.9..18.1 GHz", at="18 GHz")
    assert found.columns.values["gain"].low[0] == pytest.approx(22.3)


def test_rows_are_chosen_by_conditions() -> None:
    found = derived_of("worst", swept(), over=OVER, where=["temperature_ambient: 85 °C"])
    assert found.columns.values["gain"].low == pytest.approx([19.8, 18.8])
    with pytest.raises(DocumentError, match="no row was chosen"):
        derived_of("worst", swept(), over=OVER, where=["temperature_ambient: 40 °C"])


def test_columns_of_two_tables_are_joined_by_item_and_conditions() -> None:
    level = {"Power": {"parameter": "output_power"}}
    hot = a_trace(
        "T-1", {"Power": [-50.0, -51, -52]}, quantities=level, units={"Power": "dBm"}, frequency=[1, 2, 3]
    )
    cold = a_trace(
        "T-2", {"Power": [-55.0, -54.0]}, quantities=level, units={"Power": "dBm"}, frequency=[3, 1]
    )
    found = derived_of("difference", hot, cold, gives="y_factor")
    assert found.columns.values["y_factor"].low.tolist() == [4, 3]
    assert found.columns.conditions.numeric["frequency"].tolist() == [1, 3]
    assert found.notes == ("1 of 3 rows of value have no partner and are left out",)


def test_rows_of_one_column_are_told_apart_by_a_condition() -> None:
    """Co- and cross-polar readings stand under one another: one column, told apart by the polarisation."""
    document, columns = a_trace(
        values={"EIRP": [30.0, 29, 5, 3]},
        quantities={"EIRP": {"parameter": "eirp"}},
        units={"EIRP": "dBm"},
        theta=[0, 10, 0, 10],
        phi=[0, 0, 0, 0],
        polarisation=["V", "V", "H", "H"],
    )
    found = derived_of_cross(document, columns)
    assert found.columns.values["cross_polarisation"].low.tolist() == [25]
    assert "polarisation" not in found.columns.conditions.names


def derived_of_cross(document: Any, columns: Any) -> Any:
    """The law has a setting called where, which is also how rows are chosen."""
    from specflow.derive import LAW_BY_NAME, Request, Role, complete_settings, derive_table
    from specflow.parameters import load_dictionary

    law = LAW_BY_NAME["cross polarisation"]
    parameter = load_dictionary().get("cross_polarisation")
    assert parameter is not None
    roles = tuple(
        Role(name, document, columns, "EIRP", (f"polarisation: {word}",))
        for name, word in (("co", "V"), ("cross", "H"))
    )
    return derive_table(Request(law, roles, complete_settings(law, {"where": "at the peak"}), parameter))


def test_a_result_of_another_kind_than_its_parameter_is_refused() -> None:
    with pytest.raises(DocumentError, match="the law slope gives dB/GHz here; gain_flatness is in dB"):
        derived_of("slope", swept(), over=OVER, gives="gain_flatness")


@pytest.mark.parametrize(
    ("law", "settings", "message"),
    [
        ("percentile", {}, "needs to be told percentile"),
        ("percentile", {"percentile": "50", "of": "PDF"}, "of cannot be 'PDF'"),
        ("percentile", {"percentile": "fifty"}, "percentile=fifty"),
        ("interpolated", {"at": "18"}, "at=18: '18' has no unit"),
        ("interpolated", {"at": "18 dB"}, "at=18 dB: dB is not GHz"),
        ("worst", {"speed": "1"}, "has no setting 'speed'"),
    ],
)
def test_settings_are_read_strictly(law: str, settings: dict[str, str], message: str) -> None:
    with pytest.raises(DocumentError, match=message):
        derived_of(law, swept(), over=OVER, **settings)


@pytest.mark.parametrize(
    ("over", "message"),
    [
        ("", "runs over one stated range"),
        ("frequency 18 GHz", "is no range"),
        ("temperature 20..30 °C", "does not say which temperature"),
        ("theta 0..90 deg", "the table states no theta"),
    ],
)
def test_ranges_are_read_strictly(over: str, message: str) -> None:
    with pytest.raises(DocumentError, match=message):
        derived_of("worst", swept(), over=over)


@pytest.mark.parametrize("name", ["input_level", "input level", "input level:", "Input  level"])
def test_the_name_of_a_range_may_have_several_words(name: str) -> None:
    sweep = a_trace(values={"Gain": [20.0, 20.0, 19.5]}, input_level=[-10.0, -5.0, 0.0])
    found = derived_of("worst", sweep, over=f"{name} -10..0 dBm")
    assert found.columns.values["gain"].low.tolist() == [19.5]


def test_rows_without_a_value_in_every_column_are_left_out_and_none_is_refused() -> None:
    kinds = {"A": {"parameter": "gain"}, "B": {"parameter": "gain"}}
    pair = a_trace(values={"A": [np.nan, 5.0], "B": [1.0, 2.0]}, quantities=kinds, frequency=[1, 2])
    roles = {"value": "A", "minus": "B"}
    found = derived_of("difference", pair, pair, roles=roles, gives="gain_step")
    assert found.columns.values["gain_step"].low.tolist() == [3]
    none = a_trace(values={"A": [np.nan], "B": [1.0]}, quantities=kinds, frequency=[1])
    with pytest.raises(CalculationError, match="no row has a value in every column"):
        derived_of("difference", none, none, roles=roles, gives="gain_step")


def test_many_groups_take_no_time_that_grows_with_their_square() -> None:
    """20,000 sweeps of 5 readings: grouped by sorting, not by looking through all rows for each."""
    count = 20_000
    trace = a_trace(
        values={"Gain": np.tile([1.0, 2, 3, 2, 1], count)},
        frequency=np.tile([1.0, 2, 3, 4, 5], count).tolist(),
        temperature_ambient=np.repeat(np.arange(count), 5).tolist(),
    )
    found = derived_of("ripple", trace, over="frequency 1..5 GHz", gives="gain_flatness")
    assert found.columns.values["gain_flatness"].low.tolist() == [2.0] * count
    assert len(found.results) == 1000


def test_a_law_row_by_row_keeps_every_row() -> None:
    count = 50_000
    trace = a_trace(
        values={"A": np.full(count, 3.0), "B": np.arange(count) / 1e3},
        quantities={"A": {"parameter": "gain"}, "B": {"parameter": "gain"}},
        frequency=np.arange(count).tolist(),
    )
    found = derived_of("difference", trace, trace, roles={"value": "A", "minus": "B"}, gives="gain_step")
    assert found.columns.values["gain_step"].low == pytest.approx(3 - np.arange(count) / 1e3)
    assert found.columns.conditions.numeric["frequency"].tolist() == list(range(count))
