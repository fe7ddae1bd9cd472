"""Results of drawn specimens: blocks of places and trials that stay in the processor's cache."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain, ReadLine
from specflow.budgets.figures import figures_of
from specflow.budgets.outputs import Output
from specflow.budgets.spread import moves
from specflow.calculators.cascade import cascade_results
from specflow.model.budget import Law
from specflow.units import Converter, converter

Floats = NDArray[np.float64]
_WIDTH = 4096
"""Values of a row at once: places times trials."""
_FUSED = {"gain": "gain_db", "noise_figure": "nf_db", "iip3": "iip3_dbm", "ip1db": "ip1db_dbm"}
Ends = tuple[float, float]
_NO_ENDS: Ends = (-np.inf, np.inf)
Block = tuple[slice, slice, dict[str, Floats], int]


def physical_ends(chain: Chain) -> dict[int, Ends]:
    """Return the lines that move and cannot pass 0, with the lowest and highest value in their own unit.

    Losses, noise figures and temperatures are never below 0; the gain of a passive block is never above 0 dB.
    """
    ends: dict[int, Ends] = {}
    for number, read in enumerate(chain.lines):
        if not moves(read.line):
            continue
        zero = float(_back(read)(0.0))
        if read.role.figure in ("noise_figure", "source_k") or (
            read.role.figure == "gain" and read.role.form.rises < 0
        ):
            ends[number] = (zero, np.inf)
        elif read.role.figure == "gain" and chain.positions[read.row].passive:
            ends[number] = (-np.inf, zero)
    return ends


def _back(read: ReadLine) -> Converter:
    """Return the conversion from the unit of the law to the line's own."""
    if read.convert.is_identity:
        return read.convert
    return converter(read.convert.target, read.convert.source, log_factor=10)


def results_of(
    chain: Chain, outputs: Sequence[Output], deviations: Sequence[Floats | None], ends: dict[int, Ends]
) -> Iterator[Block]:
    """Yield (places, trials, result (places, trials) by parameter, figures taken back to 0) block by block.

    The cut into blocks depends on the sizes alone.
    """
    size = next((len(one) for one in deviations if one is not None), 1)
    width = min(size, _WIDTH)
    depth = max(1, _WIDTH // width)
    for first in range(0, chain.size, depth):
        places = slice(first, min(first + depth, chain.size))
        for start in range(0, size, width):
            trials = slice(start, min(start + width, size))
            values, clipped = _values(chain, deviations, ends, places, trials)
            yield places, trials, _results(chain, outputs, values, places, trials), clipped


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
    needed = {figure for output in outputs for figure in output.needs}
    figures = figures_of(chain, values, needed, places)
    shape = (len(range(*places.indices(chain.size))), trials.stop - trials.start)
    names = {output.parameter for output in outputs}
    results: dict[str, Floats] = {}
    if chain.budget.law is Law.CASCADE and set(_FUSED) <= needed and set(_FUSED) <= names:
        fused = cascade_results(
            figures["gain"],
            figures["noise_figure"],
            figures["iip3"],
            figures["ip1db"],
            "coherent" if chain.budget.intermodulation == "coherent" else "noncoherent",
        )
        results = {name: np.asarray(getattr(fused, field), np.float64) for name, field in _FUSED.items()}
    for output in outputs:
        if output.parameter not in results:
            results[output.parameter] = output.value(figures)
    return {name: np.broadcast_to(value, shape) for name, value in results.items()}
