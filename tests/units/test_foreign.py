"""Units that our table lacks come from pint, and only where pint's reading is no guess."""

from __future__ import annotations

import subprocess
import sys

import pint
import pytest

from specflow.errors import UnitError
from specflow.units import Kind, convert, parse_unit


@pytest.mark.parametrize(
    ("text", "pascal"), [("psi", 6894.757293168), ("torr", 133.322368421), ("atm", 101325.0)]
)
def test_a_pressure_unit_is_read_by_pint(text: str, pascal: float) -> None:  # NIST SP 811, appendix B.8
    assert convert(1.0, parse_unit(text), parse_unit("Pa")) == pytest.approx(pascal, rel=1e-9)


def test_pint_misreads_what_our_table_reads() -> None:
    registry: pint.UnitRegistry[float] = pint.UnitRegistry()
    assert str(registry.Unit("pct")) == "picocarat"
    assert str(registry.Unit("dBi")) == "decibiot"
    assert parse_unit("pct") == parse_unit("%")
    assert parse_unit("dBi").kind is Kind.RATIO and parse_unit("dBi").gauge == "i"


@pytest.mark.parametrize("text", ["pcarat", "dBq", "statvolt", "count", "turn", "mpsi"])
def test_a_guess_of_pint_is_refused(text: str) -> None:
    with pytest.raises(UnitError):
        parse_unit(text)


@pytest.mark.parametrize(
    ("text", "scale"), [("megahertz", 1e6), ("kilowatt", 1e3), ("nanoseconds", 1e-9), ("fathom", 1.8288)]
)
def test_a_written_out_name_is_read_by_pint(text: str, scale: float) -> None:  # a fathom is 6 feet
    assert parse_unit(text).scale == pytest.approx(scale, rel=1e-5)


_WORDS = [
    "link",
    "chain",
    "point",
    "pole",
    "section",
    "shot",
    "gamma",
    "sigma",
    "lambda",
    "hand",
    "are",
    "gray",
]


@pytest.mark.parametrize("word", _WORDS)
def test_a_word_of_the_trade_is_no_old_unit(word: str) -> None:
    assert pint.UnitRegistry().parse_unit_name(word), "pint would have read it"
    with pytest.raises(UnitError, match="not known"):
        parse_unit(word)


def test_ordinary_units_never_import_pint() -> None:
    script = """
import sys
from specflow.units import convert, parse_quantity, parse_unit
for text in "GHz MHz °C s A V W Ω dBm dBm/MHz dBi dB/K W/m² % ppm dBµV/m K deg ns RB dBc/Hz nV/√Hz Mbit/s".split():
    parse_unit(text)
convert(27.5, parse_unit("GHz"), parse_unit("MHz"))
parse_quantity("75 dBm/100 MHz")
sys.exit("pint" in sys.modules or "scipy" in sys.modules)
"""
    assert subprocess.run([sys.executable, "-c", script], check=False, timeout=60).returncode == 0
