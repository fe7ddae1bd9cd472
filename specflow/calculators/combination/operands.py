"""The kinds of operand, and which combination law takes which."""

from __future__ import annotations

from enum import StrEnum

from specflow.calculators.arguments import Figures, Floats, at_least, chain, finite
from specflow.errors import UnitError


class Operand(StrEnum):
    """What the figures are: this decides which law may combine them."""

    LEVEL = "level"
    """dBm, dBW, …"""
    DENSITY = "level density"
    """dBm/Hz, …"""
    RELATIVE = "relative level"
    """Noise, spurs or distortion in dB relative to the signal, rising with the unwanted part: dBc."""
    GAIN = "gain"
    """Gains (positive) and losses (negative) in dB."""
    TOLERANCE = "tolerance"
    """± dB or ± in another unit about a nominal value."""
    ERROR = "error"
    """An rms magnitude as a fraction or in %: error vector, standard uncertainty."""
    PLAIN = "plain quantity"
    """A linear quantity that adds: W, K, s."""


ACCEPTS: dict[str, tuple[Operand, ...]] = {
    "linear sum": (Operand.GAIN, Operand.PLAIN),
    "power sum": (Operand.LEVEL, Operand.DENSITY, Operand.RELATIVE),
    "voltage sum": (Operand.LEVEL, Operand.RELATIVE),
    "RSS": (Operand.TOLERANCE, Operand.ERROR),
    "worst case": (Operand.TOLERANCE, Operand.ERROR),
}

_MAGNITUDES = (Operand.TOLERANCE, Operand.ERROR)


def operands(law: str, values: Figures, kind: Operand) -> Floats:
    """Return the values (contributions on the first axis) after checking that the law takes their kind.

    Raises UnitError for a kind that the law does not take, CalculationError for figures that are none.
    """
    accepted = ACCEPTS[law]
    if kind not in accepted:
        takers = [name for name, kinds in ACCEPTS.items() if kind in kinds]
        raise UnitError(
            f"a {law} of operands of kind '{kind}' is refused",
            hint=f"use {' or '.join(takers)} for this kind",
        )
    hint = "give the magnitude of the tolerance or error"
    array = at_least(values, 0.0, str(kind), hint=hint) if kind in _MAGNITUDES else finite(values, str(kind))
    return chain(values=array)[0]
