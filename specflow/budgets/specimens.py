"""Results of drawn specimens: blocks of places and trials that stay in the processor's cache."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain
from specflow.budgets.figures import figures_of
from specflow.budgets.forms import AS_IT_IS
from specflow.budgets.image import mixers_of
from specflow.budgets.outputs import Output
from specflow.budgets.paths import groups_of
from specflow.budgets.spread import moves
from specflow.calculators.cascade import cascade_results
from specflow.model.budget import Law
from specflow.model.budget_line import Meaning

Floats = NDArray[np.float64]
_WIDTH = 4096
"""Values of a row at once: places times trials."""
_FUSED = {"gain": "gain_db", "noise_figure": "nf_db", "iip3": "iip3_dbm", "ip1db": "ip1db_dbm"}
Ends = tuple[float, float]
_NO_ENDS: Ends = (-np.inf, np.inf)
Block = tuple[slice, slice, dict[str, Floats], int]


@dataclass(frozen=True, slots=True, eq=False)
class Plan:
    """How specimens of a chain are computed: what is asked for, which lines have ends, and the straight way if any."""

    chain: Chain
    outputs: tuple[Output, ...]
    ends: dict[int, Ends]
    straight: list[list[int]] | None


def plan_of(chain: Chain, outputs: tuple[Output, ...]) -> Plan:
    """Return the plan, made once for all trials."""
    ends = physical_ends(chain)
    return Plan(chain, outputs, ends, _straight(chain, outputs, ends))


def physical_ends(chain: Chain) -> dict[int, Ends]:
    """Return the lines that move and cannot pass 0, with the lowest and highest value in their own unit.

    Losses, noise figures and temperatures are never below 0; the gain of a passive block is never above 0 dB.
    """
    return {
        number: (read.least, read.most)
        for number, read in enumerate(chain.lines)
        if (np.isfinite(read.least) or np.isfinite(read.most))
        and moves(read.line)
        and not (read.line.tolerance is not None and read.line.tolerance.meaning is Meaning.LIMITS)
    }  # limits that reach beyond 0 were refused


def results_of(plan: Plan, deviations: Sequence[Floats | None], size: int) -> Iterator[Block]:
    """Yield (places, trials, result (places, trials) by parameter, figures taken back to 0) block by block.

    ``deviations`` are those of ``size`` trials, by line.
    The cut into blocks depends on the sizes alone.
    """
    chain = plan.chain
    width = min(size, _WIDTH)
    depth = max(1, _WIDTH // width)
    for first in range(0, chain.size, depth):
        places = slice(first, min(first + depth, chain.size))
        for start in range(0, size, width):
            trials = slice(start, min(start + width, size))
            if plan.straight is not None:
                yield places, trials, _straight_results(chain, plan.straight, deviations, places, trials), 0
            else:
                values, clipped = _values(chain, deviations, plan.ends, places, trials)
                yield places, trials, _results(chain, plan.outputs, values, places, trials), clipped


def _straight(chain: Chain, outputs: Sequence[Output], ends: dict[int, Ends]) -> list[list[int]] | None:
    """Return the lines of the four fused figures by position, where each is stated as the law takes it.

    Such chains, which are most, need no copy between drawing and the law. None where something has to be made first.
    """
    if groups_of(chain.positions) or mixers_of(chain) is not None or chain.budget.law is not Law.CASCADE:
        return None
    if {output.parameter for output in outputs} != set(_FUSED) or ends:
        return None
    rows: list[list[int]] = []
    for figure in _FUSED:
        lines = [chain.at(row, figure) for row in range(len(chain.positions))]
        if any(len(numbers) != 1 for numbers in lines):
            return None
        rows.append([numbers[0] for numbers in lines])
    reads = [chain.lines[number] for row in rows for number in row]
    plain = all(
        read.role.form is AS_IT_IS and read.convert.is_identity and read.role.port != "output"
        for read in reads
    )
    return rows if plain and all(position.count == 1 for position in chain.positions) else None


def _straight_results(
    chain: Chain, rows: list[list[int]], deviations: Sequence[Floats | None], places: slice, trials: slice
) -> dict[str, Floats]:
    shape = (len(range(*places.indices(chain.size))), trials.stop - trials.start)
    figures = np.empty((len(rows), len(chain.positions), *shape))
    for table, numbers in zip(figures, rows, strict=True):
        for into, number in zip(table, numbers, strict=True):
            values, deviation = chain.lines[number].values, deviations[number]
            nominal = (values if len(values) == 1 else values[places])[:, None]
            np.add(nominal, 0.0 if deviation is None else deviation[None, trials], out=into)
    return _fused(chain, *figures)


def _fused(chain: Chain, gain: Floats, noise: Floats, iip3: Floats, ip1db: Floats) -> dict[str, Floats]:
    law: Literal["coherent", "noncoherent"] = (
        "coherent" if chain.budget.intermodulation == "coherent" else "noncoherent"
    )
    found = cascade_results(gain, noise, iip3, ip1db, law)
    return {name: np.asarray(getattr(found, field), np.float64) for name, field in _FUSED.items()}


def _values(
    chain: Chain, deviations: Sequence[Floats | None], ends: dict[int, Ends], places: slice, trials: slice
) -> tuple[list[Floats], int]:
    """Return the value of every line at places and trials, (places or 1, trials or 1)."""
    values: list[Floats] = []
    clipped = 0
    for number, (read, deviation) in enumerate(zip(chain.lines, deviations, strict=True)):
        nominal = read.values[:, None] if len(read.values) == 1 else read.values[places, None]
        value = nominal if deviation is None else nominal + deviation[None, trials]
        low, high = ends.get(number, _NO_ENDS)
        if number in ends and (value.min() < low or value.max() > high):
            clipped += int(np.count_nonzero((value < low) | (value > high)))
            value = np.clip(value, low, high)
        values.append(value)
    return values, clipped


def _results(
    chain: Chain, outputs: Sequence[Output], values: Sequence[Floats], places: slice, trials: slice
) -> dict[str, Floats]:
    needed = {figure for output in outputs for figure in output.takes}
    figures = figures_of(chain, values, needed, places)
    shape = (len(range(*places.indices(chain.size))), trials.stop - trials.start)
    names = {output.parameter for output in outputs}
    results: dict[str, Floats] = {}
    if chain.budget.law is Law.CASCADE and set(_FUSED) <= needed and set(_FUSED) <= names:
        results = _fused(chain, *(figures[name] for name in _FUSED))
    for output in outputs:
        if output.parameter not in results:
            results[output.parameter] = output.value(figures)
    return {name: np.broadcast_to(value, shape) for name, value in results.items()}
