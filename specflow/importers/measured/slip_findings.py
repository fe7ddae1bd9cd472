"""What is said about readings that look like a slip: the cell, the reading, its neighbours."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from specflow.importers.measured.slips import Slip, find_slips
from specflow.importers.measured.work import TableWork
from specflow.importers.readers import address
from specflow.model.evidence import SOURCE_COLUMN, EvidenceColumns, ValueColumn
from specflow.model.finding import Finding, Severity
from specflow.model.origin import Origin, column_number

_MOST = 5
_REMEDY = (
    "look it up at the source; mend the file and attach again, or leave it as it stands: nothing was changed"
)


def slip_findings(
    work: TableWork, columns: EvidenceColumns, values: Sequence[ValueColumn]
) -> Iterator[Finding]:
    """Yield a finding for every doubtful reading of a table; of many in one column the rest are counted."""
    turned = work.table.grid.turned
    for value in values:
        arrays = columns.values[value.name]
        if arrays.high is not arrays.low:
            continue
        slips = find_slips(arrays.low, value.unit, columns.conditions, columns.items)
        for slip in slips[:_MOST]:
            yield _finding(work, _words(columns, value, slip, turned), columns, value, slip)
        if len(slips) > _MOST:
            words = f"{value.header or value.name}: {len(slips) - _MOST} more readings look like a slip"
            yield _finding(work, words, columns, value, slips[_MOST])


def _words(columns: EvidenceColumns, value: ValueColumn, slip: Slip, turned: bool) -> str:
    low, cell = columns.values[value.name].low, _cell(columns, value, slip.place, turned)
    beside = " and ".join(f"{low[one]:.6g} ({_cell(columns, value, one, turned)})" for one in slip.neighbours)
    return f"{cell}: {low[slip.place]:.6g} {value.unit} stands beside {beside}; {slip.words}"


def _finding(
    work: TableWork, words: str, columns: EvidenceColumns, value: ValueColumn, slip: Slip
) -> Finding:
    grid = work.table.grid
    row, column = _place(columns, value, slip.place, grid.turned)
    sheet = "" if grid.name == grid.file else grid.name
    return Finding(
        rule="attach-looks-slipped",
        severity=Severity.WARNING,
        subject=_cell(columns, value, slip.place, grid.turned),
        subject_kind="cell",
        message=f"{sheet}!{words}" if sheet else words,
        why="a slipped decimal or unit decides a verdict as any other reading does",
        remedy=_REMEDY,
        origin=Origin(file=grid.file, sheet=sheet, row=row, column=column),
    )


def _cell(columns: EvidenceColumns, value: ValueColumn, place: int, turned: bool) -> str:
    return address(*_place(columns, value, place, turned))


def _place(columns: EvidenceColumns, value: ValueColumn, place: int, turned: bool) -> tuple[int, int]:
    """True row and column of a reading; where values of several columns were stacked each row names its own."""
    row, column = int(columns.source_rows[place]), value.column
    if SOURCE_COLUMN in columns.extra:
        column = column_number(columns.extra[SOURCE_COLUMN].word(place)) or column
    return (column, row) if turned else (row, column)
