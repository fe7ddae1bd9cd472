"""Result cells: points, bounds, ranges, blanks, and what is refused."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.errors import UnitError
from specflow.units import Blank, Reading, parse_reading, parse_reading_with_unit, parse_unit


@pytest.mark.parametrize(
    ("text", "lo", "hi"),
    [
        ("-3.2", -3.2, -3.2),
        ("−3,2", -3.2, -3.2),
        ("1 234.5", 1234.5, 1234.5),
        ("<-90", -math.inf, -90.0),
        ("< −90", -math.inf, -90.0),
        ("≤ -90", -math.inf, -90.0),
        ("<= -90", -math.inf, -90.0),
        ("=< -90", -math.inf, -90.0),
        ("> 60", 60.0, math.inf),
        ("≥60", 60.0, math.inf),
        (">=60", 60.0, math.inf),
        ("-90 … -80", -90.0, -80.0),
        ("-90..-80", -90.0, -80.0),
        ("1.5 to 2.5", 1.5, 2.5),
    ],
)
def test_a_cell_is_an_interval(text: str, lo: float, hi: float) -> None:
    reading = parse_reading(text)
    assert reading == Reading(lo, hi, text)
    assert reading.is_point is (lo == hi)


@pytest.mark.parametrize(
    ("text", "reason"),
    [
        ("", "nothing written"),
        ("  ", "nothing written"),
        ("—", "nothing written"),
        ("-", "nothing written"),
        ("–", "nothing written"),
        ("N/A", "not applicable"),
        ("n.a.", "not applicable"),
        ("#N/A", "not applicable"),
        ("n.m.", "not measured"),
        ("OL", "overload of the instrument"),
        ("UNCAL", "invalid at the instrument"),
        ("NaN", "not a number"),
        ("TBD", "to be determined"),
        ("#DIV/0!", "error in the cell"),
        ("9.91E37", "not a number, as SCPI instruments write it"),
        ("-9.9e37", "not a number, as SCPI instruments write it"),
    ],
)
def test_a_cell_without_a_result_says_why(text: str, reason: str) -> None:
    assert parse_reading(text) == Blank(reason, text)


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("1,234", "1.234 or as 1234"),
        ("<-1,234", "1.234 or as 1234"),
        ("3.2 ± 0.1", "uncertainty belongs in a column"),
        ("~3.2", "approximate"),
        ("3.2*", "note in a column"),
        ("(3.2)", "brackets"),
        ("-80 … -90", "smaller value first"),
        ("pass", "not a number"),
        ("12/05/2024", "not a number"),
        ("> OL", "not a number"),
    ],
)
def test_a_doubtful_cell_is_refused(text: str, says: str) -> None:
    with pytest.raises(UnitError) as refusal:
        parse_reading(text)
    assert says in str(refusal.value)


@pytest.mark.parametrize(
    ("text", "lo", "hi", "unit"),
    [
        ("<-90 dBm", -math.inf, -90.0, "dBm"),
        ("> 60dB", 60.0, math.inf, "dB"),
        ("-3.2dB", -3.2, -3.2, "dB"),
        ("27.5 GHz", 27.5, 27.5, "GHz"),
        ("5%", 5.0, 5.0, "%"),
        ("2 V", 2.0, 2.0, "V"),
        ("1 000 MHz", 1000.0, 1000.0, "MHz"),
        ("-13 dBm/40 kHz", -13.0, -13.0, "dBm/40 kHz"),
        ("1e-3 W", 1e-3, 1e-3, "W"),
        ("1.5:1", 1.5, 1.5, "1"),
        ("< 1.5 : 1", -math.inf, 1.5, "1"),
        ("1.5 to 2.5 dB", 1.5, 2.5, "dB"),
        ("-90 … -80 dBm", -90.0, -80.0, "dBm"),
    ],
)
def test_a_unit_behind_the_reading_is_read_with_it(text: str, lo: float, hi: float, unit: str) -> None:
    assert parse_reading_with_unit(text) == (Reading(lo, hi, text), parse_unit(unit))


def test_a_reading_without_a_unit_has_none() -> None:
    assert parse_reading_with_unit("-3.2") == (Reading(-3.2, -3.2, "-3.2"), None)
    assert parse_reading_with_unit("1.5 to 2.5") == (Reading(1.5, 2.5, "1.5 to 2.5"), None)
    assert parse_reading_with_unit("n.m.") == (Blank("not measured", "n.m."), None)
    with pytest.raises(UnitError):
        parse_reading_with_unit("3.2 xyz")


@given(st.text(max_size=20))
def test_any_text_is_a_reading_a_blank_or_a_refusal(text: str) -> None:
    try:
        result = parse_reading(text)
    except UnitError:
        return
    assert isinstance(result, Blank) or result.lo <= result.hi
