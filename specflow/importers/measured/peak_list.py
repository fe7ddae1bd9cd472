"""Lists of peaks, as spurious searches give them: told from traces, with the ranges that were scanned and their floors.

The floor of each scan becomes a row of its own ("less than the floor", in the bandwidth of the scan), for every item
and setting of the list. What hides under a floor may be noise, which scales with bandwidth, or a line, which does not:
its spectrum is unknown. A list that does not say what was scanned, or down to which floor, is kept all the same: it can
fail a limit and proves none, and that is said.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from specflow.errors import UnitError
from specflow.importers.measured.cell_units import brought, to_unit
from specflow.importers.measured.corrections import at_frequencies
from specflow.importers.measured.result import Role
from specflow.importers.measured.scan_text import read_scans
from specflow.importers.measured.work import TableWork
from specflow.model.columns import UNSTATED, Columns, TextColumn
from specflow.model.correction import AppliedCorrection, Correction
from specflow.model.evidence import EvidenceColumns, SpectrumKind, ValueArrays, ValueColumn
from specflow.model.source_statement import LIST_COLUMN, PEAK, PeakList, PeakScan
from specflow.units import bandwidth_words, converter, parse_unit

AXIS = "frequency"
_LIST = re.compile(
    r"\b(?:peak|spur\w*|emission)s?\s+(?:list|table|search)\b|\blist of (?:peaks|spur\w*)\b", re.IGNORECASE
)
_PROVES_NOTHING = "it can fail a limit and proves none"


def is_peak_list(work: TableWork, title: str) -> bool:
    """Whether a table lists peaks: by a person's or a mapping's word, by a scan stated above it, or by its title."""
    said = work.stated.text("list").casefold()
    if said or work.stated.text("scanned") or work.stated.text("scan_start"):
        return said not in ("no", "trace", "none")
    headers = {re.sub(r"[\s_#.]+", "", one.header.text.casefold()) for one in work.of(Role.INDEX)}
    return bool(
        _LIST.search(title)
        or _LIST.search(work.table.grid.name)
        or headers & {"peak", "peakno", "spur", "spurno"}
    )


def read_peak_list(work: TableWork, title: str) -> PeakList | None:
    """Return what was scanned for a list of peaks; None for any other table. What cannot be read is asked."""
    if not is_peak_list(work, title):
        return None
    stated = work.stated
    text = stated.text("scanned")
    if not text and stated.text("scan_start") and stated.text("scan_stop"):
        text = f"{stated.text('scan_start')} to {stated.text('scan_stop')}"
    if not text:
        remedy = '--state scanned="30 MHz to 1 GHz" --state floor="-85 dBm" says them'
        work.notes.append(f"a list of peaks that does not say what was scanned: {_PROVES_NOTHING}; {remedy}")
        return PeakList()
    try:
        scans = read_scans(text, stated.text("floor"), stated.text("bandwidth"))
    except UnitError as error:
        cell = stated.by("scanned").removeprefix("stated in ") if " in " in stated.by("scanned") else ""
        work.ask("scanned", cell, error.message, error.hint or 'say --state scanned="30 MHz to 1 GHz"')
        return PeakList()
    work.notes.append(f"a list of peaks, {'; '.join(map(_scan_words, scans))}")
    if any(scan.floor is None for scan in scans):
        work.notes.append(f'a scan without its floor: {_PROVES_NOTHING}; --state floor="-85 dBm" says it')
    return PeakList(scans=scans)


def corrected_scans(work: TableWork, peaks: PeakList, applied: Sequence[AppliedCorrection]) -> PeakList:
    """Raise the floors by what was added to the peaks: at most, over each scan. A scan beyond a correction is asked."""
    scans = list(peaks.scans)
    for name in dict.fromkeys(one.correction for one in applied):
        correction = work.context.snapshot.find(Correction, name)
        for place, scan in enumerate(scans):
            if correction is None or scan.floor is None:
                continue
            most = _most_added(correction, scan)
            if most is None:
                what = (
                    f"{name} does not reach over the scan from {scan.low / 1e6:g} to {scan.high / 1e6:g} MHz"
                )
                work.ask(
                    "floor",
                    "",
                    what,
                    "state the floor over the range of the correction, or calibrate it further",
                )
                continue
            scans[place] = scan.model_copy(update={"floor": scan.floor + most})
            work.notes.append(f"the floor of {scan.floor:g} {scan.floor_unit} is {most:+g} dB with {name}")
    return PeakList(scans=tuple(scans))


def _most_added(correction: Correction, scan: PeakScan) -> float | None:
    """The most that a correction adds within a scan, None where it does not cover it."""
    known = np.array([point.frequency_hz for point in correction.points])
    if scan.low < known[0] * (1 - 1e-9) or scan.high > known[-1] * (1 + 1e-9):
        return None
    inside = known[(known > scan.low) & (known < scan.high)]
    added, _ = at_frequencies(correction, np.array([scan.low, *inside, scan.high]))
    return float(added.max())


def _scan_words(scan: PeakScan) -> str:
    said = f"scanned from {bandwidth_words(scan.low)} to {bandwidth_words(scan.high)}"
    if scan.floor is not None:
        said += f" down to {scan.floor:g} {scan.floor_unit}"
    return said + (f" in {bandwidth_words(scan.bandwidth_hz)}" if scan.bandwidth_hz else "")


@dataclass(frozen=True, slots=True)
class WithFloors:
    """A list of peaks with the rows of its floors; ``values`` may have a column more than before."""

    columns: EvidenceColumns
    values: list[ValueColumn]


def with_floors(
    work: TableWork, peaks: PeakList, columns: EvidenceColumns, values: list[ValueColumn]
) -> WithFloors:
    """Add the floor rows to a list; a floor that cannot be held against the levels is asked about."""
    kinds = {(one.quantity.parameter, one.quantity.plane, one.quantity.statistic, one.unit) for one in values}
    floors = [(number, scan) for number, scan in enumerate(peaks.scans, 1) if scan.floor is not None]
    _note_strange_peaks(work, peaks, columns, values)
    words = TextColumn(np.zeros(columns.conditions.size, np.int32), (PEAK,))
    marked = replace(columns, extra={**columns.extra, LIST_COLUMN: words})
    if not floors:
        return WithFloors(marked, values)
    if len(kinds) > 1:
        remedy = 'mark the others role = "not read", or attach them by themselves'
        work.ask("floor", "", "a floor is stated, and the list has values of several quantities", remedy)
        return WithFloors(marked, values)
    for number, scan in floors:
        found = _with_floor(work, number, scan, marked, values)
        marked, values = found.columns, found.values
    return WithFloors(marked, values)


def _note_strange_peaks(
    work: TableWork, peaks: PeakList, columns: EvidenceColumns, values: list[ValueColumn]
) -> None:
    """Say which peaks lie outside what was scanned, or under its floor: the list, or what is said of it, is wrong."""
    frequency = columns.conditions.numeric.get(AXIS)
    if frequency is None or not peaks.scans:
        return
    unit = parse_unit(columns.conditions.units.get(AXIS, "Hz"))
    hertz = np.asarray(converter(unit, parse_unit("Hz"))(frequency), np.float64)
    inside = np.zeros(len(hertz), bool)
    under = np.zeros(len(hertz), bool)
    for scan in peaks.scans:
        within = (hertz >= scan.low * (1 - 1e-9)) & (hertz <= scan.high * (1 + 1e-9))
        inside |= within
        for value in values if scan.floor is not None else ():
            written, unit = parse_unit(scan.floor_unit), parse_unit(value.unit)
            if scan.floor is not None and brought(written, unit):
                under |= within & (columns.values[value.name].high < to_unit(scan.floor, written, unit))
    for which, words in (
        (~inside & ~np.isnan(hertz), "outside what was scanned"),
        (under, "under the floor"),
    ):
        rows = columns.source_rows[np.flatnonzero(which)]
        if len(rows):
            count = f"{len(rows)} peaks lie" if len(rows) > 1 else "a peak lies"
            work.notes.append(
                f"{count} {words} (row {int(rows[0])}): the list, or what is said of its scan, is wrong"
            )


def _with_floor(
    work: TableWork, number: int, scan: PeakScan, columns: EvidenceColumns, values: list[ValueColumn]
) -> WithFloors:
    unit, written = parse_unit(values[0].unit), parse_unit(scan.floor_unit or "1")
    if scan.floor is None or not brought(written, unit):
        work.ask("floor", "", f"a floor in {written} under levels in {unit}", f"state the floor in {unit}")
        return WithFloors(columns, values)
    floor = to_unit(scan.floor, written, unit)
    value, values = _column_of_floor(scan, values)
    rows = _settings(columns)
    added = len(rows)
    arrays = {name: _longer(one, added) for name, one in columns.values.items()}
    arrays[value.name] = _floored(arrays.get(value.name), columns, values, floor, added)
    low_source = np.full(added, _row_of(work), np.int32)
    label = TextColumn(np.zeros(added, np.int32), (str(number),))
    unsaid = TextColumn(np.full(added, UNSTATED, np.int32), ())
    extra = {
        name: _joined(words, label if name == LIST_COLUMN else unsaid)
        for name, words in columns.extra.items()
    }
    grown = EvidenceColumns(
        _conditions(columns.conditions, rows),
        arrays,
        np.concatenate([columns.source_rows, low_source]).astype(np.int32),
        _joined(columns.items, columns.items.take(rows)),
        None if columns.dates is None else _joined(columns.dates, columns.dates.take(rows)),
        extra,
    )
    return WithFloors(grown, values)


def _column_of_floor(scan: PeakScan, values: list[ValueColumn]) -> tuple[ValueColumn, list[ValueColumn]]:
    """The value column that a floor stands in: of unknown spectrum, in the bandwidth of the scan."""
    first = values[0]
    bandwidth = scan.bandwidth_hz or first.quantity.bandwidth_hz
    for one in values:
        if one.spectrum is SpectrumKind.UNKNOWN and one.quantity.bandwidth_hz == bandwidth:
            return one, values
    name = f"{first.header or first.name}, floor" + (f" in {bandwidth:g} Hz" if bandwidth else "")
    quantity = first.quantity.model_copy(update={"bandwidth_hz": bandwidth})
    update = {"name": name, "quantity": quantity, "spectrum": SpectrumKind.UNKNOWN}
    made = first.model_copy(update=update)
    return made, [*values, made]


def _settings(columns: EvidenceColumns) -> NDArray[np.intp]:
    """One row of every item at every setting but frequency: the scan was made for each."""
    peaks = np.flatnonzero(columns.extra[LIST_COLUMN].codes == 0)
    keys = [columns.items.codes, *(words.codes for words in columns.conditions.text.values())]
    keys += [
        np.nan_to_num(one, nan=-np.inf) for name, one in columns.conditions.numeric.items() if name != AXIS
    ]
    table = np.stack([np.asarray(key, np.float64)[peaks] for key in keys], axis=1)
    _, first = np.unique(table, axis=0, return_index=True)
    return np.asarray(peaks[np.sort(first)], np.intp)


def _floored(
    before: ValueArrays | None, columns: EvidenceColumns, values: list[ValueColumn], floor: float, added: int
) -> ValueArrays:
    """The arrays of the floor's column: less than the floor in the new rows, with the greatest u of the levels."""
    size = columns.conditions.size
    if before is None:
        nothing = np.full(size + added, np.nan)
        before = ValueArrays(nothing, nothing)
    low, high = before.low.copy(), before.high.copy()
    low[size:], high[size:] = -np.inf, floor
    known = [one.u[~np.isnan(one.u)] for one in columns.values.values() if one.u is not None]
    greatest = max((float(one.max()) for one in known if len(one)), default=None)
    if greatest is None:
        return ValueArrays(low, high, before.u)
    u = np.full(size + added, np.nan) if before.u is None else before.u.copy()
    u[size:] = greatest
    return ValueArrays(low, high, u)


def _longer(one: ValueArrays, added: int) -> ValueArrays:
    more = np.full(added, np.nan)
    low = np.concatenate([one.low, more])
    high = low if one.high is one.low else np.concatenate([one.high, more])
    return ValueArrays(low, high, None if one.u is None else np.concatenate([one.u, more]))


def _conditions(before: Columns, rows: NDArray[np.intp]) -> Columns:
    numeric = {
        name: np.concatenate([one, np.full(len(rows), np.nan) if name == AXIS else one[rows]])
        for name, one in before.numeric.items()
    }
    text = {name: _joined(one, one.take(rows)) for name, one in before.text.items()}
    return Columns(before.size + len(rows), numeric, text, before.units)


def _joined(first: TextColumn, second: TextColumn) -> TextColumn:
    labels = {label: code for code, label in enumerate(first.labels)}
    codes = [
        UNSTATED if code == UNSTATED else labels.setdefault(second.labels[code], len(labels))
        for code in second.codes.tolist()
    ]
    return TextColumn(
        np.concatenate([first.codes, np.array(codes, np.int32)]).astype(np.int32), tuple(labels)
    )


def _row_of(work: TableWork) -> int:
    """The row of the sheet in which the scan or its floor is stated; the header row where it is stated elsewhere."""
    for name in ("floor", "scanned", "scan_start"):
        found = re.search(r"stated in [A-Z]+(\d+)$", work.stated.by(name))
        if found:
            return int(found[1])
    return work.table.header_row
