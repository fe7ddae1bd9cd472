"""A law applied to stored tables: one derived row a group of all other conditions and item."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.groups import grouped_rows
from specflow.conditions.words import value_words
from specflow.derive.assembling import Gathered, derived_of
from specflow.derive.coverage import covered_rows
from specflow.derive.joining import Joined, joined
from specflow.derive.law import Law, Outcome
from specflow.derive.request import Derived, Refused, Request, Result
from specflow.derive.said import SaidRange, read_over, typed_settings
from specflow.derive.samples import Samples
from specflow.errors import CalculationError, DocumentError, UnitError
from specflow.units import compatible, parse_unit

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]


#: How many results are put into words for a preview; all are stored.
MOST_TOLD = 1000


def derive_table(request: Request) -> Derived:
    """Apply a law to each group of rows that agree in item and all conditions that the law does not run over.

    A group from which the law cannot be made is refused and told; raises CalculationError when none is left, and
    DocumentError when what was said does not suit the law or the tables.
    """
    rows = joined(request.roles, request.where)
    over = _over(request)
    axes = _axes(request, rows, over)
    apart = {*axes, *rows.told_apart}
    found = Gathered()
    every = np.arange(rows.size)
    each = request.law.over == "each"
    for group in [every] if each else grouped_rows(rows.conditions, rows.items, every, apart):
        _add_group(found, request, rows, axes, over, group)
    if not found.outcomes:
        _refuse_all(request, found)
    return derived_of(request, rows, over, apart, found)


def _over(request: Request) -> SaidRange | None:
    law = request.law
    if law.over != "range":
        if request.over:
            raise DocumentError(f"the law {law.name} runs over no range", hint="leave --over out")
        return None
    if len(request.over) != 1:
        raise DocumentError(
            f"the law {law.name} runs over one stated range",
            hint="say --over 'frequency 17.7..20.2 GHz step 0.1 GHz'",
        )
    return read_over(request.over[0])


def _axes(request: Request, rows: Joined, over: SaidRange | None) -> dict[str, Floats]:
    if over is not None:
        return {over.dimension: rows.numbers(over.dimension, over.unit)}
    if request.law.over == "directions":
        return rows.directions()
    return {}


def _add_group(
    found: Gathered,
    request: Request,
    rows: Joined,
    axes: Mapping[str, Floats],
    over: SaidRange | None,
    group: Rows,
) -> None:
    if not len(group):
        return
    apart = {*axes, *rows.told_apart}
    try:
        taken, gap = _taken(request.law, rows, axes, over, group)
        taken, twice = _once(request, rows, axes, over, taken)
        outcome = request.law.function(_samples(request, rows, axes, over, taken))
        _check_outcome(request, outcome)
    except (CalculationError, UnitError) as error:
        found.refused.append(Refused(rows.words(int(group[0]), apart), error.message, error.hint))
        return
    found.largest_gap = max(found.largest_gap, gap)
    at = outcome.at or tuple(_place(rows, axes, over, int(taken[row])) for row in outcome.rows)
    found.at.extend(at)
    found.results.extend(_results(found, request, rows, apart, taken, outcome, at))
    found.notes.update(dict.fromkeys(outcome.notes))
    if twice:
        found.notes.setdefault(
            f"{twice} of the readings stand twice with the same values and were taken once"
        )
    found.outcomes.append((taken, outcome))


def _results(
    found: Gathered,
    request: Request,
    rows: Joined,
    apart: set[str],
    taken: Rows,
    outcome: Outcome,
    at: Sequence[str],
) -> Iterator[Result]:
    """Give the results of a group in words, as long as people would read on."""
    each = request.law.over == "each"
    high = outcome.value if outcome.high is None else outcome.high
    u = np.full(len(outcome.value), np.nan) if outcome.u is None else outcome.u
    room = max(MOST_TOLD - len(found.results), 0)
    words = "" if each or not room else rows.words(int(taken[0]), apart)
    for place in range(min(len(outcome.value), room)):
        yield Result(
            rows.words(int(taken[outcome.rows[place]]), apart) if each else words,
            float(outcome.value[place]),
            float(high[place]),
            float(u[place]),
            at[place],
            1 if each else len(taken),
        )


def _taken(
    law: Law, rows: Joined, axes: Mapping[str, Floats], over: SaidRange | None, group: Rows
) -> tuple[Rows, float]:
    """Return the rows of a group that the law reads, ascending along its range, and the largest gap."""
    has_value = rows.has_value[group]
    if law.over == "each":
        if not has_value.any():
            raise CalculationError("no row has a value in every column that the law reads")
        return group[has_value], 0.0
    if over is None:
        if not has_value.all():
            raise CalculationError(
                f"{np.count_nonzero(~has_value)} of {len(group)} rows have no value",
                hint="the law needs all of them; read the cells that were rejected, or choose rows with --where",
            )
        return group, 0.0
    along = axes[over.dimension][group]
    covered = covered_rows(along, has_value, over.range, over.dimension, over.unit, brackets=law.brackets)
    return group[covered.rows], covered.largest_gap


def _once(
    request: Request, rows: Joined, axes: Mapping[str, Floats], over: SaidRange | None, taken: Rows
) -> tuple[Rows, int]:
    """Drop rows that say the same as the one before them at the same place, as where two segments of a sweep meet."""
    if over is None or request.law.takes_repeats or len(taken) < 2:
        return taken, 0
    same = np.diff(axes[over.dimension][taken]) == 0
    for role in request.roles if same.any() else ():
        own = rows.readings(role.name).take(taken)
        parts = (own.low, own.high) if own.u is None else (own.low, own.high, own.u)
        for part in parts:
            same &= (part[1:] == part[:-1]) | (np.isnan(part[1:]) & np.isnan(part[:-1]))
    return taken[np.concatenate([[True], ~same])], int(np.count_nonzero(same))


def _samples(
    request: Request, rows: Joined, axes: Mapping[str, Floats], over: SaidRange | None, taken: Rows
) -> Samples:
    law = request.law
    values = {role.name: rows.readings(role.name).take(taken) for role in request.roles}
    if not law.takes_bounds and any((one.low != one.high).any() for one in values.values()):
        raise CalculationError(
            "some readings are bounds (less than, more than), which the law cannot take",
            hint="the law worst takes bounds",
        )
    own = {name: axis[taken] for name, axis in axes.items()}
    if over is not None and not law.takes_repeats:
        _refuse_repeats(own[over.dimension], over)
    first = request.roles[0].name
    unit = over.unit if over is not None else ""
    settings = typed_settings(law, request.settings, axis_unit=unit, value_unit=values[first].unit)
    units = dict.fromkeys(own, unit if over is not None else "deg")
    axis, span = (over.dimension, over.range) if over is not None else ("", None)
    return Samples(values, own, units, axis, span, settings, request.gives)


def _refuse_repeats(along: Floats, over: SaidRange) -> None:
    again = np.flatnonzero(np.diff(along) == 0)
    if len(again):
        place = value_words(over.dimension, float(along[again[0]]), over.unit)
        raise CalculationError(
            f"there are several readings at {place} under the same conditions",
            hint="tell the sweeps apart by a condition (run, state), or choose rows with --where",
        )


def _check_outcome(request: Request, outcome: Outcome) -> None:
    bad = np.isnan(outcome.value) if request.law.takes_bounds else ~np.isfinite(outcome.value)
    if bad.any():
        raise CalculationError(
            f"{np.count_nonzero(bad)} of {len(outcome.value)} results are no numbers",
            hint="look at the readings: a level of nothing, a ratio to nothing",
        )
    own, wanted = parse_unit(outcome.unit or "1"), parse_unit(request.gives.unit or "1")
    if not compatible(own, wanted) and not (own.is_log != wanted.is_log and own.kind is wanted.kind):
        raise DocumentError(
            f"the law {request.law.name} gives {outcome.unit or 'a plain number'} here; "
            f"{request.gives.key} is in {request.gives.unit}",
            hint="name the parameter that it gives with --gives",
        )


def _place(rows: Joined, axes: Mapping[str, Floats], over: SaidRange | None, row: int) -> str:
    unit = over.unit if over is not None else "deg"
    return ", ".join(value_words(name, float(axis[row]), unit) for name, axis in axes.items())


def _refuse_all(request: Request, found: Gathered) -> None:
    if not found.refused:
        tables = ", ".join(dict.fromkeys(role.table.id for role in request.roles))
        raise DocumentError(
            "no row was chosen", where=tables, hint="look at --where and the conditions of the rows"
        )
    first = found.refused[0]
    more = f" (and {len(found.refused) - 1} more groups)" if len(found.refused) > 1 else ""
    table = request.roles[0].table.id
    raise CalculationError(
        f"{first.why}{more}", where=", ".join(filter(None, [table, first.group])), hint=first.remedy
    )
