"""The project workbook: sheets found by name, read into documents, with a finding for every cell that is not right."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Sequence
from pathlib import Path

from specflow.errors import FileError
from specflow.importers.readers import Grid, GridFile, is_blank, open_grids
from specflow.importers.sheets import SHEETS, Sheet
from specflow.importers.sheets.absent import note_absent
from specflow.importers.sheets.cycles import refuse_cycles
from specflow.importers.sheets.header import find_header
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.leftovers import leave_out_orphans
from specflow.importers.sheets.plans import complete_plans
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.table import missing_header, read_table
from specflow.model.draft import Draft
from specflow.model.finding import Finding, Severity
from specflow.model.nouns import NOUNS
from specflow.model.origin import Origin
from specflow.model.sheet import GUIDE, header_key
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary

_NUMBERED = re.compile(r"^[0-9]+|[0-9]+$")
_READING_ORDER = [noun.name for noun in NOUNS]  # what others refer to comes first
Found = tuple[Sheet, Grid]


def read_workbook(path: str | Path, snapshot: Snapshot, dictionary: Dictionary) -> Draft:
    """Read a project workbook (or one sheet of it as csv) into a draft.

    References may point into the workbook or to what ``snapshot`` has. Raises FileError for a file that cannot be read
    or in which no sheet is known; all else is a finding, and a row that is refused gives no document.
    """
    file = open_grids(path)
    intake = Intake(snapshot, dictionary, folder=Path(path).parent)
    found = _recognised(file, intake.findings)
    tables = _tables(found, file.fingerprint.sha256, intake.findings)
    for sheet, rows in tables:
        sheet.identify_rows(rows, intake)
    for sheet, rows in tables:
        sheet.read(rows, intake)
    refuse_cycles(intake)
    leave_out_orphans(intake)
    complete_plans(intake)
    note_absent(intake, file.fingerprint.name, _nouns_to_miss(found, tables))
    documents = [document for noun in intake.documents.values() for document in noun.values()]
    if not documents and not any(finding.severity is Severity.ERROR for finding in intake.findings):
        intake.findings.append(_nothing_to_load(file))
    kept = {getattr(document, "id", "") for document in documents}
    return Draft(
        documents=documents,
        findings=_in_order(intake.findings, [grid.name for grid in file]),
        echoes={code: words for code, words in intake.echoes.items() if code in kept},
        places={code: parts for code, parts in intake.places.items() if code in kept},
        removals=intake.removals,
    )


def _recognised(file: GridFile, findings: list[Finding]) -> list[Found]:
    """The sheets known by name, in the order in which they are read; judged by headers where no name is known."""
    known = {header_key(name): sheet for sheet in SHEETS for name in sheet.names()}
    named: list[Found] = []
    others: list[Grid] = []
    for grid in file:
        name = header_key(Path(grid.name).stem if grid.name == grid.file else grid.name)
        sheet = known.get(name) or known.get(_NUMBERED.sub("", name))
        if sheet is not None:
            named.append((sheet, grid))
        elif _has_content(grid) and name != header_key(GUIDE):
            others.append(grid)
    if not named:
        named, others = _by_headers(others, findings)
    if not named:
        raise _nothing_known(file)
    findings.extend(_not_read(grid, {sheet.layout.noun for sheet, _ in named}) for grid in others)
    return sorted(
        named, key=lambda found: (_READING_ORDER.index(found[0].layout.noun), SHEETS.index(found[0]))
    )


def _by_headers(grids: Sequence[Grid], findings: list[Finding]) -> tuple[list[Found], list[Grid]]:
    """Sheets whose headers are those of one sheet kind better than of any other, and the rest."""
    named: list[Found] = []
    others: list[Grid] = []
    for grid in grids:
        best = _like(grid)
        if best is None:
            others.append(grid)
            continue
        named.append((best, grid))
        findings.append(
            _about(
                grid,
                f"read as the sheet {best.layout.title}, judged by its headers",
                f"call it {best.layout.title} to leave no doubt",
                "workbook-sheet-by-headers",
            )
        )
    return named, others


def _like(grid: Grid) -> Sheet | None:
    """The sheet kind whose headers these are, better than those of any other; None where that is in doubt."""
    fits = [(len(header.columns), sheet) for sheet in SHEETS if (header := find_header(grid, sheet.layout))]
    most = max((count for count, _ in fits), default=0)
    best = [sheet for count, sheet in fits if count == most]
    return best[0] if most >= 3 and len(best) == 1 else None


def _tables(
    found: Sequence[Found], sha256: str, findings: list[Finding]
) -> list[tuple[Sheet, list[SheetRow]]]:
    """The rows of each sheet. A sheet that lacks headers is refused; one that is only called much like a sheet of the
    workbook ("Specification") is left aside, if another was read."""
    tables: list[tuple[Sheet, list[SheetRow]]] = []
    lacking: list[tuple[bool, Finding]] = []
    for sheet, grid in found:
        findings.extend(_about(grid, note, "", "workbook-reading") for note in grid.notes)
        header = find_header(grid, sheet.layout)
        if grid.hidden:
            findings.append(_hidden(grid))
        elif header is not None:
            tables.append((sheet, read_table(grid, sheet.layout, header, sha256, findings)))
        elif _has_content(grid):
            own_name = not sheet.may_be_another and header_key(grid.name) in (
                header_key(sheet.layout.title),
                header_key(sheet.layout.noun),
            )
            lacking.append((own_name, missing_header(grid, sheet.layout, sha256)))
    for own_name, finding in lacking:
        aside = bool(tables) and not own_name
        findings.append(finding.model_copy(update={"severity": Severity.WARNING}) if aside else finding)
    return tables


def _nouns_to_miss(found: Sequence[Found], tables: Sequence[tuple[Sheet, list[SheetRow]]]) -> dict[str, str]:
    """The nouns that were read, with their worksheet; not those of which a sheet could not be read."""
    read = {sheet.layout.noun for sheet, _ in tables if not sheet.is_further}
    refused = Counter(sheet.layout.noun for sheet, _ in found)
    refused.subtract(sheet.layout.noun for sheet, _ in tables)
    return {
        sheet.layout.noun: grid.name
        for sheet, grid in found
        if sheet.layout.noun in read - {"project"} and not refused[sheet.layout.noun]
    }


def _has_content(grid: Grid) -> bool:
    return any(not is_blank(value) for row in grid.rows for value in row)


def _hidden(grid: Grid) -> Finding:
    return _about(
        grid,
        f"the sheet {grid.name} is hidden and was not read",
        "show the sheet and load again, or delete it",
        "workbook-hidden-sheet",
        Severity.ERROR,
    )


def _nothing_known(file: GridFile) -> FileError:
    names = ", ".join(sheet.layout.title for sheet in SHEETS)
    there = ", ".join(repr(grid.name) for grid in file)
    headers = ", ".join(
        column.title for column in next(s for s in SHEETS if s.layout.noun == "requirement").layout.required
    )
    return FileError(
        f"no sheet of a project workbook is in this file (it has {there or 'none'})",
        where=file.fingerprint.name,
        hint=f"sheets are found by name: {names}; a sheet of another name needs at least the headers {headers}",
    )


def _not_read(grid: Grid, read: set[str]) -> Finding:
    """A sheet that is left aside; a warning where it looks like the one sheet of its kind."""
    like = _like(grid)
    if like is not None:
        title = like.layout.title
        return _about(
            grid,
            f"the sheet {grid.name} is not known by its name and was not read, but its headers are those of {title}",
            f"call it {title} if it should be read",
            "workbook-unknown-sheet",
            Severity.INFO if like.layout.noun in read else Severity.WARNING,
        )
    names = ", ".join(sheet.layout.title for sheet in SHEETS)
    return _about(
        grid,
        f"the sheet {grid.name} is not known and was not read",
        f"known: {names}",
        "workbook-unknown-sheet",
    )


def _nothing_to_load(file: GridFile) -> Finding:
    return _about(
        file[0],
        "no row to load was found (rows marked as examples are not loaded)",
        "fill in the sheets below their headers and load again",
        "workbook-nothing-to-load",
        Severity.WARNING,
    )


def _about(grid: Grid, message: str, remedy: str, rule: str, severity: Severity = Severity.INFO) -> Finding:
    return Finding(
        rule=rule,
        severity=severity,
        subject=grid.name,
        subject_kind="sheet",
        message=message,
        remedy=remedy,
        origin=Origin(file=grid.file, sheet="" if grid.name == grid.file else grid.name),
    )


def _in_order(findings: Sequence[Finding], sheets: Sequence[str]) -> list[Finding]:
    """Findings in the order of the file: sheet, row, column."""

    def place(finding: Finding) -> tuple[int, int, int]:
        origin = finding.origin
        if origin is None:
            return (0, 0, 0)
        sheet = sheets.index(origin.sheet) if origin.sheet in sheets else 0
        return (sheet, origin.row or 0, origin.column or 0)

    return sorted(findings, key=place)
