"""Load a workbook of requirements, blocks, conditions ... : preview what would change, then accept it."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from specflow.changes import diff
from specflow.errors import DocumentError
from specflow.importers.workbook import read_workbook
from specflow.model.change import Change
from specflow.model.finding import Finding, Severity
from specflow.store import ProjectStore
from specflow.workflows.evaluate_project import project_dictionary
from specflow.workflows.refused_budgets import without_refused_budgets
from specflow.workflows.remove_gone import with_gone_removed


@dataclass(frozen=True)
class LoadPreview:
    """What accepting would change, what could not be read, and how limits and conditions were understood."""

    path: Path
    changes: Sequence[Change]
    findings: Sequence[Finding]
    echoes: Mapping[str, str]
    unchanged: int
    project_revision: int

    @property
    def rejected(self) -> Sequence[Finding]:
        """The findings because of which something was not read."""
        return [finding for finding in self.findings if finding.severity is Severity.ERROR]


def preview_load(store: ProjectStore, path: Path, *, remove_gone: bool = False) -> LoadPreview:
    """Read the workbook and compare it with the project; nothing is stored.

    ``remove_gone``: propose the removal of requirements that an earlier state of the workbook gave and this one does
    not, with what hangs on them.
    """
    snapshot = store.load()
    draft = without_refused_budgets(read_workbook(path, snapshot, project_dictionary(snapshot)), snapshot)
    if remove_gone:
        draft = with_gone_removed(draft, snapshot)
    changes = diff(snapshot, draft.documents, removals=draft.removals)
    given = sum(change.action in ("add", "edit") for change in changes)
    return LoadPreview(
        path,
        changes,
        draft.findings,
        draft.echoes,
        unchanged=len(draft.documents) - given,
        project_revision=snapshot.revision,
    )


def accept_load(store: ProjectStore, preview: LoadPreview, *, by: str, take_rest: bool = False) -> int:
    """Store the changes in one transaction; return the new project revision.

    Raises DocumentError when something was rejected and the person has not said to take the rest, ConflictError when
    somebody changed the same documents since the preview.
    """
    refuse_rejected(preview, take_rest=take_rest)
    if not preview.changes:
        return preview.project_revision
    return store.apply(preview.changes, by=by, reason=f"loaded from {preview.path.name}")


def refuse_rejected(preview: LoadPreview, *, take_rest: bool) -> None:
    """Raise DocumentError when something was rejected, unless the person has said to take the rest."""
    rejected, first = len(preview.rejected), next(iter(preview.rejected), None)
    if first is not None and not take_rest:
        raise DocumentError(
            f"{rejected} row{'s' * (rejected != 1)} or cell{'s' * (rejected != 1)} "
            f"{'were' if rejected != 1 else 'was'} rejected; nothing was stored. "
            f"{'It' if rejected == 1 else 'The first'}: {first.message}",
            where=str(first.origin or preview.path),
            hint=f"{first.remedy or 'mend it in the workbook'}; --take-rest stores what could be read",
        )
