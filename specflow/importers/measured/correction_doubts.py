"""Reasons to ask before a correction is added: it may be in the readings already, or may not be used here."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence

import numpy as np
from numpy.typing import NDArray

from specflow.importers.measured.result import Question, Role
from specflow.importers.measured.work import TableWork
from specflow.model.base import code_key
from specflow.model.correction import Correction
from specflow.model.evidence import EvidenceTable, ValueColumn

_FEWEST, _MOST = 3, 0.9  # of readings that must be found again
_DIGITS = 0.0051  # dB: a corrected reading may have been written with two decimals
_IN_HEADER = re.compile(
    r"\bcorr(?:ected|\.)|\bincl(?:uding|\.)|\bde-?embedded\b|\bwith (?:path|cable) loss", re.IGNORECASE
)
_RAW = ("no", "raw", "not")
_REMEDY = "--state corrected=no says that the readings are raw, whatever the file says; else leave the correction out"


def doubts_of(work: TableWork, named: Sequence[Correction]) -> Iterator[Question]:
    """Yield what has to be settled before these corrections are added to the readings of a table."""
    if work.stated.text("corrected").casefold() not in _RAW:
        yield from _already_in(work, named)
    for correction in named:
        yield from _of_another_set_up(work, correction)
        yield from _out_of_date(work, correction)


def _already_in(work: TableWork, named: Sequence[Correction]) -> Iterator[Question]:
    for one in work.stated.corrected:
        cell = one.by.removeprefix("stated in ")
        yield Question(
            "correction",
            cell,
            f"the file says {one.key}: {one.text}; a correction would be in twice",
            _REMEDY,
        )
    for value in work.of(Role.VALUE):
        if _IN_HEADER.search(value.header.text):
            what = f"the header {value.header.text!r} says that its readings are corrected"
            yield Question("correction", value.header.cell, what, _REMEDY)
    said = [*work.stated.unused, *(reading.meaning for reading in work.stated.readings if reading.cell)]
    for correction in named:
        word = re.compile(rf"(?<![\w-]){re.escape(correction.id)}(?![\w-])", re.IGNORECASE)
        mention = next((line for line in said if word.search(line)), "")
        if mention and not work.stated.corrected:
            yield Question(
                "correction", "", f"the file names {correction.id} itself ({mention[:60]})", _REMEDY
            )


def _of_another_set_up(work: TableWork, correction: Correction) -> Iterator[Question]:
    stated = work.stated.text("set_up")
    if correction.set_up and stated and code_key(correction.set_up) != code_key(stated):
        what = f"{correction.id} belongs to the set-up {correction.set_up}, the table is of {stated}"
        yield Question(
            "correction", "", what, "name the correction of this set-up, or mend the one that is wrong"
        )


def _out_of_date(work: TableWork, correction: Correction) -> Iterator[Question]:
    day = work.stated.day("date")
    early = day is not None and correction.valid_from is not None and day < correction.valid_from
    late = day is not None and correction.valid_until is not None and day > correction.valid_until
    if early or late:
        valid = f"from {correction.valid_from or 'any day'} until {correction.valid_until or 'any day'}"
        what = f"{correction.id} may be used {valid}, the readings are of {day}"
        yield Question("correction", "", what, "use the issue that was valid on that day")
    elif day is None and (correction.valid_from or correction.valid_until):
        work.notes.append(
            f"{correction.id} has dates of validity, and the table states no date: they were not held"
        )


def already_corrected(
    work: TableWork, correction: Correction, value: ValueColumn, low: NDArray[np.float64]
) -> str:
    """Return the earlier table of which these are the readings, row by row, with this correction in; "" if none is."""
    if len(low) < _FEWEST or all(abs(point.added) <= _DIGITS for point in correction.points):
        return ""
    for earlier in work.context.snapshot.tables:
        columns = [one.column for one in earlier.applied if one.correction == correction.id]
        names = [one.name for one in earlier.values if one.name in columns and one.quantity == value.quantity]
        if not names or earlier.rows != len(low):
            continue
        stored = work.context.snapshot.load_columns([earlier.id])[earlier.id].values
        for name in names:
            same = np.isclose(low, stored[name].low, rtol=0, atol=_DIGITS, equal_nan=True)
            if same.mean() >= _MOST:
                return earlier.id
    return ""


def note_earlier(work: TableWork, table: EvidenceTable) -> None:
    """Say that an earlier table of the same layout, place and set-up was corrected otherwise."""
    mine = {one.correction for one in table.applied}
    for earlier in work.context.snapshot.tables:
        theirs = {one.correction for one in earlier.applied}
        if earlier.table_key == table.table_key and theirs != mine:
            with_them = f"with {', '.join(sorted(theirs))}" if theirs else "without a correction"
            work.notes.append(
                f"{earlier.id} is of the same layout and set-up, {with_them}: rows of both are compared"
            )
