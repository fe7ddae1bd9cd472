"""Rules about what sources say themselves: their limits and their verdicts, held beside ours."""

from __future__ import annotations

import math
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from functools import lru_cache

from specflow.errors import UnitError
from specflow.model.base import code_key
from specflow.model.correction import Correction
from specflow.model.evidence import EvidenceTable, Supersession, Withdrawal
from specflow.model.requirement import Requirement
from specflow.model.source_statement import StatedColumn
from specflow.model.verdict import PointResults, RecordRef, Verdict
from specflow.rules.base import Found
from specflow.rules.facts import FAILS, Facts
from specflow.rules.words import at_point, counted
from specflow.units import converter, parse_reading_with_unit, parse_unit

_PASSED = [
    "pass",
    "passed",
    "p",
    "ok",
    "true",
    "yes",
    "y",
    "compliant",
    "c",
    "go",
    "conform",
    "conforms",
    "met",
]
_FAILED = [
    "fail",
    "failed",
    "f",
    "nok",
    "ng",
    "false",
    "no",
    "n",
    "noncompliant",
    "nc",
    "nogo",
    "notok",
    "notmet",
]
_CLOSE = 1e-9  # what a conversion may leave of a difference


@dataclass(slots=True)
class Told:
    """Governing readings of one requirement at which a source and we differ: the first, and how many."""

    first: RecordRef
    point: int
    words: str
    count: int = 0
    tables: dict[str, None] = field(default_factory=dict)


def stated_verdict_differs(facts: Facts) -> Iterator[Found]:
    """A source calls a reading passed or failed, and we find the opposite.

    Why: either its limit is another one than ours, or one of the two was read wrongly.
    Fails: the sheet says PASS beside 19.2 dB, the requirement is at least 20 dB.
    Passes: the sheet and we come to the same verdict for every governing reading.
    Do: compare the limit of the source with the requirement; correct the one that is wrong.
    """
    yield from _differing(facts, "verdict")


def stated_limit_differs(facts: Facts) -> Iterator[Found]:
    """A source states another limit than the requirement has.

    Why: what was tested against is not what was promised, or the promise has moved since.
    Fails: the sheet judges against 19 dB, the requirement is at least 20 dB.
    Passes: the limit beside the reading is that of the requirement, in whatever unit.
    Do: find out which of the two is in force; correct the requirement, or have the source mended.
    """
    yield from _differing(facts, "limit")


def stated_fail_unjudged(facts: Facts) -> Iterator[Found]:
    """A source calls readings failed of which none governs a required point.

    Why: somebody saw a fail there, and nothing of ours says a word about it.
    Fails: the sheet says FAIL at 31 GHz, where nothing is required.
    Passes: a reading that the sheet calls failed governs a point, whatever we find there.
    Do: look whether the condition ought to be required, or whether the reading was matched wrongly.
    """
    governing, gone = _governing_rows(facts), _gone(facts)
    for table in facts.snapshot.tables:
        if code_key(table.id) in gone:
            continue
        failed = sorted(
            {row for said in table.stated if said.kind == "verdict" for row in _failed(facts, table, said)}
        )
        if failed and not governing.get(code_key(table.id), set()) & set(failed):
            rows = facts.columns(table.id).source_rows
            message = f"the source calls {counted(len(failed), 'reading')} failed, and none governs a required point"
            origin = facts.place(table).model_copy(update={"row": int(rows[failed[0]])})
            yield Found(table.id, message, origin=origin, related=(table.file,))


def values_without_meaning(facts: Facts) -> Iterator[Found]:
    """Readings have no meaning in the unit of the limit, and were not judged.

    Why: what is not judged neither proves nor fails, and may be the reading that fails.
    Fails: an output power of -0.1 W under a limit in dBm.
    Passes: every reading has a value in the unit of the limit.
    Do: look at these cells in the source; have them mended, and attach the file again.
    """
    for requirement, status in facts.judged:
        for mismatch in status.mismatches:
            table = facts.table(mismatch.table)
            if mismatch.kind == "value" and table is not None:
                message = f"{mismatch.column} of {table.id}: {mismatch.what}"
                yield Found(requirement.id, message, origin=facts.place(table), related=(table.id,))


def outdated_correction(facts: Facts) -> Iterator[Found]:
    """A correction was changed after it was added to readings.

    Why: the readings hold what the correction was then, not what it is now.
    Fails: a cable was measured again, and its table has another loss than when the file was attached.
    Passes: every correction is in the revision that was added.
    Do: attach the file again with the correction as it is now, superseding the table; or record why it does not matter.
    """
    gone = _gone(facts)
    for table in (one for one in facts.snapshot.tables if one.applied and code_key(one.id) not in gone):
        for name, applied in {one.correction: one for one in table.applied}.items():
            known = facts.snapshot.find(Correction, name)
            if known is None or known.revision != applied.revision:
                now = "is no longer there" if known is None else f"is at revision {known.revision} now"
                message = f"{name} was added at revision {applied.revision}, and {now}"
                yield Found(table.id, message, origin=facts.place(table), related=(table.file, name))


def _gone(facts: Facts) -> set[str]:
    """The keys of tables that were replaced or withdrawn as a whole."""
    replaced = {code_key(one.earlier) for one in facts.snapshot.all(Supersession) if one.rows is None}
    return replaced | {code_key(one.table) for one in facts.snapshot.all(Withdrawal) if one.rows is None}


def _governing_rows(facts: Facts) -> dict[str, set[int]]:
    """Positions of the rows that govern a point of any requirement, by table key."""
    found: dict[str, set[int]] = {}
    for _, results in facts.all_items():
        for place, row in zip(results.table.tolist(), results.row.tolist(), strict=True):
            if place >= 0:
                found.setdefault(code_key(results.tables[place]), set()).add(int(row))
    return found


def _failed(facts: Facts, table: EvidenceTable, said: StatedColumn) -> list[int]:
    words = facts.columns(table.id).extra.get(said.name)
    if words is None:
        return []
    failed = {code for code, label in enumerate(words.labels) if _plain(label) in _FAILED}
    return [row for row, code in enumerate(words.codes.tolist()) if code in failed]


def _differing(facts: Facts, kind: str) -> Iterator[Found]:
    for requirement, told in _compared(facts, kind):
        message = f"{told.words}{_more(told)}"
        yield Found(requirement.id, message, origin=facts.origin(told.first), related=tuple(told.tables))


def _compared(facts: Facts, kind: str) -> Iterator[tuple[Requirement, Told]]:
    """Yield the requirements of which governing readings differ from what stands beside them in their source."""
    for requirement, status in facts.judged:
        told: Told | None = None
        for activity in status.activities:
            for results in activity.items.values():
                for point, table, column in _stated(facts, results, kind):
                    words = _differs(facts, requirement, results, point, table, column)
                    record = facts.governing(results, point) if words else None
                    if record is None:
                        continue
                    where = at_point(facts.point(requirement, point), results.item)
                    told = told or Told(record, point, f"{words}{where}")
                    told.count += 1
                    told.tables[record.table] = None
        if told is not None:
            yield requirement, told


def _stated(
    facts: Facts, results: PointResults, kind: str
) -> Iterator[tuple[int, EvidenceTable, StatedColumn]]:
    """Yield the points whose governing table has such a column for the value that governs."""
    tables = [facts.table(name) for name in results.tables]
    columns = [
        () if one is None else tuple(said for said in one.stated if said.kind == kind) for one in tables
    ]
    if not any(columns):
        return
    places, values = results.table.tolist(), results.column.tolist()
    for point, place in enumerate(places):
        table = tables[place] if place >= 0 else None
        if table is None:
            continue
        name = table.values[values[point]].name
        for said in columns[place]:
            if name == said.of or name.startswith(f"{said.of} (") or (not said.of and len(table.values) == 1):
                yield point, table, said


def _differs(
    facts: Facts,
    requirement: Requirement,
    results: PointResults,
    point: int,
    table: EvidenceTable,
    said: StatedColumn,
) -> str:
    """What the source says otherwise than we do; "" where it says the same, or nothing that can be read."""
    words = facts.columns(table.id).extra.get(said.name)
    text = "" if words is None else words.word(int(results.row[point]))
    if said.kind == "verdict":
        return _other_verdict(text, Verdict(int(results.verdict[point])))
    unit = requirement.limit.unit
    ends = {"lower": float(results.lower[point]), "upper": float(results.upper[point])}
    return _other_limit(text, said, unit, ends)


def _other_verdict(text: str, ours: Verdict) -> str:
    plain = _plain(text)
    if plain in _PASSED and ours in FAILS:
        return f"the source says {text!r}, we find a fail"
    if plain in _FAILED and ours in (Verdict.PASS, Verdict.CONDITIONAL_PASS):
        return f"the source says {text!r}, we find a pass"
    return ""


@lru_cache(maxsize=1024)
def _plain(text: str) -> str:
    return re.sub(r"[\s\-_]+", "", text.casefold())


def _other_limit(text: str, said: StatedColumn, unit: str, ends: Mapping[str, float]) -> str:
    """Compare a limit as written with ours; a side that is not said may be either of them."""
    stated = _stated_limit(text, said.unit or unit or "1", unit or "1")
    sides = [said.side] if said.side else ["lower", "upper"]
    ours = [ends[side] for side in sides if math.isfinite(ends[side])]
    if not math.isfinite(stated) or any(abs(stated - one) <= _CLOSE * max(1.0, abs(one)) for one in ours):
        return ""
    side = {"lower": "a lower limit", "upper": "an upper limit"}.get(said.side, "a limit")
    mine = " and ".join(_exactly(one, unit) for one in ours) or "no such limit"
    return f"the source states {side} of {_exactly(stated, unit)}, the requirement has {mine}"


@lru_cache(maxsize=1024)
def _stated_limit(text: str, unit: str, wanted: str) -> float:
    """A limit as it is written in a cell, in ``wanted``; NaN where it cannot be read."""
    try:
        reading, written = parse_reading_with_unit(text.lstrip("<>≤≥= "))
        return float(
            converter(written or parse_unit(unit), parse_unit(wanted))(getattr(reading, "lo", math.nan))
        )
    except UnitError:
        return math.nan


def _exactly(value: float, unit: str) -> str:
    """A limit with all its digits: rounded, two that differ may look the same."""
    return f"{value:.10g} {unit}".strip()


def _more(told: Told) -> str:
    others = told.count - 1
    return f" (and {counted(others, 'other point')})" if others else ""
