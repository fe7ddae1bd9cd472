"""Evaluate a budget as known: with the best evidence of each line, for the type or for one system as built."""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass
from datetime import date

from specflow.budgets.as_known import AsKnown, as_known
from specflow.budgets.children import equivalents
from specflow.budgets.probe import Probe
from specflow.budgets.reallocation import Reallocation, reallocate
from specflow.errors import DocumentError
from specflow.model.base import code_key
from specflow.model.block import Item
from specflow.model.budget import Allocation, Budget
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.store import ProjectStore
from specflow.workflows.evaluate_project import project_dictionary
from specflow.workflows.known_lines import gather_knowledge
from specflow.workflows.show_budget import budget_named


@dataclass(frozen=True, slots=True)
class KnownBudget:
    """A budget as known, what misses its allocation, and the evidence tables it was made from."""

    known: AsKnown
    reallocation: Reallocation
    tables: tuple[str, ...]
    notes: tuple[str, ...]
    as_of: date
    project_revision: int


def known_budget(
    store: ProjectStore, code: str, as_of: date, *, serial: str = "", confidence: float = 0.95
) -> KnownBudget:
    """Return a budget with the best that is known of each line as of a date.

    ``serial`` names the item that is the system as built. DocumentError for a budget or item that is not there, or an
    item that nothing is built into; SpecflowError as ``evaluate_budget``.
    """
    snapshot = store.load()
    return known_in(snapshot, project_dictionary(snapshot), code, as_of, serial=serial, confidence=confidence)


def known_in(
    snapshot: Snapshot,
    dictionary: Dictionary,
    code: str,
    as_of: date,
    *,
    serial: str = "",
    confidence: float = 0.95,
) -> KnownBudget:
    """Return a budget of a snapshot as known."""
    if not 0.5 <= confidence < 1:
        raise DocumentError(
            f"{confidence:g} is no confidence of a margin", hint="give one from 0.5 to below 1, such as 0.95"
        )
    budget = budget_named(snapshot, code)
    children = children_of_budget(snapshot, budget)
    probe = Probe.of(budget, snapshot, dictionary)
    gathered = gather_knowledge(probe.chain, snapshot, dictionary, children, as_of)
    item = _item(snapshot, serial) if serial else None
    known = as_known(
        budget,
        snapshot,
        dictionary,
        gathered.knowledge,
        serial=item.id if item is not None else "",
        built_in=built_into(snapshot, item) if item is not None else None,
        confidence=confidence,
    )
    found = reallocate(probe, known.lines, children, confidence=confidence)
    return KnownBudget(
        known, found, gathered.tables, (*gathered.notes, *known.notes), as_of, snapshot.revision
    )


def children_of_budget(snapshot: Snapshot, budget: Budget) -> list[Requirement]:
    """Return the requirements that hold lines of a budget, each once.

    They are those that carry its allocations, and those below what it serves on a figure that it has: what a block is
    allowed there counts, whether or not the budget gave it.
    """
    links = [
        link
        for link in snapshot.all(Allocation)
        if link.budget is not None and code_key(link.budget) == code_key(budget.id)
    ]
    found = {code_key(link.child): snapshot.find(Requirement, link.child) for link in links}
    figures = {(code_key(line.block), name) for line in budget.lines for name in equivalents(line.parameter)}
    for parent in budget.requirements:
        for one in snapshot.children_of.get(code_key(parent), ()):
            if (code_key(one.block), code_key(one.quantity.parameter)) in figures:
                found.setdefault(code_key(one.id), one)
    return [one for one in found.values() if one is not None]


def _item(snapshot: Snapshot, serial: str) -> Item:
    found = snapshot.items_by_name.get(code_key(serial))
    if found is None:
        listed = ", ".join(item.id for item in snapshot.items[:8]) or "none"
        raise DocumentError(f"there is no item {serial!r}", hint=f"items: {listed}")
    return found


def built_into(snapshot: Snapshot, system: Item) -> Mapping[str, Collection[str]]:
    """Return the specimens that stand in an item, also within what is built into it, by the key of their block.

    DocumentError where nothing is recorded as built into it.
    """
    found: dict[str, set[str]] = {}
    wanted = {code_key(system.id)}
    left = list(snapshot.items)
    while True:
        inside = [item for item in left if item.built_into and code_key(item.built_into) in wanted]
        if not inside:
            break
        for item in inside:
            found.setdefault(code_key(item.block), set()).add(item.id)
            wanted.add(code_key(item.id))
        left = [item for item in left if item not in inside]
    if not found:
        raise DocumentError(
            f"nothing is recorded as built into {system.id}",
            hint="name it in the column 'Built into' of the items that stand in it",
        )
    return found
