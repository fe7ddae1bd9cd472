"""Attach a measurement file: preview what it holds and what it would replace, then accept it in one transaction."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path

from specflow.changes import diff
from specflow.errors import DocumentError
from specflow.importers.measurements import MeasuredTable, Measurements, read_measurements
from specflow.model.base import Document, code_key
from specflow.model.change import Change
from specflow.model.evidence import (
    EvidenceColumns,
    EvidenceFile,
    EvidenceTable,
    Supersession,
    TableMapping,
)
from specflow.model.finding import Severity
from specflow.model.snapshot import Snapshot
from specflow.store import ProjectStore
from specflow.workflows.earlier_tables import Replacement, replaced_rows
from specflow.workflows.evaluate_project import project_dictionary
from specflow.workflows.mapping_file import read_mapping_file
from specflow.workflows.subjects import not_found


@dataclass(frozen=True)
class AttachOptions:
    """What the person says about the files, beside the files themselves.

    ``stated`` holds for all tables; ``mapping`` is a mapping file; ``sheets`` limits what is read. ``supersedes`` are
    earlier tables that are compared whatever their layout.
    """

    stated: Mapping[str, str] = field(default_factory=dict)
    mapping: Path | None = None
    sheets: Sequence[str] = ()
    include_hidden_rows: bool = False
    supersedes: Sequence[str] = ()


@dataclass(frozen=True)
class AttachPreview:
    """What accepting the file would add.

    ``known`` says, by position of the table, under which id its values are stored already. ``replacements`` are rows
    of earlier tables with the same identity, by position of the table. ``mapping_changes`` are mappings that are kept.
    """

    path: Path
    measurements: Measurements
    snapshot: Snapshot
    known: Mapping[int, str]
    replacements: Mapping[int, Sequence[Replacement]]
    mapping_documents: Sequence[TableMapping]

    @property
    def new_tables(self) -> Sequence[tuple[int, MeasuredTable]]:
        """The tables that would be added, with their positions."""
        return [
            (place, table)
            for place, table in enumerate(self.measurements.tables)
            if table.document is not None and place not in self.known
        ]

    @property
    def unresolved(self) -> Sequence[MeasuredTable]:
        """Tables that give no evidence because something has to be settled first."""
        return [table for table in self.measurements.tables if table.questions]

    @property
    def rejected_cells(self) -> int:
        """How many cells (rows count once) of the new tables are rejected."""
        return sum(
            table.rejected_cells
            for place, table in enumerate(self.measurements.tables)
            if place not in self.known
        )

    @property
    def values(self) -> int:
        """How many values would be added."""
        return sum(table.values for _, table in self.new_tables)

    @property
    def is_unchanged(self) -> bool:
        """Whether the file has nothing that is not stored already."""
        return bool(self.known) and not self.new_tables and not self.unresolved and not self.mapping_documents


@dataclass(frozen=True)
class Decision:
    """What the person decides about a preview.

    ``take_rest``: store what could be read. ``supersedes``: ids of earlier tables whose rows are replaced; ``resolves``
    names the failing rows' disposition; ``beside``: both stand.
    """

    by: str
    take_rest: bool = False
    supersedes: Sequence[str] = ()
    beside: bool = False
    resolves: str = ""
    reason: str = ""


@dataclass(frozen=True)
class Attached:
    """What was stored: the file, the tables, and the project revision."""

    revision: int
    file: str = ""
    tables: Sequence[str] = ()
    superseded: Sequence[str] = ()
    values: int = 0


def preview_attach(
    store: ProjectStore, path: Path, options: AttachOptions = AttachOptions()
) -> AttachPreview:
    """Read a measurement file and compare it with what is stored; nothing is stored."""
    snapshot = store.load()
    measurements = read_measurements(
        path,
        snapshot,
        project_dictionary(snapshot),
        mapping=read_mapping_file(options.mapping),
        mapping_name=options.mapping.name if options.mapping else "",
        stated=options.stated,
        sheets=options.sheets,
        include_hidden_rows=options.include_hidden_rows,
    )
    known = _known_tables(snapshot, measurements)
    replacements = {
        place: found
        for place, table in enumerate(measurements.tables)
        if table.document and table.columns and place not in known
        if (
            found := replaced_rows(
                snapshot, table.document, table.columns, measurements.file.sha256, options.supersedes
            )
        )
    }
    return AttachPreview(
        path, measurements, snapshot, known, replacements, _mapping_documents(snapshot, measurements, path)
    )


def accept_attach(store: ProjectStore, preview: AttachPreview, decision: Decision) -> Attached:
    """Store the tables of a preview in one transaction.

    Raises DocumentError, and stores nothing, while tables are unresolved or cells rejected (unless ``take_rest``), and
    while rows would stand against earlier rows with other values and nobody said which holds.
    """
    supersessions = check_acceptable(preview, decision)
    if not preview.new_tables and not preview.mapping_documents:
        return Attached(preview.snapshot.revision)
    documents, columns = _documents(store, preview, decision, supersessions)
    revision = store.apply(
        _changes(preview, documents),
        columns=columns,
        by=decision.by,
        reason=decision.reason or f"attached {preview.path.name}",
        expected_revision=preview.snapshot.revision,
    )
    tables = [document for document in documents if isinstance(document, EvidenceTable)]
    replaced = [document.earlier for document in documents if isinstance(document, Supersession)]
    return Attached(
        revision, tables[0].file if tables else "", [table.id for table in tables], replaced, preview.values
    )


def check_acceptable(preview: AttachPreview, decision: Decision) -> Mapping[int, Sequence[Replacement]]:
    """Return the replacements that the person named; raises DocumentError when the preview may not be accepted so."""
    _refuse_unsettled(preview, decision)
    return _refuse_unsaid(preview, decision)


def _refuse_unsettled(preview: AttachPreview, decision: Decision) -> None:
    where = preview.path.name
    if not preview.measurements.tables:
        raise DocumentError(
            "no measurement table was found", where=where, hint="; ".join(preview.measurements.skipped)
        )
    if preview.unresolved and (not decision.take_rest or not preview.new_tables):
        table = preview.unresolved[0]
        first = table.questions[0]
        count = sum(len(one.questions) for one in preview.unresolved)
        open_ones = _counted(count, "question is open", "questions are open")
        raise DocumentError(
            f"{open_ones}; nothing was stored. {'It' if count == 1 else 'The first'}: {first.what}",
            where=", ".join(filter(None, [where, table.sheet, first.cell])),
            hint=first.remedy,
        )
    if preview.rejected_cells and not decision.take_rest:
        counted = _counted(preview.rejected_cells, "cell or row is", "cells or rows are")
        place, reason = _first_rejected(preview)
        raise DocumentError(
            f"{counted} rejected; nothing was stored. "
            f"{'It' if preview.rejected_cells == 1 else 'The first'}: {reason}",
            where=", ".join(filter(None, [where, *place])),
            hint="mend them in the file, or say --take-rest to store the rest; what is left out stays a finding",
        )
    faults = [one for one in preview.measurements.findings if one.severity is Severity.ERROR]
    if faults and not decision.take_rest:
        raise DocumentError(
            f"{faults[0].message}; nothing was stored",
            where=where,
            hint=f"{faults[0].remedy}, or say --take-rest",
        )
    empty = [table for table in preview.measurements.tables if table.document is None and not table.questions]
    if empty and not preview.new_tables and not preview.known:
        raise DocumentError("no row of the table is left to store", where=f"{where}, {empty[0].place}",
                            hint="see the rejected rows")  # fmt: skip


def _first_rejected(preview: AttachPreview) -> tuple[tuple[str, ...], str]:
    """Return sheet and cell of what is rejected first, and why."""
    for place, table in enumerate(preview.measurements.tables):
        if place not in preview.known and table.rejected:
            return (table.sheet, table.rejected[0].cell), table.rejected[0].reason
    return (), "see the preview"


def _counted(count: int, one: str, many: str) -> str:
    return f"{count} {one if count == 1 else many}"


def _refuse_unsaid(preview: AttachPreview, decision: Decision) -> Mapping[int, Sequence[Replacement]]:
    """Return the replacements that the person named; refuse where values differ and nothing was said."""
    wanted = {code_key(name) for name in decision.supersedes}
    named: dict[int, list[Replacement]] = {}
    seen: set[str] = set()
    for place, found in preview.replacements.items():
        for one in found:
            seen.add(code_key(one.earlier))
            if code_key(one.earlier) in wanted:
                named.setdefault(place, []).append(one)
            elif one.differing and not decision.beside:
                raise DocumentError(
                    f"{one.words()}; it was not said which holds",
                    where=preview.path.name,
                    hint=f"--supersedes {one.earlier} replaces them, --beside lets both stand",
                )
    for name in decision.supersedes:
        if preview.snapshot.find(EvidenceTable, name) is None:
            known = [table.id for table in preview.snapshot.tables]
            raise not_found(
                "evidence table", name, known, listing="specflow export --table evidence lists them"
            )
        if code_key(name) not in seen:
            raise DocumentError(
                f"no row of {preview.path.name} has the identity of a row of {name}",
                where=name,
                hint="rows are the same when block, quantities, item, conditions with their units, set-up and "
                "performer are; see the preview",
            )
    if decision.resolves and not named:
        raise DocumentError("--resolves names a fail, but nothing is superseded", where=preview.path.name,
                            hint="say --supersedes EV-… too")  # fmt: skip
    return named


def _known_tables(snapshot: Snapshot, measurements: Measurements) -> dict[int, str]:
    stored = {table.digest: table.id for table in snapshot.tables if table.digest}
    return {
        place: stored[table.document.digest]
        for place, table in enumerate(measurements.tables)
        if table.document is not None and table.document.digest in stored
    }


def _mapping_documents(snapshot: Snapshot, measurements: Measurements, path: Path) -> list[TableMapping]:
    """The mappings to keep: of layouts that a mapping file settled, with the id under which the layout is known."""
    documents: dict[str, TableMapping] = {}
    number = _next_number(snapshot, TableMapping, "MAP-")
    stored = {mapping.layout_key: mapping for mapping in snapshot.all(TableMapping)}
    for table in measurements.tables:
        if (
            not table.mapping
            or not table.mapping_from.startswith("the mapping file")
            or table.layout_key in documents
        ):
            continue
        known = stored.get(table.layout_key)
        if known is not None and known.toml == table.mapping.strip():
            continue
        if known is None:
            number += 1
        documents[table.layout_key] = TableMapping(
            id=known.id if known else f"MAP-{number - 1}",
            layout_key=table.layout_key,
            title=table.title[:120] or path.stem,
            toml=table.mapping,
        )
    return list(documents.values())


def _documents(
    store: ProjectStore,
    preview: AttachPreview,
    decision: Decision,
    replacements: Mapping[int, Sequence[Replacement]],
) -> tuple[list[Document], dict[str, EvidenceColumns]]:
    snapshot, now = preview.snapshot, store.now()
    documents: list[Document] = list(preview.mapping_documents)
    columns: dict[str, EvidenceColumns] = {}
    if not preview.new_tables:
        return documents, columns
    file = _file(snapshot, preview.measurements.file, now)
    documents.append(file)
    number = _next_number(snapshot, EvidenceTable, "EV-")
    steps: list[Supersession] = []
    for place, table in preview.new_tables:
        assert table.document is not None and table.columns is not None
        mapping, revision = _mapping_of(preview, table)
        document = table.document.model_copy(
            update={
                "id": f"EV-{number}",
                "file": file.id,
                "mapping": mapping,
                "mapping_revision": revision,
                "accepted_by": decision.by,
                "accepted_at": now,
                "provisional": snapshot.project.policy.second_review,
            }
        )
        documents.append(document)
        columns[document.id] = table.columns
        number += 1
        steps += [
            _supersession(snapshot, one, document.id, decision, now, len(steps))
            for one in replacements.get(place, ())
        ]
    return [*documents, *steps], columns


def _supersession(
    snapshot: Snapshot, replacement: Replacement, later: str, decision: Decision, now: str, count: int
) -> Supersession:
    whole = len(replacement.rows) == replacement.earlier_rows
    return Supersession(
        id=f"SUP-{_next_number(snapshot, Supersession, 'SUP-') + count}",
        earlier=replacement.earlier,
        later=later,
        rows=None if whole else replacement.rows,
        names_fail=decision.resolves,
        reason=decision.reason,
        by=decision.by,
        at=now,
    )


def _file(snapshot: Snapshot, file: EvidenceFile, now: str) -> EvidenceFile:
    """The file as it is known by its bytes, or a new one."""
    for known in snapshot.all(EvidenceFile):
        if known.sha256 == file.sha256:
            return known
    number = _next_number(snapshot, EvidenceFile, "F-")
    return file.model_copy(update={"id": f"F-{number}", "received_at": now})


def _mapping_of(preview: AttachPreview, table: MeasuredTable) -> tuple[str | None, int | None]:
    """Id and revision of the mapping that a table was read with, as they are when the batch is stored."""
    if not table.mapping:
        return None, None
    given = next((one for one in preview.mapping_documents if one.layout_key == table.layout_key), None)
    stored = [one for one in preview.snapshot.all(TableMapping) if one.layout_key == table.layout_key]
    if given is None:
        return (stored[-1].id, stored[-1].revision) if stored else (None, None)
    return given.id, stored[-1].revision + 1 if stored else 1


def _changes(preview: AttachPreview, documents: Sequence[Document]) -> list[Change]:
    return diff(preview.snapshot, documents)


def _next_number(snapshot: Snapshot, kind: type[Document], prefix: str) -> int:
    """The next free number; removed documents keep theirs, so the store's own guard has the last word."""
    numbers = [
        int(rest)
        for document in snapshot.all(kind)
        if (rest := str(getattr(document, "id", "")).removeprefix(prefix)).isdecimal()
    ]
    return max(numbers, default=0) + 1
