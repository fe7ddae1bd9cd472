"""What physics is missing between two units that cannot be converted, in words.

A refusal is only worth something when it names the missing piece: a bandwidth, a carrier level, an antenna gain, a
directivity, a path between planes.
"""

from __future__ import annotations

from specflow.errors import UnitError
from specflow.units.kinds import Kind
from specflow.units.unit import Unit

_GAUGES = {
    "i": "relative to an isotropic antenna",
    "ic": "relative to an isotropic antenna of circular polarisation",
    "d": "relative to a half-wave dipole",
    "c": "relative to the carrier",
    "r": "relative to a stated reference level",
    "FS": "relative to full scale",
    "": "a plain ratio that does not say what it is relative to",
}

_LEVELS = {Kind.LEVEL, Kind.LEVEL_DENSITY}
_FIELDS = {Kind.FIELD_LEVEL, Kind.FIELD_DENSITY, Kind.POWER_FLUX, Kind.POWER_FLUX_DENSITY}


def no_conversion(source: Unit, target: Unit) -> UnitError:
    """The error for two units of which one cannot become the other, with the missing piece as its hint."""
    return UnitError(f"{source} cannot be converted to {target}", hint=missing(source, target))


def missing(source: Unit, target: Unit) -> str:
    """What would be needed to get from one unit to the other, or why nothing can help."""
    if {source.kind, target.kind} <= {Kind.RATIO, Kind.RATIO_DENSITY}:
        return _between_ratios(source, target)
    for left, right in ((source, target), (target, source)):
        found = _between_kinds(left, right) or _between_dimensions(left, right)
        if found:
            return found
    return f"{source} is {_article(source)}, {target} is {_article(target)}: nothing relates the two"


def _article(unit: Unit) -> str:
    what = unit.dimension if unit.kind in (Kind.PHYSICAL, Kind.PHYSICAL_LOG) else unit.kind.value
    return f"{'an' if what[0] in 'aeio' else 'a'} {what}"


def _between_ratios(source: Unit, target: Unit) -> str:
    gauges = {source.gauge, target.gauge}
    if gauges in ({"i", "ic"}, {"d", "ic"}):
        return "linear and circular polarisation: the polarisation loss is missing"
    if "c" in gauges and "FS" in gauges:
        return "the carrier level in dBFS is missing"
    return f"{source} is {_GAUGES[source.gauge]}, {target} {_GAUGES[target.gauge]}: the reference is missing"


def _between_kinds(left: Unit, right: Unit) -> str:
    """The missing piece when ``left`` and ``right`` stand in this order, or nothing."""
    if left.kind is Kind.RATIO and right.kind in _LEVELS | _FIELDS:
        return _from_ratio_to_level(left)
    if left.kind is Kind.RATIO_DENSITY and right.kind in _LEVELS:
        return "the carrier level is missing"
    if left.kind in _LEVELS and right.kind in _FIELDS:
        return "the distance and the antenna gain, or the antenna factor, are missing"
    if left.kind is Kind.MERIT and right.kind is Kind.RATIO:
        return "the system noise temperature is missing"
    if left.kind is Kind.MERIT and right.kind is Kind.DB_SLOPE:
        return "a figure of merit (G/T) is not a slope over temperature: write a slope as dB/°C"
    if left.kind is Kind.DB_PER_LENGTH:
        return "the length is missing"
    if left.kind is Kind.DB_SLOPE:
        return f"the span over which the slope {left} acts is missing"
    return ""


def _from_ratio_to_level(ratio: Unit) -> str:
    return {
        "c": "the carrier level is missing",
        "FS": "the full-scale level of the converter is missing",
        "r": "the reference level is missing",
        "i": "the power at the antenna input is missing",
        "ic": "the power at the antenna input is missing",
        "d": "the power at the antenna input is missing",
    }.get(ratio.gauge, "the reference level is missing")


_DIMENSIONS = {
    ("ratio", "frequency"): "the reference frequency is missing (a relative frequency is a part of it)",
    ("ratio", "temperature"): "noise figure and noise temperature are two parameters with a relation",
    ("angle", "time"): "the frequency is missing",
    ("frequency", "length"): "the velocity is missing (a wavelength is a relation, not a conversion)",
    ("frequency", "time"): "a period is a relation, not a conversion",
    ("resource blocks", "frequency"): "the subcarrier spacing is missing",
    ("resource blocks", "ratio"): "the number of resource blocks that makes the whole is missing",
    ("bit rate", "symbol rate"): "the modulation and the code rate are missing",
    ("bit rate", "frequency"): "the spectral efficiency is missing",
    ("bit rate", "ratio"): "the bit rate that makes 100 % is missing",
    ("energy", "power"): "the duration is missing",
}


def _between_dimensions(left: Unit, right: Unit) -> str:
    if left.kind is Kind.RATIO and right.kind is Kind.PHYSICAL and not left.is_log:
        whole = f"the {right.dimension} that makes the whole is missing"
        return _DIMENSIONS.get(("ratio", right.dimension), whole)
    return _DIMENSIONS.get((left.dimension, right.dimension), "")
