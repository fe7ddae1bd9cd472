"""Relations between parameters: one recorded quantity tells another exactly, by a formula and not by a unit.

VSWR, return loss and |S11| all tell the magnitude of one reflection coefficient; noise figure and noise temperature
tell the noise factor. A value of one serves a requirement on another: readings go over as intervals (every formula is
monotonic), uncertainties by the larger change, and what was done is said with formula and source. Only single values,
the worst and the median go over: a mean in one is no mean in the other.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.model.base import code_key
from specflow.model.evidence import ValueArrays

Floats = NDArray[np.float64]

#: The noise figure is defined with a source at this temperature (IEEE definition, from memory).
REFERENCE_K = 290.0

#: Statistics that a monotonic formula keeps; "" is a single value.
KEPT = frozenset({"", "worst", "median"})


@dataclass(frozen=True, slots=True)
class Scale:
    """A parameter as a scale of what its family has in common (|Γ|, or F - 1), in the unit of the dictionary.

    Values from ``lowest`` to ``highest`` mean something; ``rises`` says whether more of it is more of the common thing.
    ``to`` and ``of`` are the two formulas, ``to_words`` and ``of_words`` the same for people. ``log_factor`` as that of
    the parameter.
    """

    parameter: str
    title: str
    unit: str
    lowest: float
    highest: float
    rises: bool
    to: Callable[[Floats], Floats]
    of: Callable[[Floats], Floats]
    to_words: str
    of_words: str
    log_factor: int | None = None


_REFLECTION = (
    Scale(
        "vswr",
        "VSWR",
        "1",
        1.0,
        np.inf,
        True,
        lambda v: 1.0 - 2.0 / (v + 1.0),  # (V - 1)/(V + 1), written so that an infinite VSWR is |Γ| = 1
        lambda g: (1.0 + g) / (1.0 - g),
        "|Γ| = (V - 1)/(V + 1)",
        "V = (1 + |Γ|)/(1 - |Γ|)",
    ),
    Scale(
        "return_loss",
        "return loss",
        "dB",
        0.0,
        np.inf,
        False,
        lambda loss: 10.0 ** (-loss / 20.0),
        lambda g: -20.0 * np.log10(g),
        "|Γ| = 10^(-RL/20)",
        "RL = -20·log |Γ|",
        log_factor=10,
    ),
    Scale(
        "reflection_magnitude",
        "|S11|",
        "dB",
        -np.inf,
        0.0,
        True,
        lambda level: 10.0 ** (level / 20.0),
        lambda g: 20.0 * np.log10(g),
        "|Γ| = 10^(|S11|/20)",
        "|S11| = 20·log |Γ|",
        log_factor=20,
    ),
)
_NOISE = (
    Scale(
        "noise_figure",
        "noise figure",
        "dB",
        0.0,
        np.inf,
        True,
        lambda figure: 10.0 ** (figure / 10.0) - 1.0,
        lambda excess: 10.0 * np.log10(1.0 + excess),
        "F = 10^(NF/10)",
        "NF = 10·log F",
        log_factor=10,
    ),
    Scale(
        "noise_temperature",
        "noise temperature",
        "K",
        0.0,
        np.inf,
        True,
        lambda kelvin: kelvin / REFERENCE_K,
        lambda excess: excess * REFERENCE_K,
        "F = 1 + Te/290 K",
        "Te = 290 K·(F - 1)",
    ),
)
_SOURCES = ((_REFLECTION, "by definition, passive loads"), (_NOISE, "IEEE definition, source at 290 K"))


@dataclass(frozen=True, slots=True)
class Relation:
    """How values of one parameter become values of another, in the units of the dictionary."""

    recorded: Scale
    wanted: Scale
    source: str

    @property
    def words(self) -> str:
        """What is done, with formula and source."""
        formulas = f"{self.recorded.to_words}, {self.wanted.of_words}"
        return f"{self.recorded.title} told as {self.wanted.title}: {formulas} ({self.source})"

    def values(self, values: Floats) -> Floats:
        """Return values of the wanted parameter; NaN for those that mean nothing (a VSWR below 1).

        An open end is taken to the end of the scale: a VSWR without upper bound is a return loss of 0 dB at least.
        """
        known = np.where(
            np.isinf(values), np.clip(values, self.recorded.lowest, self.recorded.highest), values
        )
        known = np.where((known >= self.recorded.lowest) & (known <= self.recorded.highest), known, np.nan)
        with np.errstate(divide="ignore"):  # of no reflection at all the return loss is infinite
            return np.asarray(self.wanted.of(self.recorded.to(known)))

    def apply(self, arrays: ValueArrays) -> ValueArrays:
        """Return readings of the wanted parameter: intervals as intervals, u as the larger change by it."""
        low = self.values(arrays.low)
        high = low if arrays.high is arrays.low else self.values(arrays.high)
        u = None if arrays.u is None else self._spread(arrays, arrays.u)
        if self.recorded.rises == self.wanted.rises:
            return ValueArrays(low, high, u)
        return ValueArrays(high, low, u)

    def _spread(self, arrays: ValueArrays, u: Floats) -> Floats:
        middle = np.where(np.isfinite(arrays.high), arrays.high, arrays.low)
        within = (middle + u, middle - u)
        centre = self.values(middle)
        with np.errstate(invalid="ignore"):
            changes = [np.abs(self.values(self._clipped(end)) - centre) for end in within]
        spread = np.maximum(*changes)
        return np.where(np.isfinite(spread), spread, np.nan)  # beside a perfect match nothing is known of it

    def _clipped(self, values: Floats) -> Floats:
        return np.clip(values, self.recorded.lowest, self.recorded.highest)


_RELATIONS = {
    (recorded.parameter, wanted.parameter): Relation(recorded, wanted, source)
    for family, source in _SOURCES
    for recorded in family
    for wanted in family
    if recorded is not wanted
}


def relation_between(recorded: str, wanted: str) -> Relation | None:
    """Return the relation by which values of one parameter serve a requirement on another, None without one."""
    return _RELATIONS.get((code_key(recorded), code_key(wanted)))


def related_to(wanted: str) -> tuple[str, ...]:
    """Return the keys of the other parameters whose values can serve a requirement on this one."""
    key = code_key(wanted)
    return tuple(recorded for recorded, other in _RELATIONS if other == key)


def parameters_telling(wanted: str) -> frozenset[str]:
    """Return the keys of all parameters whose values tell this one: itself, and those related to it."""
    return frozenset({code_key(wanted), *related_to(wanted)})
