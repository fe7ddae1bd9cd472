"""Budgets of a workbook that cannot be evaluated: told with the place and what to do, and not taken over."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import replace

from specflow.errors import SpecflowError
from specflow.model.base import Document, code_key
from specflow.model.budget import Allocation, Budget
from specflow.model.budget_line import Trace
from specflow.model.draft import Draft
from specflow.model.evidence import EvidenceTable
from specflow.model.finding import Finding, Severity
from specflow.model.nouns import NOUN_BY_DOCUMENT
from specflow.model.origin import Origin
from specflow.model.snapshot import Snapshot
from specflow.workflows.evaluate_project import project_dictionary


def without_refused_budgets(draft: Draft, snapshot: Snapshot) -> Draft:
    """Return the draft without the budgets that cannot be evaluated as they stand, each with a finding that says why.

    A budget that is not complete yet stays: one without lines, and one that reads a table nobody has attached so far.
    """
    budgets = [document for document in draft.documents if isinstance(document, Budget)]
    if not any(budget.lines for budget in budgets):
        return draft
    findings = list(_refusals(budgets, _as_loaded(draft, snapshot), draft.places))
    refused = {code_key(finding.subject) for finding in findings}
    kept = [document for document in draft.documents if not _falls(document, refused, snapshot)]
    echoes = {code: words for code, words in draft.echoes.items() if code_key(code) not in refused}
    found = [*draft.findings, *findings]
    return replace(draft, documents=kept, findings=found, echoes=echoes) if findings else draft


def _refusals(
    budgets: list[Budget], project: Snapshot, places: Mapping[str, Mapping[str, Origin]]
) -> Iterator[Finding]:
    from specflow.budgets.evaluate import evaluate_budget  # a workbook without budgets does without

    dictionary = project_dictionary(project)
    for budget in budgets:
        if not budget.lines or _waits(budget, project):
            continue
        try:
            evaluate_budget(budget, project, dictionary)
        except SpecflowError as error:
            yield Finding(
                rule="workbook-cell",
                severity=Severity.ERROR,
                subject=budget.id,
                subject_kind="budget",
                message=f"{error.where}: {error.message}" if error.where else error.message,
                remedy=error.hint or "correct the budget",
                origin=_cell(error.where, places.get(budget.id, {})) or budget.origin,
            )


def _cell(where: str, places: Mapping[str, Origin]) -> Origin | None:
    """Return the cell of the line, else of the position, that an error names; None for the budget as a whole."""
    named = [part for part in places if re.search(rf"{re.escape(part)}(?!\d)", where)]
    return places[max(named, key=len)] if named else None


def _waits(budget: Budget, project: Snapshot) -> bool:
    """Whether a line reads a table that is not attached yet."""
    tables = (line.value.table for line in budget.lines if isinstance(line.value, Trace))
    return any(project.find(EvidenceTable, table) is None for table in tables)


def _as_loaded(draft: Draft, snapshot: Snapshot) -> Snapshot:
    """Return the project as it would be with the whole draft."""
    documents = {noun: dict(group) for noun, group in snapshot.documents.items()}
    for document in draft.documents:
        noun = NOUN_BY_DOCUMENT[type(document)]
        documents.setdefault(noun.name, {})[code_key(str(getattr(document, noun.id_field)))] = document
    return replace(snapshot, documents=documents)


def _falls(document: Document, refused: set[str], snapshot: Snapshot) -> bool:
    """Whether a document is a refused budget, or an allocation from one that the project does not have either."""
    if isinstance(document, Budget):
        return code_key(document.id) in refused
    if isinstance(document, Allocation) and document.budget is not None:
        return code_key(document.budget) in refused and snapshot.find(Budget, document.budget) is None
    return False
