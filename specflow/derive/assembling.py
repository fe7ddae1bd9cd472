"""What the groups of a table gave, put together as the arrays of one derived table."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from specflow.derive.joining import Joined
from specflow.derive.law import Law, Outcome
from specflow.derive.request import Derived, Refused, Request, Result
from specflow.derive.said import SaidRange
from specflow.derive.samples import Range
from specflow.errors import DocumentError
from specflow.model.columns import Columns, TextColumn
from specflow.model.derivation import Covered
from specflow.model.evidence import AT_COLUMN, SOURCE_COLUMN, EvidenceColumns, ValueArrays

Rows = NDArray[np.intp]


@dataclass
class Gathered:
    """What the groups gave so far."""

    outcomes: list[tuple[Rows, Outcome]] = field(default_factory=list)
    results: list[Result] = field(default_factory=list)
    at: list[str] = field(default_factory=list)
    refused: list[Refused] = field(default_factory=list)
    notes: dict[str, None] = field(default_factory=dict)
    largest_gap: float = 0.0


def derived_of(
    request: Request, rows: Joined, over: SaidRange | None, apart: set[str], found: Gathered
) -> Derived:
    """Return all results as one table: values, conditions that are kept, and the raw rows that govern."""
    outcomes = [outcome for _, outcome in found.outcomes]
    units = {outcome.unit for outcome in outcomes}
    if len(units) > 1:
        raise DocumentError(f"the groups give different units: {', '.join(sorted(units))}")
    governing = np.concatenate([taken[outcome.rows] for taken, outcome in found.outcomes])
    covers = _covers(request.law, rows, over, found, outcomes)
    rules = {one.u_rule for one in outcomes if one.u is not None and not np.isnan(one.u).all()}
    return Derived(
        _columns(request, rows, apart, found, governing),
        request.gives.key,
        outcomes[0].unit,
        ", ".join(sorted(rules)),
        covers,
        tuple(found.results),
        tuple(found.refused),
        (*rows.notes, *found.notes),
    )


def _covers(
    law: Law, rows: Joined, over: SaidRange | None, found: Gathered, outcomes: Sequence[Outcome]
) -> tuple[Covered, ...]:
    """Return the range that every group reached: an end missed within the tolerance that was said is not spoken for.

    Whether such an end is near enough is for the requirement to say, by its own tolerance.
    """
    if over is None or any(over.dimension in outcome.axes for outcome in outcomes):
        return ()
    span: Range = over.range
    along = rows.numbers(over.dimension, over.unit)
    ends = [(along[taken].min(), along[taken].max()) for taken, _ in found.outcomes]
    return (
        Covered(
            dimension=over.dimension,
            low=max(span.low, *(float(first) for first, _ in ends)),
            high=min(span.high, *(float(last) for _, last in ends)),
            largest_gap=found.largest_gap,
            unit=over.unit,
            in_parts=law.in_parts,
        ),
    )


def _columns(
    request: Request, rows: Joined, apart: set[str], found: Gathered, governing: Rows
) -> EvidenceColumns:
    base = request.roles[0].columns
    outcomes = [outcome for _, outcome in found.outcomes]
    origin = rows.base_rows[governing]
    low = np.concatenate([outcome.value for outcome in outcomes])
    high = np.concatenate([outcome.value if outcome.high is None else outcome.high for outcome in outcomes])
    spread = [np.full(len(o.value), np.nan) if o.u is None else o.u for o in outcomes]
    u = None if all(outcome.u is None for outcome in outcomes) else np.concatenate(spread)
    extra = {AT_COLUMN: TextColumn.of(found.at)}
    if SOURCE_COLUMN in base.extra:
        extra[SOURCE_COLUMN] = base.extra[SOURCE_COLUMN].take(origin)
    return EvidenceColumns(
        conditions=_conditions(rows, apart, governing, outcomes),
        values={request.gives.key: ValueArrays(low, low if np.array_equal(low, high) else high, u)},
        source_rows=base.source_rows[origin],
        items=base.items.take(origin),
        dates=_dates(request, rows, found, origin),
        extra=extra,
    )


def _conditions(rows: Joined, apart: set[str], governing: Rows, outcomes: Sequence[Outcome]) -> Columns:
    kept = rows.conditions.take(governing)
    numeric = {name: values for name, values in kept.numeric.items() if name not in apart}
    text = {name: words for name, words in kept.text.items() if name not in apart}
    units = {name: unit for name, unit in kept.units.items() if name in numeric}
    for name in dict.fromkeys(name for outcome in outcomes for name in outcome.axes):
        numeric[name] = np.concatenate([outcome.axes[name] for outcome in outcomes])
        own = next((outcome.axis_units[name] for outcome in outcomes if name in outcome.axis_units), None)
        stated = rows.said_units.get(name, rows.conditions.units.get(name, ""))
        units[name] = stated if own is None else own
    return Columns(len(governing), numeric, text, units)


def _dates(request: Request, rows: Joined, found: Gathered, origin: Rows) -> TextColumn | None:
    """Return the earliest date among the rows of each group: what changed since then may touch the result.

    Without a date where the columns come from several tables: the table as a whole says it, if it can.
    """
    dates = request.roles[0].columns.dates
    if dates is None or len({role.table.id for role in request.roles}) > 1:
        return None
    if request.law.over == "each":
        return dates.take(origin)
    words: list[str | None] = []
    for taken, outcome in found.outcomes:
        known = [word for row in rows.base_rows[taken] if (word := dates.word(int(row)))]
        whole = len(known) == len(taken)
        words += [min(known) if known and whole else None] * len(outcome.value)
    return TextColumn.of(words)
