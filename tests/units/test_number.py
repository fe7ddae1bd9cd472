"""Numbers as people write them."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.errors import UnitError
from specflow.units import parse_number


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("3.2", 3.2),
        ("-3.2", -3.2),
        ("\u22123.2", -3.2),
        ("\u20133.2", -3.2),
        ("\u20113.2", -3.2),
        ("+3.2", 3.2),
        ("- 3.2", -3.2),
        ("−3,2", -3.2),
        ("0,123", 0.123),
        ("3,1416", 3.1416),
        (",5", 0.5),
        (".5", 0.5),
        ("5.", 5.0),
        ("1e-3", 1e-3),
        ("1.5E+06", 1.5e6),
        ("1,5e3", 1500.0),
        ("1 234.5", 1234.5),
        ("1\u00a0234,5", 1234.5),
        ("1\u202f234\u202f567", 1234567.0),
        ("1'234.5", 1234.5),
        ("1,234.5", 1234.5),
        ("1.234,5", 1234.5),
        ("1,234,567", 1234567.0),
        ("1.234.567", 1234567.0),
        ("1.234", 1.234),
        ("\ufeff42 ", 42.0),
        ("-0", 0.0),
    ],
)
def test_a_number_is_read_as_it_was_meant(text: str, value: float) -> None:
    assert parse_number(text) == value


@pytest.mark.parametrize("text", ["1,234", "-12,345", "999,999"])
def test_a_comma_that_could_be_either_is_refused_with_both_readings(text: str) -> None:
    with pytest.raises(UnitError) as refusal:
        parse_number(text)
    assert text.lstrip("-").replace(",", ".") in str(refusal.value)
    assert text.lstrip("-").replace(",", "") in str(refusal.value)
    assert parse_number(text, decimal_comma=True) == float(text.replace(",", "."))
    assert parse_number(text, decimal_comma=False) == float(text.replace(",", ""))


def test_a_sheet_that_states_its_decimal_sign_is_held_to_it() -> None:
    assert parse_number("1.234", decimal_comma=True) == 1234.0
    with pytest.raises(UnitError, match="decimal point where decimal commas"):
        parse_number("3.2", decimal_comma=True)
    with pytest.raises(UnitError, match="decimal comma where decimal points"):
        parse_number("3,2", decimal_comma=False)
    assert parse_number("42", decimal_comma=True) == 42.0


@pytest.mark.parametrize(
    "text",
    [
        "",
        "-",
        "--3",
        "1.2.3",
        "1,2,3",
        "1 23",
        "12 34 567",
        "3.2x",
        "1,23,456",
        "12/05/2024",
        "0x10",
        "1e400",
        "nan",
        "inf",
    ],
)
def test_what_is_no_number_is_refused(text: str) -> None:
    with pytest.raises(UnitError):
        parse_number(text)


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_a_number_written_in_full_reads_back_to_itself(value: float) -> None:
    assert parse_number(repr(value)) == value
    assert parse_number(repr(value).replace("-", "\u2212")) == value


@given(st.integers(-(10**12), 10**12), st.integers(0, 99))
def test_grouping_and_decimal_comma_do_not_change_the_value(whole: int, cents: int) -> None:
    english = f"{whole:,}.{cents:02d}"
    continental = english.translate(str.maketrans(",.", ".,"))
    value = float(english.replace(",", ""))
    assert parse_number(english) == value
    assert parse_number(continental) == value
    assert parse_number(english.replace(",", "\u202f")) == value


def test_one_group_behind_the_other_mark_is_either_where_grouping_is_not_known() -> None:
    for text, comma in (("1.234", True), ("-12.345", True), ("1,234", False)):
        with pytest.raises(UnitError, match="can be read as"):
            parse_number(text, decimal_comma=comma, grouped=False)
    assert parse_number("1.234,5", decimal_comma=True, grouped=False) == 1234.5
    assert parse_number("1.234.567", decimal_comma=True, grouped=False) == 1234567.0
    assert parse_number("1,234", decimal_comma=True, grouped=False) == 1.234
    assert parse_number("1.234", decimal_comma=False, grouped=False) == 1.234
