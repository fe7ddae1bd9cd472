"""Shares that grow together until a limit is met: place by place, or as one number for all places."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.bracketing import edge
from specflow.budgets.contribution import Contribution
from specflow.budgets.figures import Figures
from specflow.budgets.inverse_figures import figure_of_line, image_factor, line_value
from specflow.budgets.paths import groups_of, last_row
from specflow.budgets.probe import Probe, Target
from specflow.calculators.decibel import gain_before, ratio, total

Floats = NDArray[np.float64]
Values = Mapping[int, Floats]
_RANGE = 30.0  # decades in which a scale is looked for
_PLACES_TRIED = 6
_SMALL = 1e-9


@dataclass(frozen=True, slots=True, eq=False)
class Growth:
    """How the shared lines grow together: the gains in front of them stand still meanwhile.

    ``parts`` are their contributions at scale 1: at the input of the chain, or of their own positions where there are
    no ``fronts`` (linear gains in front of each position).
    """

    probe: Probe
    law: Contribution
    parts: Values
    gains: Floats | None
    fronts: Floats | None

    @classmethod
    def of(cls, probe: Probe, law: Contribution, start: Values, parts: Values) -> Growth:
        """Return the growth from what the other lines stand at."""
        figures = probe.figures(start)
        return cls(probe, law, parts, figures.own.get("gain"), fronts_of(figures, law.figure))

    def values(self, scale: Floats) -> dict[int, Floats]:
        """Return the values of the shared lines for a scale (n,) in decades."""
        grown = 10.0**scale
        found = {}
        for number, part in self.parts.items():
            read = self.probe.chain.lines[number]
            front = np.ones(1) if self.fronts is None else self.fronts[read.row]
            part = part * grown + image_factor(self.probe.chain, read) / front
            with np.errstate(divide="ignore"):
                at_position = np.clip(self.law.figure_for(part, front), -1e4, 1e4)
            gain = np.zeros(1) if self.gains is None else self.gains[read.row]
            figure = figure_of_line(self.probe.chain, read, at_position, gain)
            found[number] = line_value(read, figure, self.probe.dictionary)
        return found


def fronts_of(figures: Figures, figure: str) -> Floats | None:
    """Return the linear gain (positions, ...) by which a figure of each position counts less (noise) or more
    (distortion) in the sum of the chain; None in a sum, which has no chain.

    It is the gain in front; in parallel paths what ``paths`` makes of it: of K paths of gains g, together G, noise
    counts by g_k/(K·G), third order by √g_k/(K²·√G), second by g_k/(K³·G).
    """
    own = figures.own.get("gain")
    if own is None:
        return None
    fronts = np.array(gain_before(figures.stages["gain"]))
    for group in groups_of(figures.chain.positions):
        count, whole = len(group), ratio(figures.stages["gain"][last_row(group)])
        for rows in group:
            inside, through = gain_before(own[rows]), ratio(total(own[rows]))
            match figure:
                case "noise_figure":
                    share = count * whole / through
                case "iip2":
                    share = through / (count**3 * whole)
                case _:
                    share = np.sqrt(through / whole) / count**2
            fronts[rows] = fronts[last_row(group)] * inside * share
    return fronts


def one_number(
    probe: Probe, target: Target, law: Contribution, start: Values, shares: Values, *, is_equal: bool
) -> dict[int, Floats]:
    """Return shares that are one number each and hold at all places, from those place by place.

    Equal ones are those of the place that asks most; others are in proportion to each line's estimate at its worst.
    They are scaled together until the margin is gone at the hardest place, so that nothing is asked in vain.
    """
    if all(float(np.ptp(value)) < _SMALL for value in shares.values()):
        return dict(shares)
    holds = _Holds(probe, probe.targets.index(target), start)
    if is_equal:
        base = _of_hardest(holds, shares)
    else:
        base = {number: _worst_estimate(probe, law, number) for number in shares}
    growth = _from_values(probe, law, start, base)

    def margin(scale: Floats) -> Floats:
        return np.array([holds.margins(growth.values(np.full(probe.size, scale[0]))).min()])

    low, high = np.full(1, -_RANGE), np.full(1, _RANGE)
    scale = float(edge(margin, high, low, margin(high), margin(low))[0])
    found = growth.values(np.full(probe.size, scale))
    return {number: np.full(1, _tightest(probe, law, number, value)) for number, value in found.items()}


@dataclass(frozen=True, slots=True, eq=False)
class _Holds:
    """Margins (n,) to one limit with other values of the shared lines, +inf where nothing is required."""

    probe: Probe
    row: int
    start: Values

    def margins(self, values: Values) -> Floats:
        found = self.probe.margins({**self.start, **values})[self.row]
        return np.where(np.isnan(found), np.inf, found)


def _is_upper(probe: Probe, law: Contribution, number: int) -> bool:
    return law.at_most == (probe.chain.lines[number].role.form.rises > 0)


def _tightest(probe: Probe, law: Contribution, number: int, value: Floats) -> float:
    return float(np.min(value) if _is_upper(probe, law, number) else np.max(value))


def _worst_estimate(probe: Probe, law: Contribution, number: int) -> Floats:
    values = probe.chain.lines[number].values
    return np.full(1, float(np.max(values) if _is_upper(probe, law, number) else np.min(values)))


def _of_hardest(holds: _Holds, shares: Values) -> dict[int, Floats]:
    """Return the shares of the place that asks most: with those of another it fails there."""
    place = 0
    for _ in range(_PLACES_TRIED):
        base = {number: np.full(1, float(value[place])) for number, value in shares.items()}
        margins = holds.margins(base)
        hardest = int(np.argmin(margins))
        if hardest == place or margins[hardest] >= -_SMALL:
            break
        place = hardest
    return base


def _from_values(probe: Probe, law: Contribution, start: Values, base: Values) -> Growth:
    """Return the growth of lines from values of theirs, in the terms of their own positions."""
    figures = probe.figures({**start, **base})
    parts = {}
    for number in base:
        read = probe.chain.lines[number]
        own = law.of(figures.own[law.figure][read.row], np.ones(1))
        parts[number] = own - image_factor(probe.chain, read)
    return Growth(probe, law, parts, figures.own.get("gain"), None)
