"""What calculators take: float64 arrays, checked once at the door, with one message that says what to do.

Positions of a chain lie on the first axis; condition points and trials on the axes after it (measured: each position
is then one contiguous row, which is faster for running products and for blocks). A figure with fewer axes is the
same along the last axes that it lacks, so ``(positions,)`` goes with ``(positions, points)``.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from specflow.errors import CalculationError

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]
Figures = npt.ArrayLike | Sequence[float | None]


def finite(value: Figures, name: str) -> Floats:
    """Return ``value`` as float64; NaN and infinite figures are refused."""
    array = _numbers(value, name)
    if not np.isfinite(array).all():
        raise CalculationError(_which(array, ~np.isfinite(array), name), hint="give a finite number")
    return array


def at_least(value: Figures, least: float, name: str, *, hint: str = "") -> Floats:
    """Return finite ``value``; anything below ``least`` is refused."""
    array = finite(value, name)
    if (array < least).any():
        raise CalculationError(
            f"{_which(array, array < least, name)}, below {least:g}", hint=hint or f"give at least {least:g}"
        )
    return array


def above(value: Figures, bound: float, name: str) -> Floats:
    """Return finite ``value``; anything at or below ``bound`` is refused."""
    array = finite(value, name)
    if (array <= bound).any():
        text = _which(array, array <= bound, name)
        raise CalculationError(text, hint=f"give a number above {bound:g}")
    return array


def within(value: Figures, low: float, high: float, name: str) -> Floats:
    """Return finite ``value``; anything outside [low, high] is refused."""
    array = finite(value, name)
    outside = (array < low) | (array > high)
    if outside.any():
        text = _which(array, outside, name)
        raise CalculationError(text, hint=f"give a number from {low:g} to {high:g}")
    return array


def loss(value: Figures, name: str) -> Floats:
    """Return a loss in dB, which is never below 0."""
    return at_least(
        value, 0.0, name, hint="a loss is a positive number of dB; a gain of -3 dB is a loss of 3 dB"
    )


def noise_figure(value: Figures, name: str) -> Floats:
    """Return a noise figure in dB, which is never below 0."""
    return at_least(value, 0.0, name, hint="no stage improves the signal-to-noise ratio; was a gain meant?")


def kelvin(value: Figures, name: str) -> Floats:
    """Return an absolute temperature in K, which is never below 0."""
    return at_least(value, 0.0, name, hint="temperatures are absolute, in K; add 273.15 to °C")


def count(value: Figures, name: str, least: int = 1) -> Floats:
    """Return a whole number of things as float64."""
    array = at_least(value, least, name)
    if (array != np.round(array)).any():
        raise CalculationError(
            _which(array, array != np.round(array), name), hint="give a whole number, it is a count"
        )
    return array


def intercept(value: Figures, name: str) -> Floats:
    """Return an intercept or compression level in dBm; none (null) and +∞ mean ideal, -∞ and NaN are refused."""
    array = _numbers(_without_none(value), name)
    bad = np.isnan(array) | (array == -np.inf)
    if bad.any():
        raise CalculationError(_which(array, bad, name), hint="leave it empty where the stage is ideal")
    return array


def unchecked(value: Figures, name: str) -> Floats:
    """Return ``value`` as float64, none as +∞; only for laws that look at their results for bad figures."""
    return _numbers(_without_none(value), name)


def without(value: Figures, position: int, name: str, filled: float) -> Floats:
    """Return a copy of ``value`` with the unknown at ``position`` set to ``filled``; none elsewhere becomes +∞."""
    array = _numbers(_without_none(value), name).copy()
    if array.ndim == 0 or not 0 <= position < array.shape[0]:
        places = f"0 to {array.shape[0] - 1}" if array.ndim and array.shape[0] else "there are none"
        raise CalculationError(f"{name} has no position {position}", hint=f"positions count from 0: {places}")
    array[position] = filled
    return array


def chain(**figures: Floats) -> tuple[Floats, ...]:
    """Return the figures of one chain with equally many axes, after checking that they have the same positions."""
    names, arrays = list(figures), list(figures.values())
    for name, array in figures.items():
        if array.ndim == 0 or array.shape[0] == 0:
            raise CalculationError(
                f"{name} has no positions", hint="give one value for each position in order"
            )
    lengths = {array.shape[0] for array in arrays}
    if len(lengths) > 1:
        listed = ", ".join(f"{name} {array.shape[0]}" for name, array in figures.items())
        raise CalculationError(
            f"numbers of positions differ: {listed}", hint="give every position each figure"
        )
    axes = max(array.ndim for array in arrays)
    padded = tuple(array.reshape(array.shape + (1,) * (axes - array.ndim)) for array in arrays)
    together(**dict(zip(names, padded, strict=True)))
    return padded


def together(**figures: npt.NDArray[np.generic]) -> None:
    """Check that the shapes of the figures go together."""
    try:
        np.broadcast_shapes(*(array.shape for array in figures.values()))
    except ValueError:
        shapes = ", ".join(f"{name} {array.shape}" for name, array in figures.items())
        raise CalculationError(
            f"shapes do not go together: {shapes}", hint="give as many values of each, or one for all"
        ) from None


def complex_finite(value: npt.ArrayLike, name: str) -> Complexes:
    """Return ``value`` as complex128; NaN and infinite figures are refused."""
    try:
        array = np.asarray(value, np.complex128)
    except (TypeError, ValueError):
        raise CalculationError(
            f"{name} is no array of complex numbers", hint="give real and imaginary part"
        ) from None
    if not np.isfinite(array).all():
        raise CalculationError(f"{name} has a value that is not finite", hint="give a finite number")
    return array


def matrices(value: npt.ArrayLike, ports: int | None, name: str) -> Complexes:
    """Return scattering matrices (…, n, n), finite; ``ports`` fixes n."""
    array = complex_finite(value, name)
    square = array.ndim >= 2 and array.shape[-1] == array.shape[-2]
    if not square or (ports is not None and array.shape[-1] != ports):
        size = f"{ports} by {ports}" if ports else "square"
        raise CalculationError(
            f"{name} has the shape {array.shape}", hint=f"the last two axes must be {size}"
        )
    return array


def _numbers(value: object, name: str) -> Floats:
    try:
        return np.asarray(value, np.float64)
    except (TypeError, ValueError):
        raise CalculationError(
            f"{name} is no array of numbers", hint="give numbers, equally many in every row"
        ) from None


def _without_none(value: object) -> object:
    if value is None:
        return np.inf
    if isinstance(value, (list, tuple)):
        return [_without_none(part) for part in value]
    return value


def _which(array: Floats, bad: npt.NDArray[np.bool_], name: str) -> str:
    """Say which value is bad: ``nf_db[2] is nan``; the number is the position from 0."""
    place = tuple(int(index) for index in np.argwhere(bad)[0])
    shown = f"[{', '.join(map(str, place))}]" if place else ""
    return f"{name}{shown} is {float(array[place]):g}"
