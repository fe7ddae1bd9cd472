"""Allocate from a budget: propose what each block may have as changes, test closure, then accept them."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Literal

from specflow.budgets.allotment import Allotment, BlockParameter, key_of, open_allotment
from specflow.budgets.apportion import apportion
from specflow.budgets.children import child_ends
from specflow.budgets.closure import Closure, closure_test
from specflow.budgets.effort import Strain, least_effort
from specflow.budgets.following import NoLonger, no_longer_following
from specflow.budgets.probe import Probe
from specflow.budgets.serving import targets_of_lines
from specflow.changes import diff, due_revision
from specflow.errors import DocumentError
from specflow.limits import limit_difference, parse_limit
from specflow.model.base import Document, code_key
from specflow.model.budget import Allocation, Budget, Reserve, Sharing
from specflow.model.change import Change
from specflow.model.limit import Limit
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.store import ProjectStore
from specflow.workflows.allocated_requirement import limit_of, new_child
from specflow.workflows.evaluate_project import project_dictionary
from specflow.workflows.show_budget import budget_named

Way = Literal["equal", "proportional", "least effort"]


@dataclass(frozen=True, slots=True)
class ByHand:
    """A limit that a person gives a block instead of what the budget gives, and why."""

    block: str
    parameter: str
    limit: str
    reason: str


@dataclass(frozen=True, slots=True)
class AllocateOptions:
    """How to share. ``reserves`` are kept back first and stored in the budget with their holders.

    ``at_nominal`` shares at nominal gains and losses, not at the worst end of their tolerances. ``by_conditions`` gives
    limits that depend on conditions instead of one number that holds under all.
    """

    way: Way = "proportional"
    reserves: Sequence[Reserve] = ()
    fixed: Sequence[str] = ()
    free_gains: Sequence[str] = ()
    weights: Mapping[str, float] = field(default_factory=dict)
    by_hand: Sequence[ByHand] = ()
    at_nominal: bool = False
    by_conditions: bool = False

    @property
    def sharing(self) -> Sharing:
        """The choices as they are stored with the allocations."""
        return Sharing(
            way=self.way,
            fixed=tuple(self.fixed),
            free_gains=tuple(self.free_gains),
            weights=tuple(sorted(self.weights.items())),
            at_nominal=self.at_nominal,
            by_conditions=self.by_conditions,
        )

    @classmethod
    def of(cls, sharing: Sharing) -> AllocateOptions:
        """Return the options that share as it was shared."""
        return cls(
            sharing.way,
            fixed=sharing.fixed,
            free_gains=sharing.free_gains,
            weights=dict(sharing.weights),
            at_nominal=sharing.at_nominal,
            by_conditions=sharing.by_conditions,
        )


@dataclass(frozen=True, slots=True)
class Proposal:
    """One block requirement that a budget proposes.

    ``proposed`` is what the budget gives, ``given`` what the child carries: the same, unless a person gave another
    limit by hand for a ``reason``; ``difference`` says then what that changes. ``before`` is the limit it has now.
    """

    allotment: Allotment
    child: Requirement
    parents: tuple[str, ...]
    proposed: Limit
    given: Limit
    before: Limit | None = None
    reason: str = ""
    difference: str = ""


@dataclass(frozen=True)
class AllocatePreview:
    """What accepting would change, the closure test of what is proposed, and what binds.

    ``outdated`` are the stored allocations that no longer follow; accepting makes them follow again.
    """

    budget: Budget
    way: str
    proposals: tuple[Proposal, ...]
    closure: Closure
    binding: tuple[str, ...]
    strains: tuple[Strain, ...]
    notes: tuple[str, ...]
    changes: Sequence[Change]
    outdated: tuple[NoLonger, ...]
    project_revision: int


def preview_allocation(
    store: ProjectStore, code: str, options: AllocateOptions | None = None
) -> AllocatePreview:
    """Propose block requirements from a budget; nothing is stored.

    InfeasibleError with by how much where the limits cannot be met; DocumentError for what is not in the project.
    """
    snapshot = store.load()
    return propose(snapshot, project_dictionary(snapshot), code, options or AllocateOptions())


def accept_allocation(store: ProjectStore, preview: AllocatePreview, *, by: str, reason: str = "") -> int:
    """Store the proposals in one transaction; return the project revision.

    ConflictError when the project went on since the preview.
    """
    if not preview.changes:
        return preview.project_revision
    return store.apply(
        preview.changes,
        by=by,
        reason=reason or f"allocated from the budget {preview.budget.id}, {preview.way}",
        expected_revision=preview.project_revision,
    )


def propose(
    snapshot: Snapshot, dictionary: Dictionary, code: str, options: AllocateOptions
) -> AllocatePreview:
    """Return the proposals of a budget of a snapshot."""
    stored = budget_named(snapshot, code)
    budget = _with_reserves(stored, options.reserves)
    probe = Probe.of(budget, snapshot, dictionary)
    serves = targets_of_lines(probe)
    agreed = _agreed(probe, serves)
    allotments, binding, strains, notes = _allotted(budget, snapshot, dictionary, options, agreed)
    hands = _hands(snapshot, budget, options.by_hand, allotments)
    proposals = [
        _proposal(one, serves.get(one.key, ()), probe, hands.get(one.key))
        for one in allotments
        if not one.is_open and serves.get(one.key)
    ]
    closure = closure_test(probe, {one.allotment.key: _as_given(one, probe) for one in proposals})
    documents = _documents(snapshot, budget, proposals, options.sharing)
    if budget != stored:
        documents.insert(0, budget)
    return AllocatePreview(
        budget,
        options.way,
        tuple(proposals),
        closure,
        tuple(binding),
        strains,
        (*notes, *closure.notes),
        diff(snapshot, documents),
        no_longer_following(stored, snapshot, {code_key(one.child.id): one.proposed for one in proposals}),
        snapshot.revision,
    )


def _agreed(
    probe: Probe, serves: Mapping[BlockParameter, tuple[str, ...]]
) -> Mapping[BlockParameter, Allotment]:
    """Return what requirements that this budget did not give allow already: what is not shared keeps them."""
    own = {
        code_key(link.child)
        for link in probe.snapshot.all(Allocation)
        if _is_of(link, probe.budget) and link.proposed
    }
    found: dict[BlockParameter, Allotment] = {}
    for read in probe.chain.lines:
        key = key_of(read)
        blank = open_allotment(read, "", is_shared=False)
        child = _known_child(probe.snapshot, probe.budget, blank, serves.get(key, ()))
        if child is None or code_key(child.id) in own:
            continue
        low, high = child_ends(probe, read.row, child, read.line.unit)
        if (low <= high).all():
            found[key] = replace(blank, words=f"{child.id} as it stands", is_kept=True).by_place(low, high)
    return found


def _allotted(
    budget: Budget,
    snapshot: Snapshot,
    dictionary: Dictionary,
    options: AllocateOptions,
    agreed: Mapping[BlockParameter, Allotment],
) -> tuple[Sequence[Allotment], Sequence[str], tuple[Strain, ...], tuple[str, ...]]:
    if options.way == "least effort":
        if options.at_nominal:
            raise DocumentError(
                "the least effort is found at the worst ends of the tolerances",
                where=f"budget {budget.id}",
                hint="take equal or proportional shares at nominal figures",
            )
        if options.by_conditions:
            raise DocumentError(
                "the least effort gives each block one number for all conditions",
                where=f"budget {budget.id}",
                hint="take equal or proportional shares by conditions",
            )
        found = least_effort(
            budget,
            snapshot,
            dictionary,
            fixed=options.fixed,
            free_gains=options.free_gains,
            weights=options.weights,
            agreed=agreed,
        )
        binding = [f"{one.requirement} at {one.words}" for one in found.binding]
        return found.allotments, binding, found.strains, found.notes
    if options.free_gains or options.weights:
        raise DocumentError(
            "free gains and weights belong to the least effort",
            where=f"budget {budget.id}",
            hint="equal and proportional shares keep the gains as they are",
        )
    shares = apportion(
        budget,
        snapshot,
        dictionary,
        way=options.way,
        fixed=options.fixed,
        at_nominal=options.at_nominal,
        by_conditions=options.by_conditions,
        agreed=agreed,
    )
    where = "nominal figures" if options.at_nominal else "the worst ends of their tolerances"
    note = f"what is not shared stands at {where}"
    return shares.allotments, shares.binding, (), (note, *shares.notes)


def _with_reserves(budget: Budget, reserves: Sequence[Reserve]) -> Budget:
    """Return the budget with reserves kept back; one on the same parameter replaces the earlier."""
    if not reserves:
        return budget
    named = {code_key(one.parameter): one for one in (*budget.reserves, *reserves)}
    return budget.model_copy(update={"reserves": tuple(named.values())})


def _hands(
    snapshot: Snapshot, budget: Budget, by_hand: Sequence[ByHand], allotments: Sequence[Allotment]
) -> Mapping[BlockParameter, ByHand]:
    """Return what people give by hand: what they say now, and what they gave before and did not take back."""
    known = {one.key for one in allotments}
    hands: dict[BlockParameter, ByHand] = {}
    for link in snapshot.all(Allocation):
        child = snapshot.find(Requirement, link.child)
        if child is not None and _is_of(link, budget) and link.manual_reason and link.proposed:
            key = (code_key(child.block), code_key(child.quantity.parameter))
            if key in known:
                hands[key] = ByHand(
                    child.block, child.quantity.parameter, child.limit.text, link.manual_reason
                )
    for one in by_hand:
        key = (code_key(one.block), code_key(one.parameter))
        if key not in known:
            listed = ", ".join(f"{each.block} {each.parameter}" for each in allotments)
            raise DocumentError(
                f"the budget allocates no {one.parameter} to {one.block}",
                where=f"budget {budget.id}",
                hint=f"it allocates {listed}",
            )
        if not one.reason.strip():
            raise DocumentError(
                f"no reason is given for {one.block} {one.parameter} by hand",
                where=f"budget {budget.id}",
                hint="say why the block gets another limit than the budget gives",
            )
        hands[key] = one
    return hands


def _is_of(link: Allocation, budget: Budget) -> bool:
    return link.budget is not None and code_key(link.budget) == code_key(budget.id)


def _proposal(one: Allotment, parents: tuple[str, ...], probe: Probe, hand: ByHand | None) -> Proposal:
    snapshot, budget = probe.snapshot, probe.budget
    parameter = probe.dictionary.get(one.parameter)
    known = _known_child(snapshot, budget, one, parents)
    kept = known.limit if one.is_kept and known is not None else None
    proposed = kept or limit_of(one, probe)
    given = proposed if hand is None else parse_limit(hand.limit, parameter=parameter, unit_hint=one.unit)
    difference = limit_difference(proposed, given) if hand is not None else ""
    reason = hand.reason if hand is not None and difference else ""
    child = known or new_child(one, parents, probe, parameter.title if parameter else one.parameter)
    unlike = tuple(code for code in parents if code_key(code) not in set(map(code_key, child.parents)))
    same = known is not None and not limit_difference(known.limit, given)
    child = child.model_copy(
        update={"limit": child.limit if same else given, "parents": (*child.parents, *unlike)}
    )
    return Proposal(one, child, parents, proposed, given, known.limit if known else None, reason, difference)


def _as_given(proposal: Proposal, probe: Probe) -> Allotment:
    """Return what the child's limit allows: what the closure test has to take."""
    one = proposal.allotment
    if not proposal.reason:
        return one
    row = next(
        read.row
        for read in probe.chain.lines
        if (code_key(read.line.block), code_key(read.line.parameter)) == one.key
    )
    child = proposal.child.model_copy(update={"limit": proposal.given})
    return one.by_place(*child_ends(probe, row, child, one.unit))


def _known_child(
    snapshot: Snapshot, budget: Budget, one: Allotment, parents: Sequence[str]
) -> Requirement | None:
    """Return the requirement that carries this share already: by an allocation of the budget, else by its parents."""
    on_block = [
        requirement
        for requirement in snapshot.requirements_of_block.get(code_key(one.block), ())
        if code_key(requirement.quantity.parameter) == code_key(one.parameter)
    ]
    linked = {code_key(link.child) for link in snapshot.all(Allocation) if _is_of(link, budget)}
    by_link = [requirement for requirement in on_block if code_key(requirement.id) in linked]
    above = {code_key(code) for code in parents}
    by_parent = [
        requirement for requirement in on_block if above & {code_key(code) for code in requirement.parents}
    ]
    found = by_link or by_parent
    if len(found) > 1:
        raise DocumentError(
            f"{' and '.join(requirement.id for requirement in found)} both carry {one.parameter} of {one.block}",
            where=f"budget {budget.id}",
            hint="remove one of them, or link only one to the parent",
        )
    return found[0] if found else None


def _documents(
    snapshot: Snapshot, budget: Budget, proposals: Sequence[Proposal], sharing: Sharing
) -> list[Document]:
    revision = due_revision(snapshot.find(Budget, budget.id), budget) or budget.revision
    documents: list[Document] = [one.child for one in proposals]
    for one in proposals:
        for code in one.parents:
            documents.append(_link(snapshot, budget, revision, one, code, sharing))
    return documents


def _link(
    snapshot: Snapshot, budget: Budget, revision: int, one: Proposal, code: str, sharing: Sharing
) -> Allocation:
    parent = snapshot.find(Requirement, code)
    assert parent is not None  # a budget is read only when all it serves is there
    stored = next(
        (
            link
            for link in snapshot.all(Allocation)
            if code_key(link.parent) == code_key(code) and code_key(link.child) == code_key(one.child.id)
        ),
        None,
    )
    fresh = stored or Allocation(id=f"{parent.id} > {one.child.id}", parent=parent.id, child=one.child.id)
    text = "" if one.allotment.is_kept else one.proposed.text
    fields = {
        "parent_revision": parent.revision,
        "budget": budget.id,
        "budget_revision": revision,
        "proposed": text,
        "way": sharing.way,
        "sharing": sharing,
        "manual_reason": one.reason,
    }
    if all(getattr(fresh, name) == value for name, value in fields.items()):
        return fresh
    return fresh.model_copy(update={**fields, "state": "proposed", "agreed_on": None})
