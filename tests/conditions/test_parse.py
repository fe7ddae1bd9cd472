"""Dimensions as people type them."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.conditions import (
    KNOWN_DIMENSIONS,
    find_dimension,
    is_unlocated_temperature,
    parse_dimension,
    read_dimension,
)
from specflow.conditions.dimensions import spelling_key
from specflow.errors import ConditionsError
from specflow.model.conditions import MatchingRule, Need, Span


@pytest.mark.parametrize(
    ("text", "name", "unit", "values", "tolerance"),
    [
        ("frequency: 27.5, 28.75, 30 GHz ± 10 MHz", "frequency", "GHz", (27.5, 28.75, 30), 0.01),
        ("Frequency (GHz): 27,5; 28,75; 30", "frequency", "GHz", (27.5, 28.75, 30), 0),
        ("Freq [GHz]: 27.5,30.0", "frequency", "GHz", (27.5, 30), 0),
        ("f: 27.5 GHz; 28750 MHz", "frequency", "MHz", (27500, 28750), 0),
        ("Tamb: −40; 25; +85 °C ± 2 °C", "temperature_ambient", "°C", (-40, 25, 85), 2),
        ("T_case: 23 ± 2 °C", "temperature_case", "°C", (23,), 2),
        ("Tamb: -40,25,85 °C", "temperature_ambient", "°C", (-40, 25, 85), 0),
        ("offset: ±100 kHz, ±200 kHz", "offset", "kHz", (-100, 100, -200, 200), 0),
        ("Pin: -30; -20 dBm ± 0.5 dBm", "input_level", "dBm", (-30, -20), 0.5),
        ("load_vswr: 1.5, 2", "load_vswr", "", (1.5, 2), 0),
        ("bias step: 1, 2, 3", "bias_step", "", (1, 2, 3), 0),
        ("theta: 0, 30 deg +/- 1 deg", "theta", "deg", (0, 30), 1),
    ],
)
def test_values(text: str, name: str, unit: str, values: tuple[float, ...], tolerance: float) -> None:
    read = parse_dimension(text)
    assert (read.name, read.unit, read.values) == (name, unit, values)
    assert read.tolerance == pytest.approx(tolerance, rel=1e-12)
    assert not read.tolerance_is_percent


@pytest.mark.parametrize(
    ("text", "span"),
    [
        ("temperature_ambient: -40 to 85 °C step 25 K", Span(low=-40, high=85, step=25)),
        ("temperature_ambient: -40…85 °C every 25", Span(low=-40, high=85, step=25)),
        ("frequency: 27.5-30 GHz step 100 MHz", Span(low=27.5, high=30, step=0.1)),
        ("frequency: 17,7 – 20,2 GHz step 0,5", Span(low=17.7, high=20.2, step=0.5)),
        ("frequency: from 17.7 to 20.2 GHz in steps of 500 MHz", Span(low=17.7, high=20.2, step=0.5)),
        ("theta: -60 to -10 deg step 5 deg", Span(low=-60, high=-10, step=5)),
    ],
)
def test_ranges(text: str, span: Span) -> None:
    assert parse_dimension(text).span == span


def test_a_tolerance_may_stand_before_the_step() -> None:
    read = parse_dimension("Tamb: -40 to 85 °C ± 2 K step 25 K")
    assert read.span == Span(low=-40, high=85, step=25)
    assert read.tolerance == 2


@pytest.mark.parametrize(
    ("text", "percent"), [("Vdd: 5 V ± 1 %", 1), ("f: 2412 MHz ± 20 ppm", 0.002), ("load_vswr: 3 ± 5 %", 5)]
)
def test_relative_tolerances(text: str, percent: float) -> None:
    read = parse_dimension(text)
    assert read.tolerance_is_percent and read.tolerance == pytest.approx(percent)


@pytest.mark.parametrize(
    ("text", "rule"),
    [
        ("Tamb: 15 to 30 °C anywhere", MatchingRule.ANYWHERE),
        ("Tamb: anywhere in 15 to 30 °C", MatchingRule.ANYWHERE),
        ("Pin: >= -10 dBm", MatchingRule.AT_OR_ABOVE),
        ("Pin: -10 dBm or above", MatchingRule.AT_OR_ABOVE),
        ("Pin: at or below -10 dBm ± 1 dB", MatchingRule.AT_OR_BELOW),
        ("Pin: ≤ -10 dBm", MatchingRule.AT_OR_BELOW),
    ],
)
def test_rules_beside_the_values(text: str, rule: MatchingRule) -> None:
    assert parse_dimension(text).rule is rule


def test_not_required_and_dont_care_are_two_things() -> None:
    assert parse_dimension("humidity: not required").need is Need.NOT_REQUIRED
    assert parse_dimension("humidity: any").need is Need.ANY
    assert parse_dimension("humidity: Don't care").need is Need.ANY


def test_single_values_can_be_not_required() -> None:
    # 3GPP TS 37.544 O.2.1 has requirements at room temperature only: that extremes are not required must be sayable.
    read = parse_dimension("environment: normal; extreme not required")
    assert (read.words, read.excused) == (("normal",), ("extreme",))


def test_words() -> None:
    assert parse_dimension("channel: B, M, T").words == ("B", "M", "T")
    assert parse_dimension("band: 257; 258").words == ("257", "258")
    assert parse_dimension("antenna: east, west").words == ("east", "west")


def test_cells_of_a_sheet() -> None:
    read = read_dimension(
        "Temp. ambient", "-40; 25; 85", unit="degC", tolerance="2", rule="At or beyond"
    ).dimension
    assert (read.name, read.unit, read.values, read.tolerance) == (
        "temperature_ambient",
        "°C",
        (-40, 25, 85),
        2,
    )
    assert read.rule is MatchingRule.OUTWARD
    assert read_dimension("frequency", "30", unit="GHz", tolerance="exact").dimension.tolerance == 0


def test_what_was_decided_is_said() -> None:
    notes = read_dimension("input_level", "-30; -20", unit="dBm", tolerance="1.5 dBm").notes
    assert len(notes) == 1 and "read in dB" in notes[0]
    notes = read_dimension("frequency", "27500 MHz", unit="GHz").notes
    assert notes == ("frequency: values in MHz are held in GHz",)


@pytest.mark.parametrize(
    ("text", "complaint"),
    [
        ("frequency: 27.5 to 30 GHz", "no step"),
        ("frequency: 27,30 GHz", "either the number 27.30 GHz or the two values 27; 30 GHz"),
        ("frequency: 27,500; 28,250 GHz", "27,500"),
        ("frequency: 27.5, 30", "no unit"),
        ("frequency: 3 dB", "cannot be in dB"),
        ("frequency: 3 parsnips", "no number"),
        ("frequency: low, mid", "'low' is no number"),
        ("frequency: 30 to 27 GHz step 1", "does not rise"),
        ("frequency: 27; 28 GHz step 1", "a step belongs to a range"),
        ("frequency: 27 to 28 GHz step 0", "no step"),
        ("frequency:", "no values"),
        ("frequency 27", "names no dimension"),
        ("temperature: 25 °C", "which temperature"),
        ("Temp: 25 °C", "which temperature"),
        ("Vdd: 5 V ± 0.2 dB", "dB"),
        ("Vdd: 5 V ± -1 V", "below 0"),
        ("mode: A, B ± 1", "in words"),
        ("Tamb: 25 °C at or beyond", "no number"),
        (": 25 °C", "no name"),
    ],
)
def test_what_cannot_be_read_is_refused_in_words(text: str, complaint: str) -> None:
    with pytest.raises(ConditionsError, match=complaint):
        parse_dimension(text)


def test_contradicting_cells_are_refused() -> None:
    with pytest.raises(ConditionsError, match="two tolerances"):
        read_dimension("frequency", "30 GHz ± 1 MHz", tolerance="2 MHz")
    with pytest.raises(ConditionsError, match="two rules"):
        read_dimension("input_level", ">= 3 dBm", rule="at or below")
    with pytest.raises(ConditionsError, match="no matching rule"):
        read_dimension("input_level", "3 dBm", rule="roughly")
    with pytest.raises(ConditionsError, match="no outward side"):
        read_dimension("input_level", "3 dBm", rule="at or beyond")
    with pytest.raises(ConditionsError, match="takes no tolerance"):
        read_dimension("humidity", "any", tolerance="5 %")


@pytest.mark.parametrize(
    ("spelling", "name"),
    [
        ("Freq", "frequency"),
        ("f", "frequency"),
        ("Frequency (GHz)", "frequency"),
        ("FREQUENCY [MHz]", "frequency"),
        ("Tamb", "temperature_ambient"),
        ("T_case", "temperature_case"),
        ("T base", "temperature_baseplate"),
        ("Vdd", "supply_voltage"),
        ("Az", "azimuth"),
        ("El", "elevation"),
        ("θ", "theta"),
        ("phi", "phi"),
        ("Pol.", "polarisation"),
        ("BW", "channel_bandwidth"),
        ("Θ [°]", "theta"),
        ("ϑ", "theta"),
        ("ϕ (deg)", "phi"),
        ("θ angle", "theta"),
        ("Beam θ [deg]", "scan_theta"),
        ("Beam φ [deg]", "scan_phi"),
        ("Scan θ", "scan_theta"),
        ("Scan ϕ", "scan_phi"),
        ("θ_scan", "scan_theta"),
        ("phi_scan [deg]", "scan_phi"),
        ("θ beam", "scan_theta"),
        ("Steering θ", "scan_theta"),
        ("Steering φ", "scan_phi"),
        ("Steering angle [deg]", "scan_theta"),
        ("Beam steering angle", "scan_theta"),
        ("Scan az", "scan_azimuth"),
        ("Steering elevation", "scan_elevation"),
    ],
)
def test_spellings_met_in_sheets(spelling: str, name: str) -> None:
    found = find_dimension(spelling)
    assert found is not None and found.name == name


def test_no_spelling_means_two_dimensions() -> None:
    meant: dict[str, str] = {}
    for known in KNOWN_DIMENSIONS:
        for spelling in (known.name, known.title, *known.aliases):
            assert meant.setdefault(spelling_key(spelling), known.name) == known.name, spelling


def test_a_temperature_without_a_place_is_found_by_nobody() -> None:
    for spelling in ("Temp", "Temperature", "Temperature (°C)", "temperature [degC]"):
        assert is_unlocated_temperature(spelling)
        assert find_dimension(spelling) is None


numbers = st.lists(st.integers(-(10**6), 10**6).map(lambda number: number / 1000), min_size=2, max_size=8)


@given(numbers, st.booleans())
def test_typed_lists_read_back(values: list[float], comma: bool) -> None:
    values = [0.5, *values]  # with a comma, 0,5 is what shows that all commas are decimal
    typed = "; ".join(f"{value:.3f}" for value in values)
    if comma:
        typed = typed.replace(".", ",")
    assert parse_dimension(f"supply_voltage: {typed} V").values == tuple(values)


pieces = st.sampled_from(
    ["27.5", "-40", "1,5", "GHz", "°C", "K", "dBm", "%", "±", "to", "step", ",", ";", "-", "–", "any", "not required",
     "anywhere", ">=", "or above", "B", "inf", "nan", "1e999", "", "..", "\n", "=", "(", ")"]
)  # fmt: skip


@given(
    st.sampled_from(["frequency", "temperature_ambient", "mode", "thing", "theta"]),
    st.lists(pieces, max_size=7),
)
def test_whatever_is_typed_is_read_or_refused_in_words(name: str, typed: list[str]) -> None:
    try:
        read = parse_dimension(f"{name}: {' '.join(typed)}")
    except ConditionsError as error:
        assert str(error)
    else:
        assert read.name == name
