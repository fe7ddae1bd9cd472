"""Columns that are called a level, or by the detector of a receiver, and of which only the unit says the quantity."""

from __future__ import annotations

import re
from collections.abc import Iterable

from specflow.conditions import KnownDimension
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.header_text import known_unit, read_header
from specflow.parameters import Dictionary, suits
from specflow.units import Kind, compatible, parse_unit

_LEVEL_NAMES = frozenset(
    ("level", "reading", "amplitude", "value", "fieldlevel", "emission", "emissionlevel")
)

#: Detectors of CISPR 16-1-1 whose reading is a statistic of the field; an average is asked about.
_DETECTORS = {
    "quasipeak": "quasi-peak", "qp": "quasi-peak", "quasipk": "quasi-peak", "qpeak": "quasi-peak",
    "peak": "peak", "pk": "peak", "maxpeak": "peak", "rms": "rms",
}  # fmt: skip
_FIELD = "dBµV/m"


def field_of_detector(name: str, unit: str) -> str | None:
    """The statistic ("" unsaid) of a field strength that a column gives by its unit alone: "Level (dBµV/m)",
    "QuasiPeak (dBµV/m)"; None for any other column."""
    spelled = known_unit(unit) if unit else None
    if spelled is None or not compatible(spelled, parse_unit(_FIELD)):
        return None
    plain = re.sub(r"[\s_.\-]+", "", name.casefold())
    return "" if plain in _LEVEL_NAMES else _DETECTORS.get(plain)


def other_level(dimension: KnownDimension, unit: str, dictionary: Dictionary) -> tuple[str, str] | None:
    """What is asked of a level whose unit is none of a power (dBc, dB): the sentence, and parameters in that unit."""
    spelled = known_unit(unit) if unit else None
    if (
        dimension.name != "power_level"
        or spelled is None
        or compatible(spelled, parse_unit(dimension.unit or "1"))
    ):
        return None
    if not spelled.is_log or spelled.kind is Kind.LEVEL:
        return None
    near = [one.key for one in dictionary.all if one.unit == unit and suits(one, unit)]
    return f"a level in {unit}, which is no power; of which parameter it does not say", ", ".join(near[:6])


def is_of_receiver(dimension: KnownDimension, name: str, headers: Iterable[HeaderCell]) -> bool:
    """Whether "Bandwidth" stands in a list of a test receiver, where it is rather the resolution bandwidth."""
    if dimension.name != "channel_bandwidth" or name.casefold() not in ("bandwidth", "bw"):
        return False
    parts = [(read_header(one.text), one.unit) for one in headers]
    return any(field_of_detector(one.name, one.unit or below) is not None for one, below in parts)
