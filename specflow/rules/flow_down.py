"""Rules about how requirements are handed down: parents, children and allocations."""

from __future__ import annotations

from collections.abc import Iterator

from specflow.errors import ExpressionError
from specflow.limits import limit_difference, parse_limit
from specflow.model.base import code_key
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
    Fails: the allocation comes from revision 1 of the parent; the parent is at revision 2. Or a line was changed.
    Passes: the allocation names the present revisions of its parent and of its budget, which still serves the parent.
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
        served = None if budget is None else {code_key(code) for code in budget.requirements}
        if not older and served is not None and code_key(allocation.parent) not in served:
            older.append(f"the budget {allocation.budget}, which no longer serves {allocation.parent}")
        if older:
            message = f"{allocation.parent} → {allocation.child} was made from {' and '.join(older)}"
            related = (allocation.parent, allocation.child)
            yield Found(allocation.id, message, origin=allocation.origin, related=related)


def allocation_differs(facts: Facts) -> Iterator[Found]:
    """A block carries another limit than its budget gave, and nobody said why.

    Why: the shares no longer add up to what the budget was closed with, and nobody decided that.
    Fails: the budget gave the amplifier a noise figure of at most 1.5 dB; its requirement says 1.8 dB.
    Passes: the requirement carries what was given, or the allocation states the reason for another limit.
    Do: allocate again, or give the reason with specflow allocate --by-hand ... --because.
    """
    for allocation, child, moved in _moved_limits(facts):
        if not allocation.manual_reason:
            message = f"{child.id} carries {child.limit.text}, the budget gave {allocation.proposed}: {moved}"
            yield Found(allocation.id, message, origin=allocation.origin, related=(child.id,))


def allocation_by_hand(facts: Facts) -> Iterator[Found]:
    """A block carries a limit given by hand instead of what its budget gave.

    Why: whoever closes the budget next has to know whose decision that was, and why.
    Fails: the amplifier got 1.8 dB instead of 1.5 dB, because the supplier offers no better.
    Passes: the requirement carries what the budget gave.
    Do: nothing, as long as the reason holds; else allocate again.
    """
    for allocation, child, moved in _moved_limits(facts):
        if allocation.manual_reason:
            message = (
                f"{child.id} carries {child.limit.text} by hand, the budget gave {allocation.proposed} ({moved}): "
                f"{allocation.manual_reason}"
            )
            yield Found(allocation.id, message, origin=allocation.origin, related=(child.id,))


def closure_not_shown(facts: Facts) -> Iterator[Found]:
    """A budget is allocated, and it is not shown that the system holds with every block at its worst allowed bound.

    Why: all blocks may pass and the system still fail.
    Fails: gains have only lower limits: more gain passes, and spoils the linearity of the chain.
    Passes: with every block at the bound that hurts most, every limit of the budget holds.
    Do: give the missing side, tighten what lacks, or allocate the budget again; specflow allocate shows the test.
    """
    for standing in facts.results.budgets.values():
        if standing.closes is not True:
            budget = facts.snapshot.find(Budget, standing.budget)
            origin = budget.origin if budget is not None else None
            yield Found(standing.budget, standing.sentence, origin=origin)


def _moved_limits(facts: Facts) -> Iterator[tuple[Allocation, Requirement, str]]:
    """Yield allocations whose child carries another limit than the budget gave, with the difference in words."""
    for allocation in facts.snapshot.all(Allocation):
        child = facts.snapshot.find(Requirement, allocation.child)
        if child is None or not allocation.proposed:
            continue
        try:
            moved = limit_difference(parse_limit(allocation.proposed), child.limit)
        except ExpressionError:
            continue  # written by an older version; there is nothing to compare with
        if moved:
            yield allocation, child, moved


def _compliance(requirement: Requirement, facts: Facts) -> Compliance | None:
    status = facts.status(requirement)
    return None if status is None else status.compliance


def _with_waiver(requirement: Requirement, facts: Facts) -> str:
    status = facts.status(requirement)
    waivers = status.waived_by if status is not None else ()
    return f"{requirement.id} (waived by {', '.join(waivers)})" if waivers else requirement.id
