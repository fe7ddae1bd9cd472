"""Test sheets that come back filled in: recognised by their identity, held to it, and read without a mapping.

The hidden identity says of each row what it is of, and of each protected cell what stood in it. Where a protected cell
says something else now, nothing of its sheet is read: each such cell is asked about. What is filled in is read by the
same code as any other table, so that number formats, errors, placeholders and bounds mean what they mean everywhere;
and what comes out is compared with the identity once more.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from specflow.errors import FileError
from specflow.exchange import digest
from specflow.importers.bench_edits import edits
from specflow.importers.bench_grid import BenchGrid
from specflow.importers.bench_values import BenchValues, ReadArea, asking
from specflow.importers.measured.result import MeasuredTable, Question
from specflow.importers.readers import GridFile
from specflow.model.base import code_key
from specflow.model.bench_sheet import (
    GUIDE_SHEET,
    IDENTITY_SHEET,
    LISTS_SHEET,
    MARK,
    BenchIdentity,
    SheetIdentity,
    read_identity,
)
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot


@dataclass(frozen=True, slots=True)
class ReadBench:
    """The tables of a test sheet, what is not read of the file, and what is to be said of it."""

    tables: Sequence[MeasuredTable]
    skipped: Sequence[str] = ()
    notes: Sequence[str] = ()


def bench_identity(file: GridFile) -> BenchIdentity | None:
    """Return the identity of a test sheet; None for any other file. FileError when it is not as it was written."""
    grid = next((one for one in file if code_key(one.name) == code_key(IDENTITY_SHEET)), None)
    if grid is None or not str(grid.value(1, 1)).startswith(MARK):
        return None
    lines = [str(grid.value(row, 1)) for row in range(1, grid.last_row + 1)]
    try:
        return read_identity(lines)
    except ValueError as error:
        raise FileError(
            str(error),
            where=f"{file.fingerprint.name}, {grid.name}",
            hint="write the test sheet again (specflow testsheet) and copy the filled-in cells into it",
        ) from None


def read_bench(
    file: GridFile,
    identity: BenchIdentity,
    snapshot: Snapshot,
    read: ReadArea,
    sheets: Sequence[str] = (),
) -> ReadBench:
    """Read what is filled in; each block, quantity, method and stage is a table of its own.

    ``sheets`` limits what is read. FileError for one that is not part of the test sheet.
    """
    asked = _asked(identity, sheets, file.fingerprint.name)
    grids = {code_key(grid.name): grid for grid in file}
    own = {code_key(name) for name in (IDENTITY_SHEET, LISTS_SHEET, GUIDE_SHEET)}
    tables: list[MeasuredTable] = []
    notes = [*_other_project(identity, snapshot), *_changed_requirements(identity, snapshot)]
    sheet_id = digest(identity.model_dump(mode="json"))[:16]
    for sheet in identity.sheets:
        if code_key(sheet.name) not in asked:
            continue
        grid = grids.get(code_key(sheet.name))
        if grid is None:
            tables.append(asking(sheet, [_missing(sheet)]))
            continue
        bench = BenchGrid(grid, sheet, identity, f"{MARK} {sheet_id}")
        values = BenchValues(bench)
        questions = edits(bench)
        tables += [asking(sheet, questions)] if questions else values.tables(read)
        notes += values.notes
    known = own | {code_key(sheet.name) for sheet in identity.sheets}
    skipped = [
        f"sheet {grid.name}: not part of the test sheet; attach it as a file of its own"
        for grid in file
        if code_key(grid.name) not in known
    ]
    skipped += [
        f"sheet {one.name}: not asked for" for one in identity.sheets if code_key(one.name) not in asked
    ]
    return ReadBench(tables, skipped, notes)


def _asked(identity: BenchIdentity, sheets: Sequence[str], name: str) -> set[str]:
    known = {code_key(sheet.name): sheet.name for sheet in identity.sheets}
    for sheet in sheets:
        if code_key(sheet) not in known:
            names = ", ".join(map(repr, known.values()))
            raise FileError(
                f"there is no sheet {sheet!r} on this test sheet",
                where=name,
                hint=f"sheets with rows: {names}",
            )
    return set(map(code_key, sheets)) or set(known)


def _other_project(identity: BenchIdentity, snapshot: Snapshot) -> Iterator[str]:
    if identity.project != snapshot.project.name:
        yield f"the test sheet was written for the project {identity.project!r}, this is {snapshot.project.name!r}"


def _changed_requirements(identity: BenchIdentity, snapshot: Snapshot) -> Iterator[str]:
    """Say which requirements are gone, or are on something else now; their values are stored as what they are."""
    told: set[str] = set()
    for row in identity.rows:
        for code in row.point.requirements:
            if code in told:
                continue
            told.add(code)
            requirement = snapshot.find(Requirement, code)
            if requirement is None:
                yield f"{code} is no requirement of this project any more; its values are stored all the same"
            elif requirement.quantity != row.point.quantity:
                yield f"{code} is on another quantity than when the test sheet was written"


def _missing(sheet: SheetIdentity) -> Question:
    remedy = "give the sheet its name back; a sheet that was not worked on stays in the file as it was"
    return Question("", "", f"the sheet {sheet.name!r} is missing or was renamed", remedy)
