"""Try changes without storing them: every margin, allocation and status that would change; store them if wanted."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import date

import numpy as np

from specflow.budgets.trial import BudgetEffect, BudgetState, alternatives, budget_effects
from specflow.changes import diff, due_revision
from specflow.errors import DocumentError, SpecflowError
from specflow.limits import limit_difference
from specflow.model.base import Document, code_key
from specflow.model.budget import Allocation, Budget
from specflow.model.change import Change
from specflow.model.nouns import NOUN_BY_DOCUMENT
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Results, Snapshot
from specflow.model.verdict import RequirementStatus
from specflow.parameters import Dictionary
from specflow.store import ProjectStore
from specflow.verification import evaluate
from specflow.workflows.allocate import AllocateOptions, propose
from specflow.workflows.as_known import children_of_budget
from specflow.workflows.budget_lines import lines_in_words
from specflow.workflows.change_text import changed_documents
from specflow.workflows.evaluate_project import project_dictionary
from specflow.workflows.subjects import requirements_named


@dataclass(frozen=True, slots=True)
class AllocationEffect:
    """A block requirement whose allocation would follow no longer: what it carries and what the budget would give.

    ``proposed`` is "" where the budget gives the same and only revisions moved on, or gives none, as ``difference``
    says then; ``why`` says what happened.
    """

    allocation: str
    child: str
    limit: str
    proposed: str
    difference: str
    why: str


@dataclass(frozen=True, slots=True)
class StatusEffect:
    """A requirement whose status would change: each part before and after, in words."""

    requirement: str
    label: tuple[str, str]
    proved: tuple[str, str]
    margin: tuple[float, float]
    unit: str


@dataclass(frozen=True)
class Trial:
    """What changes would do. Nothing of it is stored."""

    changes: Sequence[Change]
    budgets: tuple[BudgetEffect, ...]
    allocations: tuple[AllocationEffect, ...]
    statuses: tuple[StatusEffect, ...]
    notes: tuple[str, ...]
    project_revision: int


def try_changes(store: ProjectStore, texts: Sequence[str], as_of: date) -> Trial:
    """Return what changes, written as ``change_text`` says, would do to the whole project.

    DocumentError for a change that cannot be read, or that names what is not there.
    """
    before = store.load()
    dictionary = project_dictionary(before)
    documents = changed_documents(texts, before, dictionary)
    after = with_documents(before, documents)
    effects = budget_effects(before, after, dictionary, (_carried(before), _carried(after)))
    allocations, notes = _allocations(before, after, dictionary)
    statuses = status_effects(
        before,
        evaluate(before, dictionary, as_of=as_of),
        evaluate(after, dictionary, as_of=as_of),
    )
    changes = [_in_words(change, before, after) for change in diff(before, documents)]
    return Trial(changes, effects, allocations, statuses, tuple(notes), before.revision)


def _in_words(change: Change, before: Snapshot, after: Snapshot) -> Change:
    """Say of the lines of a budget what they were and what they would be."""
    first, second = (snapshot.find(Budget, change.id) for snapshot in (before, after))
    if change.noun != "budget" or first is None or second is None:
        return change
    said = lines_in_words(first, second)
    fields = tuple(
        one.model_copy(update={"meaning": said}) if one.field == "lines" and said else one
        for one in change.fields
    )
    return change.model_copy(update={"fields": fields})


def keep_trial(store: ProjectStore, trial: Trial, *, by: str, reason: str) -> int:
    """Store the changes of a trial; return the project revision. ConflictError when the project went on since.

    DocumentError where a budget that can be evaluated now could no longer be.
    """
    if not trial.changes:
        return trial.project_revision
    for one in trial.budgets:
        if one.after is not None and one.after.error and (one.before is None or not one.before.error):
            raise DocumentError(
                f"the budget {one.budget} could no longer be evaluated: {one.after.error}",
                hint="correct the change; nothing was stored",
            )
    return store.apply(trial.changes, by=by, reason=reason, expected_revision=trial.project_revision)


def compare_alternatives(store: ProjectStore, code: str) -> tuple[BudgetState, ...]:
    """Return the budgets that serve a requirement side by side, most margin first. DocumentError for an unknown one."""
    snapshot = store.load()
    (requirement,) = requirements_named(snapshot, [code])
    return alternatives(requirement.id, snapshot, project_dictionary(snapshot), _carried(snapshot))


def with_documents(snapshot: Snapshot, documents: Sequence[Document]) -> Snapshot:
    """Return the snapshot with other documents, at the revisions that accepting them would give."""
    changed = {noun: dict(group) for noun, group in snapshot.documents.items()}
    for document in documents:
        noun = NOUN_BY_DOCUMENT[type(document)]
        key = code_key(str(getattr(document, noun.id_field)))
        revision = due_revision(changed.get(noun.name, {}).get(key), document)
        if revision is not None:
            document = document.model_copy(update={"revision": revision})
        changed.setdefault(noun.name, {})[key] = document
    return replace(snapshot, documents=changed)


def _carried(snapshot: Snapshot) -> dict[str, list[Requirement]]:
    return {code_key(one.id): children_of_budget(snapshot, one) for one in snapshot.all(Budget)}


def _allocations(
    before: Snapshot, after: Snapshot, dictionary: Dictionary
) -> tuple[tuple[AllocationEffect, ...], list[str]]:
    """Return the allocations that would follow no longer, with what the budget would give now."""
    found: list[AllocationEffect] = []
    notes: list[str] = []
    for budget in after.all(Budget):
        moved = {link.id: _moved(link, before, after) for link in _links(after, budget)}
        if not any(moved.values()):
            continue
        given, note = _given(after, dictionary, budget)
        notes += [note] if note else []
        for link in _links(after, budget):
            if moved[link.id]:
                found.append(_effect(link, after, given, moved[link.id], is_shared=not note))
    return tuple(found), notes


def _links(snapshot: Snapshot, budget: Budget) -> list[Allocation]:
    return [
        link
        for link in snapshot.all(Allocation)
        if link.budget is not None and code_key(link.budget) == code_key(budget.id)
    ]


def _moved(link: Allocation, before: Snapshot, after: Snapshot) -> str:
    """Say what an allocation was made from that changes, "" where nothing does."""
    parts = []
    for kind, code in ((Requirement, link.parent), (Budget, link.budget), (Requirement, link.child)):
        first, second = before.find(kind, code), after.find(kind, code)
        if first != second:
            parts.append(f"{code} changes")
    return " and ".join(parts)


def _given(after: Snapshot, dictionary: Dictionary, budget: Budget) -> tuple[dict[str, str], str]:
    """Return what the budget would give each child, by its key, shared with the choices it was shared with before.

    With a note, and nothing, where it can no longer be shared.
    """
    sharing = next((link.sharing for link in _links(after, budget) if link.sharing is not None), None)
    options = AllocateOptions.of(sharing) if sharing is not None else AllocateOptions()
    try:
        preview = propose(after, dictionary, budget.id, options)
    except SpecflowError as error:
        return {}, f"{budget.id} could not be allocated again: {error}"
    return {code_key(one.child.id): one.given.text for one in preview.proposals}, ""


def _effect(
    link: Allocation, after: Snapshot, given: dict[str, str], why: str, *, is_shared: bool
) -> AllocationEffect:
    child = after.find(Requirement, link.child)
    limit = child.limit.text if child is not None else ""
    proposed = given.get(code_key(link.child), "")
    difference = ""
    if child is not None and proposed:
        from specflow.limits import parse_limit

        difference = limit_difference(child.limit, parse_limit(proposed))
    if not is_shared:
        difference = "not known: the budget cannot be shared"
    elif not proposed:
        difference = "the budget gives it no share"
    return AllocationEffect(link.id, link.child, limit, proposed if difference else "", difference, why)


def status_effects(snapshot: Snapshot, before: Results, after: Results) -> tuple[StatusEffect, ...]:
    """Return the requirements whose state, proved points or guarded margin differ between two evaluations."""
    found = []
    for requirement in snapshot.requirements:
        first, second = (
            before.statuses.get(code_key(requirement.id)),
            after.statuses.get(code_key(requirement.id)),
        )
        if first is None or second is None:
            continue
        effect = StatusEffect(
            requirement.id,
            (first.label.value, second.label.value),
            (f"{first.k} of {first.n}", f"{second.k} of {second.n}"),
            (_margin(first), _margin(second)),
            second.unit,
        )
        same_margin = np.isclose(*effect.margin, rtol=0, atol=1e-9, equal_nan=True)
        if effect.label[0] != effect.label[1] or effect.proved[0] != effect.proved[1] or not same_margin:
            found.append(effect)
    return tuple(found)


def _margin(status: RequirementStatus) -> float:
    return float("nan") if status.governing is None else status.governing.guarded_margin
