"""Rules about conditions sets: is there one, is it used, and do its exclusions exclude anything."""

from __future__ import annotations

from collections.abc import Iterator

from specflow.conditions import compile_points
from specflow.errors import ConditionsError
from specflow.model.base import code_key
from specflow.model.budget import Budget
from specflow.model.conditions import ConditionsSet
from specflow.rules.base import Found
from specflow.rules.facts import Facts


def no_conditions(facts: Facts) -> Iterator[Found]:
    """The requirement does not say under which conditions it holds.

    Why: one reading anywhere proves it, so room temperature at mid band passes for all of the band.
    Fails: R-1 names no conditions set.
    Passes: it names one, if only one that says "any" or "not required" of each dimension.
    Do: name a conditions set; say "not required" of what truly does not matter.
    """
    for requirement, _ in facts.defined:
        if requirement.conditions is None:
            message = "no conditions are required: one reading anywhere counts as proof"
            yield Found(requirement.id, message, origin=requirement.origin)


def idle_exclusion(facts: Facts) -> Iterator[Found]:
    """An exclusion takes no point away.

    Why: somebody meant to leave a corner out, and it is still required (or was misspelt).
    Fails: "supply_voltage = 5.5 V" is excluded and no point requires 5.5 V.
    Passes: each exclusion takes away one point at least.
    Do: correct the value in the exclusion, or take the exclusion out.
    """
    for conditions in facts.snapshot.all(ConditionsSet):
        try:
            excluded = compile_points(conditions).excluded
        except ConditionsError:
            continue  # told of the requirements that need the set
        for exclusion, count in zip(conditions.exclusions, excluded, strict=True):
            if count == 0:
                message = f"the exclusion {exclusion.text!r} takes no point away"
                yield Found(conditions.id, message, origin=conditions.origin)


def unused_conditions(facts: Facts) -> Iterator[Found]:
    """A conditions set is used by no requirement and no budget.

    Why: a requirement may have lost the conditions it was meant to have.
    Fails: the set CS-HOT is in the project and nothing names it.
    Passes: a requirement names it.
    Do: name it where it belongs, or take it out.
    """
    named = {code_key(one.conditions or "") for one in facts.snapshot.requirements}
    named |= {code_key(one.conditions or "") for one in facts.snapshot.all(Budget)}
    for conditions in facts.snapshot.all(ConditionsSet):
        if code_key(conditions.id) not in named:
            yield Found(
                conditions.id, "no requirement and no budget names this set", origin=conditions.origin
            )
