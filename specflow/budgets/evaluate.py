"""Evaluate a budget at nominal values over all its conditions at once."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain, Overrides
from specflow.budgets.figures import Figures, figures_of
from specflow.budgets.image import Turn, mixers_of
from specflow.budgets.laws import check_complete, outputs_of, served
from specflow.budgets.margins import Bar, bars_of
from specflow.budgets.outputs import Output
from specflow.budgets.read import read_budget
from specflow.budgets.result import BudgetResult, OutputResult
from specflow.budgets.spread import correlation_matrix
from specflow.errors import CalculationError
from specflow.model.base import code_key
from specflow.model.budget import Budget
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Prepared:
    """A budget read and checked: the chain, what it gives, and the limits on each of these."""

    chain: Chain
    outputs: tuple[Output, ...]
    bars: tuple[tuple[Bar, ...], ...]
    notes: tuple[str, ...]

    @property
    def needed(self) -> set[str]:
        """The figures that any of the outputs takes."""
        return {figure for output in self.outputs for figure in output.takes}


def prepare(
    budget: Budget, snapshot: Snapshot, dictionary: Dictionary, *, values: Overrides | None = None
) -> Prepared:
    """Read and check a budget; every way of evaluating starts here."""
    requirements = served(budget, snapshot)
    correlation_matrix(budget, budget.lines)  # refuses one that cannot be
    chain = read_budget(budget, snapshot, dictionary, values=values)
    outputs = outputs_of(budget, snapshot, dictionary)
    check_complete(chain, outputs)
    bars = tuple(
        bars_of(output, budget, requirements, chain.required, snapshot, dictionary) for output in outputs
    )
    return Prepared(chain, tuple(outputs), bars, (*chain.notes, *_notes(chain, requirements, outputs)))


def evaluate_budget(
    budget: Budget, snapshot: Snapshot, dictionary: Dictionary, *, values: Overrides | None = None
) -> BudgetResult:
    """Return the result of a budget at nominal values at every required condition, with margins.

    ``values`` replaces the values of lines: {(order of the position, parameter key): value or array (n,)}, each in the
    unit of its line, NaN where the line's own stays; the n places are those of ``required_conditions``.

    Raises SpecflowError (DocumentError, UnitError, ConditionsError, CalculationError) with place and remedy for a
    budget that cannot be evaluated.
    """
    return nominal_result(prepare(budget, snapshot, dictionary, values=values))


def nominal_result(prepared: Prepared) -> BudgetResult:
    """Return the nominal result of a budget that was read."""
    chain = prepared.chain
    figures = figures_of(chain, chain.nominal(), prepared.needed)
    outputs = tuple(
        _evaluated(output, bars, figures, chain)
        for output, bars in zip(prepared.outputs, prepared.bars, strict=True)
    )
    levels = _levels(figures)
    return BudgetResult(
        chain.budget,
        chain.required,
        chain.positions,
        outputs,
        figures,
        levels,
        chain,
        prepared.notes,
    )


def _evaluated(output: Output, bars: Sequence[Bar], figures: Figures, chain: Chain) -> OutputResult:
    size = chain.size
    cumulative = np.broadcast_to(output.cumulative(figures), (len(chain.positions), size))
    result = cumulative[-1]
    if np.isnan(result).any():
        raise CalculationError(
            f"{output.parameter} has no value at {chain.required.words(int(np.argmax(np.isnan(result))))}",
            where=f"budget {chain.budget.id}",
            hint="look for figures that are far out of range",
        )
    held = tuple(bar.held(result) for bar in bars)
    return OutputResult(
        output.parameter, output.unit, law_words(output, chain.budget), result, cumulative, held, output
    )


def law_words(output: Output, budget: Budget) -> str:
    """Say by which law a result was combined; distortion sums say their phase."""
    if {"iip3", "iip2"} & set(output.takes):
        return f"{output.words}, {budget.intermodulation} sum"
    return output.words


def _levels(figures: Figures) -> Floats | None:
    if figures.start is None or "gain" not in figures.arrays:
        return None
    gain = figures["gain"]
    levels = np.empty((len(gain) + 1, *gain.shape[1:]))
    levels[0] = figures.start
    levels[1:] = figures.start + np.cumsum(gain, axis=0)
    return levels


def _image_notes(chain: Chain) -> list[str]:
    """Say of every mixer that names its sideband what is taken of the noise at its image."""
    mixers = mixers_of(chain)
    notes = []
    for read in chain.lines:
        if read.role.figure != "noise_figure" or not read.line.sideband:
            continue
        if mixers is not None and mixers.turns[read.row] is Turn.IMAGE:
            said = "noise at its image counts, as far as image rejections let it through"
        elif read.line.sideband == "both":
            said = "the wanted signal is in both sidebands, so its double-sideband figure counts as it is"
        else:
            said = (
                "its image is taken as kept off, at 290 K; image_rejection lines would say what comes through"
            )
        notes.append(f"{read.line.place}: {said}")
    return notes


def _notes(chain: Chain, requirements: Sequence[Requirement], outputs: Sequence[Output]) -> list[str]:
    budget = chain.budget
    notes = [
        f"{one.id} is stated over {one.conditions}, the budget is evaluated over {budget.conditions}"
        for one in requirements
        if budget.conditions and one.conditions and code_key(one.conditions) != code_key(budget.conditions)
    ]
    names = {output.parameter for output in outputs}
    has_source = any(code_key(line.parameter) == "antenna_noise_temperature" for line in budget.lines)
    needs_source = names & {"noise_floor", "noise_density", "sensitivity", "refsens", "sfdr"}
    if needs_source and budget.noise_source is None and not has_source:
        notes.append("the source is taken at 290 K")
    if "sfdr" in names:
        notes.append(
            "the spurious-free dynamic range is 2/3 (IIP3 - noise floor): no signal-to-noise ratio is taken off"
        )
    notes += _image_notes(chain)
    if names & {"ip1db", "op1db", "output_backoff"}:
        notes.append("the compression of a cascade is an approximation, good to about 0.5 dB")
    return notes
