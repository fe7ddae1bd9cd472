"""Derive evidence from stored tables by a law: preview what it gives, then accept it in one transaction."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from specflow.changes import diff
from specflow.derive import Derived, Request, derive_table
from specflow.errors import DocumentError
from specflow.model.base import Document
from specflow.model.derivation import Derivation
from specflow.model.evidence import EvidenceTable, Supersession
from specflow.model.parameter import QuantityIdentity
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.store import ProjectStore
from specflow.workflows.derive_documents import derivation_document, table_document
from specflow.workflows.derive_request import DeriveOptions, law_named, request_of
from specflow.workflows.derived_uncertainty import with_register
from specflow.workflows.evaluate_project import project_dictionary
from specflow.workflows.numbering import next_number

__all__ = ["DeriveOptions", "DerivePreview", "DerivedStored", "accept_derive", "check_acceptable", "law_named",
           "made_documents", "preview_derive", "preview_in", "preview_of", "repeated"]  # fmt: skip


@dataclass(frozen=True)
class DerivePreview:
    """What accepting would add. ``stored_as``: the id under which exactly this is stored already, or ""."""

    snapshot: Snapshot
    request: Request
    derivation: Derivation
    table: EvidenceTable
    derived: Derived
    stored_as: str = ""
    replaces: str = ""
    names_fail: str = ""

    @property
    def is_unchanged(self) -> bool:
        """Whether this very derivation is stored already."""
        return bool(self.stored_as)


@dataclass(frozen=True)
class DerivedStored:
    """What was stored: the project revision, the derivation and its table."""

    revision: int
    derivation: str = ""
    table: str = ""
    superseded: str = ""


def preview_derive(store: ProjectStore, options: DeriveOptions) -> DerivePreview:
    """Apply a law to stored tables and compare the result with what is stored; nothing is stored."""
    snapshot = store.load()
    return preview_in(snapshot, project_dictionary(snapshot), options)


def preview_in(snapshot: Snapshot, dictionary: Dictionary, options: DeriveOptions) -> DerivePreview:
    """Return the preview for a snapshot that is loaded."""
    request, quantity = request_of(snapshot, dictionary, options)
    return preview_of(snapshot, request, quantity)


def preview_of(
    snapshot: Snapshot, request: Request, quantity: QuantityIdentity, derived: Derived | None = None
) -> DerivePreview:
    """Return the preview of a request; ``derived`` where its law was applied already."""
    derived = derived or with_register(snapshot, request, derive_table(request), quantity)
    derivation = derivation_document(request, quantity, derived)
    table = table_document(snapshot, request, quantity, derived, derivation)
    known = {one.digest: one.id for one in snapshot.tables if one.digest and one.derivation}
    return DerivePreview(snapshot, request, derivation, table, derived, known.get(table.digest, ""))


def accept_derive(
    store: ProjectStore, preview: DerivePreview, *, by: str, reason: str = "", take_rest: bool = False
) -> DerivedStored:
    """Store a derivation with its table (and the supersession of what it repeats) in one transaction.

    Raises DocumentError, and stores nothing, while groups are refused (unless ``take_rest``).
    """
    check_acceptable(preview, take_rest=take_rest)
    if preview.is_unchanged:
        return DerivedStored(preview.snapshot.revision, table=preview.stored_as)
    documents = made_documents(preview, by=by, at=store.now(), reason=reason)
    table = next(one for one in documents if isinstance(one, EvidenceTable))
    revision = store.apply(
        diff(preview.snapshot, documents),
        columns={table.id: preview.derived.columns},
        by=by,
        reason=reason or f"derived {preview.request.law.name} of {', '.join(preview.derivation.inputs)}",
        expected_revision=preview.snapshot.revision,
    )
    return DerivedStored(revision, str(table.derivation), table.id, preview.replaces)


def check_acceptable(preview: DerivePreview, *, take_rest: bool) -> None:
    """Raise DocumentError while groups are refused and nobody said to take the rest."""
    refused = preview.derived.refused
    if refused and not take_rest:
        first = refused[0]
        count = f"{len(refused)} group{'s' * (len(refused) != 1)} of rows"
        raise DocumentError(
            f"{count} gave no result; nothing was stored. {'It' if len(refused) == 1 else 'The first'}: {first.why}",
            where=", ".join(filter(None, [preview.request.roles[0].table.id, first.group])),
            hint=f"{first.remedy}; or say --take-rest to store the others",
        )


def made_documents(
    preview: DerivePreview, *, by: str, at: str, reason: str = "", taken: Mapping[str, int] | None = None
) -> list[Document]:
    """Return the documents to store, with their ids. ``taken``: numbers given out already, by prefix."""
    snapshot, taken = preview.snapshot, taken or {}
    number = {
        prefix: next_number(snapshot, kind, prefix) + taken.get(prefix, 0)
        for prefix, kind in (("DV-", Derivation), ("EV-", EvidenceTable), ("SUP-", Supersession))
    }
    derivation = preview.derivation.model_copy(
        update={"id": f"DV-{number['DV-']}", "by": by, "at": at, "reason": reason}
    )
    table = preview.table.model_copy(
        update={
            "id": f"EV-{number['EV-']}",
            "derivation": derivation.id,
            "accepted_by": by,
            "accepted_at": at,
            "provisional": snapshot.project.policy.second_review or preview.table.provisional,
        }
    )
    documents: list[Document] = [derivation, table]
    if preview.replaces:
        documents.append(
            Supersession(
                id=f"SUP-{number['SUP-']}",
                earlier=preview.replaces,
                later=table.id,
                names_fail=preview.names_fail,
                reason=reason or f"derived again as {derivation.id}",
                by=by,
                at=at,
            )
        )
    return documents


def repeated(preview: DerivePreview, earlier: Derivation, replaces: str, names_fail: str) -> DerivePreview:
    """Return a preview that takes the place of an earlier derivation and its table."""
    derivation = preview.derivation.model_copy(update={"again_of": earlier.id})
    return replace(preview, derivation=derivation, replaces=replaces, names_fail=names_fail)
