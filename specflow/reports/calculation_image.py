"""The columns of a worksheet that follow the noise at the image frequency of mixers, in units of 290 K.

Behind a position: at the signal S' = g·(S + F - 1), at the image Q' = r·g·(Q + F - 1) + (1 - r)·t; a mixer is taken
with F - 1 + r·Q + (1 - r)·t, and behind it both are one; t is the physical temperature where it is passive. What feeds
the chain is followed in the same way, for a source not at 290 K.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Protocol

from specflow.model.budget_outcome import BudgetOutcome
from specflow.reports.calculation_grid import Maker, Term

_ONE = Term("1", 1.0)


class Cells(Protocol):
    """The chain that the columns are put in."""

    outcome: BudgetOutcome
    fixed: dict[str, Term]
    temperatures: dict[int, Term]

    def own(self, key: str, row: int) -> Term:
        """Return the cell of a column at one position."""


def image_columns(cells: Cells) -> Iterator[tuple[str, str, Maker]]:
    """Yield key, title and maker of each column; each sees those before it, and all of the row above."""
    yield "image_noise_figure", "NF with image [dB]", lambda row, _: _noise_figure(cells, row)
    yield "signal_noise", "Noise at signal [T/290 K]", lambda row, _: _signal(cells, row)
    yield "image_noise", "Noise at image [T/290 K]", lambda row, _: _image(cells, row)
    yield "image_weight", "Source at images", lambda row, _: _weight(cells, row)
    yield "image_source", "Source at next image", lambda row, _: _source(cells, row)


def _before(cells: Cells, key: str, row: int, start: Term = _ONE) -> Term:
    return start if row == 0 else cells.own(key, row - 1)


def _ratio(term: Term, sign: str = "") -> Term:
    value = 10.0 ** ((-term.value if sign else term.value) / 10.0)
    return Term(f"10^({sign}{term.text}/10)", value)


def _passed(cells: Cells, row: int) -> Term:
    return _ratio(cells.own("image_rejection", row), "-")


def _noise_figure(cells: Cells, row: int) -> Term:
    own = cells.own("noise_figure", row)
    if cells.outcome.turns[row] != "image":
        return own
    factor, passed, noise = _ratio(own), _passed(cells, row), _before(cells, "image_noise", row)
    kept = _kept(cells, row, passed)
    value = factor.value - 1.0 + passed.value * noise.value + kept.value
    text = f"10*LOG10({factor.text}-1+{passed.text}*{noise.text}+{kept.text})"
    return Term(text, 10.0 * math.log10(value))


def _kept(cells: Cells, row: int, passed: Term) -> Term:
    """Return the noise of a filter where it keeps the image off, 290 K = 1."""
    own = Term(f"(1-{passed.text})", 1.0 - passed.value)
    kelvin = cells.temperatures.get(row)
    if kelvin is None:
        return own
    t0 = cells.fixed["t0"]
    return Term(f"{own.text}*{kelvin.text}/{t0.text}", own.value * kelvin.value / t0.value)


def _behind(cells: Cells, row: int, figure: str, before: str) -> Term:
    gain, factor = _ratio(cells.own("gain", row)), _ratio(cells.own(figure, row))
    noise = _before(cells, before, row)
    value = gain.value * (noise.value + factor.value - 1.0)
    return Term(f"{gain.text}*({noise.text}+{factor.text}-1)", value)


def _signal(cells: Cells, row: int) -> Term:
    return _behind(cells, row, "image_noise_figure", "signal_noise")


def _image(cells: Cells, row: int) -> Term:
    if cells.outcome.turns[row] != "none":
        return cells.own("signal_noise", row)
    passed, behind = _passed(cells, row), _behind(cells, row, "noise_figure", "image_noise")
    kept = _kept(cells, row, passed)
    return Term(f"{passed.text}*{behind.text}+{kept.text}", passed.value * behind.value + kept.value)


def _weight(cells: Cells, row: int) -> Term:
    """How often what feeds the chain is in its noise at images, beside once at the signal."""
    weight = _before(cells, "image_weight", row, Term("0", 0.0))
    if cells.outcome.turns[row] != "image":
        return weight
    passed, source = _passed(cells, row), _before(cells, "image_source", row)
    return weight + Term(f"{passed.text}*{source.text}", passed.value * source.value)


def _source(cells: Cells, row: int) -> Term:
    if cells.outcome.turns[row] != "none":
        return _ONE + cells.own("image_weight", row)
    passed, source = _passed(cells, row), _before(cells, "image_source", row)
    return Term(f"{passed.text}*{source.text}", passed.value * source.value)
