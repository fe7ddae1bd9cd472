"""Attach a measurement file: preview what it holds and what it would replace, then accept it in one transaction."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from specflow.changes import diff
from specflow.model.evidence import EvidenceFile, EvidenceTable, Supersession
from specflow.store import ProjectStore
from specflow.workflows.attach_checks import check_acceptable
from specflow.workflows.attach_documents import documents_of, file_of
from specflow.workflows.attach_preview import AttachOptions, AttachPreview, Decision, preview_attach
from specflow.workflows.kept_copy import keeps_copy, path_from_project, refuse_changed, unchanged_content

__all__ = [
    "AttachOptions",
    "AttachPreview",
    "Attached",
    "Decision",
    "accept_attach",
    "check_acceptable",
    "preview_attach",
]


@dataclass(frozen=True)
class Attached:
    """What was stored: the file, the tables, the project revision, and whether a copy of the file is new."""

    revision: int
    file: str = ""
    tables: Sequence[str] = ()
    superseded: Sequence[str] = ()
    values: int = 0
    kept: bool = False


def accept_attach(store: ProjectStore, preview: AttachPreview, decision: Decision) -> Attached:
    """Store the tables of a preview in one transaction.

    Raises DocumentError, and stores nothing, while tables are unresolved or cells rejected (unless ``take_rest``), and
    while rows would stand against earlier rows with other values and nobody said which holds. FileError when the file
    is not the one that was previewed any more.
    """
    supersessions = check_acceptable(preview, decision)
    kept = keeps_copy(preview, asked=decision.keep)
    refuse_changed(preview)
    now = store.now()
    file = file_of(preview, now, path=path_from_project(store, preview.path), kept=kept)
    documents, columns = documents_of(preview, decision, supersessions, file, now)
    changes = diff(preview.snapshot, documents)
    if not changes:
        return Attached(preview.snapshot.revision)
    is_new_copy = (
        any(isinstance(one, EvidenceFile) for one in documents) and file.kept and not _had_copy(preview, file)
    )
    revision = store.apply(
        changes,
        columns=columns,
        files={file.id: unchanged_content(preview)} if is_new_copy else {},
        by=decision.by,
        reason=decision.reason or f"attached {preview.path.name}",
        expected_revision=preview.snapshot.revision,
    )
    tables = [document for document in documents if isinstance(document, EvidenceTable)]
    replaced = [document.earlier for document in documents if isinstance(document, Supersession)]
    return Attached(
        revision,
        file.id if tables or is_new_copy else "",
        [table.id for table in tables],
        replaced,
        preview.values,
        kept=is_new_copy,
    )


def _had_copy(preview: AttachPreview, file: EvidenceFile) -> bool:
    known = preview.snapshot.find(EvidenceFile, file.id)
    return known is not None and known.kept
