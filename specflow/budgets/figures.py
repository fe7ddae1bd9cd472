"""The figures of each position as the laws take them, built from values of lines; and the way back for derivatives.

Arrays have the positions on the first axis, then whatever the values of the lines have: places of evaluation, and
trials behind them.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain, ReadLine
from specflow.budgets.image import gradient_through_image, mixers_of, with_image_noise
from specflow.budgets.paths import Law, gradient_of_positions, groups_of, joined
from specflow.calculators.decibel import NEPER, T0
from specflow.model.base import code_key
from specflow.model.budget import Law as BudgetLaw
from specflow.units import Kind, parse_unit

Floats = NDArray[np.float64]
Gradient = Mapping[str, Floats]
_PORTS = ("iip3", "iip2", "ip1db")
_IDEAL = {"iip3": math.inf, "iip2": math.inf, "ip1db": math.inf}


@dataclass(frozen=True, slots=True, eq=False)
class Figures:
    """What a law combines: ``arrays`` by figure, each (positions, ...); levels at the ports of whole positions.

    ``start`` is the level at the input in dBm (or None); ``own`` are the figures of the positions
    themselves, which differ from ``stages`` where parallel paths stand as one stage (see ``paths``), and these from
    ``arrays`` where a mixer's noise figure is taken with the image noise that reaches it (see ``image``).
    """

    chain: Chain
    arrays: Mapping[str, Floats]
    start: Floats | None
    own: Mapping[str, Floats]
    stages: Mapping[str, Floats]

    def __getitem__(self, figure: str) -> Floats:
        return self.arrays[figure]


def figures_of(
    chain: Chain, values: Sequence[Floats], needed: Iterable[str], slice_: slice = slice(None)
) -> Figures:
    """Return the figures for values of the lines (each (n,) or (1,), or with further axes (n, trials)).

    ``slice_`` are the places of evaluation that the values are for. ``needed`` names the figures.
    """
    length = _length(chain, slice_)
    axes = max(one.ndim for one in values)
    shape = np.broadcast_shapes(*(one.shape for one in values), (length,) + (1,) * (axes - 1))
    wanted = set(needed)
    arrays: dict[str, Floats] = {}
    gain = _sum_of(chain, values, "gain", shape) if wanted & {"gain", "noise_figure", *_PORTS} else None
    if gain is not None:
        arrays["gain"] = gain
    mixers = mixers_of(chain) if "noise_figure" in wanted else None
    if mixers is not None:
        wanted.add("image_rejection")
    for name in wanted - {"gain", "noise_figure", "amount", *_PORTS}:
        arrays[name] = _sum_of(chain, values, name, shape)
    if "dc_w" in arrays:
        arrays["dc_w"] *= _counts(chain, arrays["dc_w"].ndim)
    if "antenna_gain" in arrays:
        _of_all_elements(chain, arrays["antenna_gain"])
    if "amount" in wanted:
        arrays["amount"] = _amounts(chain, values, shape)
    for name in wanted & set(_PORTS):
        assert gain is not None
        arrays[name] = _referred(chain, values, name, gain, shape)
    if "noise_figure" in wanted:
        assert gain is not None
        arrays["noise_figure"] = _noise(chain, values, gain, shape, slice_)
    start = _start(chain, arrays, shape, slice_)
    groups = groups_of(chain.positions)
    stages = joined(arrays, groups, sum_law(chain)) if groups and gain is not None else arrays
    taken = (
        stages
        if mixers is None or gain is None
        else with_image_noise(stages, mixers, _warmth(chain, slice_, gain))
    )
    return Figures(chain, taken, start, arrays, stages)


def sum_law(chain: Chain) -> Law:
    """Return how distortion products of one path add, as the calculators call it."""
    return "coherent" if chain.budget.intermodulation == "coherent" else "noncoherent"


def _length(chain: Chain, slice_: slice) -> int:
    return len(range(*slice_.indices(chain.size)))


def _sum_of(chain: Chain, values: Sequence[Floats], figure: str, shape: tuple[int, ...]) -> Floats:
    array = np.empty((len(chain.positions), *shape))
    empty = set(range(len(array)))
    for read, value in zip(chain.lines, values, strict=True):
        if read.role.figure != figure:
            continue
        if read.row in empty:
            array[read.row] = read.figure(value)
            empty.discard(read.row)
        else:
            array[read.row] += read.figure(value)
    for row in empty:
        array[row] = 0.0
    return array


def _counts(chain: Chain, axes: int) -> Floats:
    """Return how many elements each position has, with as many axes as figures have."""
    counts = np.array([float(position.count) for position in chain.positions])
    return counts.reshape(counts.shape + (1,) * (axes - 1))


def _of_all_elements(chain: Chain, antenna_gain: Floats) -> None:
    """Make the (embedded) gain of one element that of the N in phase: 10·log N more.

    Source: EIRP = P_total + 10·log N + G_element, G/T = G_element + 10·log N - 10·log T.
    """
    for row in {read.row for read in chain.lines if read.role.figure == "antenna_gain"}:
        antenna_gain[row] += 10.0 * math.log10(chain.positions[row].count)


def _amounts(chain: Chain, values: Sequence[Floats], shape: tuple[int, ...]) -> Floats:
    array = np.zeros((len(chain.positions), *shape))
    for read, value in zip(chain.lines, values, strict=True):
        factor, offset = of_elements(chain, read)
        array[read.row] += factor * read.figure(value) + offset
    return array


def of_elements(chain: Chain, read: ReadLine) -> tuple[float, float]:
    """Return factor and offset by which the contribution of one element becomes that of a position of N in parallel.

    Powers of N elements add: 10·log N where they are independent (per element), 20·log N where they are in phase
    (common). Beside the signal, which is in phase, independent errors lose 10·log N and common ones stay. Plain amounts
    (watts) count N times; a gain of N equal elements is that of one, the antenna gain of N in phase is N times it.
    """
    law, count = chain.budget.law, chain.positions[read.row].count
    if count == 1:
        return 1.0, 0.0
    decibels = 10.0 * math.log10(count)
    independent = read.line.shared == "per element"
    if law is BudgetLaw.ROOT_SUM_OF_SQUARES:
        return (1.0 / math.sqrt(count) if independent else 1.0), 0.0
    unit = parse_unit(read.role.unit)
    if not unit.is_log:
        return float(count), 0.0
    if law is BudgetLaw.SUM:
        is_gain = unit.kind is Kind.RATIO and code_key(read.line.parameter) != "antenna_gain"
        return 1.0, 0.0 if is_gain else decibels
    if unit.kind is Kind.RATIO:
        return 1.0, -decibels if independent else 0.0
    return 1.0, decibels if independent else 2.0 * decibels


def _referred(
    chain: Chain, values: Sequence[Floats], figure: str, gain: Floats, shape: tuple[int, ...]
) -> Floats:
    """Return intercepts or compression points at the input of whole positions: N elements bear N times the power."""
    array = np.full((len(chain.positions), *shape), _IDEAL[figure])
    for read, value in zip(chain.lines, values, strict=True):
        if read.role.figure != figure:
            continue
        row = read.row
        array[row] = read.figure(value)
        if read.role.port == "output":
            array[row] -= gain[row] - (1.0 if figure == "ip1db" else 0.0)
        if chain.positions[row].count > 1:
            array[row] += 10.0 * math.log10(chain.positions[row].count)
    return array


def _noise(
    chain: Chain, values: Sequence[Floats], gain: Floats, shape: tuple[int, ...], slice_: slice
) -> Floats:
    array = np.zeros((len(chain.positions), *shape))
    stated = set()
    for read, value in zip(chain.lines, values, strict=True):
        if read.role.figure == "noise_figure":
            array[read.row] = read.figure(value)
            stated.add(read.row)
    for row in makes_noise_of_loss(chain):
        if row not in stated:
            loss = np.exp(-gain[row] * NEPER)
            part = relative_temperature(chain, row, slice_, gain.ndim - 1)
            array[row] = 10.0 * np.log10(1.0 + (loss - 1.0) * part)
    return array


def _warmth(chain: Chain, slice_: slice, gain: Floats) -> list[Floats]:
    """Return the physical temperature of each passive position over 290 K, 1 of the others."""
    return [
        relative_temperature(chain, row, slice_, gain.ndim - 1) if position.passive else np.ones(1)
        for row, position in enumerate(chain.positions)
    ]


def makes_noise_of_loss(chain: Chain) -> list[int]:
    """Return the passive positions without a noise line: their noise is that of their loss."""
    stated = {read.row for read in chain.lines if read.role.figure == "noise_figure"}
    return [row for row, position in enumerate(chain.positions) if position.passive and row not in stated]


def relative_temperature(chain: Chain, row: int, slice_: slice, axes: int) -> Floats:
    """Return T/290 K of a position, 1 where no temperature is stated, with as many axes as the values have."""
    kelvin = chain.temperature_k[row, slice_] / T0
    kelvin = np.where(np.isnan(kelvin), 1.0, kelvin)
    return kelvin.reshape(kelvin.shape + (1,) * (axes - 1))


def _start(
    chain: Chain, arrays: Mapping[str, Floats], shape: tuple[int, ...], slice_: slice
) -> Floats | None:
    if chain.input_level is None:
        return None
    if "source_level" in arrays and any(read.role.figure == "source_level" for read in chain.lines):
        counts = np.array([10.0 * math.log10(position.count) for position in chain.positions])
        rows = sorted({read.row for read in chain.lines if read.role.figure == "source_level"})
        return np.asarray(arrays["source_level"][rows[0]] + counts[rows[0]])
    level = chain.input_level[slice_]
    return level.reshape(level.shape + (1,) * (len(shape) - 1))


def line_slopes(chain: Chain, values: Sequence[Floats], figures: Figures, gradient: Gradient) -> Floats:
    """Return the derivative of a result to the value of every line, float64 (lines, ...), per unit of its tolerance.

    ``gradient`` holds the derivative of the result to each figure of each position.
    """
    shape = next(iter(figures.arrays.values())).shape[1:]
    groups, mixers = groups_of(chain.positions), mixers_of(chain)
    if mixers is not None and "noise_figure" in figures.arrays:
        warmth = _warmth(chain, slice(None), figures.own["gain"])
        gradient = gradient_through_image(figures.stages, mixers, warmth, gradient)
    if groups and "gain" in figures.arrays:
        gradient = gradient_of_positions(figures.own, figures.stages, groups, gradient, sum_law(chain))
    lossy = set(makes_noise_of_loss(chain))
    slopes = np.zeros((len(chain.lines), *shape))
    for number, read in enumerate(chain.lines):
        part = gradient.get(read.role.figure)
        along = np.zeros(shape) if part is None else part[read.row]
        if read.role.figure == "gain":
            along = along + _through_gain(chain, read, figures, gradient, read.row in lossy)
        if read.role.figure == "amount":
            along = along * of_elements(chain, read)[0]
        if read.role.figure == "dc_w":
            along = along * chain.positions[read.row].count
        if np.any(along):
            slopes[number] = along * read.figure_slope(np.broadcast_to(values[number], shape))
    return slopes


def _through_gain(
    chain: Chain, read: ReadLine, figures: Figures, gradient: Gradient, is_lossy: bool
) -> Floats:
    """What a gain moves besides itself: figures stated at the output of the position, and the noise of its loss."""
    row = read.row
    moved = np.zeros(figures.own["gain"].shape[1:])
    for other in chain.lines:
        if other.row == row and other.role.port == "output" and other.role.figure in gradient:
            moved = moved - gradient[other.role.figure][row]
    if is_lossy and "noise_figure" in gradient:
        part = relative_temperature(chain, row, slice(None), moved.ndim)
        loss = np.exp(-figures.own["gain"][row] * NEPER)
        moved = moved - gradient["noise_figure"][row] * loss * part / (1.0 + (loss - 1.0) * part)
    return np.asarray(moved)
