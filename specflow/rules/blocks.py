"""Rules about blocks."""

from __future__ import annotations

from collections.abc import Iterator

from specflow.model.base import code_key
from specflow.rules.base import Found
from specflow.rules.facts import Facts


def block_without_requirement(facts: Facts) -> Iterator[Found]:
    """A block has no requirement.

    Why: its maker is told nothing, and the budget counts on something that nobody promised.
    Fails: the mixer is in the tree and no requirement is on it.
    Passes: one requirement at least is on it.
    Do: allocate to it, or take it out of the tree.
    """
    for block in facts.snapshot.blocks:
        if not facts.snapshot.requirements_of_block.get(code_key(block.id)):
            yield Found(block.id, "no requirement is on this block", origin=block.origin)
