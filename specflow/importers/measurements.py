"""Measurement files: every table of a workbook or text file read into evidence, or asked about where not clear."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from itertools import groupby
from pathlib import Path

from specflow.errors import FileError
from specflow.importers.bench_sheets import bench_identity, read_bench
from specflow.importers.measured.context import Context
from specflow.importers.measured.document import PROVISIONAL_FILE
from specflow.importers.measured.evidence import ReadTable, read_table
from specflow.importers.measured.layout import sheet_pattern
from specflow.importers.measured.letters import with_letter_doubts
from specflow.importers.measured.located import GivenMappings, LocatedTable, Mappings, locate_tables
from specflow.importers.measured.mapping import read_mappings, write_mapping
from specflow.importers.measured.mapping_parts import LayoutMapping
from specflow.importers.measured.network import read_network_tables
from specflow.importers.measured.network_doubts import OPTION_LINE
from specflow.importers.measured.proposal import Proposal, propose
from specflow.importers.measured.repeats import without_repeats
from specflow.importers.measured.result import (
    ColumnReading,
    MeasuredTable,
    Measurements,
    Question,
    Role,
)
from specflow.importers.readers import FileFingerprint, Grid, GridFile, open_grids, read_source, sheet
from specflow.importers.readers.touchstone import has_option_line, is_touchstone, read_network
from specflow.model.bench_sheet import MARK, NOTHING_FILLED_IN, BenchIdentity
from specflow.model.evidence import EvidenceFile, FileKind, HowRead
from specflow.model.finding import Finding, Severity
from specflow.model.origin import Origin
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary

__all__ = [
    "ColumnReading",
    "MeasuredTable",
    "Measurements",
    "Question",
    "Role",
    "read_measurements",
]

#: Stands with every table that was read; raised when a release reads some file otherwise than the one before.
IMPORTER_VERSION = "measurements 2"

_SIMULATED = ("analysis", "similarity")


def read_measurements(
    path: str | Path,
    snapshot: Snapshot,
    dictionary: Dictionary,
    *,
    mapping: str = "",
    mapping_name: str = "mapping",
    stated: Mapping[str, str] | None = None,
    sheets: Sequence[str] = (),
    include_hidden_rows: bool = False,
) -> Measurements:
    """Read a measurement file.

    ``mapping`` is the TOML of a mapping file; layouts that it does not have, the project's stored mappings settle.
    ``stated`` is what the person says for all tables: block, item, set_up, date, conditions ("temperature_ambient":
    "23 °C"), "column C": "gain". ``sheets`` limits what is read. Raises FileError for a file or a mapping that cannot
    be read; everything about the tables is data.
    """
    context = Context(snapshot, dictionary)
    given = GivenMappings(read_mappings(mapping, mapping_name) if mapping else (), mapping_name)
    mappings = Mappings(given, context)
    person = dict(stated or {})
    if is_touchstone(Path(path).name) or has_option_line(Path(path)):
        return _of_network(path, context, given, person, sheets)
    file = open_grids(path)
    identity = bench_identity(file)
    if identity is not None:
        return _of_test_sheet(file, identity, context, person, sheets, include_hidden_rows)
    skipped: list[str] = []
    findings: list[Finding] = []
    located: list[LocatedTable] = []
    for grid in _chosen(file, sheets, skipped):
        found = locate_tables(grid, context, mappings)
        located += found.tables
        skipped += found.skipped
        findings += [_finding(grid, note) for note in grid.notes]
        if found.outside:
            findings.append(_outside(grid, found.outside))
    findings += [_unused(file.fingerprint.name, layout, mapping_name) for layout in mappings.unused()]
    located = with_letter_doubts(located, person)
    read = [_read(one, context, person, include_hidden_rows) for one in located]
    tables = without_repeats([one.table for one in read])
    findings += [finding for table in tables for finding in table.findings]
    if not located:
        findings.append(_nothing(file, skipped))
    proposal = _proposal(located, read)
    document = _file(file.fingerprint, tables, person)
    return Measurements(document, tuple(tables), tuple(findings), tuple(skipped), proposal)


def _of_test_sheet(
    file: GridFile,
    identity: BenchIdentity,
    context: Context,
    person: Mapping[str, str],
    sheets: Sequence[str],
    include_hidden_rows: bool,
) -> Measurements:
    """A test sheet that came back: its identity says all that a mapping would; stored mappings have no part in it."""
    documents = {**context.snapshot.documents, "mapping": {}}
    own = Context(replace(context.snapshot, documents=documents), context.dictionary)

    def read(grid: Grid, mapping: LayoutMapping) -> list[MeasuredTable]:
        mappings = Mappings(GivenMappings((mapping,), MARK), own)
        located = locate_tables(grid, own, mappings).tables
        return [_read(one, own, person, include_hidden_rows).table for one in located]

    bench = read_bench(file, identity, context.snapshot, read, sheets)
    findings = [finding for table in bench.tables for finding in table.findings]
    findings += [_of_file(file, note) for note in bench.notes]
    if not bench.tables:
        empty = _of_file(file, "nothing is filled in on this test sheet", Severity.ERROR)
        remedy = "write values into the yellow cells of the column Value"
        findings.append(empty.model_copy(update={"rule": NOTHING_FILLED_IN, "remedy": remedy}))
    document = _file(file.fingerprint, bench.tables, person)
    return Measurements(document, tuple(bench.tables), tuple(findings), tuple(bench.skipped))


def _of_file(file: GridFile, message: str, severity: Severity = Severity.INFO) -> Finding:
    return Finding(
        rule="attach-reading",
        severity=severity,
        subject=file.fingerprint.name,
        subject_kind="file",
        message=message,
        origin=Origin(file=file.fingerprint.name),
    )


def _of_network(
    path: str | Path,
    context: Context,
    given: GivenMappings,
    person: Mapping[str, str],
    sheets: Sequence[str],
) -> Measurements:
    """A Touchstone file: it has no cells to be understood, but entries, comments and doubts."""
    if sheets:
        raise FileError("a network file has no sheets", where=Path(path).name, hint="leave --sheet out")
    option = next((text for key, text in person.items() if key.strip().casefold() == OPTION_LINE), "")
    network = read_network(read_source(Path(path)), option)
    read = read_network_tables(network, context, given, person, IMPORTER_VERSION)
    file = _file(network.fingerprint, read.tables, person)
    unused = [_unused(network.fingerprint.name, layout, given.name) for layout in read.unused_layouts]
    return Measurements(file, read.tables, (*read.findings, *unused), read.skipped, read.proposal)


def _read(
    located: LocatedTable, context: Context, person: Mapping[str, str], include_hidden_rows: bool
) -> ReadTable:
    if include_hidden_rows:
        located = replace(
            located,
            mapping=replace(located.mapping, include_hidden_rows=True),
            read_as=replace(located.read_as, include_hidden_rows=True),
        )
    read = read_table(located, context, person)
    table = _with_how_read(read.table, located, person)
    table = replace(table, asked=tuple(located.mapping.derive))
    if located.mapping_from:
        mapping = located.mapping
        sheet_name = mapping.sheet or (sheet_pattern(located.table) if mapping.area else "")
        table = replace(table, mapping=write_mapping(replace(mapping, layout=located.key, sheet=sheet_name)))
    return replace(read, table=table)


def _with_how_read(table: MeasuredTable, located: LocatedTable, person: Mapping[str, str]) -> MeasuredTable:
    if table.document is None:
        return table
    how = HowRead(
        importer=IMPORTER_VERSION,
        layout=located.key,
        place=table.place,
        stated=tuple(sorted(person.items())),
        include_hidden_rows=located.mapping.include_hidden_rows,
    )
    return replace(table, document=table.document.model_copy(update={"how_read": how}))


def _chosen(file: GridFile, sheets: Sequence[str], skipped: list[str]) -> list[Grid]:
    if sheets:
        wanted = [sheet(file, name) for name in sheets]
        skipped += [f"sheet {grid.name}: not asked for" for grid in file if grid not in wanted]
        return wanted
    skipped += [
        f"sheet {grid.name}: it is hidden; --sheet {grid.name!r} reads it" for grid in file if grid.hidden
    ]
    return [grid for grid in file if not grid.hidden]


def _file(file: FileFingerprint, tables: Sequence[MeasuredTable], person: Mapping[str, str]) -> EvidenceFile:
    """The file as a document; it is a simulation when all its tables are analyses."""
    methods = {table.document.method for table in tables if table.document is not None}
    simulated = bool(methods) and methods <= set(_SIMULATED)
    return EvidenceFile(
        id=PROVISIONAL_FILE,
        name=file.name,
        sha256=file.sha256,
        size=file.size,
        received_at="",
        received_from=person.get("performer", ""),
        kind=FileKind.SIMULATION if simulated else FileKind.MEASUREMENT,
        importer_version=IMPORTER_VERSION,
    )


def _proposal(located: Sequence[LocatedTable], read: Sequence[ReadTable]) -> str:
    """The proposal for all tables, the parts of one table together."""
    proposals = []
    pairs = zip(located, read, strict=True)
    for _, group in groupby(pairs, key=lambda pair: (pair[0].table.grid.name, pair[0].number)):
        parts = list(group)
        first = parts[0][0]
        proposals.append(
            Proposal(
                first.table,
                first.key,
                first.mapping,
                [one.meanings for _, one in parts],
                [one.read_as for one, _ in parts],
                first.preamble.facts,
                [doubt for one, _ in parts for doubt in one.table.doubts],
            )
        )
    return propose(proposals)


def _nothing(file: GridFile, skipped: Sequence[str]) -> Finding:
    return Finding(
        rule="attach-no-table",
        severity=Severity.ERROR,
        subject=file.fingerprint.name,
        subject_kind="file",
        message="no measurement table was found in this file",
        why="; ".join(skipped),
        remedy="a table has a row of headers with numbers below; name the sheet with --sheet",
    )


def _unused(file: str, layout: str, mapping_name: str) -> Finding:
    return Finding(
        rule="attach-layout-not-met",
        severity=Severity.WARNING,
        subject=file,
        subject_kind="file",
        message=f"{mapping_name} settles the layout {layout}, which no table of this file has",
        why="a layout is known by its headers, their units and their order, and by the sheet",
        remedy="compare it with the layout that --propose-mapping writes for this file",
    )


def _outside(grid: Grid, rows: Sequence[int]) -> Finding:
    message = f"{len(rows)} rows of numbers belong to no table, the first is row {rows[0]}"
    remedy = "give them headers, or delete them"
    return _finding(grid, message, Severity.ERROR, remedy).model_copy(update={"rule": "attach-rows-outside"})


def _finding(grid: Grid, message: str, severity: Severity = Severity.INFO, remedy: str = "") -> Finding:
    return Finding(
        rule="attach-reading",
        severity=severity,
        subject=grid.name,
        subject_kind="sheet",
        message=message,
        remedy=remedy,
        origin=Origin(file=grid.file, sheet="" if grid.name == grid.file else grid.name),
    )
