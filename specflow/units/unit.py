"""The unit: what a number is counted in, resolved once and compared by meaning."""

from __future__ import annotations

from dataclasses import dataclass, field

from specflow.units.kinds import Kind


@dataclass(frozen=True, slots=True)
class Unit:
    """A unit of one kind; two units are equal when they mean the same, however they were spelled.

    The linear value in SI units is ``scale * x + offset`` for a linear unit, and ``scale * 10 ** (x / log_factor)``
    for a logarithmic one, where ``scale`` is the reference (0.001 W for dBm). A ratio in dB has no ``log_factor`` of
    its own: whether it was 10·log or 20·log belongs to the parameter.
    """

    symbol: str = field(compare=False)
    kind: Kind
    dimension: str
    scale: float = 1.0
    offset: float = 0.0
    is_log: bool = False
    log_factor: int | None = None
    gauge: str = ""  # what a ratio in dB is relative to: i, ic, d, c, r, FS; "" when it does not say
    bandwidth_hz: float | None = None  # reference bandwidth of a density
    measure: str = ""  # "rms", "p-p" or "peak" when the unit was written with it

    def __str__(self) -> str:
        return self.symbol

    @property
    def is_absolute_temperature(self) -> bool:
        """Whether zero of this unit is not the absence of the quantity (°C, °F): sums of two make no sense."""
        return self.offset != 0.0


DECIBEL = Unit("dB", Kind.RATIO, "ratio", is_log=True)
ONE = Unit("1", Kind.RATIO, "ratio")
PERCENT = Unit("%", Kind.RATIO, "ratio", scale=0.01)
KELVIN = Unit("K", Kind.PHYSICAL, "temperature")
DB_HERTZ = Unit("dBHz", Kind.BANDWIDTH_LOG, "frequency", is_log=True, log_factor=10)


def format_unit(unit: Unit) -> str:
    """The canonical spelling, which ``parse_unit`` reads back to an equal unit: "dBm/MHz", "dBµV/m", "°C"."""
    return unit.symbol
