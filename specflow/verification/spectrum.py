"""How a reading moves from one reference bandwidth to another, and in which bandwidth it was recorded.

A noise-like reading scales by 10·log10 of the ratio, a discrete line does not; of a spectrum that nobody described only
the interval between the two is known. In dB only: what a ratio of powers does to a linear value depends on whether it
is a power or an amplitude, so there nothing is scaled.
"""

from __future__ import annotations

from specflow.errors import UnitError
from specflow.limits.conversion import unit_of
from specflow.model.evidence import SpectrumKind, ValueColumn
from specflow.units import Kind, Unit

#: What a density becomes in its bandwidth.
WITHOUT_BANDWIDTH = {
    Kind.LEVEL_DENSITY: Kind.LEVEL,
    Kind.FIELD_DENSITY: Kind.FIELD_LEVEL,
    Kind.POWER_FLUX_DENSITY: Kind.POWER_FLUX,
    Kind.RATIO_DENSITY: Kind.RATIO,
}
_SCALES = frozenset({*WITHOUT_BANDWIDTH, *WITHOUT_BANDWIDTH.values()})


def scales(unit: Unit) -> bool:
    """Whether values in this unit depend on the bandwidth they are measured in."""
    return unit.kind in _SCALES


def recorded_bandwidth(column: ValueColumn) -> float | None:
    """Return the bandwidth in Hz that a column refers to: that of its unit (dBm/kHz), else the one stated with it."""
    try:
        own = unit_of(column.unit or "1").bandwidth_hz
    except UnitError:
        own = None
    return own or column.quantity.bandwidth_hz


def shares(spectrum: SpectrumKind) -> tuple[float, float]:
    """Return the least and the greatest share of the step (10·log10 of the ratio) that a reading may move by."""
    if spectrum is SpectrumKind.NOISE_LIKE:
        return 1.0, 1.0
    return (0.0, 0.0) if spectrum is SpectrumKind.DISCRETE else (0.0, 1.0)
