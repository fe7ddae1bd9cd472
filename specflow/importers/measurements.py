"""Measurement files: every table of a workbook or text file read into evidence, or asked about where not clear."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

from specflow.importers.measured.context import Context
from specflow.importers.measured.evidence import read_table
from specflow.importers.measured.facts import Fact, read_preamble
from specflow.importers.measured.layout import layout_key
from specflow.importers.measured.mapping import LayoutMapping, read_mappings, write_mapping
from specflow.importers.measured.meaning import read_meanings
from specflow.importers.measured.proposal import propose
from specflow.importers.measured.result import (
    ColumnReading,
    MeasuredTable,
    Measurements,
    Question,
    Role,
)
from specflow.importers.measured.stated import collect, holds_below
from specflow.importers.measured.tables import FoundTable, cut_table, find_tables, rows_outside
from specflow.importers.readers import Grid, GridFile, open_grids, sheet
from specflow.model.evidence import EvidenceFile, FileKind, TableMapping
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

IMPORTER_VERSION = "measurements 1"


@dataclass(frozen=True, slots=True)
class _Found:
    """A table with its layout key and the mapping for it ("" when none is known)."""

    table: FoundTable
    key: str
    mapping: LayoutMapping
    mapping_from: str
    sheet_facts: tuple[Fact, ...] = ()


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
    given = read_mappings(mapping, mapping_name) if mapping else ()
    file = open_grids(path)
    person = dict(stated or {})
    found: list[_Found] = []
    skipped: list[str] = []
    findings: list[Finding] = []
    for grid in _chosen(file, sheets, skipped):
        findings += [_finding(grid, note, Severity.INFO) for note in grid.notes]
        found += _tables(grid, context, given, snapshot, mapping_name, skipped, findings)
    tables = tuple(_read(one, context, person, include_hidden_rows) for one in found)
    if not found:
        findings.append(_nothing(file, skipped))
    return Measurements(
        _file(file, person), tables, tuple(findings), tuple(skipped), _proposal(found, context, person)
    )


def _read(
    found: _Found, context: Context, person: Mapping[str, str], include_hidden_rows: bool
) -> MeasuredTable:
    mapping = found.mapping
    if include_hidden_rows:
        mapping = replace(mapping, include_hidden_rows=True)
    table = read_table(
        found.table, found.key, context, mapping, found.mapping_from, person, found.sheet_facts
    )
    if not found.mapping_from:
        return table
    return replace(table, mapping=write_mapping(replace(found.mapping, layout=found.key)))


def _chosen(file: GridFile, sheets: Sequence[str], skipped: list[str]) -> list[Grid]:
    if sheets:
        wanted = [sheet(file, name) for name in sheets]
        skipped += [f"sheet {grid.name}: not asked for" for grid in file if grid not in wanted]
        return wanted
    hidden = [grid for grid in file if grid.hidden]
    skipped += [f"sheet {grid.name}: it is hidden; --sheet {grid.name!r} reads it" for grid in hidden]
    return [grid for grid in file if not grid.hidden]


def _tables(
    grid: Grid,
    context: Context,
    given: Sequence[LayoutMapping],
    snapshot: Snapshot,
    mapping_name: str,
    skipped: list[str],
    findings: list[Finding],
) -> Iterator[_Found]:
    tables = find_tables(grid, context.recognises)
    where = grid.file if grid.name == grid.file else f"sheet {grid.name}"
    if not tables:
        skipped.append(f"{where}: no table was found (a row of headers with numbers below)")
    facts: tuple[Fact, ...] = ()
    for table in tables:
        key = layout_key(table)
        mapping, source = _mapping_for(key, given, snapshot, mapping_name)
        if mapping.skip:
            skipped.append(f"{where}, {table.place}: {source} says skip")
            continue
        if mapping.header_rows > 1:
            table = cut_table(grid, table.top, table.header_row, mapping.header_rows, context.recognises)
        yield _Found(table, key, mapping, source, facts)
        own = read_preamble(grid, table.top, table.header_row).facts
        facts = (*filter(holds_below, own), *facts)
    outside = list(rows_outside(grid, tables)) if tables else []
    if outside:
        findings.append(
            _finding(
                grid,
                f"{len(outside)} rows with numbers belong to no table, the first is row {outside[0]}",
                Severity.ERROR,
            )
        )


def _mapping_for(
    key: str, given: Sequence[LayoutMapping], snapshot: Snapshot, name: str
) -> tuple[LayoutMapping, str]:
    """The mapping of a layout: from the given file (one without a key fits any layout), else as stored."""
    for mapping in given:
        if mapping.layout == key or (not mapping.layout and len(given) == 1):
            return mapping, f"the mapping file {name}"
    stored = [one for one in snapshot.all(TableMapping) if one.layout_key == key]
    if stored:
        latest = stored[-1]
        layouts = read_mappings(latest.toml, f"mapping {latest.id}")
        return layouts[0], f"{latest.id} revision {latest.revision}, recognised by its layout"
    return LayoutMapping(), ""


def _file(file: GridFile, person: Mapping[str, str]) -> EvidenceFile:
    method = person.get("method", "")
    return EvidenceFile(
        id="F-0",
        name=file.fingerprint.name,
        sha256=file.fingerprint.sha256,
        size=file.fingerprint.size,
        received_at="",
        received_from=person.get("performer", ""),
        kind=FileKind.SIMULATION if method in ("analysis", "similarity") else FileKind.MEASUREMENT,
        importer_version=IMPORTER_VERSION,
    )


def _proposal(found: Sequence[_Found], context: Context, person: Mapping[str, str]) -> str:
    entries = []
    for one in found:
        preamble = read_preamble(one.table.grid, one.table.top, one.table.header_row)
        stated = collect(
            preamble.facts,
            one.mapping.stated,
            person,
            sheet_facts=one.sheet_facts,
            own_dimensions=context.dimensions,
        )
        meanings = read_meanings(one.table, context, one.mapping, stated)
        entries.append((one.table, one.key, one.mapping, meanings, preamble.title))
    return propose(entries)


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


def _finding(grid: Grid, message: str, severity: Severity) -> Finding:
    return Finding(
        rule="attach-reading",
        severity=severity,
        subject=grid.name,
        subject_kind="sheet",
        message=message,
        remedy="give them headers, or delete them" if severity is Severity.ERROR else "",
        origin=Origin(file=grid.file, sheet="" if grid.name == grid.file else grid.name),
    )
