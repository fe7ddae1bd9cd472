"""Alternatives on different quantities: each member as a limit of its own, and what the outcomes come to together."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import reduce

import numpy as np

from specflow.limits.inputs import Flags
from specflow.limits.tree import tree_units, undefined_in
from specflow.model.limit import Alternatives, Gate, Limit, LimitNode, LimitState, OfQuantity, Stringency


@dataclass(frozen=True, slots=True)
class Alternative:
    """One member: the quantity it bounds by parameter name ("" is the requirement's own) and its limit."""

    quantity: str
    limit: Limit


def alternatives(limit: Limit) -> tuple[Alternative, ...]:
    """Return the members of a limit with alternatives, gates put on each; the limit itself when it has none."""
    return tuple(_member(limit, node, quantity) for quantity, node in _parts(limit.tree))


def _parts(node: LimitNode) -> list[tuple[str, LimitNode]]:
    match node:
        case Alternatives(members=members):
            return [_named(member) for member in members]
        case Gate(when=when, limit=Alternatives() as inner):
            return [(quantity, Gate(when=when, limit=part)) for quantity, part in _parts(inner)]
    return [_named(node)]


def _named(node: LimitNode) -> tuple[str, LimitNode]:
    return (node.quantity, node.limit) if isinstance(node, OfQuantity) else ("", node)


def _member(limit: Limit, node: LimitNode, quantity: str) -> Alternative:
    # Few limits have alternatives, and writing a tree as text takes long to load.
    from specflow.limits.text import node_text

    units = tree_units(node)
    state = LimitState.TBD if undefined_in(node) else limit.state
    alone = limit.model_copy(
        update={
            "text": node_text(node),
            "tree": node,
            "unit": units[0] if len(units) == 1 else "",
            "state": state,
        }
    )
    return Alternative(quantity, alone)


def rule_of(limit: Limit) -> Stringency | None:
    """Return which member governs, None for a limit without alternatives."""
    tree = limit.tree.limit if isinstance(limit.tree, Gate) else limit.tree
    return tree.rule if isinstance(tree, Alternatives) else None


def choose(limit: Limit, passed: Sequence[Flags]) -> Flags:
    """Return where the limit as a whole is met, from where each member is: the looser needs one, the stricter all."""
    if rule_of(limit) is Stringency.LOOSER:
        return np.asarray(reduce(np.logical_or, passed))
    return np.asarray(reduce(np.logical_and, passed))
