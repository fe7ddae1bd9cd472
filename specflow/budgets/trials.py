"""Monte Carlo: specimens of a budget, each the same at all its condition points."""

from __future__ import annotations

from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain, Overrides
from specflow.budgets.draws import CHUNK, Draws, draws_of
from specflow.budgets.evaluate import Prepared, nominal_result, prepare
from specflow.budgets.margins import Bar
from specflow.budgets.outputs import Output
from specflow.budgets.result import BudgetResult
from specflow.budgets.specimens import physical_ends, results_of
from specflow.budgets.spread import check_bounds
from specflow.errors import CalculationError
from specflow.model.base import code_key
from specflow.model.budget import Budget
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary

Floats = NDArray[np.float64]
Margins = NDArray[np.float32]
MOST_TRIALS = 100_000_000
_AT_ONCE = 4
"""Worst margins kept of a trial, 4 bytes each; a budget of more requirements is drawn again for the others."""
_BINS = 60
_CONFIDENCE = 0.95
_BLOCK = 4 * CHUNK


@dataclass(frozen=True, slots=True)
class Probability:
    """A share of trials with the interval that sampling alone leaves open (95 %, exact binomial)."""

    value: float
    low: float
    high: float
    trials: int

    @property
    def words(self) -> str:
        """Say the probability with its confidence."""
        return (
            f"{100 * self.value:.4g} % ({100 * self.low:.4g} to {100 * self.high:.4g} % with 95 % confidence, "
            "sampling only: what is assumed of the lines is not part of it)"
        )


@dataclass(frozen=True, slots=True, eq=False)
class ServedChance:
    """One requirement over all trials.

    ``probability`` (n,) that a specimen meets the limit at each place, NaN where nothing is required; ``joint``: that
    it meets it at all places. ``quantiles`` are those of the specimen's worst margin, in ``margin_unit``: the margin
    that the named part of all specimens falls short of. ``histogram`` counts worst margins between ``edges``.
    """

    requirement: Requirement
    margin_unit: str
    probability: Floats
    joint: Probability
    quantiles: dict[float, float]
    edges: Floats
    histogram: NDArray[np.int64]


@dataclass(frozen=True, slots=True, eq=False)
class OutputChance:
    """One quantity over all trials: mean and standard deviation (n,) in ``unit``, and the requirements on it."""

    parameter: str
    unit: str
    mean: Floats
    deviation: Floats
    served: tuple[ServedChance, ...]


@dataclass(frozen=True, slots=True, eq=False)
class MonteCarloResult:
    """What specimens drawn by the tolerances of the lines show.

    ``joint``: that a specimen meets every limit of the budget at every place. ``notes`` say what was assumed.
    """

    budget: Budget
    nominal: BudgetResult
    trials: int
    seed: int
    outputs: tuple[OutputChance, ...]
    joint: Probability
    notes: tuple[str, ...]

    def of(self, parameter: str) -> OutputChance:
        """Return one quantity. KeyError for one that the budget does not give."""
        for one in self.outputs:
            if code_key(one.parameter) == code_key(parameter):
                return one
        raise KeyError(parameter)


def monte_carlo(
    budget: Budget,
    snapshot: Snapshot,
    dictionary: Dictionary,
    *,
    trials: int,
    seed: int,
    values: Overrides | None = None,
    block: int = _BLOCK,
    threads: int = 1,
) -> MonteCarloResult:
    """Return probabilities and worst margins of ``trials`` specimens drawn by the tolerances of the lines.

    One specimen has one deviation of each line at all its conditions; lines of one correlation group share it. The
    result depends on ``seed`` and ``trials`` only: ``block`` (trials handed out at once) and ``threads`` change the
    time it takes. Levels that drive a block are those of the nominal chain.

    Raises CalculationError for lines without a distribution, else as ``evaluate_budget``.
    """
    if not 1 <= trials <= MOST_TRIALS:
        raise CalculationError(f"{trials} trials", hint=f"ask for 1 to {MOST_TRIALS:,}")
    if block < 1 or threads < 1:
        raise CalculationError(
            "a block has at least one trial, and there is at least one thread", hint="give 1 or more"
        )
    prepared = prepare(budget, snapshot, dictionary, values=values)
    check_bounds(prepared.chain)
    draws = draws_of(prepared.chain, seed)
    run = _Run(prepared, draws, trials, block, threads)
    groups = _groups(run.bars)
    tallies = [run.tally(group, with_values=number == 0) for number, group in enumerate(groups)]
    return _result(prepared, run, groups, tallies, seed)


def _groups(bars: Sequence[tuple[int, Bar]]) -> list[range]:
    """Return which requirements are counted together: at most 16 bytes are kept of a trial."""
    if len(bars) <= _AT_ONCE:
        return [range(len(bars))]
    size = _AT_ONCE - 1  # the fourth place is taken by whether all limits were met so far
    return [range(start, min(start + size, len(bars))) for start in range(0, len(bars), size)]


@dataclass(slots=True, eq=False)
class _Tally:
    """Sums of one pass: ``passes`` (bars, n), sums of deviations from nominal (outputs, n), worst margins, clipped."""

    passes: NDArray[np.int64]
    sums: Floats
    squares: Floats
    worst: Margins
    clipped: int


class _Run:
    """One way through all trials, chunk by chunk."""

    def __init__(self, prepared: Prepared, draws: Draws, trials: int, block: int, threads: int) -> None:
        self.prepared = prepared
        self.chain: Chain = prepared.chain
        self.draws = draws
        self.trials = trials
        self.chunks_at_once = max(1, -(-block // CHUNK))
        self.threads = threads
        self.nominal = nominal_result(prepared)
        self.bars = [(place, bar) for place, bars in enumerate(prepared.bars) for bar in bars]
        self.ends = physical_ends(self.chain)

    def tally(self, group: range, *, with_values: bool) -> _Tally:
        """Count one group of requirements over all trials."""
        chunks = -(-self.trials // CHUNK)
        worst = np.empty((len(group), self.trials), np.float32)
        pieces = [
            range(start, min(start + self.chunks_at_once, chunks))
            for start in range(0, chunks, self.chunks_at_once)
        ]

        def work(piece: range) -> list[_Tally]:
            return [self._chunk(number, group, worst, with_values) for number in piece]

        if self.threads == 1:
            parts = [tally for piece in pieces for tally in work(piece)]
        else:
            with ThreadPoolExecutor(self.threads) as pool:
                parts = [tally for found in pool.map(work, pieces) for tally in found]
        total = parts[0]
        for part in parts[
            1:
        ]:  # in the order of the chunks, so that rounding is the same however they were shared out
            total.passes += part.passes
            total.sums += part.sums
            total.squares += part.squares
            total.clipped += part.clipped
        return total

    def _chunk(self, number: int, group: range, worst: Margins, with_values: bool) -> _Tally:
        size = min(CHUNK, self.trials - number * CHUNK)
        deviations = [None if one is None else one[:size] for one in self.draws.chunk(number)]
        places, n = len(self.prepared.outputs), self.chain.size
        outputs = self._asked(group, with_values)
        tally = _Tally(
            np.zeros((len(group), n), np.int64), np.zeros((places, n)), np.zeros((places, n)), worst, 0
        )
        kept = worst[:, number * CHUNK : number * CHUNK + size]
        kept.fill(np.inf)
        for points, trials, results, clipped in results_of(self.chain, outputs, deviations, self.ends):
            tally.clipped += clipped
            for place, output in enumerate(self.prepared.outputs):
                if with_values and output in outputs:
                    apart = results[output.parameter] - self.nominal.outputs[place].result[points, None]
                    tally.sums[place, points] += apart.sum(axis=1)
                    tally.squares[place, points] += np.einsum("nt,nt->n", apart, apart)
            for row, member in enumerate(group):
                place, bar = self.bars[member]
                margin = bar.margin(results[self.prepared.outputs[place].parameter], points)
                tally.passes[row, points] += np.count_nonzero(margin >= 0, axis=1)
                np.fmin(
                    kept[row, trials],
                    np.fmin.reduce(margin, axis=0),
                    out=kept[row, trials],
                    casting="same_kind",
                )
        return tally

    def _asked(self, group: range, with_values: bool) -> tuple[Output, ...]:
        if with_values:
            return self.prepared.outputs
        places = {self.bars[member][0] for member in group}
        return tuple(output for place, output in enumerate(self.prepared.outputs) if place in places)


def _result(
    prepared: Prepared, run: _Run, groups: Sequence[range], tallies: Sequence[_Tally], seed: int
) -> MonteCarloResult:
    chances: dict[int, ServedChance] = {}
    met = np.ones(run.trials, np.bool_)
    for group, tally in zip(groups, tallies, strict=True):
        for row, member in enumerate(group):
            bar = run.bars[member][1]
            met &= tally.worst[row] >= 0
            chances[member] = _chance(bar, tally.passes[row], tally.worst[row], run.trials)
    first = tallies[0]
    outputs = []
    for place, one in enumerate(run.nominal.outputs):
        mean = first.sums[place] / run.trials
        variance = np.maximum(first.squares[place] / run.trials - mean**2, 0.0)
        served = tuple(chances[member] for member, (owner, _) in enumerate(run.bars) if owner == place)
        outputs.append(OutputChance(one.parameter, one.unit, one.result + mean, np.sqrt(variance), served))
    joint = probability(int(np.count_nonzero(met)), run.trials)
    notes = (*prepared.notes, *_notes(run, first.clipped))
    return MonteCarloResult(
        prepared.chain.budget, run.nominal, run.trials, seed, tuple(outputs), joint, notes
    )


#: The parts of all specimens at which the worst margin is told.
QUANTILES = (0.001, 0.01, 0.05, 0.1, 0.5, 0.9, 0.95, 0.99, 0.999)


def _chance(bar: Bar, passes: NDArray[np.int64], worst: Margins, trials: int) -> ServedChance:
    share = np.where(bar.required, passes / trials, np.nan)
    finite = worst[np.isfinite(worst)]
    if len(finite) == 0:
        edges, histogram = np.array([0.0, 0.0]), np.zeros(1, np.int64)
        quantiles = dict.fromkeys(QUANTILES, float("nan"))
    else:
        values = np.quantile(finite, QUANTILES)
        quantiles = {part: float(value) for part, value in zip(QUANTILES, values, strict=True)}
        counts, ends = np.histogram(finite, _BINS)
        edges, histogram = ends.astype(np.float64), counts.astype(np.int64)
    joint = probability(int(np.count_nonzero(worst >= 0)), trials) if bar.required.any() else UNKNOWN
    return ServedChance(bar.requirement, bar.margin_unit, share, joint, quantiles, edges, histogram)


UNKNOWN = Probability(float("nan"), 0.0, 1.0, 0)
"""Where the limit is not known anywhere."""


def probability(successes: int, trials: int) -> Probability:
    """Return a share of trials with its exact binomial interval (Clopper and Pearson, Biometrika 26, 1934)."""
    from scipy.special import betaincinv  # late: loading it takes longer than many a budget

    tail = (1.0 - _CONFIDENCE) / 2.0
    low = 0.0 if successes == 0 else float(betaincinv(successes, trials - successes + 1, tail))
    high = 1.0 if successes == trials else float(betaincinv(successes + 1, trials - successes, 1.0 - tail))
    return Probability(successes / trials, low, high, trials)


def _notes(run: _Run, clipped: int) -> list[str]:
    notes = [
        "one specimen has the same deviations at all its conditions; confidence is that of sampling only"
    ]
    if clipped:
        notes.append(
            f"{clipped} of the figures drawn lay beyond 0 dB or 0 K, where no block can be, and were taken as 0"
        )
    if run.chain.input_level is not None:
        notes.append("levels that drive a block are those of the nominal chain")
    unknown = [f"{bar.requirement.id} ({bar.why})" for _, bar in run.bars if bar.why]
    if unknown:
        notes.append(f"left out where the limit is not known: {', '.join(unknown)}")
    return notes
