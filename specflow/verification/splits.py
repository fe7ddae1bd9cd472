"""Declared splits: a known shortfall on part of the scope. What fails outside that part is not declared.

The scope is a condition, as in waivers and applicability (``frequency >= 29 GHz``, ``item == LNA-2``); one that cannot
be read declares nothing, and that is said.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from specflow.errors import ExpressionError
from specflow.limits import parse_condition
from specflow.model.decision import DeclaredSplit
from specflow.verification.points import Failing, Fails, Flags


def declared(splits: Sequence[DeclaredSplit], failing: Failing) -> tuple[bool, tuple[str, ...]]:
    """Return whether all that fails lies within the declared scopes, and remarks on splits that do not help."""
    if not splits:
        return False, ()
    left = [flags.copy() for _, flags in failing]
    remarks: list[str] = []
    for split in splits:
        try:
            _take_off(split, failing, left)
        except ExpressionError as error:
            remarks.append(
                f"the split {split.id} declares {split.scope_not_met!r}, which is no condition that can be decided: "
                f"{error.message}"
            )
    beyond = sum(int(np.count_nonzero(flags)) for flags in left)
    if beyond:
        remarks.append(f"{beyond} failing point{'s' * (beyond != 1)} outside the declared split")
    return not beyond, tuple(remarks)


def _take_off(split: DeclaredSplit, failing: Failing, left: Sequence[Flags]) -> None:
    """Take the points off that fail only within the scope of a split."""
    scope = parse_condition(split.scope_not_met)

    def within(fails: Fails, item: str) -> Flags:
        return fails.bench.judging.holds(scope, fails.bench.readings, fails.pair)

    for (one, flags), rest in zip(failing, left, strict=True):
        rest &= ~one.where_fails(flags, within)
