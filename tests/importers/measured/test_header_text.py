"""Headers as laboratories write them."""

from __future__ import annotations

import pytest

from specflow.importers.measured.header_text import header_key, read_header


@pytest.mark.parametrize(
    ("text", "name", "unit"),
    [
        ("Gain (dB)", "Gain", "dB"),
        ("Pout [dBm]", "Pout", "dBm"),
        ("EIRP / dBm", "EIRP", "dBm"),
        ("f, GHz", "f", "GHz"),
        ("Temp °C", "Temp", "°C"),
        ("T (°C)", "T", "°C"),
        ("Gain in dB", "Gain", "dB"),
        ("gain_db", "gain", "db"),
        ("EIRP density (dBm/MHz)", "EIRP density", "dBm/MHz"),
        ("  Gain\n(dB) ", "Gain", "dB"),
        ("± dB", "±", "dB"),
        ("Gain", "Gain", ""),
        ("Gain (min)", "Gain", ""),  # the least of several, not minutes
    ],
)
def test_name_and_unit(text: str, name: str, unit: str) -> None:
    parts = read_header(text)
    assert (parts.name, parts.unit) == (name, unit)


def test_what_follows_the_at_sign_is_a_place() -> None:
    assert read_header("Gain @ antenna face (dB)").place == "antenna face"
    assert read_header("Gain @ 28 GHz (dB)").place == "28 GHz"
    assert read_header("Gain @ 28 GHz (dB)").unit == "dB"


def test_a_coverage_factor_is_found_wherever_it_stands() -> None:
    for text in ("U (dB), k=2", "U (k=2) [dB]", "U, k = 2, (dB)", "U (dB, k=2)"):
        parts = read_header(text)
        assert (parts.name, parts.unit, parts.k) == ("U", "dB", 2.0), text


def test_decibels_of_something_unheard_of_are_no_unit() -> None:
    parts = read_header("Channel power [dBX]")
    assert (parts.unit, parts.odd_unit) == ("", "dBX")


def test_headers_are_the_same_whatever_their_blanks_and_case() -> None:
    assert header_key("Gain [dB]") == header_key(" gain (dB)")
    assert header_key("Gain (dB)") != header_key("Gain (dBm)")
