"""Which condition map takes the evidence of a block to the terms of a conditions set.

Evidence of a block is stated in the block's own conditions. A set that a requirement on a block above uses too is in
system terms: there the block's map is undone in full. A set of the block's own is taken as it stands, except for
dimensions that only the system has (temperature_ambient, where the block knows temperature_baseplate).
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Mapping
from dataclasses import dataclass

from specflow.model.base import code_key
from specflow.model.block import Block
from specflow.model.conditions import ConditionMap
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot


@dataclass(frozen=True, slots=True)
class MapChoice:
    """Condition maps by block: ``full`` and ``added`` (entries whose target is not one of its sources).

    ``users`` are the blocks that use a conditions set, ``above`` the blocks above each block.
    """

    full: Mapping[str, ConditionMap]
    added: Mapping[str, ConditionMap | None]
    users: Mapping[str, frozenset[str]]
    above: Mapping[str, frozenset[str]]

    @classmethod
    def of(cls, snapshot: Snapshot) -> MapChoice:
        """Collect the maps of a snapshot."""
        maps = {code_key(one.block): one for one in snapshot.all(ConditionMap) if one.block is not None}
        if not maps:
            return cls({}, {}, {}, {})
        users: dict[str, set[str]] = defaultdict(set)
        for requirement in snapshot.requirements:
            users[code_key(requirement.conditions or "")].add(code_key(requirement.block))
        return cls(
            maps,
            {block: _without_own_sources(one) for block, one in maps.items()},
            {name: frozenset(blocks) for name, blocks in users.items()},
            {block: _above(snapshot, block) for block in maps},
        )

    def of_requirement(self, requirement: Requirement) -> ConditionMap | None:
        """Return the map whose inverse takes recorded conditions to the terms of the requirement's set."""
        block = code_key(requirement.block)
        if block not in self.full:
            return None
        users = self.users.get(code_key(requirement.conditions or ""), frozenset())
        return self.full[block] if users & self.above[block] else self.added[block]


def _without_own_sources(one: ConditionMap) -> ConditionMap | None:
    entries = tuple(
        entry for entry in one.entries if entry.target not in {term.dimension for term in entry.terms}
    )
    return one.model_copy(update={"entries": entries}) if entries else None


def _above(snapshot: Snapshot, block: str) -> frozenset[str]:
    above: set[str] = set()
    found = snapshot.find(Block, block)
    while found is not None and found.parent is not None and code_key(found.parent) not in above:
        above.add(code_key(found.parent))
        found = snapshot.find(Block, found.parent)
    return frozenset(above)
