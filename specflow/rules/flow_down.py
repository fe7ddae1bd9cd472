"""Rules about how requirements are handed down: parents, children and allocations."""

from __future__ import annotations

from collections.abc import Iterator

from specflow.model.block import Tier
from specflow.model.budget import Allocation, Budget
from specflow.model.requirement import Requirement
from specflow.model.verdict import Compliance
from specflow.rules.base import Found
from specflow.rules.facts import Facts
from specflow.rules.words import counted, listed

_NOT_MET = (Compliance.NON_COMPLIANT, Compliance.PARTIALLY_COMPLIANT)


def unallocated(facts: Facts) -> Iterator[Found]:
    """A requirement above block tier is handed down to nobody.

    Why: nobody below works to it, so the system meets it by luck.
    Fails: a limit on the terminal, whose blocks below have no requirement that names it as parent.
    Passes: a block requirement names it as its parent, or an allocation does.
    Do: allocate it over the blocks, or say in the requirement that it needs no allocation.
    """
    for requirement, status in facts.judged:
        if status.unallocated:
            message = f"nothing below {requirement.block} carries a share of {requirement.limit.text}"
            yield Found(requirement.id, message, origin=requirement.origin)


def orphan(facts: Facts) -> Iterator[Found]:
    """A requirement below system tier has no parent and is not said to be derived.

    Why: nobody can tell what it is good for, or whether it may be relaxed.
    Fails: a block requirement that names no parent and gives no reason.
    Passes: it names its parent, or states why it was derived.
    Do: name the parent, or give the reason for a derived requirement.
    """
    for requirement, _ in facts.judged:
        if requirement.tier is not Tier.SYSTEM and not requirement.parents and not requirement.derived_reason:
            message = (
                f"a requirement of {requirement.tier.value} tier without a parent, and not said to be derived"
            )
            yield Found(requirement.id, message, origin=requirement.origin)


def child_failing(facts: Facts) -> Iterator[Found]:
    """A requirement below does not meet its limit.

    Why: the parent may still hold, but somebody has to say so with the budget as it is now.
    Fails: the gain of the amplifier misses its allocation; the terminal's own test passes.
    Passes: all children are met, or a disposition of this finding says why the parent still holds.
    Do: run the budget again with the value measured and record a disposition, or have the block mended.
    """
    for requirement, _ in facts.judged:
        children = [one for one in facts.children(requirement) if _compliance(one, facts) in _NOT_MET]
        if children and not requirement.met_by_lower_level:
            names = listed([_with_waiver(child, facts) for child in children])
            message = f"{counted(len(children), 'requirement')} below not met: {names}"
            yield Found(
                requirement.id, message, origin=requirement.origin, related=tuple(one.id for one in children)
            )


def child_open(facts: Facts) -> Iterator[Found]:
    """A requirement that is met has requirements below that are not.

    Why: closing the parent first can hide a block that nobody has verified.
    Fails: the terminal's gain is proved; the amplifier's share of it has no evidence.
    Passes: the shares below are proved too, or the parent is not proved either.
    Do: prove what is open below, or close it with the parent's evidence and a reason.
    """
    for requirement, status in facts.judged:
        if status.compliance is not Compliance.COMPLIANT:
            continue
        children = [
            one for one in facts.children(requirement) if _compliance(one, facts) is Compliance.NOT_DETERMINED
        ]
        if children:
            names = listed([child.id for child in children])
            message = f"met, while {counted(len(children), 'requirement')} below cannot be called so: {names}"
            yield Found(
                requirement.id, message, origin=requirement.origin, related=tuple(one.id for one in children)
            )


def outdated_allocation(facts: Facts) -> Iterator[Found]:
    """An allocation was made from a parent or a budget that has changed since.

    Why: the share below may no longer add up to what is promised above.
    Fails: the allocation comes from revision 1 of the parent; the parent is at revision 2.
    Passes: the allocation names the present revisions of its parent and of its budget.
    Do: compute the allocation again, or confirm it against the present revisions.
    """
    for allocation in facts.snapshot.all(Allocation):
        parent = facts.snapshot.find(Requirement, allocation.parent)
        budget = facts.snapshot.find(Budget, allocation.budget)
        older = []
        if parent is not None and allocation.parent_revision < parent.revision:
            older.append(f"revision {allocation.parent_revision} of {parent.id}, now {parent.revision}")
        made_from = allocation.budget_revision
        if budget is not None and made_from is not None and made_from < budget.revision:
            older.append(f"revision {made_from} of the budget {budget.id}, now {budget.revision}")
        if older:
            message = f"{allocation.parent} → {allocation.child} was made from {' and '.join(older)}"
            related = (allocation.parent, allocation.child)
            yield Found(allocation.id, message, origin=allocation.origin, related=related)


def _compliance(requirement: Requirement, facts: Facts) -> Compliance | None:
    status = facts.status(requirement)
    return None if status is None else status.compliance


def _with_waiver(requirement: Requirement, facts: Facts) -> str:
    status = facts.status(requirement)
    waivers = status.waived_by if status is not None else ()
    return f"{requirement.id} (waived by {', '.join(waivers)})" if waivers else requirement.id
