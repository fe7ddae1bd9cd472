"""Spellings met in sheets, data sheets and standards, and what each of them means."""

from __future__ import annotations

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from specflow.errors import UnitError
from specflow.units import Kind, Unit, format_unit, parse_unit
from specflow.units.table import LINEAR, LOGARITHMIC

# (as written, canonical spelling, kind)
SPELLINGS = [
    ("dBm", "dBm", Kind.LEVEL),
    ("dbm", "dBm", Kind.LEVEL),
    ("DBM", "dBm", Kind.LEVEL),
    ("[dBm]", "dBm", Kind.LEVEL),
    ("(dBm)", "dBm", Kind.LEVEL),
    (" dBm\u00a0", "dBm", Kind.LEVEL),
    ("dBm (rms)", "dBm rms", Kind.LEVEL),
    ("dBW", "dBW", Kind.LEVEL),
    ("mW", "mW", Kind.LEVEL),
    ("dBuV", "dBµV", Kind.LEVEL),
    ("dB\u03bcV", "dBµV", Kind.LEVEL),
    ("dBÂµV", "dBµV", Kind.LEVEL),
    ("dBm/MHz", "dBm/MHz", Kind.LEVEL_DENSITY),
    ("dBm per MHz", "dBm/MHz", Kind.LEVEL_DENSITY),
    ("dBm/1 MHz", "dBm/MHz", Kind.LEVEL_DENSITY),
    ("dBm/1MHz", "dBm/MHz", Kind.LEVEL_DENSITY),
    ("dBm in 1 MHz", "dBm/MHz", Kind.LEVEL_DENSITY),
    ("dBm in a 1 MHz bandwidth", "dBm/MHz", Kind.LEVEL_DENSITY),
    ("dBm/(MHz)", "dBm/MHz", Kind.LEVEL_DENSITY),
    ("dBm·MHz⁻¹", "dBm/MHz", Kind.LEVEL_DENSITY),
    ("dBm/1000 kHz", "dBm/MHz", Kind.LEVEL_DENSITY),
    ("dBm/40 kHz", "dBm/40 kHz", Kind.LEVEL_DENSITY),
    ("dBm per 100 MHz", "dBm/100 MHz", Kind.LEVEL_DENSITY),
    ("dBm / 3,84 MHz", "dBm/3.84 MHz", Kind.LEVEL_DENSITY),
    ("W/Hz", "W/Hz", Kind.LEVEL_DENSITY),
    ("dBc/Hz", "dBc/Hz", Kind.RATIO_DENSITY),
    ("dBµV/m", "dBµV/m", Kind.FIELD_LEVEL),
    ("dBuV/m", "dBµV/m", Kind.FIELD_LEVEL),
    ("V/m", "V/m", Kind.FIELD_LEVEL),
    ("mV/m", "mV/m", Kind.FIELD_LEVEL),
    ("uV/m", "µV/m", Kind.FIELD_LEVEL),
    ("dBµA/m", "dBµA/m", Kind.FIELD_LEVEL),
    ("W/m2", "W/m²", Kind.POWER_FLUX),
    ("W/m^2", "W/m²", Kind.POWER_FLUX),
    ("mW/(cm*cm)", "mW/cm²", Kind.POWER_FLUX),
    ("mW/cm²", "mW/cm²", Kind.POWER_FLUX),
    ("dBW/m2/MHz", "dBW/m²/MHz", Kind.POWER_FLUX_DENSITY),
    ("dBW/(m²·MHz)", "dBW/m²/MHz", Kind.POWER_FLUX_DENSITY),
    ("dBW/m^2 in 4 kHz", "dBW/m²/4 kHz", Kind.POWER_FLUX_DENSITY),
    ("dB", "dB", Kind.RATIO),
    ("dB p-p", "dB p-p", Kind.RATIO),
    ("dBpp", "dB p-p", Kind.RATIO),
    ("dB (rms)", "dB rms", Kind.RATIO),
    ("dBi", "dBi", Kind.RATIO),
    ("dBic", "dBic", Kind.RATIO),
    ("dBd", "dBd", Kind.RATIO),
    ("dBc", "dBc", Kind.RATIO),
    ("dBr", "dBr", Kind.RATIO),
    ("dBFS", "dBFS", Kind.RATIO),
    ("dBfs", "dBFS", Kind.RATIO),
    ("%", "%", Kind.RATIO),
    ("% rms", "% rms", Kind.RATIO),
    ("%rms", "% rms", Kind.RATIO),
    ("pct", "%", Kind.RATIO),
    ("ppm", "ppm", Kind.RATIO),
    ("1", "1", Kind.RATIO),
    ("-", "1", Kind.RATIO),
    ("dB/K", "dB/K", Kind.MERIT),
    ("dBi/K", "dB/K", Kind.MERIT),
    ("dBi·K⁻¹", "dB/K", Kind.MERIT),
    ("dB / K", "dB/K", Kind.MERIT),
    ("dB/m", "dB/m", Kind.DB_PER_LENGTH),
    ("dB/100 m", "dB/100 m", Kind.DB_PER_LENGTH),
    ("dB/MHz", "dB/MHz", Kind.DB_SLOPE),
    ("dB/°C", "dB/°C", Kind.DB_SLOPE),
    ("deg/dB", "deg/dB", Kind.DB_SLOPE),
    ("dBHz", "dBHz", Kind.BANDWIDTH_LOG),
    ("dB-Hz", "dBHz", Kind.BANDWIDTH_LOG),
    ("dBK", "dBK", Kind.PHYSICAL_LOG),
    ("dBsm", "dBsm", Kind.PHYSICAL_LOG),
    ("°C", "°C", Kind.PHYSICAL),
    ("degC", "°C", Kind.PHYSICAL),
    ("deg C", "°C", Kind.PHYSICAL),
    ("℃", "°C", Kind.PHYSICAL),
    ("Â°C", "°C", Kind.PHYSICAL),
    ("ºC", "°C", Kind.PHYSICAL),
    ("GHz", "GHz", Kind.PHYSICAL),
    ("GHZ", "GHz", Kind.PHYSICAL),
    ("Mhz", "MHz", Kind.PHYSICAL),
    ("Ω", "Ω", Kind.PHYSICAL),
    ("\u2126", "Ω", Kind.PHYSICAL),
    ("ohm", "Ω", Kind.PHYSICAL),
    ("kOhm", "kΩ", Kind.PHYSICAL),
    ("V rms", "V rms", Kind.PHYSICAL),
    ("Vrms", "V rms", Kind.PHYSICAL),
    ("mVpp", "mV p-p", Kind.PHYSICAL),
    ("ns", "ns", Kind.PHYSICAL),
    ("us", "µs", Kind.PHYSICAL),
    ("deg", "deg", Kind.PHYSICAL),
    ("°", "deg", Kind.PHYSICAL),
    ("rad", "rad", Kind.PHYSICAL),
    ("RB", "RB", Kind.PHYSICAL),
    ("Mbps", "Mbit/s", Kind.PHYSICAL),
    ("MS/s", "MSa/s", Kind.PHYSICAL),
    ("nV/√Hz", "nV/√Hz", Kind.PHYSICAL),
    ("rad²/Hz", "rad²/Hz", Kind.PHYSICAL),
    ("ppm/°C", "ppm/°C", Kind.PHYSICAL),
    ("MHz/V", "MHz/V", Kind.PHYSICAL),
]


@pytest.mark.parametrize(("text", "canonical", "kind"), SPELLINGS)
def test_a_spelling_met_in_practice_is_read(text: str, canonical: str, kind: Kind) -> None:
    unit = parse_unit(text)
    assert (format_unit(unit), unit.kind) == (canonical, kind)


@pytest.mark.parametrize("canonical", sorted({canonical for _, canonical, _ in SPELLINGS}))
def test_the_canonical_spelling_reads_back_to_an_equal_unit(canonical: str) -> None:
    unit = parse_unit(canonical)
    assert parse_unit(format_unit(unit)) == unit
    assert hash(parse_unit(format_unit(unit))) == hash(unit)


@pytest.mark.parametrize("row", [*LINEAR, *LOGARITHMIC], ids=lambda row: row.symbol)
def test_every_unit_of_the_table_is_written_as_it_is_read(row: Unit) -> None:
    unit = parse_unit(row.symbol)
    assert format_unit(unit) == row.symbol
    for prefix in getattr(row, "prefixes", ""):
        prefixed = parse_unit(prefix + row.symbol)
        assert format_unit(prefixed) == prefix + row.symbol
        assert prefixed != unit and prefixed.dimension == unit.dimension


@pytest.mark.parametrize(
    ("written", "meaning"),
    [  # ITU-R V.574-5, section 2 (notation of the decibel; its examples quoted from memory)
        ("dB(W)", "dBW"),
        ("dB(m)", "dBm"),
        ("dB(mW)", "dBm"),
        ("dB(1 mW)", "dBm"),
        ("dB(µV)", "dBµV"),
        ("dB(µV/m)", "dBµV/m"),
        ("dB(W/m²)", "dBW/m²"),
        ("dB(W/(m²·MHz))", "dBW/m²/MHz"),
        ("dB(W/(m² · 4 kHz))", "dBW/m²/4 kHz"),
        ("dB(W/4 kHz)", "dBW/4 kHz"),
        ("dB(K⁻¹)", "dB/K"),
        ("dB(K)", "dBK"),
        ("dB(Hz)", "dBHz"),
        ("dB(m²)", "dBsm"),
        ("dB(1/m)", "dB(1/m)"),
    ],
)
def test_the_notation_with_the_reference_in_brackets_means_the_short_one(written: str, meaning: str) -> None:
    assert parse_unit(written) == parse_unit(meaning)


def test_units_are_equal_by_meaning_and_differ_where_physics_does() -> None:
    assert parse_unit("dBm/0.04 MHz") == parse_unit("dBm per 40 kHz")
    assert parse_unit("W/dm²") == parse_unit("W/(dm*dm)")
    names = [
        "dB",
        "dBi",
        "dBic",
        "dBd",
        "dBc",
        "dBr",
        "dBFS",
        "dB/K",
        "dB/°C",
        "dB/m",
        "dB p-p",
        "dB rms",
        "1",
    ]
    assert len({parse_unit(name) for name in names}) == len(names)


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("dBx", "nearest: dB"),
        ("Ghz/Vv", "'Vv' is not known"),
        ("mhz", "nine decades"),
        ("mw", "mW and MW"),
        ("MV", "nearest: "),
        ("dBu", "write dBµV or dBµV/m"),
        ("dBA", "A-weighted"),
        ("C", "°C"),
        ("mV/C", "°C"),
        ("dB(A)", "A-weighted"),
        ("dB (gain)", "a remark is no part"),
        ("dB/(Hz)", "dBc/Hz"),
        ("W/(1e99 m)^12", "cannot be counted in"),
        ("W/(1e-99 m)^12", "cannot be counted in"),
        ("NF", "not known"),
        ("dB/Hz", "dBc/Hz"),
        ("dBm EIRP", "'EIRP' is a plane"),
        ("dBm (TRP)", "'TRP' is a plane"),
        ("dBi/Hz", "not counted per bandwidth"),
        ("dBm/m", "not counted per"),
        ("dBm/MHz/kHz", "two bandwidths"),
        ("dBm/0 Hz", "no part of a unit"),
        ("m^99", "no part of a unit"),
        ("10 MHz", "a value with a unit"),
        ("dBm/", "a unit is missing"),
        ("W/(m2", "bracket does not close"),
        ("W)", "bracket does not close"),
        ("dBm!", "cannot be read from '!'"),
        ("V rms peak", "already says rms"),
        ("", "write 1 for a plain number"),
        ("x" * 200, "too long"),
    ],
)
def test_what_cannot_be_read_is_refused_with_what_would_help(text: str, says: str) -> None:
    with pytest.raises(UnitError) as refusal:
        parse_unit(text)
    assert says in str(refusal.value)


@given(st.text(max_size=30) | st.text("dBmWMHzkG/()0123456789 .^*-µ√%e", max_size=30))
@example("1e99 Hz/1e99 m")
@example("(" * 70)
@example("dB/1.23456789012345678 m")
@example("dBm/1.23456789012345678 MHz")
@example("dBm/0.001 Hz")
@example("dB/1e99 m")
@example("W^12/Hz^12/1e99 m^12")
def test_any_text_is_a_unit_or_a_refusal(text: str) -> None:
    try:
        unit = parse_unit(text)
    except UnitError as refusal:
        assert refusal.message
        return
    assert parse_unit(format_unit(unit)) == unit


_names = st.sampled_from(
    ["mW", "kHz", "m", "cm", "µs", "K", "V", "A", "Ω", "dB", "deg", "40 kHz", "ppm", "bit"]
)
_products = st.lists(st.tuples(_names, st.integers(1, 3)), min_size=1, max_size=4)


@given(st.sampled_from(["mW", "V", "GHz", "s", "dB", "%", "K"]), _products)
def test_a_product_of_units_reads_back_to_itself(head: str, below: list[tuple[str, int]]) -> None:
    text = "/".join([head, *(f"({name})^{exponent}" for name, exponent in below)])
    try:
        unit = parse_unit(text)
    except UnitError as refusal:
        assert any(word in str(refusal) for word in ("meaning", "bandwidth", "no power")), text
        return
    assert parse_unit(format_unit(unit)) == unit
