"""Format codes follow ECMA-376 part 1, 18.8.30 and 18.8.31; which are dates is compared with openpyxl's judgement."""

from __future__ import annotations

import pytest
from openpyxl.styles.numbers import BUILTIN_FORMATS, is_date_format

from specflow.importers.readers.number_format import BUILT_IN, odd_format
from specflow.importers.readers.odd_cells import OddCell, OddKind


@pytest.mark.parametrize(
    "code",
    ["General", "0.00", "#,##0.00", "0.00E+00", "##0.0E-0", "@", "# ?/?", "[Red]0.0;[Blue]-0.0", "[<1]0.00;0.0",
     '_(* #,##0.00_);_(* (#,##0.00)', "0.0_-", '0.0;-0.0;"none"', "[$-409]0.00", "#,##0.00_);(#,##0.00)"],
)  # fmt: skip
def test_plain_formats_are_not_odd(code: str) -> None:
    assert odd_format(200, code) is None


@pytest.mark.parametrize(
    ("code", "unit"),
    [
        ('0.0" dBm"', "dBm"),
        (r"0.0\ \d\B\m", "dBm"),
        ('General" dB"', "dB"),
        ('0.0 "dBm/MHz"', "dBm/MHz"),
        ('0.0"%"', "%"),
        (r"0.0\%", "%"),
        ('0.0" dBm";-0.0" dBm"', "dBm"),
        ('"@"\\ 0.0\\ "V"', "V"),
        ("#,##0.00 [$€-407]", "€"),
        ('"P = "0.0', "P ="),
        ('0.0"°C"', "°C"),
        ("0.0°", "°"),
        ('0" days"', "days"),
        ("$#,##0.00", ""),
    ],
)
def test_text_beside_the_number_is_reported_as_unit(code: str, unit: str) -> None:
    expected = OddCell(OddKind.UNIT_FORMAT, code, unit) if unit else OddCell(OddKind.UNIT_FORMAT, code, "$")
    assert odd_format(200, code) == expected


@pytest.mark.parametrize("code", ["0%", "0.0 %", '0.0%" rms"', "[Red]0.0%"])
def test_percent_formats_are_told_apart_from_a_percent_sign_in_text(code: str) -> None:
    odd = odd_format(200, code)
    assert odd is not None
    assert odd.kind is OddKind.PERCENT


@pytest.mark.parametrize(("code", "unit"), [("0.0,", ""), ('0.0,"k"', "k"), ('#,##0.0,," MHz"', "MHz")])
def test_numbers_shown_in_thousands_are_reported(code: str, unit: str) -> None:
    assert odd_format(200, code) == OddCell(OddKind.SCALED, code, unit)


@pytest.mark.parametrize(
    "code", ["yyyy-mm-dd", "d-mmm", "[h]:mm", "mm:ss.0", "h:mm AM/PM", "[$-409]d mmm yyyy"]
)
def test_date_formats_are_reported(code: str) -> None:
    odd = odd_format(200, code)
    assert odd is not None
    assert odd.kind is OddKind.DATE
    assert is_date_format(code)


@pytest.mark.parametrize("number", sorted(BUILT_IN))
def test_built_in_formats_are_dates_where_openpyxl_says_so(number: int) -> None:
    odd = odd_format(number, None)
    assert (odd is not None and odd.kind is OddKind.DATE) == is_date_format(BUILTIN_FORMATS[number])


def test_built_in_numbers_without_a_code_are_known() -> None:
    assert odd_format(10, None) == OddCell(OddKind.PERCENT, "0.00%")
    assert odd_format(44, None) == OddCell(OddKind.UNIT_FORMAT, "built-in format 44", "currency")
    assert odd_format(30, None) == OddCell(OddKind.DATE, "built-in format 30")
    assert odd_format(999, None) is None


def test_a_declared_code_stands_before_the_built_in_one() -> None:
    assert odd_format(10, '0.0" dB"') == OddCell(OddKind.UNIT_FORMAT, '0.0" dB"', "dB")
