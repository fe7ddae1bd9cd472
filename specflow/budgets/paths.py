"""Parallel paths of a cascade: what feeds them is shared equally, what leaves them is added in phase, without loss.

Losses of dividers and combiners are positions of their own. K paths with gains g, noise factors F and intercepts I
(linear) are together one stage at the place of their last position; the positions before it are neutral there:

- gain (Σ√g / K)²; noise F - 1 = Σ (F_k - 1)·g_k / (K·G), as the noise that the paths add is independent
- third order 1/IIP3 = Σ (√g_k/IIP3_k) / (K²·√G), second order 1/√IIP2 = Σ √(g_k/IIP2_k) / (K^1.5·√G), both in phase,
  as all paths carry one signal; compression points as third order

Source: computed from waves in matched, lossless dividers and combiners; K equal paths keep gain and noise figure and
bear K times the power.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from specflow.calculators.compression import cascade_ip1db
from specflow.calculators.decibel import ratio, total
from specflow.calculators.intercept_cascade import cascade_iip2, cascade_iip3, iip2_slopes, iip3_slopes
from specflow.calculators.noise_cascade import Slopes, cascade_noise_figure, noise_figure_slopes
from specflow.model.base import code_key
from specflow.model.budget import BudgetPosition

Floats = NDArray[np.float64]
Law = Literal["coherent", "noncoherent"]
Group = list[list[int]]
"""The rows of each path of one set of parallel paths."""
_PER_NEPER = 10.0 / math.log(10.0)
#: Figure -> value of a position that neither gains, adds noise nor distorts.
_NEUTRAL = {"gain": 0.0, "noise_figure": 0.0, "iip3": math.inf, "iip2": math.inf, "ip1db": math.inf}
#: Figure of distortion -> the power p in Σ √g_k / I_k^p, 1 for third order, 1/2 for second.
_POWERS = {"iip3": 1.0, "iip2": 0.5, "ip1db": 1.0}


def groups_of(positions: Sequence[BudgetPosition]) -> list[Group]:
    """Return the sets of parallel paths: runs of neighbouring positions that name a path, by path."""
    groups: list[dict[str, list[int]]] = []
    previous = False
    for row, position in enumerate(positions):
        if position.path:
            if not previous:
                groups.append({})
            groups[-1].setdefault(code_key(position.path), []).append(row)
        previous = bool(position.path)
    return [list(one.values()) for one in groups]


def last_row(group: Group) -> int:
    """Return the row at whose place a set of paths stands as one stage."""
    return max(row for rows in group for row in rows)


def joined_gain(gains: Sequence[Floats]) -> Floats:
    """Return the gain in dB of parallel paths of these gains in dB."""
    return np.asarray(2.0 * _PER_NEPER * np.log(total(np.sqrt(ratio(np.array(gains)))) / len(gains)))


def joined(own: Mapping[str, Floats], groups: Sequence[Group], law: Law) -> dict[str, Floats]:
    """Return the figures of the positions with every set of paths as one stage."""
    arrays = {name: array.copy() if name in _NEUTRAL else array for name, array in own.items()}
    for group in groups:
        rows = [row for path in group for row in path]
        for name, value in _stage(own, group, law).items():
            arrays[name][rows] = _NEUTRAL[name]
            arrays[name][last_row(group)] = value
    return arrays


def _stage(own: Mapping[str, Floats], group: Group, law: Law) -> dict[str, Floats]:
    """Return the figures of one set of paths as a stage."""
    count = len(group)
    gains = np.array([total(own["gain"][rows]) for rows in group])
    found = {"gain": joined_gain(list(gains))}
    power, whole = ratio(gains), ratio(found["gain"])
    if "noise_figure" in own:
        factors = np.array([ratio(_noise(own, rows)) for rows in group])
        added = total((factors - 1.0) * power) / (count * whole)
        found["noise_figure"] = np.asarray(_PER_NEPER * np.log1p(added))
    for name in _POWERS.keys() & own.keys():
        found[name] = _intercept(own, group, name, law, power, whole)
    return found


def _noise(own: Mapping[str, Floats], rows: list[int]) -> Floats:
    return cascade_noise_figure(own["gain"][rows], own["noise_figure"][rows])


def _along(own: Mapping[str, Floats], rows: list[int], name: str, law: Law) -> Floats:
    gain, figure = own["gain"][rows], own[name][rows]
    if name == "iip2":
        return cascade_iip2(gain, figure, law)
    return cascade_iip3(gain, figure, law) if name == "iip3" else cascade_ip1db(gain, figure)


def _intercept(
    own: Mapping[str, Floats], group: Group, name: str, law: Law, power: Floats, whole: Floats
) -> Floats:
    exponent, count = _POWERS[name], len(group)
    products = total(_products(own, group, name, law, power)) / (count ** (1.0 + exponent) * np.sqrt(whole))
    with np.errstate(divide="ignore"):
        return np.asarray(-_PER_NEPER / exponent * np.log(products))


def _products(own: Mapping[str, Floats], group: Group, name: str, law: Law, power: Floats) -> Floats:
    """Return √g_k / I_k^p of every path."""
    levels = np.array([_along(own, rows, name, law) for rows in group])
    return np.asarray(np.sqrt(power) * np.exp(-levels * _POWERS[name] / _PER_NEPER))


def gradient_of_positions(
    own: Mapping[str, Floats],
    arrays: Mapping[str, Floats],
    groups: Sequence[Group],
    gradient: Mapping[str, Floats],
    law: Law,
) -> dict[str, Floats]:
    """Return the derivatives to the figures of the positions themselves, from those to the figures of stages."""
    found = {name: array.copy() for name, array in gradient.items()}
    found.setdefault("gain", np.zeros_like(arrays["gain"]))
    for group in groups:
        last = last_row(group)
        outer = {name: gradient[name][last] for name in _NEUTRAL.keys() & gradient.keys()}
        gains = np.array([total(own["gain"][rows]) for rows in group])
        power, whole = ratio(gains), ratio(arrays["gain"][last])
        parts = np.sqrt(power) / total(np.sqrt(power))
        for name in outer:
            found[name][[row for rows in group for row in rows]] = 0.0
        found["gain"][[row for rows in group for row in rows]] = 0.0
        _through_gain(found, outer, group, parts)
        if "noise_figure" in outer:
            _through_noise(found, outer["noise_figure"], own, arrays, group, parts, power, whole)
        for name in _POWERS.keys() & outer.keys():
            _through_products(found, outer[name], own, group, name, law, parts, power)
    return found


def _through_gain(found: dict[str, Floats], outer: Mapping[str, Floats], group: Group, parts: Floats) -> None:
    """A path's gain moves the stage's by its part of the voltage."""
    if "gain" in outer:
        for rows, part in zip(group, parts, strict=True):
            found["gain"][rows] += outer["gain"] * part


def _through_noise(
    found: dict[str, Floats],
    outer: Floats,
    own: Mapping[str, Floats],
    arrays: Mapping[str, Floats],
    group: Group,
    parts: Floats,
    power: Floats,
    whole: Floats,
) -> None:
    factor = ratio(arrays["noise_figure"][last_row(group)])
    for path, rows in enumerate(group):
        own_factor = ratio(_noise(own, rows))
        share = power[path] / (len(group) * whole)
        to_noise = own_factor * share / factor
        to_gain = ((own_factor - 1.0) * share - (factor - 1.0) * parts[path]) / factor
        slopes = noise_figure_slopes(own["gain"][rows], own["noise_figure"][rows])
        found["noise_figure"][rows] += outer * to_noise * slopes.to_figure
        found["gain"][rows] += outer * (to_noise * slopes.to_gain + to_gain)


def _through_products(
    found: dict[str, Floats],
    outer: Floats,
    own: Mapping[str, Floats],
    group: Group,
    name: str,
    law: Law,
    parts: Floats,
    power: Floats,
) -> None:
    products = _products(own, group, name, law, power)
    all_of_them = total(products)
    weights = np.divide(products, all_of_them, out=np.zeros_like(products), where=all_of_them > 0)
    exponent = _POWERS[name]
    for path, rows in enumerate(group):
        slopes = _slopes_along(own, rows, name, law)
        to_gain = (parts[path] - weights[path]) / (2.0 * exponent)
        found[name][rows] += outer * weights[path] * slopes.to_figure
        found["gain"][rows] += outer * (weights[path] * slopes.to_gain + to_gain)


def _slopes_along(own: Mapping[str, Floats], rows: list[int], name: str, law: Law) -> Slopes:
    gain, figure = own["gain"][rows], own[name][rows]
    if name == "iip2":
        return iip2_slopes(gain, figure, law)
    return iip3_slopes(gain, figure, law if name == "iip3" else "coherent")
