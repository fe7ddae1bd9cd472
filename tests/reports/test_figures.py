"""Rounding for reading: nothing is shown more exactly than it is known, and nothing is hidden that decides."""

from __future__ import annotations

import math
from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specflow.model.report import CellTone
from specflow.model.verdict import Label, Verdict
from specflow.reports.figures import (
    DASH,
    interval,
    label_tone,
    margin,
    number,
    reading,
    rounded,
    share,
    text,
    verdict_tone,
)


@pytest.mark.parametrize(
    ("value", "shown"),
    [
        (45.0, "45"),
        (27.5, "27.5"),
        (45.001, "45.00"),  # rounded away: the zeros say so
        (19.999, "20.00"),
        (0.125, "0.13"),  # halves away from zero, as spreadsheet programs show them
        (-0.125, "-0.13"),
        (1234.56, "1234.6"),
        (123456.7, "123457"),
        (0.00123456, "0.00123"),
        (0.00001, "1e-05"),
        (1e9, "1e+09"),
        (0.0, "0"),
        (-0.0, "0"),
        (math.inf, "no bound"),
        (math.nan, DASH),
    ],
)
def test_values_are_rounded_for_reading(value: float, shown: str) -> None:
    assert rounded(value) == shown


@pytest.mark.parametrize(
    ("value", "shown"),
    [(0.4, "+0.40 dB"), (-1.0, "-1.00 dB"), (0.0, "+0.00 dB"), (-0.004, "-0.004 dB"), (-1e-12, "+0.00 dB")],
)
def test_margins_keep_their_sign_and_two_decimals(value: float, shown: str) -> None:
    assert margin(value, "dB").text == shown


def test_only_a_negative_margin_is_bad() -> None:
    assert margin(-0.001, "dB").tone is CellTone.BAD
    assert margin(0.0, "dB").tone is CellTone.PLAIN
    assert margin(math.nan, "dB").text == DASH
    assert margin(math.inf, "dB").number is None


@given(st.floats(-1e6, 1e6, allow_nan=False, allow_subnormal=False))
def test_rounding_is_within_half_a_digit_of_what_is_shown(value: float) -> None:
    shown = Decimal(rounded(value))
    digit = Decimal(1).scaleb(int(shown.as_tuple().exponent))
    assert abs(shown - Decimal(repr(value))) <= max(digit / 2, abs(shown) * Decimal("0.0005"))


def test_bounds_are_not_shown_as_values() -> None:
    assert interval(-math.inf, -90.0, "dBm") == "≤ -90 dBm"
    assert interval(60.0, math.inf, "dB") == "≥ 60 dB"
    assert interval(1.0, 2.0, "dB") == "1 to 2 dB"
    assert reading(-math.inf, -90.0, "dBm").number is None
    assert reading(3.0, 3.0, "dB").number == 3.0


def test_nothing_is_shown_as_a_dash() -> None:
    assert text("").text == text(None).text == number(math.nan, "dB").text == DASH
    assert share(31, 48) == "31 of 48"


def test_every_label_and_verdict_has_a_tone_of_its_kind() -> None:
    assert label_tone(Label.FAILING) is verdict_tone(Verdict.FAIL) is CellTone.BAD
    assert label_tone(Label.CLOSED_WAIVED) is not CellTone.GOOD, "a waiver never makes compliant"
    assert {label_tone(label) for label in Label} == {
        CellTone.GOOD,
        CellTone.DOUBTFUL,
        CellTone.BAD,
        CellTone.QUIET,
    }
