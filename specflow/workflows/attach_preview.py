"""What attaching a measurement file would do: what the person says, the file as read, what is stored of it already."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path

from specflow.importers.measurements import MeasuredTable, Measurements, read_measurements
from specflow.model.evidence import EvidenceFile, TableMapping
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.store import ProjectStore
from specflow.workflows.attach_derived import Planned, planned_tables
from specflow.workflows.earlier_tables import Replacement, replaced_rows
from specflow.workflows.evaluate_project import project_dictionary
from specflow.workflows.mapping_file import read_mapping_file
from specflow.workflows.numbering import next_number


@dataclass(frozen=True)
class AttachOptions:
    """What the person says about the files, beside the files themselves.

    ``stated`` holds for all tables; ``mapping`` is a mapping file, ``mapping_text`` and ``mapping_name`` stand for
    several in one; ``sheets`` limits what is read. ``supersedes`` are earlier tables
    that are compared whatever their layout.
    """

    stated: Mapping[str, str] = field(default_factory=dict)
    mapping: Path | None = None
    mapping_text: str = ""
    mapping_name: str = ""
    sheets: Sequence[str] = ()
    include_hidden_rows: bool = False
    supersedes: Sequence[str] = ()


@dataclass(frozen=True)
class AttachPreview:
    """What accepting the file would add.

    ``known`` says, by position of the table, under which id its values are stored already. ``replacements`` are rows
    of earlier tables with the same identity, by position of the table. ``mapping_changes`` are mappings that are kept.
    ``planned`` is what is derived from the tables, by their position.
    """

    path: Path
    measurements: Measurements
    snapshot: Snapshot
    known: Mapping[int, str]
    replacements: Mapping[int, Sequence[Replacement]]
    mapping_documents: Sequence[TableMapping]
    planned: Planned = field(default_factory=dict)

    @property
    def new_derived(self) -> int:
        """How many derived tables would be added."""
        return sum(one.is_new for tables in self.planned.values() for one in tables)

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
        new = self.new_tables or self.unresolved or self.mapping_documents or self.new_derived
        return bool(self.known) and not new


@dataclass(frozen=True)
class Decision:
    """What the person decides about a preview.

    ``take_rest``: store what could be read. ``supersedes``: ids of earlier tables whose rows are replaced; ``resolves``
    names the failing rows' disposition; ``beside``: both stand. ``keep``: a copy of the file is kept in the project.
    """

    by: str
    take_rest: bool = False
    supersedes: Sequence[str] = ()
    beside: bool = False
    resolves: str = ""
    reason: str = ""
    keep: bool = False


def preview_attach(
    store: ProjectStore, path: Path, options: AttachOptions = AttachOptions()
) -> AttachPreview:
    """Read a measurement file and compare it with what is stored; nothing is stored."""
    snapshot = store.load()
    dictionary = project_dictionary(snapshot)
    measurements = read_measurements(
        path,
        snapshot,
        dictionary,
        mapping=options.mapping_text or read_mapping_file(options.mapping),
        mapping_name=options.mapping_name or (options.mapping.name if options.mapping else ""),
        stated=options.stated,
        sheets=options.sheets,
        include_hidden_rows=options.include_hidden_rows,
    )
    if not options.stated and any(table.questions for table in measurements.tables):
        measurements = _as_answered_before(path, snapshot, dictionary, options, measurements)
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
        path,
        measurements,
        snapshot,
        known,
        replacements,
        _mapping_documents(snapshot, measurements, path),
        planned_tables(snapshot, dictionary, measurements, known),
    )


def _as_answered_before(
    path: Path, snapshot: Snapshot, dictionary: Dictionary, options: AttachOptions, measurements: Measurements
) -> Measurements:
    """Return the file as it was read when it was stored, where that leaves nothing to ask and nothing new.

    What a person answered for the file with --state holds for the same bytes: they are not asked again.
    """
    files = {one.id for one in snapshot.all(EvidenceFile) if one.sha256 == measurements.file.sha256}
    answers = {one.how_read.stated for one in snapshot.tables if one.file in files and one.how_read.stated}
    if options.mapping or options.mapping_text or len(answers) != 1:
        return measurements
    again = read_measurements(
        path,
        snapshot,
        dictionary,
        stated=dict(next(iter(answers))),
        sheets=options.sheets,
        include_hidden_rows=options.include_hidden_rows,
    )
    return again if len(_known_tables(snapshot, again)) == len(again.tables) else measurements


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
    number = next_number(snapshot, TableMapping, "MAP-")
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
