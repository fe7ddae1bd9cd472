"""Compute a budget and hand over what it came to, as data that tables, pictures and writers share."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from specflow.budgets import (
    BudgetResult,
    MonteCarloResult,
    Probability,
    ReadLine,
    Rss,
    ServedChance,
    ServedRange,
    WorstCase,
    evaluate_budget,
    monte_carlo,
    rss,
    shares_of,
    slopes_of,
    worst_case,
)
from specflow.budgets.cascade_noise import source_at_images
from specflow.budgets.figures import figures_of, of_elements
from specflow.budgets.forms import (
    AS_IT_IS,
    CARRIER,
    DOUBLE_SIDEBAND,
    IMAGE,
    LOSS,
    PHASE_NOISE,
    SIGNAL_TO_ERROR,
    TEMPERATURE,
)
from specflow.budgets.image import mixers_of
from specflow.budgets.root_sum import MOST_BEND
from specflow.budgets.trials import percent_words
from specflow.calculators.decibel import BOLTZMANN, T0
from specflow.calculators.noise_cascade import cumulative_noise_figure
from specflow.errors import CalculationError
from specflow.model.budget import Budget
from specflow.model.budget_outcome import (
    BudgetOutcome,
    ChanceOutcome,
    LineForm,
    LineOutcome,
    QuantityOutcome,
    ServedOutcome,
    Way,
    WayOutcome,
)
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary

Floats = NDArray[np.float64]
TRIALS = 20_000
SEED = 1
_AFFORDABLE = 5_000_000
"""Trials times condition points that are drawn unasked: about a second."""
_LEAST_TRIALS = 1_000
ALL_WAYS = (Way.WORST_CASE, Way.RSS, Way.MONTE_CARLO)
_ASSUMES = {
    Way.NOMINAL: "every line at its figure",
    Way.WORST_CASE: "every line at its worse end at once, whatever the others do, but lines of one correlation group "
    "together; k·σ at the k·σ stated, cut where no block can be",
    Way.RSS: "lines independent unless a correlation is stated, law near to linear over the tolerances "
    f"(bend below {MOST_BEND:g} of the sum); of limits it is neither a k·σ nor guaranteed",
    Way.MONTE_CARLO: "the distributions and correlations of the lines as stated; one specimen at all conditions",
}

FORMS = {
    AS_IT_IS: LineForm.AS_IT_IS,
    LOSS: LineForm.LOSS,
    TEMPERATURE: LineForm.TEMPERATURE,
    DOUBLE_SIDEBAND: LineForm.DOUBLE_SIDEBAND,
    SIGNAL_TO_ERROR: LineForm.SIGNAL_TO_ERROR,
    IMAGE: LineForm.SIGNAL_TO_ERROR,
    CARRIER: LineForm.LEAKAGE,
    PHASE_NOISE: LineForm.PHASE_NOISE,
}

Step = Callable[[str], None]


def _silent(text: str) -> None:
    """Tell nobody."""


@dataclass(frozen=True, slots=True)
class HowToCompute:
    """Which ways of treating tolerances to go, and the trials and seed of a Monte Carlo run.

    Without ``trials`` 20,000 are drawn, fewer where there are very many condition points (the result says how many).
    ``k`` asks for a root sum of squares at that many standard deviations. Of several ``ways`` one that cannot be gone
    is kept with the reason; a single one that cannot is an error.
    """

    ways: Sequence[Way] = ALL_WAYS
    trials: int | None = None
    seed: int = SEED
    k: float | None = None

    def trials_over(self, places: int) -> int:
        """Return how many trials are drawn over so many condition points."""
        return self.trials or min(TRIALS, max(_LEAST_TRIALS, _AFFORDABLE // max(places, 1)))


def budget_outcome(
    budget: Budget,
    snapshot: Snapshot,
    dictionary: Dictionary,
    how: HowToCompute | None = None,
    *,
    step: Step = _silent,
) -> BudgetOutcome:
    """Return what a budget comes to. SpecflowError with place and remedy where it cannot be evaluated."""
    how = how or HowToCompute()
    step("nominal")
    outcome = _nominal(evaluate_budget(budget, snapshot, dictionary))
    ways = list(_nominal_ways(outcome))
    for way in dict.fromkeys(how.ways):
        trials = how.trials_over(len(outcome.places))
        step(f"{way.value}, {trials:,} trials" if way is Way.MONTE_CARLO else way.value)
        try:
            outcome, found = _gone(way, outcome, snapshot, dictionary, how, step)
        except CalculationError as error:
            if len(how.ways) == 1:
                raise
            found = [_refused(way, one, error) for one in ways if one.way is Way.NOMINAL]
        ways.extend(found)
    return replace(outcome, ways=tuple(ways))


def _gone(
    way: Way,
    outcome: BudgetOutcome,
    snapshot: Snapshot,
    dictionary: Dictionary,
    how: HowToCompute,
    step: Step,
) -> tuple[BudgetOutcome, list[WayOutcome]]:
    budget = outcome.budget
    match way:
        case Way.WORST_CASE:
            found = worst_case(budget, snapshot, dictionary)
            notes = dict.fromkeys((*outcome.notes, *found.notes))
            return replace(outcome, notes=tuple(notes)), _worst_ways(found)
        case Way.RSS:
            return outcome, _rss_ways(rss(budget, snapshot, dictionary, k=how.k), how.k)
        case Way.MONTE_CARLO:
            trials = how.trials_over(len(outcome.places))

            def told(done: int) -> None:
                step(f"{way.value}, {done:,} of {trials:,} trials")

            drawn = monte_carlo(budget, snapshot, dictionary, trials=trials, seed=how.seed, told=told)
            return _with_chances(outcome, drawn), _chance_ways(drawn)
    return outcome, []


# Nominal


def _nominal(result: BudgetResult) -> BudgetOutcome:
    slopes = {one.parameter: one.slopes for one in slopes_of(result)}
    shares = {one.parameter: one for one in shares_of(result)}
    size = result.required.size
    quantities = []
    for one in result.outputs:
        shared = shares.get(one.parameter)
        quantities.append(
            QuantityOutcome(
                parameter=one.parameter,
                unit=one.unit,
                law=one.law,
                result=one.result,
                cumulative=one.cumulative,
                served=one.served,
                slopes=np.broadcast_to(slopes[one.parameter], (len(result.chain.lines), size)),
                shares=None if shared is None else shared.shares,
                shared="" if shared is None else shared.of,
            )
        )
    worst = result.worst
    source = _source(result)
    mixers = mixers_of(result.chain) if "image_rejection" in result.figures.arrays else None
    return BudgetOutcome(
        budget=result.budget,
        places=tuple(result.required.words(place) for place in range(size)),
        positions=result.positions,
        quantities=tuple(quantities),
        lines=tuple(_line(one, result) for one in result.chain.lines),
        figures={name: _spread(array, result) for name, array in _figures(result).items()},
        temperature_k=result.chain.temperature_k,
        levels=None
        if result.levels is None
        else np.broadcast_to(result.levels, (len(result.positions) + 1, size)),
        noise=_noise(result, source),
        source_k=source,
        turns=() if mixers is None else tuple(turn.value for turn in mixers.turns),
        worst=None if worst is None else (worst.requirement.id, worst.worst),
        notes=result.notes,
    )


def _figures(result: BudgetResult) -> Mapping[str, Floats]:
    """Return what the laws took, and the compression points of blocks where levels can be held against them.

    Of a mixer whose image noise counts both noise figures are there: as stated, and with the noise at its image.
    """
    arrays = result.figures.arrays
    if "image_rejection" in arrays:
        stated, taken = result.figures.stages["noise_figure"], arrays["noise_figure"]
        arrays = {**arrays, "noise_figure": stated, "image_noise_figure": taken}
    states_compression = any(one.role.figure == "ip1db" for one in result.chain.lines)
    if not states_compression or "ip1db" in arrays or result.levels is None:
        return arrays
    further = figures_of(result.chain, result.chain.nominal(), ("gain", "ip1db"))
    return {**arrays, "ip1db": further["ip1db"]}


def _spread(array: Floats, result: BudgetResult) -> Floats:
    return np.broadcast_to(array, (len(result.positions), result.required.size))


def _line(read: ReadLine, result: BudgetResult) -> LineOutcome:
    size = result.required.size
    values = np.broadcast_to(read.values, (size,))
    form = FORMS.get(read.role.form)
    taken = values if read.convert.is_identity else read.convert(values)
    if form is None:  # a way of taking values that a worksheet has no formula for: it shows what comes of it
        form, taken = LineForm.AS_IT_IS, read.figure(values)
    factor, offset = of_elements(result.chain, read) if read.role.figure == "amount" else (1.0, 0.0)
    return LineOutcome(
        line=read.line,
        row=read.row,
        value=values,
        taken=np.broadcast_to(taken, (size,)),
        unit=read.role.unit,
        figure=read.role.figure,
        form=form,
        port=read.role.port,
        factor=factor,
        offset=offset,
    )


def _source(result: BudgetResult) -> Floats | None:
    """Return the noise temperature of what feeds a cascade: its antenna's line, the budget's own, else 290 K."""
    if "noise_figure" not in result.figures.arrays:
        return None
    size = result.required.size
    lines = [one for one in result.chain.lines if one.role.figure == "source_k"]
    if lines:
        return np.asarray(
            sum((np.broadcast_to(one.figure(one.values), (size,)) for one in lines), np.zeros(size))
        )
    stated = result.budget.noise_source
    return np.full(size, T0 if stated is None else stated)


def _noise(result: BudgetResult, source: Floats | None) -> Floats | None:
    """Return the noise level at the input and behind each position in dBm; None without figures or bandwidth."""
    bandwidth = result.budget.bandwidth_hz
    if source is None or bandwidth is None:
        return None
    gain = _spread(result.figures["gain"], result)
    factor = 10.0 ** (cumulative_noise_figure(gain, _spread(result.figures["noise_figure"], result)) / 10.0)
    at_images = np.zeros_like(gain) + source_at_images(result.figures)
    kelvin = np.vstack([source, source + T0 * (factor - 1.0) + at_images])
    behind = np.vstack([np.zeros(result.required.size), np.cumsum(gain, axis=0)])
    return np.asarray(10.0 * np.log10(kelvin * BOLTZMANN * bandwidth * 1e3) + behind)


# Ways of treating tolerances


def _nominal_ways(outcome: BudgetOutcome) -> Sequence[WayOutcome]:
    return [
        _way(Way.NOMINAL, quantity.parameter, one, _at(one.result, one.worst), _at(one.result, one.worst))
        for quantity in outcome.quantities
        for one in quantity.served
    ]


def _at(values: Floats, place: int) -> float:
    return float(values[place]) if place >= 0 else float("nan")


def _way(
    way: Way, parameter: str, one: ServedOutcome, low: float, high: float, assumes: str = ""
) -> WayOutcome:
    return WayOutcome(
        way=way,
        requirement=one.requirement.id,
        parameter=parameter,
        unit=one.unit,
        low=min(low, high),
        high=max(low, high),
        margin=one.smallest_margin,
        margin_unit=one.margin_unit,
        worst=one.worst,
        assumes=assumes or _ASSUMES[way],
    )


def _between(way: Way, parameter: str, held: ServedRange, assumes: str) -> WayOutcome:
    """Return the adverse end with the range about it, both at the place where the adverse margin is smallest."""
    place = held.adverse.worst
    low, high = _at(held.adverse.result, place), _at(held.favourable.result, place)
    return _way(way, parameter, held.adverse, low, high, assumes)


def _worst_ways(found: WorstCase) -> list[WayOutcome]:
    return [
        _between(Way.WORST_CASE, one.parameter, held, f"{_ASSUMES[Way.WORST_CASE]}; {one.words}")
        for one in found.outputs
        for held in one.served
    ]


def _rss_ways(found: Rss, k: float | None) -> list[WayOutcome]:
    assumes = _ASSUMES[Way.RSS]
    if k is not None:
        assumes = f"{assumes}; {k:g} σ as asked for, about the mean, which tolerances with unlike sides move"
    return [
        replace(
            _between(Way.RSS, one.parameter, held, assumes),
            means="of limits" if one.means == "limits" else f"± {one.means.replace('sigma', 'σ')}",
        )
        for one in found.outputs
        for held in one.served
    ]


def _refused(way: Way, nominal: WayOutcome, error: CalculationError) -> WayOutcome:
    place = error.where.partition(", ")[2]  # behind the budget, which the table is of
    reason = "; ".join(filter(None, (f"{place}: {error.message}" if place else error.message, error.hint)))
    return WayOutcome(way, nominal.requirement, nominal.parameter, refused=reason, assumes=_ASSUMES[way])


def _with_chances(outcome: BudgetOutcome, drawn: MonteCarloResult) -> BudgetOutcome:
    chances = tuple(
        ChanceOutcome(
            requirement=one.requirement,
            parameter=output.parameter,
            margin_unit=one.margin_unit,
            probability=one.probability,
            joint=one.joint.value,
            joint_words=one.joint.words,
            quantiles=one.quantiles,
            edges=one.edges,
            counts=one.histogram,
        )
        for output in drawn.outputs
        for one in output.served
    )
    notes = (*outcome.notes, *(note for note in drawn.notes if note not in outcome.notes))
    return replace(
        outcome,
        chances=chances,
        joint_words=drawn.joint.words,
        trials=drawn.trials,
        seed=drawn.seed,
        notes=notes,
    )


LOW_PART = 0.01
"""The quantile of the worst margin that stands beside the other ways: 99 of 100 specimens do better."""


def _chance_ways(drawn: MonteCarloResult) -> list[WayOutcome]:
    return [_chance_way(output.parameter, one, drawn) for output in drawn.outputs for one in output.served]


def _short(found: Probability) -> str:
    if found.trials == 0:
        return ""
    low, high = percent_words(found.low), percent_words(found.high)
    return f"{percent_words(found.value)} % ({low} to {high} %, sampling only)"


def _chance_way(parameter: str, one: ServedChance, drawn: MonteCarloResult) -> WayOutcome:
    assumes = (
        f"{_ASSUMES[Way.MONTE_CARLO]}; {drawn.trials:,} trials, seed {drawn.seed}; margin that 99 % keep"
    )
    return WayOutcome(
        way=Way.MONTE_CARLO,
        requirement=one.requirement.id,
        parameter=parameter,
        margin=one.quantiles[LOW_PART],
        margin_unit=one.margin_unit,
        worst=one.place,
        probability=_short(one.joint),
        assumes=assumes,
    )
