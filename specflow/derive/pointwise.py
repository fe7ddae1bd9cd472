"""Laws row by row: the difference of two columns, the sum of two powers, noise figure by the Y factor."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from specflow.calculators.noise import y_factor_noise_figure
from specflow.derive.law import Law, Outcome, Setting
from specflow.derive.samples import Samples
from specflow.errors import CalculationError
from specflow.units import converter

Floats = NDArray[np.float64]
ROOT_SUM = "root of the sum of squares of both readings (common errors make it smaller)"


def difference(samples: Samples) -> Outcome:
    """Return value minus the other, row by row: Y factor, image rejection, isolation, a ratio of two levels in dB.

    Formula: value - minus; levels give a ratio in dB. u² = u1² + u2².
    Valid: both in units of one kind; rows of the same item and conditions. Two readings of one instrument share errors,
    which makes the true uncertainty smaller than stated.
    Source: definition; law of propagation, JCGM 100 5.1.2.
    """
    return Outcome(
        samples.value("value") - _as(samples, "minus", "value"),
        samples.difference_unit("value"),
        np.arange(samples.size),
        u=_root_sum(samples, "value", "minus"),
        u_rule=ROOT_SUM,
    )


def power_sum(samples: Samples) -> Outcome:
    """Return the sum of two powers, row by row: two polarisations, two ports.

    Formula: 10·log(10^(a/10) + 10^(b/10)) for levels; a + b for linear powers.
    Valid: components that do not interfere (orthogonal polarisations, independent noise). No uncertainty is derived.
    Source: definition; total of two polarisation components as in 3GPP TS 38.521-2 (from memory).
    """
    first, second = samples.value("value"), _as(samples, "other", "value")
    unit = samples.unit("value")
    if unit.is_log:
        top = np.maximum(first, second)
        total = top + 10 * np.log10(10 ** ((first - top) / 10) + 10 ** ((second - top) / 10))
    else:
        total = first + second
    return Outcome(total, samples.values["value"].unit, np.arange(samples.size))


def y_factor(samples: Samples) -> Outcome:
    """Return the noise figure from the powers with the source hot and cold, row by row.

    Formula: Y = hot - cold in dB; Th = 290·(1 + ENR), Te = (Th - Y·Tc)/(Y - 1), NF = 10·log(1 + Te/290).
    Valid: one ENR for all rows (a table of ENR against frequency is not read yet), linear receiver, same match in both
    states. No uncertainty is derived.
    Source: the definition of ENR; calculator y_factor_noise_figure.
    """
    y = samples.value("hot") - _as(samples, "cold", "hot")
    if samples.unit("hot").is_log is False:
        raise CalculationError("the powers are linear; the law takes levels in dB", hint="attach them in dBm")
    nf = y_factor_noise_figure(samples.number("enr"), y, samples.number("cold temperature"))
    return Outcome(np.asarray(nf, np.float64), "dB", np.arange(samples.size))


def _as(samples: Samples, role: str, wanted: str) -> Floats:
    """Return the readings of a role in the unit of another."""
    source, target = samples.unit(role), samples.unit(wanted)
    return np.asarray(converter(source, target)(samples.value(role)), np.float64)


def _root_sum(samples: Samples, *roles: str) -> Floats | None:
    spreads = [samples.values[role].u for role in roles]
    if any(one is None for one in spreads):
        return None
    return np.asarray(np.sqrt(sum(np.square(one) for one in spreads if one is not None)))


POINTWISE_LAWS: tuple[Law, ...] = (
    Law(
        "difference",
        "one column less another, row by row",
        difference,
        over="each",
        needs="two value columns (or one, with rows told apart by a condition) at the same conditions",
        roles=("value", "minus"),
        gives=("y_factor", "image_rejection", "isolation"),
    ),
    Law(
        "power sum",
        "two powers together, row by row",
        power_sum,
        over="each",
        needs="two value columns (or one, with rows told apart by a condition) at the same conditions",
        roles=("value", "other"),
        keeps_parameter=True,
    ),
    Law(
        "y factor",
        "noise figure from a hot and a cold source, row by row",
        y_factor,
        over="each",
        needs="the output levels with the source hot and cold",
        roles=("hot", "cold"),
        settings=(
            Setting("enr", "excess noise ratio of the source, as '15 dB'", unit="dB"),
            Setting("cold temperature", "temperature of the cold source", unit="K"),
        ),
        gives=("noise_figure",),
    ),
)
