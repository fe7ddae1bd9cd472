"""Monte Carlo: specimens of a budget, each the same at all its condition points."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain, Overrides
from specflow.budgets.draws import CHUNK, Draws, draws_of
from specflow.budgets.evaluate import Prepared, nominal_result, prepare
from specflow.budgets.margins import Bar
from specflow.budgets.result import BudgetResult
from specflow.budgets.specimens import plan_of, results_of
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
#: The parts of all specimens at which the worst margin is told.
QUANTILES = (0.001, 0.01, 0.05, 0.1, 0.5, 0.9, 0.95, 0.99, 0.999)
_BINS = 60
_CONFIDENCE = 0.95
_EDGE = 2.326  # of a normal distribution one in a hundred lies beyond it
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
        if not self.trials:
            return "not known: no limit is known at any condition"
        return (
            f"{percent_words(self.value)} % ({percent_words(self.low)} to {percent_words(self.high)} % with 95 % "
            "confidence, sampling only: what is assumed of the lines is not part of it)"
        )


def percent_words(share: float) -> str:
    """Return a share in per cent to four digits, with more where it would read 100 or 0 and is neither."""
    digits = 4
    while (shown := f"{100 * share:.{digits}g}") == "100" and share < 1.0 and digits < 12:
        digits += 1
    return shown


@dataclass(frozen=True, eq=False)
class ServedChance:
    """One requirement over all trials.

    ``probability`` (n,) that a specimen meets the limit at each place, NaN where nothing is required; ``joint``: that
    it meets it at all places. ``place``: where most specimens miss it, or come nearest to it where none does; -1 where
    nothing is required. ``worst`` float32 (trials,) is the worst margin of each specimen in ``margin_unit``, +inf
    where the limit is not known anywhere: 4 bytes a trial, all that is kept of it.
    """

    requirement: Requirement
    margin_unit: str
    probability: Floats
    joint: Probability
    place: int
    worst: Margins

    def quantile(self, part: float) -> float:
        """Return the worst margin that ``part`` of all specimens fall short of, NaN where none is known."""
        return float(np.quantile(self._known, part)) if len(self._known) else float("nan")

    @cached_property
    def quantiles(self) -> Mapping[float, float]:
        """The worst margins at the parts ``QUANTILES``."""
        if not len(self._known):
            return dict.fromkeys(QUANTILES, float("nan"))
        values = np.quantile(self._known, QUANTILES)
        return {part: float(value) for part, value in zip(QUANTILES, values, strict=True)}

    @property
    def edges(self) -> Floats:
        """The ends of the bins of ``histogram``, in ``margin_unit``."""
        return self._bins[1]

    @property
    def histogram(self) -> NDArray[np.int64]:
        """How many specimens have their worst margin in each bin between ``edges``."""
        return self._bins[0]

    @cached_property
    def _known(self) -> Margins:
        finite = np.isfinite(self.worst)
        return self.worst if finite.all() else self.worst[finite]

    @cached_property
    def _bins(self) -> tuple[NDArray[np.int64], Floats]:
        if not len(self._known):
            return np.zeros(1, np.int64), np.zeros(2)
        counts, ends = np.histogram(self._known, _BINS)
        return counts.astype(np.int64), ends.astype(np.float64)


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
    told: Callable[[int], None] | None = None,
) -> MonteCarloResult:
    """Return probabilities and worst margins of ``trials`` specimens drawn by the tolerances of the lines.

    One specimen has one deviation of each line at all its conditions; lines of one correlation group share it. The
    result depends on ``seed`` and ``trials`` only: ``block`` (trials handed out at once) and ``threads`` change the
    time it takes. ``told`` hears how many trials are done. Levels that drive a block are those of the nominal chain.

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
    return drawn_result(prepared, draws_of(prepared.chain, seed), trials, seed, block, threads, told)


def drawn_result(
    prepared: Prepared,
    draws: Draws,
    trials: int,
    seed: int,
    block: int = _BLOCK,
    threads: int = 1,
    told: Callable[[int], None] | None = None,
) -> MonteCarloResult:
    """Return the result of a budget that was read, from streams of deviations."""
    run = _Run(prepared, draws, trials, block, threads, told)
    return _result(run, run.tally(), seed)


@dataclass(slots=True, eq=False)
class _Tally:
    """Sums of one pass: ``passes`` (bars, n), sums of deviations from nominal (outputs, n), worst margins, clipped."""

    passes: NDArray[np.int64]
    sums: Floats
    squares: Floats
    worst: Margins
    clipped: int = 0

    @classmethod
    def empty(cls, bars: int, outputs: int, size: int, worst: Margins) -> _Tally:
        """Return a tally of nothing."""
        return cls(
            np.zeros((bars, size), np.int64), np.zeros((outputs, size)), np.zeros((outputs, size)), worst
        )

    def add(self, other: _Tally) -> None:
        """Add the counts of later chunks."""
        self.passes += other.passes
        self.sums += other.sums
        self.squares += other.squares
        self.clipped += other.clipped


class _Run:
    """One way through all trials, chunk by chunk."""

    def __init__(
        self,
        prepared: Prepared,
        draws: Draws,
        trials: int,
        block: int,
        threads: int,
        told: Callable[[int], None] | None,
    ) -> None:
        self.told = told
        self.prepared = prepared
        self.chain: Chain = prepared.chain
        self.draws = draws
        self.trials = trials
        self.chunks_at_once = max(1, -(-block // CHUNK))
        self.threads = threads
        self.nominal = nominal_result(prepared)
        self.bars = [(place, bar) for place, bars in enumerate(prepared.bars) for bar in bars]
        self.plan = plan_of(self.chain, prepared.outputs)

    def tally(self) -> _Tally:
        """Count over all trials, in the order of the chunks: rounding is the same however they are shared out."""
        chunks = -(-self.trials // CHUNK)
        step = self.chunks_at_once
        pieces = [range(start, min(start + step, chunks)) for start in range(0, chunks, step)]
        worst = np.full((len(self.bars), self.trials), np.inf, np.float32)

        def work(piece: range) -> list[_Tally]:
            return [self._chunk(number, worst) for number in piece]

        parts: list[_Tally] = []
        if self.threads == 1:
            for piece in pieces:
                parts += self._counted(piece, work(piece))
        else:
            with ThreadPoolExecutor(self.threads) as pool:
                for piece, found in zip(pieces, pool.map(work, pieces), strict=True):
                    parts += self._counted(piece, found)
        total = parts[0]
        for part in parts[1:]:
            total.add(part)
        return total

    def _counted(self, piece: range, found: list[_Tally]) -> list[_Tally]:
        """Tell how many trials are done after a piece."""
        if self.told is not None:
            self.told(min(piece.stop * CHUNK, self.trials))
        return found

    def _chunk(self, number: int, worst: Margins) -> _Tally:
        size = min(CHUNK, self.trials - number * CHUNK)
        deviations = [None if one is None else one[:size] for one in self.draws.chunk(number)]
        tally = _Tally.empty(len(self.bars), len(self.prepared.outputs), self.chain.size, worst)
        kept = worst[:, number * CHUNK : number * CHUNK + size]
        for points, trials, results, clipped in results_of(self.plan, deviations, size):
            tally.clipped += clipped
            for place, output in enumerate(self.prepared.outputs):
                apart = results[output.parameter] - self.nominal.outputs[place].result[points, None]
                tally.sums[place, points] += apart.sum(axis=1)
                tally.squares[place, points] += np.einsum("nt,nt->n", apart, apart)
            for row, (place, bar) in enumerate(self.bars):
                margin = bar.margin(results[self.prepared.outputs[place].parameter], points)
                tally.passes[row, points] += np.count_nonzero(margin >= 0, axis=1)
                here, lowest = kept[row, trials], np.fmin.reduce(margin, axis=0)
                np.fmin(here, lowest, out=here, casting="same_kind")
        return tally


def _result(run: _Run, tally: _Tally, seed: int) -> MonteCarloResult:
    rows = list(zip(run.bars, tally.passes, tally.worst, strict=True))
    outputs = []
    for place, one in enumerate(run.nominal.outputs):
        apart = tally.sums[place] / run.trials
        spread = np.sqrt(np.maximum(tally.squares[place] / run.trials - apart**2, 0.0))
        mean = one.result + apart
        served = tuple(
            _chance(bar, passes, worst, run.trials, _edge(bar, mean, spread))
            for (owner, bar), passes, worst in rows
            if owner == place
        )
        outputs.append(OutputChance(one.parameter, one.unit, mean, spread, served))
    met = np.ones(run.trials, np.bool_)
    for worst in tally.worst:
        met &= worst >= 0
    is_known = any(bar.required.any() for _, bar in run.bars)
    joint = probability(int(np.count_nonzero(met)), run.trials) if is_known else UNKNOWN
    notes = (*run.prepared.notes, *_notes(run, tally.clipped))
    return MonteCarloResult(run.chain.budget, run.nominal, run.trials, seed, tuple(outputs), joint, notes)


def _edge(bar: Bar, mean: Floats, spread: Floats) -> Floats:
    """Return the margin (n,) at the end of what is drawn, NaN where nothing is required: it only ranks the places."""
    return np.fmin(bar.margin(mean - _EDGE * spread), bar.margin(mean + _EDGE * spread))


def _chance(bar: Bar, passes: NDArray[np.int64], worst: Margins, trials: int, edge: Floats) -> ServedChance:
    share = np.where(bar.required, passes / trials, np.nan)
    joint = probability(int(np.count_nonzero(worst >= 0)), trials) if bar.required.any() else UNKNOWN
    place = int(np.lexsort((edge, share))[0]) if bar.required.any() else -1
    return ServedChance(bar.requirement, bar.margin_unit, share, joint, place, worst)


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
