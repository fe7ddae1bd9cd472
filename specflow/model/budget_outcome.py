"""What computing a budget came to, as data: what tables, pictures, pages and the workbook show of it.

It is made by a workflow from what the budgets package returns, and never stored. Arrays have positions or lines on the
first axis and places of evaluation (n) on the last; dB, dBm and so on as the units beside them say.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

from specflow.model.budget import Budget, BudgetPosition
from specflow.model.budget_line import BudgetLine
from specflow.model.requirement import Requirement

Floats = NDArray[np.float64]


class Way(StrEnum):
    """A way to treat the tolerances of a budget."""

    NOMINAL = "nominal"
    WORST_CASE = "worst case"
    RSS = "root sum of squares"
    MONTE_CARLO = "monte carlo"


class LineForm(StrEnum):
    """How the law takes the value that a line states."""

    AS_IT_IS = "as it is"
    LOSS = "loss"  # a gain with the other sign
    TEMPERATURE = "temperature"  # a noise temperature as a noise figure
    DOUBLE_SIDEBAND = "double sideband"  # a double-sideband noise figure as a single-sideband one
    SIGNAL_TO_ERROR = "signal to error"  # a ratio in dB as an error vector
    LEAKAGE = "leakage"  # an unwanted level in dBc as an error vector
    PHASE_NOISE = "phase noise"  # a phase error in degrees as an error vector


@dataclass(frozen=True, slots=True, eq=False)
class LineOutcome:
    """A line with its value (n,) in its own unit, and the figure that the law takes from it.

    ``figure`` names it ("gain", "noise_figure", "iip3" ..., "amount"), ``taken`` (n,) is the stated value in ``unit``,
    the unit in which the law takes it, before it is referred to a port or to all elements. ``port``: "output" where the
    gain of the position refers it to its input. ``factor`` and ``offset`` make one element's contribution that of the
    position.
    """

    line: BudgetLine
    row: int
    value: Floats
    taken: Floats
    unit: str
    figure: str
    form: LineForm
    port: str
    factor: float = 1.0
    offset: float = 0.0


@dataclass(frozen=True, slots=True, eq=False)
class ServedOutcome:
    """One requirement that a budget serves, held against the result at every place of evaluation.

    ``lower``, ``upper`` (n,) in ``unit``, the unit of the limit: ±inf where that side has none. ``result`` (n,) is in
    the same unit. ``margin`` (n,) in ``margin_unit`` is the distance to the limit less the ``reserve``, positive is
    good, NaN where nothing is required or the limit is not known (``why``). ``worst`` is the place with the smallest
    margin, -1 where there is none.
    """

    requirement: Requirement
    unit: str
    margin_unit: str
    lower: Floats
    upper: Floats
    result: Floats
    margin: Floats
    reserve: float
    reserve_holder: str
    worst: int
    why: str = ""

    @property
    def smallest_margin(self) -> float:
        """The margin at the worst place, NaN where there is none."""
        return float(self.margin[self.worst]) if self.worst >= 0 else float("nan")

    @property
    def closes(self) -> bool | None:
        """Whether the limit is kept everywhere with the reserve; None where it is not known at some required place."""
        if self.worst >= 0 and self.smallest_margin < 0:
            return False
        return None if self.worst < 0 or self.why else True


@dataclass(frozen=True, slots=True, eq=False)
class QuantityOutcome:
    """One quantity of a budget: ``result`` (n,), ``cumulative`` (positions, n), ``shares`` (positions, n) or None.

    ``slopes`` (lines, n) are per unit of each line's tolerance; ``shared`` says what the shares are parts of.
    """

    parameter: str
    unit: str
    law: str
    result: Floats
    cumulative: Floats
    served: tuple[ServedOutcome, ...]
    slopes: Floats
    shares: Floats | None = None
    shared: str = ""


@dataclass(frozen=True, slots=True)
class WayOutcome:
    """What one way of treating tolerances says about one requirement.

    ``low`` and ``high`` are the result at the place with the smallest ``margin``, in ``unit``. ``assumes`` says what
    the way takes for granted. ``refused`` is the reason where the way cannot be gone; then nothing else is there.
    """

    way: Way
    requirement: str
    parameter: str
    unit: str = ""
    low: float = float("nan")
    high: float = float("nan")
    margin: float = float("nan")
    margin_unit: str = ""
    worst: int = -1
    probability: str = ""
    assumes: str = ""
    means: str = ""
    refused: str = ""


@dataclass(frozen=True, slots=True, eq=False)
class ChanceOutcome:
    """A requirement over the specimens of a Monte Carlo run.

    ``probability`` (n,) that a specimen meets the limit at each place; ``joint`` at all of them, with its interval.
    ``quantiles``: part of the specimens -> worst margin that they fall short of. ``counts`` between ``edges`` are those
    of the worst margin of a specimen, in ``margin_unit``.
    """

    requirement: Requirement
    parameter: str
    margin_unit: str
    probability: Floats
    joint: float
    joint_words: str
    quantiles: Mapping[float, float]
    edges: Floats
    counts: NDArray[np.int64]


@dataclass(frozen=True, slots=True, eq=False)
class BudgetOutcome:
    """A budget evaluated: nominal at every place, and what the ways of treating tolerances say.

    ``places`` are the conditions in words; ``figures`` (positions, n) what the law took; ``levels`` (positions + 1, n)
    the level at the input and behind each position in dBm; ``noise`` the noise level there in the bandwidth of the
    budget, or None. ``temperature_k`` (positions, n) is NaN where no temperature is stated. ``source_k`` is the noise
    temperature of what feeds the chain. ``turns`` says of each position whether it is a mixer whose image noise is
    followed ("image"), another mixer ("plain") or none; empty where no image noise counts. ``worst`` is the place and
    the requirement with the smallest margin.
    """

    budget: Budget
    places: tuple[str, ...]
    positions: tuple[BudgetPosition, ...]
    quantities: tuple[QuantityOutcome, ...]
    lines: tuple[LineOutcome, ...]
    figures: Mapping[str, Floats]
    temperature_k: Floats
    levels: Floats | None = None
    noise: Floats | None = None
    source_k: Floats | None = None
    turns: tuple[str, ...] = ()
    worst: tuple[str, int] | None = None
    ways: tuple[WayOutcome, ...] = ()
    chances: tuple[ChanceOutcome, ...] = ()
    joint_words: str = ""
    trials: int = 0
    seed: int = 0
    notes: tuple[str, ...] = ()

    @property
    def served(self) -> tuple[ServedOutcome, ...]:
        """All requirements that the budget serves."""
        return tuple(one for quantity in self.quantities for one in quantity.served)

    @property
    def place(self) -> int:
        """The place to look at first: the worst, else the first."""
        return self.worst[1] if self.worst is not None else 0
