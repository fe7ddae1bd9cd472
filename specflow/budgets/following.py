"""Which allocations of a budget no longer follow from what they were made from."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from specflow.errors import ExpressionError
from specflow.limits import limit_difference, parse_limit
from specflow.model.base import code_key
from specflow.model.budget import Allocation, Budget
from specflow.model.limit import Limit
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot


@dataclass(frozen=True, slots=True)
class NoLonger:
    """An allocation that no longer follows: every reason, most far-reaching first."""

    allocation: str
    child: str
    reasons: tuple[str, ...]


def no_longer_following(
    budget: Budget, snapshot: Snapshot, given: Mapping[str, Limit] | None = None
) -> tuple[NoLonger, ...]:
    """Return the allocations of a budget that no longer follow, in the order of their ids.

    They were made from an older revision of the budget or of the parent; the child carries another limit than was given
    and nobody said why; or the budget gives another limit now, because a line, its evidence or the conditions changed:
    ``given`` holds what it gives now, by the key of the child.
    """
    found = []
    for link in snapshot.all(Allocation):
        if link.budget is None or code_key(link.budget) != code_key(budget.id):
            continue
        reasons = tuple(_reasons(link, budget, snapshot, given or {}))
        if reasons:
            found.append(NoLonger(link.id, link.child, reasons))
    return tuple(found)


def _reasons(
    link: Allocation, budget: Budget, snapshot: Snapshot, given: Mapping[str, Limit]
) -> Iterator[str]:
    if link.budget_revision is not None and link.budget_revision < budget.revision:
        yield f"made from revision {link.budget_revision} of {budget.id}, now {budget.revision}"
    parent = snapshot.find(Requirement, link.parent)
    if parent is not None and link.parent_revision < parent.revision:
        yield f"made from revision {link.parent_revision} of {parent.id}, now {parent.revision}"
    if parent is not None and code_key(parent.id) not in {code_key(code) for code in budget.requirements}:
        yield f"{budget.id} no longer serves {parent.id}"
    child = snapshot.find(Requirement, link.child)
    proposed = _limit(link.proposed)
    if child is not None and proposed is not None and not link.manual_reason:
        moved = limit_difference(proposed, child.limit)
        if moved:
            yield f"{child.id} carries {child.limit.text}, the budget gave {link.proposed}: {moved}"
    now = given.get(code_key(link.child))
    if now is not None and proposed is not None:
        moved = limit_difference(proposed, now)
        if moved:
            yield f"the budget gives {now.text} now: {moved}"


def _limit(text: str) -> Limit | None:
    if not text:
        return None
    try:
        return parse_limit(text)
    except ExpressionError:
        return None  # written by an older version; the revisions still tell
