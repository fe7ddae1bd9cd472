"""Dimensions and reference bandwidths as they are named."""

from __future__ import annotations

from fractions import Fraction

import pytest

from specflow.errors import UnitError
from specflow.units import density_of, dimension, level_of, parse_unit
from specflow.units.table import LINEAR


def test_every_dimension_of_the_table_can_be_read_and_named() -> None:
    for row in LINEAR:
        exponents = dimension.read(row.dimension)
        assert dimension.name(exponents), row.symbol


def test_every_named_dimension_is_written_in_the_order_of_the_bases() -> None:
    # A name under a key in another order would never be found.
    for key, name in dimension.NAMES.items():
        assert dimension.name(dimension.read(key)) == name


def test_bases_that_cancel_disappear() -> None:
    speed = dimension.read("m s^-1")
    assert dimension.multiply(speed, dimension.read("m"), Fraction(-1)) == dimension.read("s^-1")


def test_a_dimension_of_unknown_bases_is_an_error_of_the_table() -> None:
    with pytest.raises(ValueError, match="not a dimension"):
        dimension.read("furlong^2")


@pytest.mark.parametrize(
    "text", ["dBm/40 kHz", "dBW/m²/4 kHz", "dBc/Hz", "W/MHz", "dBµV/m/MHz", "dBm/MHz rms"]
)
def test_a_density_is_its_level_in_its_bandwidth(text: str) -> None:
    density = parse_unit(text)
    level = level_of(density)
    assert level.bandwidth_hz is None and density.bandwidth_hz is not None
    assert density_of(level, density.bandwidth_hz) == density
    assert str(density_of(level, density.bandwidth_hz)) == str(density)
    assert level_of(level) == level == parse_unit(str(level))


@pytest.mark.parametrize("text", ["dBi", "dB", "%", "GHz", "dB/K"])
def test_what_is_not_counted_per_bandwidth_has_no_density(text: str) -> None:
    with pytest.raises(UnitError, match="not counted per bandwidth"):
        density_of(parse_unit(text), 1e6)
