"""The card of one requirement: limit in words, k of n proved, margins, margin bar, proof grid, trail, findings."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import Points
from specflow.limits import limit_words
from specflow.model.base import code_key
from specflow.model.card import Card, MarginBar, PointState, ProofCell, ProofGrid
from specflow.model.finding import Finding
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Results, Snapshot
from specflow.model.verdict import ActivityResult, PointResults, RequirementStatus, Verdict
from specflow.parameters import Dictionary
from specflow.reports.about import EXPOSURE_CAUTION, is_radiated
from specflow.reports.figures import interval, label_tone, margin, share
from specflow.reports.matrix import quantity_words, shown_activity
from specflow.reports.origins import OriginFinder
from specflow.reports.points import points_of, record_at, shown_points, words_of
from specflow.reports.trace import requirement_trail

FAILING = (Verdict.FAIL, Verdict.CONDITIONAL_FAIL)


def requirement_card(
    requirement: Requirement,
    snapshot: Snapshot,
    results: Results,
    findings: Sequence[Finding],
    dictionary: Dictionary,
) -> Card:
    """Return the card of one requirement."""
    status = results.of(requirement.id)
    activity = shown_activity(status)
    found = shown_points(activity) if activity else None
    points = points_of(snapshot, requirement)
    finder = OriginFinder(snapshot)
    if found is not None:
        finder.fetch(set(found.tables))
    return Card(
        id=requirement.id,
        title=requirement.title,
        label=status.label.value,
        tone=label_tone(status.label),
        limit_words=limit_words(requirement.limit, dictionary.get(requirement.quantity.parameter)),
        limit_text=requirement.limit.text,
        proved=f"{share(status.k, status.n)} points proved, {status.n_failing} failing, "
        f"{status.n_missing} without evidence",
        k=status.k,
        n=status.n,
        facts=_facts(requirement, status, dictionary),
        bar=_margin_bar(requirement, found, finder),
        grid=_proof_grid(points, activity, found, finder),
        trail=requirement_trail(requirement, snapshot, results, dictionary),
        remarks=status.remarks,
        findings=tuple(
            finding for finding in findings if code_key(finding.subject) == code_key(requirement.id)
        ),
        cautions=(EXPOSURE_CAUTION,) if is_radiated(requirement, dictionary) else (),
    )


def _facts(
    requirement: Requirement, status: RequirementStatus, dictionary: Dictionary
) -> tuple[tuple[str, str], ...]:
    facts = [
        ("Quantity", quantity_words(requirement, dictionary)),
        ("Block", requirement.block),
        ("Compliance", status.compliance.value),
        ("Close-out", f"{status.close_out.value}: {status.close_out_reason}"),
        ("Worst verdict", status.verdict.words),
    ]
    if status.governing is not None:
        where = ", ".join(
            part
            for part in (
                status.governing.words,
                f"item {status.governing.item}" if status.governing.item else "",
            )
            if part
        )
        facts.append(("Governed at", where))
        facts.append(("Margin", margin(status.governing.margin, status.governing.unit).text))
        facts.append(("Guarded margin", margin(status.governing.guarded_margin, status.governing.unit).text))
    if status.smallest_margin is not None:
        smallest = status.smallest_margin
        facts.append(
            ("Smallest margin", f"{margin(smallest.margin, smallest.unit).text} at {smallest.words}")
        )
    facts.append(("Owner", requirement.owner or "nobody"))
    return tuple(facts)


def _margin_bar(
    requirement: Requirement, found: PointResults | None, finder: OriginFinder
) -> MarginBar | None:
    """Return limit, guard band and spread; only where one limit holds at all points and values share a unit."""
    if found is None or not (found.table >= 0).any():
        return None
    known = found.table >= 0
    first = record_at(found, int(np.flatnonzero(known)[0]), finder)
    assert first is not None
    guard = _largest(found.margin[known] - found.guarded_margin[known])
    return MarginBar(
        unit=finder.column(first).unit,
        lower=_only(found.lower[known]),
        upper=_only(found.upper[known]),
        guard=max(guard, 0.0),
        least=_bound(found.value_low[known], np.nanmin),
        greatest=_bound(found.value_high[known], np.nanmax),
    )


def _only(values: NDArray[np.float64]) -> float | None:
    finite = np.unique(values[np.isfinite(values)])
    return float(finite[0]) if finite.size == 1 else None


def _largest(values: NDArray[np.float64]) -> float:
    finite = values[np.isfinite(values)]
    return float(finite.max()) if finite.size else 0.0


def _bound(values: NDArray[np.float64], pick: np.ufunc | object) -> float | None:
    finite = values[np.isfinite(values)]
    return float(pick(finite)) if finite.size else None  # type: ignore[operator]


def _proof_grid(
    points: Points | None, activity: ActivityResult | None, found: PointResults | None, finder: OriginFinder
) -> ProofGrid | None:
    if activity is None or activity.n == 0:
        return None
    count = len(found.verdict) if found is not None else activity.n
    cells = [_proof_cell(points, place, activity, found, finder) for place in range(count)]
    axes = grid_axes(points) if points is not None else None
    if axes is None or found is None or count != len(axes[0][1]):
        return ProofGrid(cells=(tuple(cells),), note=f"{count} required points")
    (row_name, row_codes, row_titles), (column_name, column_codes, column_titles) = axes
    places: dict[tuple[int, int], list[int]] = {}
    for place in range(count):
        places.setdefault((int(row_codes[place]), int(column_codes[place])), []).append(place)
    grid = tuple(
        tuple(
            _merged([cells[place] for place in places.get((row, column), ())])
            for column in range(len(column_titles))
        )
        for row in range(len(row_titles))
    )
    hidden = max((len(group) for group in places.values()), default=1)
    note = f"each cell holds up to {hidden} points; the worst is shown" if hidden > 1 else ""
    return ProofGrid(
        row_dimension=row_name,
        column_dimension=column_name,
        row_titles=row_titles,
        column_titles=column_titles,
        cells=grid,
        note=note,
    )


Axis = tuple[str, NDArray[np.int64], tuple[str, ...]]


def grid_axes(points: Points) -> tuple[Axis, Axis] | None:
    """Return the two dimensions with the most values as rows and columns of the grid, or None."""
    axes: list[Axis] = []
    for name, values in points.columns_lo.numeric.items():
        unique, codes = np.unique(values, return_inverse=True)
        if unique.size > 1:
            unit = points.columns_lo.units.get(name, "")
            axes.append(
                (name, codes.astype(np.int64), tuple(f"{value:g} {unit}".strip() for value in unique))
            )
    for name, column in points.columns_lo.text.items():
        unique_codes, codes = np.unique(column.codes, return_inverse=True)
        if unique_codes.size > 1:
            titles = tuple(column.labels[code] if code >= 0 else "" for code in unique_codes)
            axes.append((name, codes.astype(np.int64), titles))
    if len(axes) < 2:
        return None
    axes.sort(key=lambda axis: len(axis[2]))
    return axes[-2], axes[-1]


def _proof_cell(
    points: Points | None,
    place: int,
    activity: ActivityResult,
    found: PointResults | None,
    finder: OriginFinder,
) -> ProofCell:
    words = words_of(points, place)
    if found is None:
        return ProofCell(words=words, state=PointState.MISSING)
    verdict = Verdict(int(found.verdict[place]))
    record = record_at(found, place, finder)
    unit = finder.column(record).unit if record else ""
    value = interval(float(found.value_low[place]), float(found.value_high[place]), unit)
    tolerance = activity.governing.unit if activity.governing else ""
    shown = float(found.guarded_margin[place])
    return ProofCell(
        words=words,
        state=point_state(verdict, bool(found.proved[place])),
        value=value if record else "",
        margin="" if math.isnan(shown) else margin(shown, tolerance).text,
    )


def point_state(verdict: Verdict, proved: bool) -> PointState:
    """Return the state in which the proof grid shows a point."""
    if verdict in FAILING:
        return PointState.FAILING
    if proved:
        return PointState.PROVED
    return PointState.MISSING if verdict is Verdict.NONE else PointState.DOUBTFUL


STATE_ORDER = (PointState.FAILING, PointState.MISSING, PointState.DOUBTFUL, PointState.PROVED)


def _merged(cells: Sequence[ProofCell]) -> ProofCell | None:
    if not cells:
        return None
    return min(cells, key=lambda cell: STATE_ORDER.index(cell.state))
