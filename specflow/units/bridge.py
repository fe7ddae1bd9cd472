"""What lies between two units besides their size: a bandwidth, an impedance, a gauge. Or a refusal.

A bridge is a law on linear SI values, ``y = factor · x ** power``, and a number of dB between two gauges. Each one that
is more than the same quantity in another size was asked for by an argument, and says so in its notes.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

from specflow.errors import UnitError
from specflow.units.density import hertz
from specflow.units.kinds import Kind, Spectrum
from specflow.units.refusal import no_conversion
from specflow.units.table import AMPLITUDES, DIPOLE_OVER_ISOTROPIC_DB
from specflow.units.unit import Unit

FREE_SPACE_OHM = 376.730313412
"""Wave impedance of free space, CODATA 2022: valid in the far field of a source, asked for by passing it."""


@dataclass(frozen=True, slots=True)
class Bridge:
    factor: float = 1.0
    power: float = 1.0
    shift_db: float = 0.0
    notes: tuple[str, ...] = ()


# y = x ** power · R ** exponent, for the pairs of dimensions that an impedance connects.
_THROUGH_IMPEDANCE = {
    ("voltage", "power"): (2.0, -1.0),
    ("power", "voltage"): (0.5, 0.5),
    ("current", "power"): (2.0, 1.0),
    ("power", "current"): (0.5, -0.5),
    ("voltage", "current"): (1.0, -1.0),
    ("current", "voltage"): (1.0, 1.0),
    ("electric field", "power flux"): (2.0, -1.0),
    ("power flux", "electric field"): (0.5, 0.5),
    ("magnetic field", "power flux"): (2.0, 1.0),
    ("power flux", "magnetic field"): (0.5, -0.5),
    ("electric field", "magnetic field"): (1.0, -1.0),
    ("magnetic field", "electric field"): (1.0, 1.0),
}


def between(
    source: Unit, target: Unit, bandwidth_hz: float | None, spectrum: Spectrum, impedance_ohm: float | None
) -> Bridge:
    """The bridge from one unit to the other; raises UnitError that names what is missing."""
    if _lacks_more_than_a_bandwidth(source, target):
        raise no_conversion(source, target)
    link = _through_impedance(source, target, impedance_ohm)
    if source.bandwidth_hz != target.bandwidth_hz:
        link = _through_bandwidth(source, target, link, bandwidth_hz, spectrum)
    return _between_gauges(source, target, link) if source.gauge != target.gauge else link


def _lacks_more_than_a_bandwidth(source: Unit, target: Unit) -> bool:
    """Whether the units measure different things even where bandwidth and impedance are known."""
    if source.dimension == target.dimension:
        ratios = {Kind.RATIO, Kind.RATIO_DENSITY}
        return (source.kind in ratios) != (target.kind in ratios)
    return (source.dimension, target.dimension) not in _THROUGH_IMPEDANCE


def _through_impedance(source: Unit, target: Unit, impedance_ohm: float | None) -> Bridge:
    if source.dimension == target.dimension:
        return Bridge()
    fields = {source.dimension, target.dimension} & {"electric field", "magnetic field", "power flux"}
    if impedance_ohm is None:
        free = f"the wave impedance is missing: {FREE_SPACE_OHM:.2f} Ω in free space and the far field, to be asked for"
        hint = free if fields else "the impedance is missing"
        raise UnitError(f"{source} cannot be converted to {target}", hint=hint)
    peaks = [unit for unit in (source, target) if unit.measure in ("p-p", "peak")]
    if peaks:
        hint = f"{peaks[0]} is not an rms value: the wave form is missing"
        raise UnitError(f"{source} cannot be converted to {target}", hint=hint)
    power, exponent = _THROUGH_IMPEDANCE[source.dimension, target.dimension]
    where = "wave impedance" if fields else "across"
    note = f"{where} {impedance_ohm:.9g} Ω, rms values" + (", far field" if fields else "")
    return Bridge(impedance_ohm**exponent, power, notes=(note,))


def _through_bandwidth(
    source: Unit, target: Unit, link: Bridge, bandwidth_hz: float | None, spectrum: Spectrum
) -> Bridge:
    """Another reference bandwidth, or a density integrated over a bandwidth: for noise-like signals only."""
    refused = f"{source} cannot be converted to {target}"
    if bandwidth_hz is None and None in (source.bandwidth_hz, target.bandwidth_hz):
        raise UnitError(refused, hint="the bandwidth is missing, and that the signal is noise-like in it")
    if spectrum is Spectrum.DISCRETE:
        hint = "a discrete line does not scale with bandwidth: compare its level as it is"
        raise UnitError(refused, hint=hint)
    if spectrum is Spectrum.UNKNOWN:
        hint = "whether the spectrum is noise-like or a discrete line is missing: only noise scales with bandwidth"
        raise UnitError(refused, hint=hint)
    before, after = (unit.bandwidth_hz or bandwidth_hz or 1.0 for unit in (source, target))
    ratio = after / before
    factor = math.sqrt(ratio) if target.dimension in AMPLITUDES else ratio
    note = f"noise-like, {hertz(before)} to {hertz(after)} is {10 * math.log10(ratio):+.4g} dB"
    return replace(link, factor=link.factor * factor, notes=(*link.notes, note))


def _between_gauges(source: Unit, target: Unit, link: Bridge) -> Bridge:
    if (source.kind, target.kind) == (Kind.RATIO, Kind.RATIO) and {source.gauge, target.gauge} == {"i", "d"}:
        shift = DIPOLE_OVER_ISOTROPIC_DB if target.gauge == "i" else -DIPOLE_OVER_ISOTROPIC_DB
        note = f"a half-wave dipole has {DIPOLE_OVER_ISOTROPIC_DB} dBi"
        return replace(link, shift_db=shift, notes=(*link.notes, note))
    raise no_conversion(source, target)
