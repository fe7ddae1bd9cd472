"""Whose values they are: the block, and the items."""

from __future__ import annotations

import re
from collections.abc import Sequence
from difflib import get_close_matches

from specflow.importers.measured.context import Context
from specflow.importers.measured.result import Question
from specflow.importers.measured.stated import PERSON, Said, Stated
from specflow.importers.measured.tables import FoundTable
from specflow.model.base import code_key
from specflow.model.block import Block
from specflow.model.columns import TextColumn
from specflow.model.requirement import Requirement

_LEADING_WORD = re.compile(r"^(?:s/?n|serial(?: (?:no|number)\.?)?|#)[\s:#.\-]*(?=\S*\d)", re.IGNORECASE)


def find_block(
    table: FoundTable, context: Context, stated: Stated, items: TextColumn
) -> tuple[Block | None, str, Question | None]:
    """Return (block, where that is from, question): as stated, else by items, requirement or sheet name."""
    snapshot = context.snapshot
    said = stated.text("block")
    if said:
        block = _named(said, snapshot.blocks)
        if block is not None:
            return block, stated.by("block"), None
        near = get_close_matches(said, [one.id for one in snapshot.blocks], n=3, cutoff=0.5)
        remedy = (
            f"nearest: {', '.join(near)}"
            if near
            else f"blocks: {', '.join(one.id for one in snapshot.blocks[:12])}"
        )
        return None, "", Question("block", "", f"there is no block {said!r} ({stated.by('block')})", remedy)
    by_items = {
        item.block
        for label in items.labels
        if (item := snapshot.items_by_name.get(code_key(label))) is not None
    }
    if len(by_items) == 1:
        return snapshot.find(Block, next(iter(by_items))), "the block of its items", None
    requirement = snapshot.find(Requirement, stated.text("requirement") or None)
    if requirement is not None:
        return snapshot.find(Block, requirement.block), f"the block of {requirement.id}", None
    block = _named(table.grid.name, snapshot.blocks)
    if block is not None and table.grid.name != table.grid.file:
        return block, "the name of the sheet", None
    what = "which block the values are of"
    if len(by_items) > 1:
        what = f"the items are of several blocks: {', '.join(sorted(by_items))}"
    return None, "", Question("block", "", what, '--state block=ID, or block = "ID" in a mapping')


def item_notes(items: TextColumn, context: Context, block: Block | None) -> list[str]:
    """Say which items the project does not know, with the nearest, and which belong to another block."""
    known = context.snapshot.items_by_name
    notes = []
    for label in items.labels:
        item = known.get(code_key(label))
        if item is None:
            names = [name for one in context.snapshot.items for name in (one.id, one.serial)]
            near = get_close_matches(label, names, n=3, cutoff=0.6)
            notes.append(
                f"the item {label!r} is not known to the project"
                + (f"; nearest: {', '.join(near)}" if near else "")
            )
        elif block is not None and code_key(item.block) != code_key(block.id):
            notes.append(f"the item {label!r} is of the block {item.block}, the table of {block.id}")
    return notes


def item_name(said: Sequence[Said], context: Context) -> str:
    """Return the item that lines like "DUT: SN 0007" mean: the first that the project knows, else a serial as written.

    The person's word stands, whether it is known or not.
    """
    known = context.snapshot.items_by_name
    for one in said:
        bare = _LEADING_WORD.sub("", one.text)
        for name in (one.text, bare, f"SN{bare}", f"SN-{bare}", f"SN {bare}"):
            if code_key(name) in known:
                return name
        if one.by == PERSON:
            return one.text
    sure = [one for one in said if not one.doubtful]
    serials = [one.text for one in sure if "s" in one.key.casefold()[:2]]
    return next(iter([*serials, *(one.text for one in sure)]), "")


def _named(name: str, blocks: Sequence[Block]) -> Block | None:
    key = code_key(name)
    by_id = next((block for block in blocks if code_key(block.id) == key), None)
    if by_id is not None:
        return by_id
    by_name = [block for block in blocks if code_key(block.name) == key]
    return by_name[0] if len(by_name) == 1 else None
