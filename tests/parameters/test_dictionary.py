"""The dictionary: what it holds, and that sheets find their parameter in it."""

from __future__ import annotations

import csv
import subprocess
import sys
from collections import defaultdict
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.errors import ParameterError
from specflow.model.parameter import Better, Parameter
from specflow.parameters import Dictionary, load_dictionary, suits
from specflow.parameters.headers import spelling_key, tokens
from specflow.units import Kind, parse_unit

PUBLISHED = Path(__file__).parents[1] / "data" / "standards_limits.csv"

#: One spelling, several meanings: a person must say which (a unit helps where the kinds differ).
DELIBERATELY_AMBIGUOUS = {
    "ip3": {"iip3", "oip3"},
    "toi": {"iip3", "oip3"},
    "thirdorderintercept": {"iip3", "oip3"},
    "ip2": {"iip2", "oip2"},
    "soi": {"iip2", "oip2"},
    "secondorderintercept": {"iip2", "oip2"},
    "p1db": {"ip1db", "op1db"},
    "1dbcompressionpoint": {"ip1db", "op1db"},
    "cp1": {"ip1db", "op1db"},
    "powerdensity": {"output_power_density", "power_density"},
    "psd": {"output_power_density", "eirp_density"},
    "powerspectraldensity": {"output_power_density", "eirp_density"},
    "sphericalcoverage": {"eirp_spherical_coverage", "eis_spherical_coverage"},
}

#: Kinds a parameter kept in this unit may have; log_factor tells power from amplitude.
LOGARITHMIC_KINDS = {
    Kind.LEVEL,
    Kind.LEVEL_DENSITY,
    Kind.FIELD_LEVEL,
    Kind.POWER_FLUX,
    Kind.POWER_FLUX_DENSITY,
    Kind.RATIO,
    Kind.RATIO_DENSITY,
    Kind.MERIT,
}


@pytest.fixture(scope="module")
def dictionary() -> Dictionary:
    return load_dictionary()


def parameter(key: str, **fields: object) -> Parameter:
    return Parameter.model_validate(
        {"key": key, "title": key, "group": "house", "unit": "dB", "better": Better.HIGHER} | fields
    )


def keys(dictionary: Dictionary, header: str, unit: str = "") -> list[str]:
    return [one.parameter.key for one in dictionary.match(header, unit=unit)]


def published_limits() -> list[dict[str, str]]:
    with PUBLISHED.open(encoding="utf-8", newline="") as stream:
        return [row for row in csv.DictReader(stream) if row["bound"]]


def test_at_least_ninety_parameters_each_with_a_description_that_names_its_source(
    dictionary: Dictionary,
) -> None:
    assert len(dictionary.all) >= 90
    marks = ("no source", "3GPP", "ITU-R", "IEEE", "CFR", "regulation")
    assert [one.key for one in dictionary.all if not any(mark in one.description for mark in marks)] == []


def test_every_unit_parses_and_a_parameter_with_a_log_factor_is_kept_in_a_logarithmic_kind(
    dictionary: Dictionary,
) -> None:
    for one in dictionary.all:
        unit = parse_unit(one.unit)
        assert suits(one, one.unit)
        if one.log_factor:
            assert unit.kind in LOGARITHMIC_KINDS, one.key
        if unit.is_log:
            assert one.log_factor, one.key


def test_densities_need_a_bandwidth(dictionary: Dictionary) -> None:
    densities = {Kind.LEVEL_DENSITY, Kind.POWER_FLUX_DENSITY}
    kept_as_density = [one for one in dictionary.all if parse_unit(one.unit).kind in densities]
    assert len(kept_as_density) >= 6
    assert [one.key for one in kept_as_density if not one.needs_bandwidth] == []


def test_radiated_power_is_marked_for_caution(dictionary: Dictionary) -> None:
    for key in (
        "eirp",
        "eirp_density",
        "off_axis_eirp_density",
        "trp",
        "erp",
        "field_strength",
        "power_density",
    ):
        assert dictionary.by_key[key].radiated, key
    assert not dictionary.by_key["output_power"].radiated


def test_names_are_unique_but_for_the_deliberate_ambiguities(dictionary: Dictionary) -> None:
    named: dict[str, set[str]] = defaultdict(set)
    for one in dictionary.all:
        for name in (one.key, one.title, *one.aliases):
            named[spelling_key(tokens(name))].add(one.key)
    assert {name: found for name, found in named.items() if len(found) > 1} == DELIBERATELY_AMBIGUOUS


@pytest.mark.parametrize(
    ("header", "key"),
    [
        ("NF", "noise_figure"),
        ("Noise Figure", "noise_figure"),
        ("F (dB)", "noise_figure"),
        ("noise_figure_dB", "noise_figure"),
        ("NoiseFigure [dB]", "noise_figure"),
        ("S21", "gain"),
        ("Gain (dB)", "gain"),
        ("Gain, dB", "gain"),
        ("Gain / dB", "gain"),
        ("Gain in dB", "gain"),
        ("dB(S(2,1))", "gain"),
        ("Gain (dBi)", "antenna_gain"),
        ("Psat", "saturated_power"),
        ("P1dB,out", "op1db"),
        ("OP1dB", "op1db"),
        ("IP1dB [dBm]", "ip1db"),
        ("ACP", "aclr"),
        ("ACPR", "aclr"),
        ("ACPR (dBc)", "acpr_relative"),
        ("ACLR [dBm/MHz]", "aclr"),
        ("ACP (dBm)", "aclr_absolute"),
        ("Return loss", "return_loss"),
        ("RL", "return_loss"),
        ("|S11| (dB)", "reflection_magnitude"),
        ("S11", "reflection_magnitude"),
        ("VSWR", "vswr"),
        ("EVM (% rms)", "evm"),
        ("Phase noise dBc/Hz", "phase_noise"),
        ("Off-axis EIRP density dBW/40 kHz", "off_axis_eirp_density"),
        ("Field strength V/m", "field_strength"),
        ("Supply current, A", "supply_current"),
        ("Pout (sat)", "saturated_power"),
        ("Phase noise [dBc/Hz]", "phase_noise"),
        ("e.i.r.p.", "eirp"),
        ("EIRP", "eirp"),
        ("Supply current (mA)", "supply_current"),
        ("G/T [dB/K]", "g_over_t"),
        ("Settling time / µs", "settling_time"),
        ("Settling time (μs)", "settling_time"),
        ("AM-PM", "am_pm"),
        ("X-pol isolation", "cross_polarisation"),
        ("spurious (dBc)", "spurious_relative"),
        ("Spurious (dBm)", "spurious_emission"),
        ("Frequency error (Hz)", "frequency_error_absolute"),
        ("Ch 3: Gain (dB)", "gain"),
    ],
)
def test_a_header_as_sheets_write_it_names_one_parameter(
    dictionary: Dictionary, header: str, key: str
) -> None:
    assert keys(dictionary, header) == [key]


@pytest.mark.parametrize(
    ("header", "unit", "key"),
    [
        ("Gain", "dBi", "antenna_gain"),
        ("Gain", "dB", "gain"),
        ("ACP", "dBc", "acpr_relative"),
        ("Frequency error", "Hz", "frequency_error_absolute"),
        ("Power density", "W/m2", "power_density"),
        ("Power density", "dBm/MHz", "output_power_density"),
    ],
)
def test_the_unit_of_a_units_row_chooses_among_unlike_kinds(
    dictionary: Dictionary, header: str, unit: str, key: str
) -> None:
    assert keys(dictionary, header, unit) == [key]


def test_a_unit_that_fits_no_reading_turns_none_down(dictionary: Dictionary) -> None:
    assert keys(dictionary, "P1dB (V)") == ["ip1db", "op1db"]
    assert keys(dictionary, "EVM", "kHz") == ["evm"]


@pytest.mark.parametrize(
    "header",
    [
        "",
        "()",
        "Gain control voltage",
        "Frequency",
        "F",
        "Temperature",
        "Pout (corner)",
        "Gain A",
        "Comment",
        "U (dB)",
    ],
)
def test_a_header_that_names_no_parameter_is_not_forced_into_one(dictionary: Dictionary, header: str) -> None:
    assert dictionary.match(header) == []


def test_opposite_signs_are_different_parameters(dictionary: Dictionary) -> None:
    for positive, negative in (
        ("return_loss", "reflection_magnitude"),
        ("aclr", "acpr_relative"),
        ("image_rejection", "image_level"),
        ("side_lobe_suppression", "side_lobe_level"),
        ("cross_polarisation", "cross_polar_level"),
        ("reverse_isolation", "reverse_transmission"),
    ):
        assert dictionary.by_key[positive].better is Better.HIGHER
        assert dictionary.by_key[negative].better is Better.LOWER


def test_words_that_qualify_are_left_out_and_reported_with_the_statistic_they_say(
    dictionary: Dictionary,
) -> None:
    (found,) = dictionary.match("measured EVM rms (%)")
    assert (found.parameter.key, found.unit, found.statistic) == ("evm", "%", "")
    assert found.leftover == ("measured",)
    (found,) = dictionary.match("TX EVM peak [%]")
    assert (found.parameter.key, found.statistic, found.leftover) == ("evm", "peak", ("tx", "peak"))


def test_an_average_of_a_level_says_no_statistic_because_it_may_be_of_power_or_of_db(
    dictionary: Dictionary,
) -> None:
    (found,) = dictionary.match("EIRP avg (dBm)")
    assert (found.parameter.key, found.statistic, found.leftover) == ("eirp", "", ("avg",))
    (found,) = dictionary.match("Supply current avg (mA)")
    assert found.statistic == "mean"


def test_a_plane_in_brackets_is_reported(dictionary: Dictionary) -> None:
    (found,) = dictionary.match("Minimum output power (EIRP)")
    assert (found.parameter.key, found.plane) == ("minimum_output_power", "EIRP")
    assert dictionary.match("Minimum output power (corner)") == []


def test_the_reason_names_the_spelling_that_was_recognised(dictionary: Dictionary) -> None:
    (found,) = dictionary.match("Return loss max (dB)")
    assert found.reason == "key 'return_loss' of return_loss, leaving out 'max'"
    assert dictionary.match("RL")[0].reason == "alias 'RL' of return_loss"


def test_an_unknown_parameter_is_refused_with_near_spellings(dictionary: Dictionary) -> None:
    with pytest.raises(ParameterError, match=r"noise_figure") as caught:
        dictionary.resolve("niose figure")
    assert "did you mean" in caught.value.hint
    with pytest.raises(ParameterError, match="ip1db, op1db"):
        dictionary.resolve("P1dB")
    with pytest.raises(ParameterError, match="add a parameter"):
        dictionary.resolve("zzzzqq")
    assert dictionary.resolve("NF").key == "noise_figure"


def test_parameters_of_which_an_alias_stands_in_the_text_are_suggested_first(dictionary: Dictionary) -> None:
    assert dictionary.suggest("gain compression at 5 dBm")[0].key == "gain_compression"


def test_a_parameter_of_the_project_replaces_or_joins_those_shipped() -> None:
    house = load_dictionary(
        [parameter("EVM", title="House EVM"), parameter("link_gain", aliases=("NF", "LG"))]
    )
    assert house.get("evm") is not None and house.by_key["evm"].title == "House EVM"
    assert house.get("EVM") is house.get("evm")
    assert keys(house, "LG") == ["link_gain"]
    assert keys(house, "NF") == ["noise_figure", "link_gain"]
    assert keys(house, "error vector magnitude") == []
    assert load_dictionary().get("link_gain") is None


def test_every_published_title_names_at_most_one_parameter_and_nearly_all_limit_rows_find_theirs(
    dictionary: Dictionary,
) -> None:
    rows = published_limits()
    found = [dictionary.parameter_for_title(row["parameter"]) for row in rows]
    missing = {row["parameter"] for row, one in zip(rows, found, strict=True) if one is None}
    # A declared level that the standard itself calls no requirement, and a density that may be conducted or radiated.
    assert missing == {"declared basis level EIS_REFSENS_50M", "power spectral density"}
    assert len(rows) == 455
    assert sum(one is not None for one in found) == 451


def test_published_units_suit_the_parameter_they_map_to(dictionary: Dictionary) -> None:
    unlike = set()
    for row in published_limits():
        one = dictionary.parameter_for_title(row["parameter"])
        if one and not suits(one, row["unit"]):
            unlike.add((row["unit"], one.key))
    # Two units in one cell; and an attenuation that its regulation writes in dBc.
    assert unlike <= {("dBr or dBm/MHz", "mask_emission_relative"), ("dBc", "emission_attenuation")}


@given(st.text(max_size=40))
def test_any_text_is_matched_without_error(text: str) -> None:
    dictionary = load_dictionary()
    for one in dictionary.match(text):
        assert one.parameter.key in dictionary.by_key


@given(st.sampled_from(load_dictionary().all), st.sampled_from([" ", "_", "-", "."]), st.booleans())
def test_a_title_is_found_however_it_is_spaced_and_cased(one: Parameter, space: str, upper: bool) -> None:
    dictionary = load_dictionary()
    header = space.join(tokens(one.title))
    found = dictionary.match(header.upper() if upper else header)
    assert one.key in [candidate.parameter.key for candidate in found]


@pytest.mark.parametrize(
    ("header", "plane"),
    [("NF DSB (dB)", "DSB"), ("noise figure (SSB)", "SSB"), ("SSB noise figure", "SSB"), ("NF (dB)", "")],
)
def test_a_name_that_says_the_sideband_of_a_noise_figure_keeps_it(header: str, plane: str) -> None:
    found = load_dictionary().match(header)
    assert [(one.parameter.key, one.plane) for one in found] == [("noise_figure", plane)]


def test_the_dictionary_loads_without_the_heavy_libraries() -> None:
    script = (
        "import sys; from specflow.parameters import load_dictionary; load_dictionary().match('NF (dB)');"
        "print(sorted({'pint', 'scipy', 'numpy', 'sqlalchemy', 'difflib'} & set(sys.modules)))"
    )
    done = subprocess.run(
        [sys.executable, "-c", script], capture_output=True, text=True, check=True, timeout=60
    )
    assert done.stdout.strip() == "[]"
