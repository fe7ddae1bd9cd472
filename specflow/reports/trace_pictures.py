"""The raw data behind a requirement, as pictures: readings along an axis, the limit on them, what was derived."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import conditions_words, find_dimension
from specflow.conditions.groups import grouped_rows
from specflow.conditions.words import value_words
from specflow.errors import SpecflowError
from specflow.limits import LimitContext, evaluate_limit
from specflow.limits.conversion import unit_of
from specflow.model.base import code_key
from specflow.model.columns import Columns
from specflow.model.derivation import Derivation
from specflow.model.evidence import AT_COLUMN, EvidenceColumns, EvidenceTable, ValueColumn
from specflow.model.picture import TraceLine, TraceMark, TracePicture
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import RequirementStatus
from specflow.reports.figures import rounded
from specflow.reports.origins import OriginFinder
from specflow.reports.serving import governed_points
from specflow.units import converter, parse_unit

Floats = NDArray[np.float64]

MOST_PICTURES = 2  # of one requirement
MOST_LINES = 6  # in one picture: those that come nearest to the limit, or lie lowest
MOST_PLACES = 300  # along one line; of more, the least and the greatest of each stretch are drawn
LEAST_PLACES = 5  # fewer readings along an axis are no trace


@dataclass(frozen=True, slots=True)
class _Raw:
    """A raw column to be drawn: along which axis, and the derived table that was made of it (None: itself counts)."""

    table: EvidenceTable
    column: ValueColumn
    axis: str
    derived: EvidenceTable | None = None


def trace_pictures(
    requirement: Requirement, status: RequirementStatus, snapshot: Snapshot, finder: OriginFinder
) -> tuple[TracePicture, ...]:
    """Return the raw data of the tables that govern points of a requirement, those of derived tables included."""
    governing = dict.fromkeys(
        name
        for activity in status.activities
        for found in activity.items.values()
        for name in governed_points(found)
    )
    pictures: list[TracePicture] = []
    for name in governing:
        table = snapshot.find(EvidenceTable, name)
        raw = None if table is None else _raw(table, requirement, snapshot, finder)
        picture = None if raw is None else _picture(raw, requirement, snapshot, finder)
        if picture is not None and len(pictures) < MOST_PICTURES:
            pictures.append(picture)
    return tuple(pictures)


def _raw(
    table: EvidenceTable, requirement: Requirement, snapshot: Snapshot, finder: OriginFinder
) -> _Raw | None:
    derivation = snapshot.find(Derivation, table.derivation)
    if derivation is None:
        wanted = code_key(requirement.quantity.parameter)
        column = next((one for one in table.values if code_key(one.quantity.parameter) == wanted), None)
        axis = "" if column is None else _axis(finder.columns(table.id).conditions)
        return _Raw(table, column, axis) if column is not None and axis else None
    first = derivation.columns[0]
    source = snapshot.find(EvidenceTable, first.table)
    if source is None:
        return None
    column = next((one for one in source.values if one.name == first.column), None)
    said = derivation.over[0].replace(":", " ").split() if derivation.over else [""]
    known = find_dimension(said[0]) if said[0] else None
    axis = known.name if known is not None else said[0]
    conditions = finder.columns(source.id).conditions
    if axis not in conditions.numeric:
        axis = _axis(conditions)
    return _Raw(source, column, axis, table) if column is not None and axis else None


def _axis(conditions: Columns) -> str:
    """Return the condition that takes the most values; "" where none takes enough to be a trace."""
    counts = {name: len(np.unique(values[values == values])) for name, values in conditions.numeric.items()}
    best = max(counts, key=lambda name: counts[name], default="")
    return best if best and counts[best] >= LEAST_PLACES else ""


def _picture(
    raw: _Raw, requirement: Requirement, snapshot: Snapshot, finder: OriginFinder
) -> TracePicture | None:
    columns = finder.columns(raw.table.id)
    along = columns.conditions.numeric[raw.axis]
    arrays = columns.values[raw.column.name]
    drawn = np.isfinite(along) & np.isfinite(arrays.low) & np.isfinite(arrays.high)
    groups = grouped_rows(columns.conditions, columns.items, np.flatnonzero(drawn), {raw.axis})
    groups = [group for group in groups if len(group) >= LEAST_PLACES]
    if not groups:
        return None
    shown = sorted(groups, key=lambda group: float(arrays.low[group].min()))[:MOST_LINES]
    lines = [_line(columns, raw, group) for group in shown]
    bounds = list(_bounds(raw, requirement, columns, shown[0]))
    unit = columns.conditions.units.get(raw.axis, "")
    left = (
        f" {len(groups) - len(shown)} more groups of rows are not drawn." if len(groups) > len(shown) else ""
    )
    return TracePicture(
        title=f"{raw.column.quantity.parameter.replace('_', ' ')} of {raw.table.id} along {raw.axis.replace('_', ' ')}",
        words=f"{int(drawn.sum())} raw readings in {len(groups)} groups, from "
        f"{rounded(float(arrays.low[drawn].min()))} to {rounded(float(arrays.high[drawn].max()))} "
        f"{raw.column.unit}.{left}{_derived_words(raw, snapshot)}",
        axis=raw.axis.replace("_", " "),
        axis_unit=unit,
        unit=raw.column.unit,
        lines=(*lines, *bounds),
        marks=tuple(_marks(raw, columns, finder, shown)),
    )


def _derived_words(raw: _Raw, snapshot: Snapshot) -> str:
    derivation = None if raw.derived is None else snapshot.find(Derivation, raw.derived.derivation)
    return "" if derivation is None else f" Derived: {derivation.words} ({derivation.id})."


def _line(columns: EvidenceColumns, raw: _Raw, group: NDArray[np.intp]) -> TraceLine:
    along = columns.conditions.numeric[raw.axis][group]
    order = np.argsort(along, kind="stable")
    x, y = along[order], columns.values[raw.column.name].low[group][order]
    kept = _thinned(y)
    return TraceLine(
        name=_name(columns, raw, int(group[0])), x=tuple(x[kept].tolist()), y=tuple(y[kept].tolist())
    )


def _name(columns: EvidenceColumns, raw: _Raw, row: int) -> str:
    conditions = columns.conditions
    others = Columns(
        conditions.size,
        {name: values for name, values in conditions.numeric.items() if name != raw.axis},
        conditions.text,
        conditions.units,
    )
    item = columns.items.word(row)
    return (
        ", ".join(filter(None, [f"item {item}" if item else "", conditions_words(others, row)])) or "readings"
    )


def _thinned(values: Floats) -> NDArray[np.intp]:
    """Return the places to draw: all of few; of many, where each stretch is least and greatest."""
    if len(values) <= MOST_PLACES:
        return np.arange(len(values))
    kept = {0, len(values) - 1}
    for part in np.array_split(np.arange(len(values)), MOST_PLACES // 2):
        kept |= {int(part[np.argmin(values[part])]), int(part[np.argmax(values[part])])}
    return np.array(sorted(kept), np.intp)


def _bounds(
    raw: _Raw, requirement: Requirement, columns: EvidenceColumns, group: NDArray[np.intp]
) -> Iterator[TraceLine]:
    """Give the bounds of the limit along the axis, where it is a limit on what is drawn."""
    if code_key(raw.column.quantity.parameter) != code_key(requirement.quantity.parameter):
        return
    order = group[np.argsort(columns.conditions.numeric[raw.axis][group], kind="stable")]
    try:
        to_drawn = converter(unit_of(requirement.limit.unit or "1"), parse_unit(raw.column.unit or "1"))
        found = evaluate_limit(requirement.limit, LimitContext(columns.conditions.take(order)))
        nothing = np.array([np.nan])
        sides = [
            np.broadcast_to(to_drawn(nothing if side is None else side), len(order))
            for side in (found.lower, found.upper)
        ]
    except SpecflowError:  # a limit that needs what the table does not state is told elsewhere
        return
    x = columns.conditions.numeric[raw.axis][order]
    for name, side in zip(("lower limit", "upper limit"), sides, strict=True):
        known = np.flatnonzero(np.isfinite(side))
        if len(known):
            kept = known[_thinned(side[known])]
            yield TraceLine(name=name, x=tuple(x[kept].tolist()), y=tuple(side[kept].tolist()), look="bound")


def _marks(
    raw: _Raw, columns: EvidenceColumns, finder: OriginFinder, shown: Sequence[NDArray[np.intp]]
) -> Iterator[TraceMark]:
    """Give the readings that derived values point to, among those that are drawn."""
    if raw.derived is None:
        return
    derived = finder.columns(raw.derived.id)
    rows = {int(row): place for place, row in enumerate(columns.source_rows.tolist())}
    drawn = {int(row) for group in shown for row in group}
    low = derived.values[raw.derived.values[0].name].low
    at = derived.extra.get(AT_COLUMN)
    axis_unit = columns.conditions.units.get(raw.axis, "")
    for place, source in enumerate(derived.source_rows.tolist()):
        row = rows.get(int(source))
        if row is None or row not in drawn or place >= MOST_LINES:
            continue
        x = float(columns.conditions.numeric[raw.axis][row])
        where = at.word(place) if at is not None and at.word(place) else value_words(raw.axis, x, axis_unit)
        text = f"{rounded(float(low[place]))} {raw.derived.values[0].unit}, {where}"
        yield TraceMark(x=x, y=float(columns.values[raw.column.name].low[row]), text=text)
