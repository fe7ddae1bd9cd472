"""Rules about evidence: does it match anything, does it contradict itself, may it be trusted."""

from __future__ import annotations

from collections.abc import Iterator

from specflow.model.base import code_key
from specflow.model.evidence import EvidenceTable, Withdrawal
from specflow.model.verdict import Mismatch, RecordRef
from specflow.rules.base import Found
from specflow.rules.facts import Facts
from specflow.rules.words import amount, at_point, counted, listed, shortened


def unit_mismatch(facts: Facts) -> Iterator[Found]:
    """Values of the right parameter are in a unit that cannot be held against the limit.

    Why: a number in the wrong unit proves nothing, and looks as if it did.
    Fails: the column says mA, the limit is in dB.
    Passes: the unit converts into that of the limit: mW against dBm.
    Do: correct the unit in the mapping of the table; if the sheet is wrong, have it mended.
    """
    yield from _mismatches(facts, "unit")


def plane_mismatch(facts: Facts) -> Iterator[Found]:
    """Values are referred to another plane than the limit.

    Why: between two planes lies a gain or a loss, with its uncertainty.
    Fails: measured at connector 3, required at the antenna face, no path declared.
    Passes: the same plane; or the block declares the path between the two.
    Do: state the plane in the mapping, or declare the path with its gain and uncertainty in the block.
    """
    yield from _mismatches(facts, "plane")


def statistic_mismatch(facts: Facts) -> Iterator[Found]:
    """Values are another statistic than the limit is on.

    Why: peak and average of one signal differ by many dB.
    Fails: the column is a peak, the limit is on the rms value.
    Passes: both are the same statistic.
    Do: state the statistic in the mapping, or record the one that is required.
    """
    yield from _mismatches(facts, "statistic")


def bandwidth_mismatch(facts: Facts) -> Iterator[Found]:
    """Values are in another reference bandwidth and cannot be brought to that of the limit.

    Why: noise scales with bandwidth, a line does not; a guess is wrong by the ratio.
    Fails: the column states no bandwidth, the limit is in 1 MHz.
    Passes: the same bandwidth; or another one, for a spectrum said to be noise-like.
    Do: state the bandwidth, and whether the spectrum is noise-like or discrete, in the mapping.
    """
    yield from _mismatches(facts, "bandwidth")


def polarisation_mismatch(facts: Facts) -> Iterator[Found]:
    """Values are of another polarisation than the limit.

    Why: the other polarisation says nothing about this one.
    Fails: the column is left-hand circular, the limit right-hand circular.
    Passes: both are the same.
    Do: state the polarisation in the mapping, or measure the one that is required.
    """
    yield from _mismatches(facts, "polarisation")


def conditions_mismatch(facts: Facts) -> Iterator[Found]:
    """Values of the right quantity stand at no required point.

    Why: effort was spent at conditions nobody asked for, or the conditions are not stated.
    Fails: measured at 28.0 GHz, required are 27.5 and 30 GHz within 10 MHz.
    Passes: a reading within the setting tolerance of a required point, every condition stated.
    Do: state missing conditions in the mapping; else measure at the required points.
    """
    yield from _mismatches(facts, "conditions")


def wrong_requirement_named(facts: Facts) -> Iterator[Found]:
    """A sheet names a requirement that its values do not belong to.

    Why: either the id or the block or the parameter is wrong, and one of them decides what the values prove.
    Fails: the sheet says R-7, a limit on noise figure; it holds a gain.
    Passes: the requirement named is on the block and the parameter of the sheet.
    Do: correct the id in the sheet, or the mapping of the table.
    """
    yield from _mismatches(facts, "requirement")


def _mismatches(facts: Facts, kind: str) -> Iterator[Found]:
    """Yield the mismatches of a kind; a column that serves another requirement is simply another quantity."""
    for requirement, status in facts.judged:
        for mismatch in status.mismatches:
            serves = (code_key(mismatch.table), code_key(mismatch.column)) in facts.serving
            table = facts.table(mismatch.table)
            if mismatch.kind != kind or serves or table is None:
                continue
            message = f"{_column(mismatch, table)}: {mismatch.what}"
            origin = facts.place(table).model_copy(update={"column": _number(mismatch, table)})
            yield Found(requirement.id, message, mismatch.remedy, origin, (table.id,))


def _column(mismatch: Mismatch, table: EvidenceTable) -> str:
    return f"{mismatch.column} of {table.id}" if mismatch.column else table.id


def _number(mismatch: Mismatch, table: EvidenceTable) -> int | None:
    return next((one.column for one in table.values if one.name == mismatch.column), None)


def unmatched_evidence(facts: Facts) -> Iterator[Found]:
    """A table serves no requirement.

    Why: somebody measured it for a reason; the requirement it was for goes unproved.
    Fails: a table of phase noise on a block that has no limit on phase noise.
    Passes: a reading of it stands at a required point.
    Do: see the reason; correct block, quantity or conditions in the mapping, or add the requirement.
    """
    for name, reason in facts.results.unmatched.items():
        table = facts.table(name)
        if table is not None:
            yield Found(table.id, reason, origin=facts.place(table), related=(table.file,))


def ambiguous_evidence(facts: Facts) -> Iterator[Found]:
    """One reading is within the setting tolerance of several required points.

    Why: it counts for the nearest only; whoever wrote the tolerance probably did not mean that.
    Fails: points at 28.0 and 28.1 GHz with a tolerance of 100 MHz, and a reading at 28.04 GHz.
    Passes: tolerances so narrow that no reading belongs to two points.
    Do: narrow the setting tolerance in the conditions set, or measure at the points.
    """
    for requirement, status in facts.judged:
        if status.ambiguous:
            first = status.ambiguous[0]
            message = f"{counted(len(status.ambiguous), 'reading')} within the tolerance of several points"
            yield Found(
                requirement.id, message, origin=facts.origin(first), related=_tables(status.ambiguous)
            )


def _tables(records: tuple[RecordRef, ...]) -> tuple[str, ...]:
    return tuple(dict.fromkeys(record.table for record in records))


def conflicting_evidence(facts: Facts) -> Iterator[Found]:
    """Two readings of one item at one point differ by more than their uncertainties allow.

    Why: one of them is wrong, and the one that is trusted may be that one.
    Fails: two laboratories find 21.0 and 19.4 dB, each with U = 0.3 dB.
    Passes: they differ by less than the root of the sum of squares of their U.
    Do: find out which one is wrong and withdraw it with its reason, or record a disposition; the worst governs.
    """
    for requirement, status in facts.judged:
        if not status.conflicts:
            continue
        worst = max(
            status.conflicts, key=lambda one: one.difference / one.allowed if one.allowed else one.difference
        )
        others = len(status.conflicts) - 1
        more = f" (and {counted(others, 'other point')})" if others else ""
        message = (
            f"{worst.first.table} and {worst.second.table} differ by {amount(worst.difference, worst.unit)}"
            f"{at_point(worst.words, worst.item)}; {amount(worst.allowed, worst.unit)} is allowed{more}"
        )
        pairs = tuple(record for one in status.conflicts for record in (one.first, one.second))
        yield Found(requirement.id, message, origin=facts.origin(worst.second), related=_tables(pairs))


def left_out_cells(facts: Facts) -> Iterator[Found]:
    """Cells were rejected at import and left out.

    Why: what was left out may be the reading that fails.
    Fails: three cells read "OL" and the rest of the table was taken.
    Passes: every cell of the table could be read.
    Do: have the sheet mended and attach it again, or record a disposition that says why they do not matter.
    """
    for table in facts.snapshot.tables:
        if table.left_out:
            cells = listed([f"{one.cell} {shortened(one.text)!r} ({one.reason})" for one in table.left_out])
            message = f"{counted(len(table.left_out), 'cell')} left out: {cells}"
            yield Found(table.id, message, origin=facts.place(table), related=(table.file,))


def provisional_evidence(facts: Facts) -> Iterator[Found]:
    """Evidence is not accepted yet.

    Why: it shows progress and closes nothing.
    Fails: the project asks for a second review and nobody has done it.
    Passes: the table was accepted by name.
    Do: review the table and accept it, or withdraw it.
    """
    for table in facts.snapshot.tables:
        if table.provisional or not table.accepted_by:
            yield Found(table.id, "not accepted yet", origin=facts.place(table), related=(table.file,))


def outdated_derivation(facts: Facts) -> Iterator[Found]:
    """A derived table was made from what does not stand any more.

    Why: the number is right for data that was replaced or found wrong; a pass of it does not count.
    Fails: the trace behind a ripple was measured again and superseded.
    Passes: the table was derived again from the new trace, and supersedes the earlier one.
    Do: derive it again (specflow derive --again), or withdraw it.
    """
    gone = facts.replaced_tables
    for table in facts.snapshot.tables:
        reason = facts.results.outdated.get(code_key(table.id))
        if reason and code_key(table.id) not in gone:
            related = () if table.derivation is None else (table.derivation,)
            yield Found(table.id, reason, origin=facts.place(table), related=related)


def withdrawn_evidence(facts: Facts) -> Iterator[Found]:
    """Evidence was withdrawn: it counts no more, neither for nor against.

    Why: a withdrawal can take a failing reading away on the word of its reason; a board has to see each.
    Fails: a run was withdrawn because a cable was loose.
    Passes: every table stands, or was superseded by a named successor.
    Do: look whether the reason holds, and record a disposition that says so.
    """
    for withdrawal in facts.snapshot.all(Withdrawal):
        table = facts.snapshot.find(EvidenceTable, withdrawal.table)
        if table is None or withdrawal.at[:10] > facts.results.as_of:
            continue
        whole = withdrawal.rows is None
        what = "the whole table" if whole else counted(len(withdrawal.rows or ()), "row")
        by = f" by {withdrawal.by}" if withdrawal.by else ""
        message = f"{what} withdrawn{by}: {withdrawal.reason}"
        yield Found(table.id, message, origin=facts.place(table), related=(withdrawal.id, table.file))


def calibration_lapsed(facts: Facts) -> Iterator[Found]:
    """An instrument was used after its calibration had run out.

    Why: nobody can say how far off it was; the readings do not count.
    Fails: the power meter was due on 30 April and used on 1 May.
    Passes: the calibration covers the day of the test.
    Do: have the instrument calibrated and look at what was found; measure again where it was out.
    """
    for table in facts.snapshot.tables:
        dates = _dates(table, facts) if table.equipment else ()
        for instrument in table.equipment:
            due = instrument.calibration_due
            late = [day for day in dates if due is not None and day > due.isoformat()]
            if late:
                message = f"{instrument.asset} was due for calibration on {due} and used on {listed(late)}"
                yield Found(table.id, message, origin=facts.place(table), related=(table.file,))


def _dates(table: EvidenceTable, facts: Facts) -> list[str]:
    """Return the days on which a table was taken (ISO), those of its rows where it gives them."""
    days = set() if table.performed_on is None else {table.performed_on.isoformat()}
    recorded = facts.columns(table.id).dates if table.performed_on is None else None
    if recorded is not None:
        days.update(label[:10] for label in recorded.labels)
    return sorted(days)
