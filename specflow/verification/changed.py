"""What a change record touches: the item or block that it names, and the items it was built into.

An item knows what it was built into. When a part changes, what it sits in is no longer what was measured: the evidence
of the host is stale, for the quantities that the record names (all, where it names none). A change of a block type
touches the hosts of all its items; where no item is known to sit in one, the blocks above it get a remark
and keep their evidence, because nobody said that what was measured contained the part. Procedures and models belong to
their own evidence and touch no host.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import date

from specflow.model.base import code_key
from specflow.model.block import Block, Item
from specflow.model.evidence import EvidenceTable, ItemChange
from specflow.model.snapshot import Snapshot

_OF_EVIDENCE = frozenset({"procedure", "model"})


@dataclass(frozen=True, slots=True)
class Touch:
    """A change as it touches the evidence of one block: of one item of it (by id), or all of it. ``part`` changed."""

    change: ItemChange
    item: str | None
    part: str = ""

    @property
    def words(self) -> str:
        """Say what changed, and when."""
        one = self.change
        inside = f" of {self.part}, which is built into {self.item}," if self.part else ""
        return f"{one.aspect}{inside} changed on {one.effective} ({one.id}: {one.description})"


def touched(snapshot: Snapshot, as_of: date) -> Mapping[str, Sequence[Touch]]:
    """Return the changes in effect on a day, by the key of the block whose evidence they touch."""
    found: dict[str, list[Touch]] = defaultdict(list)
    for change in _in_effect(snapshot, as_of):
        found[code_key(change.block)].append(Touch(change, change.item))
        if change.aspect in _OF_EVIDENCE:
            continue
        for part in _changed_items(change, snapshot):
            for host in _hosts(part, snapshot):
                found[code_key(host.block)].append(Touch(change, host.id, part.id))
    return dict(found)


def changes_below(snapshot: Snapshot, as_of: date) -> Mapping[str, Sequence[ItemChange]]:
    """Return the changes in effect on a day, by the key of each block above the one that changed."""
    found: dict[str, list[ItemChange]] = defaultdict(list)
    for change in _in_effect(snapshot, as_of):
        if change.aspect not in _OF_EVIDENCE:
            for key in _above(snapshot.find(Block, change.block), snapshot):
                found[key].append(change)
    return dict(found)


def remarks_on(tables: Sequence[EvidenceTable], changes: Sequence[ItemChange]) -> tuple[str, ...]:
    """Return what to say of evidence of a block when blocks below it have changed since it was taken."""
    return tuple(
        f"{change.block}, a part of {table.block}, changed on {change.effective} ({change.id}: {change.description}): "
        f"{table.id} was taken before, or on a day that is not known"
        for change in changes
        for table in tables
        if table.performed_on is None or table.performed_on < change.effective
    )


def _in_effect(snapshot: Snapshot, as_of: date) -> Iterator[ItemChange]:
    return (change for change in snapshot.all(ItemChange) if change.effective <= as_of)


def _changed_items(change: ItemChange, snapshot: Snapshot) -> Sequence[Item]:
    if change.item is None:
        return [item for item in snapshot.items if code_key(item.block) == code_key(change.block)]
    item = snapshot.items_by_name.get(code_key(change.item))
    return [] if item is None else [item]


def _hosts(item: Item, snapshot: Snapshot) -> Iterator[Item]:
    """Yield what an item was built into, and what that was built into."""
    seen = {code_key(item.id)}
    host = _host(item, snapshot)
    while host is not None and code_key(host.id) not in seen:
        seen.add(code_key(host.id))
        yield host
        host = _host(host, snapshot)


def _host(item: Item, snapshot: Snapshot) -> Item | None:
    return None if item.built_into is None else snapshot.items_by_name.get(code_key(item.built_into))


def _above(block: Block | None, snapshot: Snapshot) -> Iterator[str]:
    seen: set[str] = set()
    while block is not None and block.parent is not None and code_key(block.parent) not in seen:
        seen.add(code_key(block.parent))
        yield code_key(block.parent)
        block = snapshot.find(Block, block.parent)
