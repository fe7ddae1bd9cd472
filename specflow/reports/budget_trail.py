"""How an allocation came about: the budget and those of its lines that a child requirement answers for."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from specflow.model.base import code_key
from specflow.model.block import Block
from specflow.model.budget import Allocation, Budget, BudgetLine
from specflow.model.budget_line import ConditionTable, Constant, Drift, TouchstoneTrace, Trace, WordTable
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.reports.budget import tolerance_words
from specflow.reports.figures import rounded, with_unit

MOST_LINES = 4


def budget_words(budget: Budget, link: Allocation) -> str:
    """Say which budget it is, and by which of its revisions the share was given."""
    words = (
        f"{budget.title or budget.quantity.parameter}: {budget.law.value} of {len(budget.chain)} positions"
    )
    if link.budget_revision == budget.revision:
        return f"{words}, revision {budget.revision}"
    return f"{words}, revision {budget.revision}; shared out by revision {link.budget_revision}"


def line_words(budget: Budget, child: Requirement, snapshot: Snapshot) -> str:
    """Say which lines of the budget the child answers for: those of its block, or of what its block is made of."""
    lines = lines_of(budget, child, snapshot)
    if not lines:
        places = [
            f"{one.order} {one.label}" for one in budget.chain if code_key(one.block) == code_key(child.block)
        ]
        return f"position {', '.join(places)}" if places else "no line of it is on this block or below"
    said = [f"position {line.position} {line.block} {line.parameter} {value_words(line)}" for line in lines]
    more = len(said) - MOST_LINES
    return "; ".join([*said[:MOST_LINES], *([f"and {more} more"] if more > 0 else [])])


def lines_of(budget: Budget, child: Requirement, snapshot: Snapshot) -> Sequence[BudgetLine]:
    """Return the lines on the child's quantity, of its own block or else of the blocks below it."""
    parameter = code_key(child.quantity.parameter)
    same = [line for line in budget.lines if code_key(line.parameter) == parameter]
    own = [line for line in same if code_key(line.block) == code_key(child.block)]
    if own:
        return own
    below = set(_below(child.block, snapshot, frozenset()))
    return [line for line in same if code_key(line.block) in below]


def _below(block: str, snapshot: Snapshot, seen: frozenset[str]) -> Iterator[str]:
    found: Sequence[Block] = snapshot.blocks_below.get(code_key(block), ())
    for one in found:
        key = code_key(one.id)
        if key not in seen:
            yield key
            yield from _below(one.id, snapshot, seen | {key})


def value_words(line: BudgetLine) -> str:
    """Say the value of a line as it stands, whatever it depends on."""
    match line.value:
        case Constant(value=value):
            words = with_unit(value, line.unit)
        case ConditionTable(dimension=dimension, values=values):
            words = f"{rounded(min(values))} to {with_unit(max(values), line.unit)} by {dimension}"
        case WordTable(dimension=dimension, words=states, values=values):
            listed = (f"{state} {rounded(value)}" for state, value in zip(states, values, strict=True))
            words = f"{', '.join(listed)} {line.unit} by {dimension}"
        case Trace(table=table):
            words = f"as recorded in {table}"
        case TouchstoneTrace(file=file, entry=entry):
            words = f"|{entry}| of {file}"
    drifts = "".join(f", {one.slope:+g} for each {_step(one)} of {one.dimension}" for one in line.drifts)
    tolerance = tolerance_words(line)
    return f"{words}{drifts}{f', {tolerance}' if tolerance else ''}"


def _step(drift: Drift) -> str:
    return "K" if drift.dimension_unit == "°C" else drift.dimension_unit
