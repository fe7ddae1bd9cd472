"""Scanned ranges and floors as files and people write them: "30 MHz to 1 GHz (RBW 100 kHz, floor -85 dBm); ..."."""

from __future__ import annotations

import re
from dataclasses import dataclass

from specflow.errors import UnitError
from specflow.model.source_statement import PeakScan
from specflow.units import Quantity, converter, format_unit, parse_quantity, parse_unit

_RANGE = re.compile(r"^(?P<low>.*?\S)\s*(?:\bto\b|\.\.+|…|–|—|(?<=[\w\s])-(?=\s*\d))\s*(?P<high>\S.*)$")
_MORE = re.compile(r"\(([^()]*)\)")
_HERTZ = parse_unit("Hz")


@dataclass(frozen=True, slots=True)
class SaidScan:
    """What is said of one scan; "" and None where nothing is."""

    low: Quantity
    high: Quantity
    floor: str = ""
    bandwidth: str = ""


def read_scans(text: str, floor: str, bandwidth: str) -> tuple[PeakScan, ...]:
    """Read ranges separated by semicolons; ``floor`` and ``bandwidth`` hold for all that say none of their own.

    UnitError where one cannot be read, or runs downwards.
    """
    return tuple(
        _scan(_said(part), floor, bandwidth) for part in re.split(r"\s*;\s*", text.strip()) if part.strip()
    )


def _said(text: str) -> SaidScan:
    more = " ".join(_MORE.findall(text))
    found = _RANGE.match(_MORE.sub("", text).strip())
    if found is None:
        raise UnitError(f"{text!r} is no range that was scanned", hint="write it like 30 MHz to 1 GHz")
    high = _named("upper end", found["high"])
    low_text = found["low"] if not re.fullmatch(r"[\d.,\s]+", found["low"]) else f"{found['low']} {high.unit}"
    floor = re.search(r"floor\s*[:=]?\s*(?P<floor>[^,;]+)", more, re.IGNORECASE)
    bandwidth = re.search(
        r"(?:RBW|resolution bandwidth|bandwidth)\s*[:=]?\s*(?P<rbw>[^,;]+)", more, re.IGNORECASE
    )
    return SaidScan(
        parse_quantity(low_text),
        high,
        floor["floor"].strip() if floor else "",
        bandwidth["rbw"].strip() if bandwidth else "",
    )


def _scan(said: SaidScan, floor: str, bandwidth: str) -> PeakScan:
    low, high = (_hertz(end) for end in (said.low, said.high))
    if not low < high:
        raise UnitError(
            f"the scan from {low:g} to {high:g} Hz runs downwards", hint="write the lower end first"
        )
    floor_text, rbw = said.floor or floor, said.bandwidth or bandwidth
    level = _named("floor", floor_text.lstrip("<≤ ")) if floor_text else None
    return PeakScan(
        low=low,
        high=high,
        unit="Hz",
        floor=None if level is None else float(level.value),
        floor_unit="" if level is None else format_unit(level.unit),
        bandwidth_hz=_hertz(_named("bandwidth", rbw)) if rbw else None,
    )


def _named(what: str, text: str) -> Quantity:
    try:
        return parse_quantity(text)
    except UnitError as error:
        raise UnitError(f"the {what} of the scan, {error.message}", hint=error.hint) from None


def _hertz(quantity: Quantity) -> float:
    if quantity.unit.dimension != "frequency":
        raise UnitError(f"{quantity.value} {quantity.unit} is no frequency", hint="write it like 30 MHz")
    return float(converter(quantity.unit, _HERTZ)(float(quantity.value)))
