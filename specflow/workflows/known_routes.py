"""How a recorded quantity becomes what a line of a budget states: the same, turned, through the gain, or as noise.

An intercept or compression point recorded at the output of a block serves a line stated at its input through the gain
at the same point (IIP = OIP - G, IP1dB = OP1dB - G + 1), and the other way; a noise temperature is a noise figure,
NF = 10·log(1 + T/290 K). The gain's standard uncertainty is added as independent: u² = u_OIP² + u_G². What is known
through a gain is known no better than that gain.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain
from specflow.budgets.knowledge import Knowledge, KnownLine, best_known
from specflow.calculators.decibel import T0
from specflow.calculators.noise import noise_figure_of_temperature, noise_temperature
from specflow.model.base import code_key
from specflow.model.budget_line import BudgetLine
from specflow.model.evidence import ValueColumn
from specflow.units import parse_unit

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]
_LOSSES = ("insertion_loss", "conversion_loss", "attenuation")


@dataclass(frozen=True, slots=True)
class Route:
    """``sign`` -1 turns a gain into a loss; ``gain`` -1 goes from output to input, +1 back, with ``offset_db``.

    ``unit`` is where values are taken to before that, "" straight to the unit of the line.
    """

    words: str = ""
    sign: float = 1.0
    gain: int = 0
    offset_db: float = 0.0
    unit: str = ""

    @property
    def is_direct(self) -> bool:
        """Whether the column records what the line states, perhaps with the other sign."""
        return not self.unit


_DIRECT = Route()
_TURNED = Route(sign=-1.0)
_FROM_OUTPUT = Route("less the gain", gain=-1, unit="dBm")
_FROM_INPUT = Route("plus the gain", gain=+1, unit="dBm")
#: Recorded parameter, parameter of the line -> the route between them.
_ROUTES = {
    ("oip3", "iip3"): _FROM_OUTPUT,
    ("oip2", "iip2"): _FROM_OUTPUT,
    ("iip3", "oip3"): _FROM_INPUT,
    ("iip2", "oip2"): _FROM_INPUT,
    ("op1db", "ip1db"): Route("less the gain, which has dropped by 1 dB", gain=-1, offset_db=1.0, unit="dBm"),
    ("ip1db", "op1db"): Route(
        "plus the gain, which has dropped by 1 dB", gain=+1, offset_db=-1.0, unit="dBm"
    ),
    ("noise_temperature", "noise_figure"): Route("as a noise figure", unit="K"),
    ("noise_figure", "noise_temperature"): Route("as a noise temperature", unit="dB"),
}


def route_of(column: ValueColumn, line: BudgetLine) -> Route | None:
    """Return how a column becomes what a line states; None where it does not."""
    found, wanted = code_key(column.quantity.parameter), code_key(line.parameter)
    if found == wanted:
        return _DIRECT
    turned = (found == "gain" and wanted in _LOSSES) or (wanted == "gain" and found in _LOSSES)
    if turned and parse_unit(column.unit or "1").is_log:
        return _TURNED
    return _ROUTES.get((found, wanted))


def as_noise(route: Route, value: Floats, u: Floats) -> tuple[Floats, Floats]:
    """Return noise temperatures in K as noise figures in dB, or back, with their standard uncertainty."""
    if route.unit == "K":
        figure = np.asarray(noise_figure_of_temperature(np.maximum(value, 0.0)))
        return figure, u * 10.0 / np.log(10.0) / (T0 + value)
    kelvin = np.asarray(noise_temperature(np.maximum(value, 0.0)))
    return kelvin, u * (T0 + kelvin) * np.log(10.0) / 10.0


@dataclass(frozen=True, slots=True, eq=False)
class GainAt:
    """The gain of one position in dB, by place and specimen: a reading of the same specimen, else the best known."""

    values: Floats
    u: Floats
    rank: Rows
    words: str
    own: Knowledge | None
    sign: float

    @classmethod
    def of(cls, chain: Chain, row: int, knowledge: Sequence[Knowledge]) -> GainAt | None:
        """Return the gain of a position from what is known of its lines; None where no line states one."""
        numbers = chain.at(row, "gain")
        if not numbers:
            return None
        lines = [best_known(chain, number, knowledge) for number in numbers]
        return cls(
            sum((_figure(one, one.value) for one in lines), np.zeros(chain.size)),
            np.sqrt(sum((one.spread**2 + one.common**2 for one in lines), np.zeros(chain.size))),
            np.min([one.rank for one in lines], axis=0),
            " and ".join(one.source_words(0) for one in lines),
            _own(lines, knowledge) if len(lines) == 1 else None,
            float(lines[0].read.role.form.rises),
        )

    def at(self, places: Rows, items: Sequence[str]) -> tuple[Floats, Floats, Rows, str]:
        """Return gain, standard uncertainty, rank and source for pairs of place and specimen ("" for none)."""
        gain, u, rank = self.values[places].copy(), self.u[places].copy(), self.rank[places].copy()
        if self.own is None:
            return gain, u, rank, self.words
        count = 0
        names = np.array([code_key(name) for name in self.own.items])[self.own.item]
        for index, (place, item) in enumerate(zip(places.tolist(), items, strict=True)):
            rows = np.flatnonzero((self.own.place == place) & (names == code_key(item))) if item else ()
            if len(rows):
                count += 1
                gain[index] = self.sign * float(self.own.value[rows].mean())
                known = self.own.u[rows][~np.isnan(self.own.u[rows])]
                u[index] = float(known.max()) if len(known) else 0.0
                rank[index] = int(self.own.rank[rows].max())
        is_all = count == len(places)
        return gain, u, rank, f"the same specimen, {', '.join(self.own.sources)}" if is_all else self.words


def _figure(one: KnownLine, value: Floats) -> Floats:
    return np.asarray(one.read.figure(value))


def _own(lines: Sequence[KnownLine], knowledge: Sequence[Knowledge]) -> Knowledge | None:
    line = lines[0].read.line
    return next(
        (
            one
            for one in knowledge
            if one.position == line.position and code_key(one.parameter) == code_key(line.parameter)
        ),
        None,
    )
