"""Requirements that an edited workbook no longer has: removed on request, with what hangs on them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from specflow.changes.removal import Removal, key_of, removal_of
from specflow.model.base import Document, code_key
from specflow.model.draft import Draft
from specflow.model.finding import Finding, Severity
from specflow.model.nouns import NOUN_BY_DOCUMENT
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters.relations import parameters_telling

#: The finding of the importer that names what an earlier state of the workbook gave.
GONE = "workbook-row-gone"

#: Code → what it means.
REMOVAL_FINDINGS: dict[str, str] = {
    "requirement-in-use": "A requirement is not removed: a budget serves nothing else.",
    "requirement-removed": "A requirement is removed, with what is about nothing else.",
}


def with_gone_removed(draft: Draft, snapshot: Snapshot) -> Draft:
    """Return the draft with the requirements removed that its workbook no longer has, and findings that say what goes.

    Each is removed with what is about nothing else (activities, allocations, waivers, splits, approvals); what only
    names it (children, budgets, reports, evidence tables) stays and loses the name. Evidence is never removed. One on
    which a budget rests that serves nothing else stays, with a finding.
    """
    reports = [one for one in draft.findings if one.rule == GONE and one.subject_kind == "requirement"]
    named = [snapshot.find(Requirement, code) for report in reports for code in report.related]
    removals = [_removal(one, draft, snapshot) for one in named if one is not None]
    going = [unwanted for unwanted, removal in removals if not removal.bound]
    whole = removal_of(going, snapshot, draft.documents)
    findings = [one for one in draft.findings if one not in reports]
    findings += [_told(unwanted, removal, snapshot) for unwanted, removal in removals]
    laid_over = {key_of(one): one for one in draft.documents} | {key_of(one): one for one in whole.changed}
    removed = {key_of(one) for one in whole.removed}
    documents = [one for key, one in laid_over.items() if key not in removed]
    stored = [one for one in whole.removed if key_of(one)[1] in snapshot.documents.get(key_of(one)[0], {})]
    known = {key_of(one) for one in draft.removals}
    further = [one for one in stored if key_of(one) not in known]
    return replace(draft, documents=documents, removals=[*draft.removals, *further], findings=findings)


def _removal(requirement: Requirement, draft: Draft, snapshot: Snapshot) -> tuple[Requirement, Removal]:
    return requirement, removal_of([requirement], snapshot, draft.documents)


def _told(requirement: Requirement, removal: Removal, snapshot: Snapshot) -> Finding:
    """Say what the removal of one requirement takes along, or why it cannot be removed."""
    if removal.bound:
        return Finding(
            rule="requirement-in-use",
            severity=Severity.ERROR,
            subject=requirement.id,
            subject_kind="requirement",
            message=f"cannot be removed: {_listed(removal.bound)} serves nothing else",
            remedy="let the budget serve another requirement, or write the row again",
            origin=requirement.origin,
            related=tuple(_code(one) for one in removal.bound),
        )
    taken = [one for one in removal.removed if one is not requirement]
    parts = [
        f"with it {_listed(taken)}" if taken else "",
        f"kept without naming it any more: {_listed(removal.changed)}" if removal.changed else "",
        _evidence(requirement, snapshot),
        "its id is never used again",
    ]
    return Finding(
        rule="requirement-removed",
        severity=Severity.WARNING,
        subject=requirement.id,
        subject_kind="requirement",
        message="is removed: " + "; ".join(part for part in parts if part),
        remedy="accept, or write the row again under its id; where it only does not apply any more, fill in "
        "'Not applicable: reason' and approver instead",
        origin=requirement.origin,
        related=tuple(_code(one) for one in (*taken, *removal.changed)),
    )


def _evidence(requirement: Requirement, snapshot: Snapshot) -> str:
    """Name the tables that hold evidence of its quantity: they stay, and may serve nothing afterwards."""
    told_by = parameters_telling(requirement.quantity.parameter)
    tables = [
        table
        for table in snapshot.tables_of_block.get(code_key(requirement.block), ())
        if any(code_key(column.quantity.parameter) in told_by for column in table.values)
    ]
    return f"evidence of its quantity stays: {_listed(tables)}" if tables else ""


def _listed(documents: Sequence[Document]) -> str:
    return ", ".join(f"{NOUN_BY_DOCUMENT[type(one)].title} {_code(one)}" for one in documents)


def _code(document: Document) -> str:
    return str(getattr(document, NOUN_BY_DOCUMENT[type(document)].id_field))
