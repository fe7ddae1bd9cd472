"""Load a table of published limits as requirements of one block: preview what would change; acceptance is that of a
workbook (``load_workbook.accept_load``)."""

from __future__ import annotations

import hashlib
from pathlib import Path

from specflow.changes import diff
from specflow.errors import DocumentError
from specflow.importers.published_limits import read_published_limits
from specflow.importers.published_requirements import published_draft
from specflow.model.block import Block
from specflow.model.snapshot import Snapshot
from specflow.store import ProjectStore
from specflow.workflows.evaluate_project import project_dictionary
from specflow.workflows.load_workbook import LoadPreview


def preview_published(store: ProjectStore, path: Path, *, block: str = "", prefix: str = "") -> LoadPreview:
    """Read a table of published limits as requirements and compare it with the project; nothing is stored.

    ``block`` is the block they are on, by default the one without a parent; ``prefix`` goes before every id. Raises
    FileError for a file that cannot be read, DocumentError where the block is not known.
    """
    snapshot = store.load()
    table = read_published_limits(path)
    draft = published_draft(
        table,
        snapshot,
        project_dictionary(snapshot),
        block=_block(snapshot, block),
        prefix=prefix,
        file=path.name,
        sha256=hashlib.sha256(path.read_bytes()).hexdigest(),
    )
    changes = diff(snapshot, draft.documents)
    given = sum(change.action in ("add", "edit") for change in changes)
    return LoadPreview(
        path,
        changes,
        draft.findings,
        draft.echoes,
        unchanged=len(draft.documents) - given,
        project_revision=snapshot.revision,
    )


def _block(snapshot: Snapshot, code: str) -> Block:
    """The block of that id; without one, the only block that has no parent."""
    if code:
        found = snapshot.find(Block, code)
        if found is not None:
            return found
        known = ", ".join(block.id for block in snapshot.blocks[:5]) or "none"
        raise DocumentError(f"there is no block {code}", hint=f"blocks of the project: {known}")
    roots = [block for block in snapshot.blocks if block.parent is None]
    if len(roots) == 1:
        return roots[0]
    if not roots:
        raise DocumentError(
            "the project has no block that the limits could be on", hint="load a workbook with blocks first"
        )
    names = ", ".join(block.id for block in roots)
    raise DocumentError(f"several blocks have no parent: {names}", hint="say which one with --block")
