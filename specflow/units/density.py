"""Reference bandwidths of densities: taking one off a unit and putting one on."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

from specflow.errors import UnitError
from specflow.units.kinds import Kind
from specflow.units.unit import Unit

IN_BANDWIDTH = {
    Kind.LEVEL: Kind.LEVEL_DENSITY,
    Kind.POWER_FLUX: Kind.POWER_FLUX_DENSITY,
    Kind.FIELD_LEVEL: Kind.FIELD_DENSITY,
    Kind.RATIO: Kind.RATIO_DENSITY,
}
_WITHOUT_BANDWIDTH = {density: level for level, density in IN_BANDWIDTH.items()}
_GAUGES_WITH_DENSITY = ("", "c", "r", "FS")


def density_of(unit: Unit, bandwidth_hz: float) -> Unit:
    """The density of a level, field, flux or relative level in a reference bandwidth: dBm in 1e6 Hz is dBm/MHz.

    Raises UnitError for a unit that is not counted per bandwidth (dBi, dB, GHz).
    """
    kind = IN_BANDWIDTH.get(unit.kind)
    is_bare_ratio = unit.kind is Kind.RATIO and not (unit.is_log and unit.gauge)
    if kind is None or is_bare_ratio or unit.gauge not in _GAUGES_WITH_DENSITY:
        raise UnitError(f"{unit} is not counted per bandwidth")
    symbol = f"{_bare(unit)}/{hertz(bandwidth_hz).removeprefix('1 ')}"
    return replace(unit, symbol=_measured(symbol, unit), kind=kind, bandwidth_hz=bandwidth_hz)


def level_of(density: Unit) -> Unit:
    """The unit without its reference bandwidth: dBm of dBm/MHz; any other unit as it is."""
    if density.bandwidth_hz is None:
        return density
    symbol = _measured(_bare(density).rpartition("/")[0], density)
    return replace(density, symbol=symbol, kind=_WITHOUT_BANDWIDTH[density.kind], bandwidth_hz=None)


def hertz(value: float) -> str:
    """A bandwidth in the prefix that people would use, exact: "40 kHz", "1 MHz"."""
    for size, symbol in ((1e9, "GHz"), (1e6, "MHz"), (1e3, "kHz")):
        text = f"{value / size:.12g}"
        if value >= size and Fraction(text) * Fraction(size) == Fraction(repr(value)):
            return f"{text} {symbol}"
    return f"{value!r} Hz".replace(".0 ", " ")


def _bare(unit: Unit) -> str:
    return unit.symbol.removesuffix(f" {unit.measure}") if unit.measure else unit.symbol


def _measured(symbol: str, unit: Unit) -> str:
    return f"{symbol} {unit.measure}" if unit.measure else symbol
