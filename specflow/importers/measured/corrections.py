"""Corrections by name, added to the readings of a table: linear in dB over frequency, uncertainty in RSS at k = 1.

What a person or a mapping names is added; what a file says of corrections is taken to be in its readings already. Where
both speak, it is asked. The reading as it was read stays beside the corrected one. Combining standard uncertainties of
gains in dB as the root of the sum of their squares: JCGM 100:2008, 5.1.2, for a sum of independent quantities.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field, replace
from difflib import get_close_matches

import numpy as np
from numpy.typing import NDArray

from specflow.errors import UnitError
from specflow.importers.measured.correction_doubts import already_corrected, doubts_of
from specflow.importers.measured.correction_units import unit_after
from specflow.importers.measured.stated import MAPPING, PERSON
from specflow.importers.measured.work import TableWork
from specflow.model.columns import TextColumn
from specflow.model.correction import AppliedCorrection, Correction
from specflow.model.evidence import EvidenceColumns, ValueArrays, ValueColumn, as_read_column
from specflow.units import converter, format_unit, parse_unit

Floats = NDArray[np.float64]

AXIS = "frequency"


@dataclass
class Corrected:
    """A table after its corrections: arrays, documents, what was added, and the words of the table for people."""

    columns: EvidenceColumns
    values: list[ValueColumn]
    applied: list[AppliedCorrection] = field(default_factory=list)
    words: list[str] = field(default_factory=list)


def with_corrections(work: TableWork, columns: EvidenceColumns, values: list[ValueColumn]) -> Corrected:
    """Add the corrections that were named for a table; a question where one cannot be, or may be in already."""
    done = Corrected(columns, values)
    done.words += [f"{one.key}: {one.text}, {one.by}" for one in work.stated.corrected]
    named = _named(work, done)
    if not named:
        return done
    for question in doubts_of(work, named):
        work.ask("correction", question.cell, question.what, question.remedy)
    for correction in named:
        places = _places(work, correction, done.values)
        for place in places:
            _add(work, correction, done, place)
    return done


def _named(work: TableWork, done: Corrected) -> list[Correction]:
    """The correction tables that a person or a mapping names; other words are kept as they are."""
    said = work.stated.said.get("corrections")
    if said is None:
        return []
    names = [name for name in (part.strip() for part in said.text.replace(";", ",").split(",")) if name]
    known = work.context.snapshot.all(Correction)
    found = []
    for name, count in Counter(names).items():
        correction = work.context.snapshot.find(Correction, name)
        if correction is not None and said.by in (PERSON, MAPPING):
            if count > 1:
                work.ask("correction", "", f"{name} is named {count} times", "name it once")
            found.append(correction)
        elif " " in name or said.by not in (PERSON, MAPPING):
            done.words.append(f"{name}, {said.by}")
        else:
            near = get_close_matches(name, [one.id for one in known], n=3, cutoff=0.4)
            listed = (
                ", ".join(near or [one.id for one in known][:8]) or "none; the sheet Corrections holds them"
            )
            work.ask("correction", "", f"there is no correction {name!r} ({said.by})", f"known: {listed}")
    return found


def _places(work: TableWork, correction: Correction, values: Sequence[ValueColumn]) -> list[int]:
    """The value columns that a correction is for: those of its parameter, else the only one (or one split by kind)."""
    mine = [
        place
        for place, value in enumerate(values)
        if correction.parameter is None or correction.parameter == value.quantity.parameter
    ]
    parameters = {values[place].quantity.parameter for place in mine}
    if len(parameters) == 1:
        return mine
    names = ", ".join(value.header or value.name for value in values)
    remedy = "say the parameter it is for on the sheet Corrections, or attach the columns by themselves"
    what = (
        f"which of the columns {correction.id} is for"
        if mine
        else f"{correction.id} is for {correction.parameter}"
    )
    work.ask("correction", work.table.place, f"{what}; there are {names}", remedy)
    return []


def _add(work: TableWork, correction: Correction, done: Corrected, place: int) -> None:
    value = done.values[place]
    arrays = done.columns.values[value.name]
    hertz = _hertz(done.columns)
    there = ~np.isnan(arrays.low)
    problem = _problem(correction, value, hertz, there)
    if problem:
        work.ask("correction", work.table.place, *problem)
        return
    earlier = already_corrected(work, correction, value, arrays.low)
    if earlier:
        what = f"these readings are those of {earlier} after {correction.id} was added: it would be in twice"
        work.ask("correction", work.table.place, what, "leave the correction out, or attach the raw readings")
        return
    assert hertz is not None
    step, spread = at_frequencies(correction, hertz)
    u, note = _combined(arrays.u, spread, there)
    low = arrays.low + step
    high = low if arrays.high is arrays.low else arrays.high + step
    unit = format_unit(unit_after(value.unit, correction.unit))
    words = f"{said_of(correction)}: {_range(step[there])} {correction.unit} added, linear in dB over frequency; {note}"
    raw = as_read_column(value.name)
    if raw not in done.columns.extra:
        extra = {**done.columns.extra, raw: _as_read(arrays)}
        done.columns = replace(done.columns, extra=extra)
    changed = {**done.columns.values, value.name: ValueArrays(low, high, u)}
    done.columns = replace(done.columns, values=changed)
    done.values[place] = value.model_copy(update={"unit": unit, "conversions": (*value.conversions, words)})
    done.applied.append(
        AppliedCorrection(
            correction=correction.id, revision=correction.revision, column=value.name, words=words
        )
    )
    done.words.append(f"{value.header or value.name}: {words}")
    work.notes.append(f"{value.header or value.name}: {words}; the reading as read is kept beside it")


def said_of(correction: Correction) -> str:
    """The correction with its issue, as it is named in what was done."""
    return correction.id + (f" issue {correction.issue}" if correction.issue else "")


def at_frequencies(correction: Correction, hertz: Floats) -> tuple[Floats, Floats]:
    """Return what is added at each frequency (n,), and its u (n,): the greater of the two neighbouring points'.

    Linear in dB over frequency between the points; NaN where there is no frequency. The frequencies must lie within.
    """
    known = np.array([point.frequency_hz for point in correction.points])
    added = np.array([point.added for point in correction.points])
    spread = np.array([np.nan if point.u is None else point.u for point in correction.points])
    inside = np.clip(hertz, known[0], known[-1])
    right = np.clip(np.searchsorted(known, inside), 0, len(known) - 1)
    left = np.where(known[right] <= inside, right, np.maximum(right - 1, 0))
    step = np.interp(inside, known, added)
    return np.where(np.isnan(hertz), np.nan, step), np.maximum(spread[left], spread[right])


def _problem(
    correction: Correction, value: ValueColumn, hertz: Floats | None, there: NDArray[np.bool_]
) -> tuple[str, str] | None:
    """Why a correction cannot be added to a column, with what to do; None where it can."""
    if hertz is None or np.isnan(hertz[there]).any():
        what = f"{correction.id} is over frequency, and {'no row' if hertz is None else 'not every row'} states one"
        return what, "state it: --state frequency=28 GHz, or a column of frequencies"
    low, high = correction.points[0].frequency_hz, correction.points[-1].frequency_hz
    needed = hertz[there]
    slack = 1e-9 * high
    if len(needed) and (needed.min() < low - slack or needed.max() > high + slack):
        needs = f"{needed.min() / 1e9:g} to {needed.max() / 1e9:g} GHz"
        what = f"{correction.id} is known from {low / 1e9:g} to {high / 1e9:g} GHz, the readings need {needs}"
        return (
            what,
            "a correction is never extrapolated: calibrate it over the whole range, or split the table",
        )
    try:
        unit_after(value.unit, correction.unit)
    except UnitError as error:
        return f"{correction.id} is in {correction.unit}, the readings in {value.unit}: {error.message}", (
            "a correction in dB is added to readings in dB: export them so"
        )
    return None


def _hertz(columns: EvidenceColumns) -> Floats | None:
    values = columns.conditions.numeric.get(AXIS)
    if values is None:
        return None
    unit = columns.conditions.units.get(AXIS, "Hz")
    return np.asarray(converter(parse_unit(unit), parse_unit("Hz"))(values), np.float64)


def _combined(u: Floats | None, spread: Floats, there: NDArray[np.bool_]) -> tuple[Floats | None, str]:
    """The uncertainty of corrected readings: RSS where both are known; without one of them what is known is said."""
    if np.isnan(spread[there]).all():
        return u, "it states no uncertainty, that of the readings stays"
    own = f"u {_range(spread[there])} dB"
    if u is None or np.isnan(u[there]).all():
        return u, f"its {own} is not combined: the readings have none"
    both = np.where(np.isnan(spread), u, np.hypot(u, spread))
    return both, f"its {own} combined in RSS at k = 1"


def _range(values: Floats) -> str:
    known = values[np.isfinite(values)]
    if not len(known):
        return "nothing"
    low, high = float(known.min()), float(known.max())
    return f"{low:.4g}" if low == high else f"{low:.4g} to {high:.4g}"


def _as_read(arrays: ValueArrays) -> TextColumn:
    """The readings before correction, with all their digits."""
    return TextColumn.of(list(_figures(arrays)))


def _figures(arrays: ValueArrays) -> Iterator[str]:
    for low, high in zip(arrays.low.tolist(), arrays.high.tolist(), strict=True):
        if low != low:
            yield ""
        elif low == high:
            yield repr(low)
        else:
            yield f"{low!r} .. {high!r}"
