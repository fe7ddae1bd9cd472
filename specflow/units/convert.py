"""Converting values from one unit to another, resolved once and then plain numpy.

``converter`` decides everything (may it be converted, by which formula, with which constants) and remembers its
answer; the ``Converter`` it returns does arithmetic only, so that a million values cost what numpy costs.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import Any, overload

import numpy as np
from numpy.typing import NDArray

from specflow.errors import UnitError
from specflow.units import bridge
from specflow.units.bridge import Bridge
from specflow.units.density import level_of
from specflow.units.kinds import Spectrum
from specflow.units.unit import Unit

Array = NDArray[np.float64]
Formula = Callable[[Any], Any]


@dataclass(frozen=True, slots=True)
class Converter:
    """A resolved conversion: call it with a float or an array and get the same shape back.

    ``words`` says what it does, for the trail of a number. An identity returns its argument, not a copy.
    """

    source: Unit
    target: Unit
    words: str
    is_identity: bool
    formula: Formula

    @overload
    def __call__(self, values: float) -> float: ...

    @overload
    def __call__(self, values: Array) -> Array: ...

    def __call__(self, values: float | Array) -> float | Array:
        if isinstance(values, np.ndarray):
            result: Array = self.formula(values.astype(np.float64, copy=False))
            return result
        return float(self.formula(np.float64(values)))


def converter(
    source: Unit,
    target: Unit,
    *,
    log_factor: int | None = None,
    bandwidth_hz: float | None = None,
    spectrum: Spectrum = Spectrum.UNKNOWN,
    difference: bool = False,
    impedance_ohm: float | None = None,
) -> Converter:
    """Resolve the conversion from ``source`` to ``target``.

    ``log_factor`` (10 or 20) says what a linear ratio becomes in dB, and comes from the parameter. ``bandwidth_hz`` and
    ``spectrum`` turn a density into a level, ``impedance_ohm`` a voltage into a power, or a field strength into a power
    flux when it is the wave impedance. ``difference`` converts a difference of two values, so that the zero of a
    temperature scale and a reference level drop out.

    Raises UnitError that names the missing piece when physics refuses.
    """
    if log_factor not in (None, 10, 20):
        raise UnitError(f"log_factor is 10 or 20, not {log_factor}")
    for name, value in (("bandwidth_hz", bandwidth_hz), ("impedance_ohm", impedance_ohm)):
        if value is not None and not (math.isfinite(value) and value > 0):
            raise UnitError(f"{name} must be a positive number, not {value}")
    return resolved(source, target, log_factor, bandwidth_hz, spectrum, difference, impedance_ohm)


@overload
def convert(values: float, source: Unit, target: Unit, **keywords: Any) -> float: ...


@overload
def convert(values: Array, source: Unit, target: Unit, **keywords: Any) -> Array: ...


def convert(values: float | Array, source: Unit, target: Unit, **keywords: Any) -> float | Array:
    """Convert values once; the keywords are those of ``converter``, which is the one to keep when there are many."""
    return converter(source, target, **keywords)(values)


def compatible(a: Unit, b: Unit) -> bool:
    """Whether values in ``a`` can be compared with values in ``b`` without any further information."""
    try:
        converter(a, b)
    except UnitError:
        return False
    return True


def bandwidth_bounds(
    values: Array, source: Unit, target: Unit, *, bandwidth_hz: float | None = None
) -> tuple[Array, Array]:
    """Lower and upper value in ``target`` of a signal in ``source`` whose spectrum is not known.

    One end is what a discrete line would read in the other bandwidth (the same level), the other end what noise-like
    power would. They hold where the signal does not rise elsewhere within the wider bandwidth.
    """
    line = converter(level_of(source), level_of(target))(values)
    noise = converter(source, target, bandwidth_hz=bandwidth_hz, spectrum=Spectrum.NOISE_LIKE)(values)
    return np.minimum(line, noise), np.maximum(line, noise)


@lru_cache(maxsize=2048)
def resolved(
    source: Unit,
    target: Unit,
    log_factor: int | None,
    bandwidth_hz: float | None,
    spectrum: Spectrum,
    difference: bool,
    impedance_ohm: float | None,
) -> Converter:
    """The remembered work behind ``converter``; its cache shows how often a conversion had to be resolved."""
    if source.measure and target.measure and source.measure != target.measure:
        raise UnitError(
            f"{source} cannot be converted to {target}",
            hint=f"{source.measure} and {target.measure} are different statistics: the wave form is missing",
        )
    if difference and source.is_log and target.is_log:
        spectrum, bandwidth_hz = (
            Spectrum.NOISE_LIKE,
            bandwidth_hz or 1.0,
        )  # a constant number of dB, which cancels
    link = bridge.between(source, target, bandwidth_hz, spectrum, impedance_ohm)
    if source.measure != target.measure:
        note = f"only one of them says {source.measure or target.measure}: taken to be the same statistic"
        link = replace(link, notes=(*link.notes, note))
    if difference:
        return _of_difference(source, target, link)
    if source.is_log and target.is_log:
        return _shifted(source, target, link)
    if source.is_log or target.is_log:
        return _across(source, target, link, log_factor)
    return _scaled(source, target, link)


def _of_difference(source: Unit, target: Unit, link: Bridge) -> Converter:
    """Differences: references and zero points cancel, sizes of the unit do not."""
    if source.is_log and target.is_log:
        return _identity(source, target, "a difference in dB stays as it is")
    if source.is_log or target.is_log or link.power != 1:
        hint = "a difference needs the value it is a difference from"
        raise UnitError(f"a difference in {source} cannot be converted to {target}", hint=hint)
    factor, divisor = _ratio(source.scale * link.factor, target.scale)
    return _linear(source, target, factor, divisor, 0.0, [*link.notes, "a difference"])


def _shifted(source: Unit, target: Unit, link: Bridge) -> Converter:
    """dB to dB: all that can change is the reference, a constant number of dB."""
    shift = _decibels(source, target, link) + link.shift_db
    if shift == 0:
        return _identity(source, target, *link.notes)
    words = _words(source, target, f"x {'-' if shift < 0 else '+'} {_figure(abs(shift))} dB", link.notes)
    return Converter(source, target, words, False, lambda x: x + shift)


def _decibels(source: Unit, target: Unit, link: Bridge) -> float:
    """How many dB the same quantity counts more in the target's reference than in the source's."""
    factor = target.log_factor or source.log_factor or 10
    logs = math.log10(link.factor) + link.power * math.log10(source.scale) - math.log10(target.scale)
    return _settled(factor * logs)


def _across(source: Unit, target: Unit, link: Bridge, log_factor: int | None) -> Converter:
    """Between a linear unit and its logarithm."""
    decibel = source if source.is_log else target
    factor = decibel.log_factor or log_factor
    if factor is None:
        hint = (
            "whether 10·log (a power ratio) or 20·log (an amplitude ratio) is meant comes from the parameter"
        )
        raise UnitError(f"{source} cannot be converted to {target}", hint=hint)
    if target.is_log:
        return _logarithm(source, target, link, factor)
    return _antilogarithm(source, target, link, factor)


def _logarithm(source: Unit, target: Unit, link: Bridge, factor: int) -> Converter:
    logs = math.log10(link.factor) + link.power * math.log10(source.scale) - math.log10(target.scale)
    slope, shift = _settled(factor * link.power), _settled(factor * logs)
    zero = source.offset / source.scale

    def formula(x: Any) -> Any:
        magnitude = x + zero if zero else x
        if np.any(magnitude < 0):
            raise UnitError(f"a negative value in {source} has no value in {target}", hint="check the sign")
        with np.errstate(divide="ignore"):
            return slope * np.log10(magnitude) + shift

    inside = f"(x + {_figure(zero)})" if zero else "(x)"
    tail = f" {'-' if shift < 0 else '+'} {_figure(abs(shift))}" if shift else ""
    words = _words(source, target, f"{_figure(slope)}·log10{inside}{tail}", link.notes)
    return Converter(source, target, words, False, formula)


def _antilogarithm(source: Unit, target: Unit, link: Bridge, factor: int) -> Converter:
    divisor = _settled(factor / link.power)
    size = link.factor * source.scale**link.power / target.scale
    zero = target.offset / target.scale

    def formula(x: Any) -> Any:
        return size * np.power(10.0, x / divisor) - zero

    tail = f" - {_figure(zero)}" if zero else ""
    words = _words(source, target, f"{_figure(size)} · 10^(x/{_figure(divisor)}){tail}", link.notes)
    return Converter(source, target, words, False, formula)


def _scaled(source: Unit, target: Unit, link: Bridge) -> Converter:
    """Linear to linear: another size of unit, another zero, or a relation that squares or takes the root."""
    if link.power == 1:
        factor, divisor = _ratio(source.scale * link.factor, target.scale)
        zero = _settled((source.offset - target.offset) / target.scale)
        return _linear(source, target, factor, divisor, zero, link.notes)
    size = link.factor * source.scale**link.power / target.scale
    power = link.power
    words = _words(source, target, f"{_figure(size)} · x^{_figure(power)}", link.notes)
    return Converter(source, target, words, False, lambda x: size * np.power(x, power))


def _linear(
    source: Unit, target: Unit, factor: float, divisor: float, zero: float, notes: list[str] | tuple[str, ...]
) -> Converter:
    if factor == 1 and divisor == 1 and zero == 0:
        return _identity(source, target, *notes)
    text = f"x / {_figure(divisor)}" if divisor != 1 else "x" if factor == 1 else f"x · {_figure(factor)}"
    if zero:
        text += f" {'-' if zero < 0 else '+'} {_figure(abs(zero))}"
    words = _words(source, target, text, notes)
    if divisor != 1:
        return Converter(source, target, words, False, lambda x: x / divisor + zero)
    return Converter(source, target, words, False, lambda x: x * factor + zero)


def _identity(source: Unit, target: Unit, *notes: str) -> Converter:
    same = "as written" if source.symbol == target.symbol else "the same number"
    return Converter(source, target, _words(source, target, same, notes), True, lambda x: x)


def _ratio(above: float, below: float) -> tuple[float, float]:
    """Factor and divisor for above/below, one of them 1: dividing by 1000 is exact in decimal where · 0.001 is not."""
    factor, divisor = above / below, below / above
    if abs(divisor - round(divisor)) <= 1e-12 * divisor and divisor >= 1:
        return 1.0, float(round(divisor))
    if abs(factor - round(factor)) <= 1e-12 * factor and factor >= 1:
        return float(round(factor)), 1.0
    return factor, 1.0


def _settled(value: float) -> float:
    """Logarithms of powers of ten are whole numbers; remove what rounding left on them."""
    return float(round(value)) if abs(value - round(value)) < 1e-12 else value


def _figure(value: float) -> str:
    return f"{value:.9g}"


def _words(source: Unit, target: Unit, formula: str, notes: list[str] | tuple[str, ...]) -> str:
    return "; ".join([f"{source} to {target}: {formula}", *notes])
