"""A budget that is evaluated again and again with other values of some lines: what all ways backwards rest on."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain, LineKey, Overrides, ReadLine, line_key
from specflow.budgets.evaluate import Prepared, prepare
from specflow.budgets.figures import Figures, figures_of
from specflow.budgets.margins import Bar
from specflow.budgets.outputs import Output
from specflow.budgets.own_conditions import DRIVE, DRIVEN
from specflow.budgets.read import read_budget
from specflow.errors import DocumentError
from specflow.model.base import code_key
from specflow.model.budget import Budget, BudgetLine
from specflow.model.budget_line import ConditionTable, Trace
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary

Floats = NDArray[np.float64]
Changes = Mapping[int, Floats]
"""Other values of lines, by the number of the line in the chain, in the unit of the line: (n,) or (1,)."""


@dataclass(frozen=True, slots=True, eq=False)
class Target:
    """One limit of a budget: the quantity it is on, and the bar it sets."""

    output: Output
    bar: Bar

    @property
    def name(self) -> str:
        """The id of the requirement."""
        return self.bar.requirement.id


@dataclass(frozen=True, slots=True, eq=False)
class Probe:
    """A budget read once. ``is_driven``: some line depends on a level in the chain, so a changed gain moves others."""

    budget: Budget
    snapshot: Snapshot
    dictionary: Dictionary
    prepared: Prepared
    targets: tuple[Target, ...]
    is_driven: bool
    given: Overrides

    @classmethod
    def of(
        cls, budget: Budget, snapshot: Snapshot, dictionary: Dictionary, *, values: Overrides | None = None
    ) -> Probe:
        """Read a budget. Raises SpecflowError as ``evaluate_budget``."""
        prepared = prepare(budget, snapshot, dictionary, values=values)
        targets = tuple(
            Target(output, bar)
            for output, bars in zip(prepared.outputs, prepared.bars, strict=True)
            for bar in bars
        )
        driven = any(_is_driven(line) for line in budget.lines)
        return cls(budget, snapshot, dictionary, prepared, targets, driven, values or {})

    @property
    def chain(self) -> Chain:
        """The chain at the values it was read with."""
        return self.prepared.chain

    @property
    def size(self) -> int:
        """How many places of evaluation there are."""
        return self.chain.size

    def number(self, key: LineKey) -> int:
        """Return the number of a line. DocumentError where the budget has none of that name."""
        position, parameter = key
        for number, read in enumerate(self.chain.lines):
            if line_key(read.line) == (position, code_key(parameter)):
                return number
        there = ", ".join(one.line.place for one in self.chain.lines)
        raise DocumentError(
            f"there is no line {parameter} at position {position}",
            where=f"budget {self.budget.id}",
            hint=f"its lines are {there}",
        )

    def at(self, changes: Changes) -> tuple[Chain, list[Floats]]:
        """Return chain and values of all lines with some changed; a growth allowance is in the changed values."""
        if self.is_driven and any(self.chain.lines[number].role.figure == "gain" for number in changes):
            chain = self._read_again(changes)
            values = chain.nominal()
        else:
            chain, values = self.chain, self.chain.nominal()
        for number, value in changes.items():
            values[number] = np.atleast_1d(np.asarray(value, np.float64))
        return chain, values

    def _read_again(self, changes: Changes) -> Chain:
        keys = {number: line_key(self.chain.lines[number].line) for number in changes}
        plain = {
            line_key(one): one.model_copy(update={"growth": 0.0})
            for one in self.budget.lines
            if line_key(one) in keys.values()
        }
        lines = tuple(plain.get(line_key(one), one) for one in self.budget.lines)
        budget = self.budget.model_copy(update={"lines": lines})
        values = {**self.given, **{key: changes[number] for number, key in keys.items()}}
        return read_budget(budget, self.snapshot, self.dictionary, values=values)

    def figures(self, changes: Changes) -> Figures:
        """Return the figures that the laws take, with some lines changed."""
        chain, values = self.at(changes)
        return figures_of(chain, values, self.prepared.needed)

    def margins(self, changes: Changes) -> Floats:
        """Return the margin to every limit at every place (targets, n), NaN where nothing is required."""
        figures = self.figures(changes)
        return np.array(
            [one.bar.margin(np.broadcast_to(one.output.value(figures), (self.size,))) for one in self.targets]
        ).reshape(len(self.targets), self.size)

    def words(self, place: int) -> str:
        """Say the conditions of one place."""
        return self.chain.required.words(place)


def _is_driven(line: BudgetLine) -> bool:
    names = {drift.dimension for drift in line.drifts}
    if isinstance(line.value, ConditionTable):
        names.add(line.value.dimension)
    if isinstance(line.value, Trace):
        names.add(line.value.along or DRIVE)
    return bool(names & {DRIVE, DRIVEN})


def line_name(read: ReadLine) -> str:
    """Return what a line is called in tables and messages."""
    return f"{read.line.block} {read.line.parameter}"
