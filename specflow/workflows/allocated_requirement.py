"""The requirement that a share becomes: its limit, what it is on, its id."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from specflow.budgets.allotment import Allotment
from specflow.budgets.probe import Probe
from specflow.errors import DocumentError
from specflow.limits import LimitContext, evaluate_limit, parse_limit
from specflow.model.base import code_key
from specflow.model.block import Block
from specflow.model.limit import Limit
from specflow.model.requirement import Requirement, Source
from specflow.model.snapshot import Snapshot
from specflow.workflows.allocated_limit import limit_text_of
from specflow.workflows.allocated_quantity import quantity_of, sideband_words


def limit_of(one: Allotment, probe: Probe) -> Limit:
    """Return an allotment as a limit. DocumentError where the limit would say something else than the allotment."""
    limit = parse_limit(
        limit_text_of(one, probe.chain.required), parameter=probe.dictionary.get(one.parameter)
    )
    if one.at is not None:
        columns = probe.chain.required.columns
        found = evaluate_limit(limit, LimitContext(columns, {}, columns.size)).spread(columns.size)
        for side, told in zip(one.at, (found.lower, found.upper), strict=True):
            known = np.isfinite(side)
            if known.any() and (told is None or not np.allclose(told[known], side[known], rtol=0, atol=1e-9)):
                raise DocumentError(
                    f"the limit of {one.block} {one.parameter} by conditions cannot be written: {limit.text}",
                    hint="share without --by-conditions",
                )
    return limit


def new_child(one: Allotment, parents: Sequence[str], probe: Probe, title: str) -> Requirement:
    """Return the requirement that carries a share which no requirement carries yet."""
    snapshot, budget = probe.snapshot, probe.budget
    block = snapshot.find(Block, one.block)
    assert block is not None  # checked when the budget was read
    points = probe.chain.required.points
    quantity = quantity_of(one.key, probe, block)
    return Requirement(
        id=_free_id(snapshot, f"{block.id}-{one.parameter.upper().replace('_', '-')}"),
        title=f"{title}{sideband_words(one.key, probe)} of {block.name}",
        source=Source(document=f"Budget {budget.id}"),
        parents=tuple(parents),
        tier=block.tier,
        owner=block.owner,
        block=block.id,
        quantity=quantity,
        limit=limit_of(one, probe),
        conditions=points.conditions.id if points is not None else None,
        rationale=one.words,
    )


def _free_id(snapshot: Snapshot, stem: str) -> str:
    gone = snapshot.removed.get("requirement", frozenset())
    code, number = stem, 1
    while snapshot.find(Requirement, code) is not None or code_key(code) in gone:
        number += 1
        code = f"{stem}-{number}"
    return code
