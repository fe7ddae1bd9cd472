"""A value with its unit, from text and for people."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.errors import UnitError
from specflow.units import (
    Quantity,
    bandwidth_words,
    format_quantity,
    format_value,
    parse_quantity,
    parse_unit,
    split_quantity,
)


@pytest.mark.parametrize(
    ("text", "value", "unit"),
    [
        ("45 dBm", 45.0, "dBm"),
        ("-13 dBm/MHz", -13.0, "dBm/MHz"),
        ("75 dBm/100 MHz", 75.0, "dBm/100 MHz"),
        ("3.2 dB", 3.2, "dB"),
        ("−3,2dB", -3.2, "dB"),
        ("27.5GHz", 27.5, "GHz"),
        ("2 kHz", 2000.0 / 1000.0, "kHz"),
        ("1 234,5 MHz", 1234.5, "MHz"),
        ("1e-3 W", 1e-3, "W"),
        ("0.05 ppm", 0.05, "ppm"),
        ("17.5 %", 17.5, "%"),
        ("85°C", 85.0, "°C"),
        ("0.5 1", 0.5, "1"),
        ("0.36 V/m", 0.36, "V/m"),
        ("5 mW/(cm*cm)", 5.0, "mW/cm²"),
    ],
)
def test_a_quantity_is_read(text: str, value: float, unit: str) -> None:
    assert parse_quantity(text) == Quantity(value, parse_unit(unit))


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("45", "has no unit"),
        ("dBm", "begin with a number"),
        ("1,234 MHz", "1.234 or as 1234"),
        ("45 dBq", "not known"),
    ],
)
def test_what_is_no_quantity_is_refused(text: str, says: str) -> None:
    with pytest.raises(UnitError) as refusal:
        parse_quantity(text)
    assert says in str(refusal.value)


def test_a_quantity_is_split_into_its_texts() -> None:
    assert split_quantity("-13 dBm/40 kHz") == ("-13", "dBm/40 kHz")
    assert split_quantity("1\u00a0000 MHz") == ("1 000", "MHz")
    assert split_quantity("42") == ("42", "")


@pytest.mark.parametrize(
    ("value", "decimals", "text"),
    [
        (45.0, None, "45 dBm"),
        (-0.4, None, "-0.4 dBm"),
        (0.1 + 0.2, None, "0.3 dBm"),
        (-0.0, None, "0 dBm"),
        (-0.04, 1, "0.0 dBm"),
        (2.675, 2, "2.67 dBm"),
        (29.5, 1, "29.5 dBm"),
        (1e-7, None, "1e-07 dBm"),
        (100000000.0, None, "100000000 dBm"),
        (float("-inf"), None, "-inf dBm"),
        (float("nan"), 1, "not a number dBm"),
    ],
)
def test_a_quantity_is_written_for_people(value: float, decimals: int | None, text: str) -> None:
    assert format_quantity(value, parse_unit("dBm"), decimals=decimals) == text


def test_a_plain_number_is_written_without_its_unit() -> None:
    assert format_quantity(1.5, parse_unit("1")) == "1.5"
    assert str(Quantity(1.5, parse_unit("dB/K"))) == "1.5 dB/K"
    assert str(Quantity(np.array([1.0, 2.0]), parse_unit("dB"))) == "[1. 2.] dB"


_units = st.sampled_from(
    ["dBm", "dBm/40 kHz", "dBµV/m", "dB p-p", "% rms", "°C", "GHz", "Ω", "dBW/m²/MHz", "ppm", "ns"]
)


@given(st.integers(-(10**9), 10**9), st.integers(0, 5), _units)
def test_a_written_quantity_reads_back_to_itself(digits: int, places: int, unit: str) -> None:
    value = digits / 10**places
    assert parse_quantity(format_quantity(value, parse_unit(unit))) == Quantity(value, parse_unit(unit))


@given(st.floats(allow_nan=False, allow_infinity=False, min_value=-1e15, max_value=1e15))
def test_a_written_value_is_the_value_to_twelve_digits(value: float) -> None:
    assert float(format_value(value)) == pytest.approx(value, rel=1e-11)


@pytest.mark.parametrize(
    ("hertz", "words"),
    [(1e6, "1 MHz"), (1.4e6, "1.4 MHz"), (4e4, "40 kHz"), (300.0, "300 Hz"), (2e9, "2 GHz")],
)
def test_a_bandwidth_is_said_in_the_unit_of_its_size(hertz: float, words: str) -> None:
    assert bandwidth_words(hertz) == words
