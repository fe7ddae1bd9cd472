"""Units as sheets and instruments spell them: read where there is one meaning, refused where there are two."""

from __future__ import annotations

import pytest

from specflow.errors import UnitError
from specflow.units import parse_unit


@pytest.mark.parametrize(
    ("written", "unit"),
    [
        ("dBuVPerMeter", "dBµV/m"),  # an export that names its units as words
        ("dBmPerHz", "dBm/Hz"),
        ("mW/cm*cm", "mW/cm²"),  # a published exposure worksheet writes both of these
        ("mW/(cm*cm)", "mW/cm²"),
        ("uA/um", "µA/µm"),
        ("dB uV/m", "dBµV/m"),
        ("Deg C", "°C"),
        ("deg.", "deg"),
        ("MHz:", "MHz"),
        ("GHZ", "GHz"),
        ("Mhz", "MHz"),
        ("dbm", "dBm"),
        ("V DC", "V"),
        ("mVdc", "mV"),
    ],
)
def test_one_meaning(written: str, unit: str) -> None:
    assert str(parse_unit(written)) == unit


@pytest.mark.parametrize("written", ["V/m*s", "dBW/m2*MHz", "mhz", "mw", "dBX", "dBu", "dB K"])
def test_two_meanings_or_none(written: str) -> None:
    with pytest.raises(UnitError):
        parse_unit(written)
