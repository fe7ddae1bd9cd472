"""The documents that a previewed file becomes: the file, its tables, the mapping it was read with, what it replaces."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from specflow.importers.measurements import MeasuredTable
from specflow.model.base import Document
from specflow.model.evidence import (
    EvidenceColumns,
    EvidenceFile,
    EvidenceTable,
    Supersession,
    TableMapping,
)
from specflow.model.snapshot import Snapshot
from specflow.workflows.attach_derived import Acceptance, derived_documents
from specflow.workflows.attach_preview import AttachPreview, Decision
from specflow.workflows.earlier_tables import Replacement
from specflow.workflows.numbering import next_number


def documents_of(
    preview: AttachPreview,
    decision: Decision,
    replacements: Mapping[int, Sequence[Replacement]],
    file: EvidenceFile,
    now: str,
) -> tuple[list[Document], dict[str, EvidenceColumns]]:
    """Return the documents to store with ``file``, and the arrays of the tables by id."""
    snapshot = preview.snapshot
    documents: list[Document] = list(preview.mapping_documents)
    columns: dict[str, EvidenceColumns] = {}
    if preview.new_tables or snapshot.find(EvidenceFile, file.id) is not None:
        documents.append(file)
    number = next_number(snapshot, EvidenceTable, "EV-")
    steps: list[Supersession] = []
    roots = {
        place: stored
        for place, code in preview.known.items()
        if (stored := snapshot.find(EvidenceTable, code)) is not None
    }
    for place, table in preview.new_tables:
        assert table.columns is not None
        document = _accepted(preview, table, f"EV-{number}", file, decision, now)
        documents.append(document)
        roots[place] = document
        columns[document.id] = table.columns
        number += 1
        steps += [
            _supersession(snapshot, one, document.id, decision, now, len(steps))
            for one in replacements.get(place, ())
        ]
    replaced = {
        place: [one.earlier for one in found if len(one.rows) == one.earlier_rows]
        for place, found in replacements.items()
    }
    derived, arrays = derived_documents(
        snapshot,
        preview.planned,
        roots,
        replaced,
        {"EV-": len(preview.new_tables), "SUP-": len(steps)},
        Acceptance(decision.by, now, decision.reason, decision.resolves),
    )
    return [*documents, *steps, *derived], {**columns, **arrays}


def _accepted(
    preview: AttachPreview, table: MeasuredTable, code: str, file: EvidenceFile, decision: Decision, now: str
) -> EvidenceTable:
    """The document of a table that was read, as it is stored."""
    assert table.document is not None
    mapping, revision = _mapping_of(preview, table)
    return table.document.model_copy(
        update={
            "id": code,
            "file": file.id,
            "mapping": mapping,
            "mapping_revision": revision,
            "accepted_by": decision.by,
            "accepted_at": now,
            "provisional": preview.snapshot.project.policy.second_review,
        }
    )


def file_of(preview: AttachPreview, now: str, *, path: str, kept: bool) -> EvidenceFile:
    """Return the file as it is known by its bytes, or a new one that lies at ``path``.

    A file that is kept stays so; one that was not becomes so with ``kept``.
    """
    file, snapshot = preview.measurements.file, preview.snapshot
    for known in snapshot.all(EvidenceFile):
        if known.sha256 == file.sha256:
            return known.model_copy(update={"kept": True}) if kept and not known.kept else known
    number = next_number(snapshot, EvidenceFile, "F-")
    return file.model_copy(update={"id": f"F-{number}", "received_at": now, "path": path, "kept": kept})


def _supersession(
    snapshot: Snapshot, replacement: Replacement, later: str, decision: Decision, now: str, count: int
) -> Supersession:
    whole = len(replacement.rows) == replacement.earlier_rows
    return Supersession(
        id=f"SUP-{next_number(snapshot, Supersession, 'SUP-') + count}",
        earlier=replacement.earlier,
        later=later,
        rows=None if whole else replacement.rows,
        names_fail=decision.resolves,
        reason=decision.reason,
        by=decision.by,
        at=now,
    )


def _mapping_of(preview: AttachPreview, table: MeasuredTable) -> tuple[str | None, int | None]:
    """Id and revision of the mapping that a table was read with, as they are when the batch is stored."""
    if not table.mapping:
        return None, None
    given = next((one for one in preview.mapping_documents if one.layout_key == table.layout_key), None)
    stored = [one for one in preview.snapshot.all(TableMapping) if one.layout_key == table.layout_key]
    if given is None:
        return (stored[-1].id, stored[-1].revision) if stored else (None, None)
    return given.id, stored[-1].revision + 1 if stored else 1
