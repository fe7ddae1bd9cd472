"""All documents of a project at one revision, with look-ups; and the arrays of its evidence, loaded when asked for."""

from __future__ import annotations

import re
from collections import defaultdict
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from functools import cached_property, lru_cache
from typing import TypeVar, cast

from specflow.model.base import Document, code_key
from specflow.model.block import Block, Item
from specflow.model.budget_standing import BudgetStanding
from specflow.model.evidence import EvidenceColumns, EvidenceTable
from specflow.model.nouns import NOUN_BY_DOCUMENT
from specflow.model.project import Project
from specflow.model.requirement import Activity, Requirement
from specflow.model.verdict import RequirementStatus

D = TypeVar("D", bound=Document)
_RUNS = re.compile(r"\d+|\D+")

ColumnsLoader = Callable[[Sequence[str]], Mapping[str, EvidenceColumns]]


def _no_columns(tables: Sequence[str]) -> Mapping[str, EvidenceColumns]:
    if tables:
        raise KeyError(tables[0])
    return {}


@dataclass(frozen=True)
class Snapshot:
    """Everything that is stored, at one project revision, frozen.

    ``documents`` maps noun → code key → document. ``load_columns`` fetches the arrays of evidence tables by id.
    ``removed`` maps noun → the code keys of what was removed: those ids are never used again.
    """

    revision: int
    documents: Mapping[str, Mapping[str, Document]]
    load_columns: ColumnsLoader = _no_columns
    removed: Mapping[str, frozenset[str]] = field(default_factory=dict)

    def all(self, kind: type[D]) -> Sequence[D]:
        """Return all documents of one class, in the order of their codes as people read them."""
        return cast("Sequence[D]", self._ordered.get(NOUN_BY_DOCUMENT[kind].name, ()))

    def find(self, kind: type[D], code: str | None) -> D | None:
        """Return one document by its code (case does not matter), or None."""
        if code is None:
            return None
        found = self.documents.get(NOUN_BY_DOCUMENT[kind].name, {}).get(code_key(code))
        return cast("D | None", found)

    @cached_property
    def _ordered(self) -> Mapping[str, Sequence[Document]]:
        return {
            noun: [documents[key] for key in sorted(documents, key=reading_order)]
            for noun, documents in self.documents.items()
        }

    @property
    def project(self) -> Project:
        """The project document."""
        return self.all(Project)[0]

    @property
    def requirements(self) -> Sequence[Requirement]:
        """All requirements."""
        return self.all(Requirement)

    @property
    def blocks(self) -> Sequence[Block]:
        """All blocks."""
        return self.all(Block)

    @property
    def items(self) -> Sequence[Item]:
        """All items."""
        return self.all(Item)

    @property
    def tables(self) -> Sequence[EvidenceTable]:
        """All evidence tables (without their arrays)."""
        return self.all(EvidenceTable)

    @cached_property
    def activities_of(self) -> Mapping[str, Sequence[Activity]]:
        """Activities by requirement key."""
        return _grouped(self.all(Activity), lambda activity: (activity.requirement,))

    @cached_property
    def children_of(self) -> Mapping[str, Sequence[Requirement]]:
        """Child requirements by parent key."""
        return _grouped(self.requirements, lambda requirement: requirement.parents)

    @cached_property
    def requirements_of_block(self) -> Mapping[str, Sequence[Requirement]]:
        """Requirements by block key."""
        return _grouped(self.requirements, lambda requirement: (requirement.block,))

    @cached_property
    def tables_of_block(self) -> Mapping[str, Sequence[EvidenceTable]]:
        """Evidence tables by block key."""
        return _grouped(self.tables, lambda table: (table.block,))

    @cached_property
    def blocks_below(self) -> Mapping[str, Sequence[Block]]:
        """Child blocks by parent block key; roots under ""."""
        return _grouped(self.blocks, lambda block: (block.parent or "",))

    @cached_property
    def items_by_name(self) -> Mapping[str, Item]:
        """Items by id key and by serial key: sheets name either. A serial that two items share is left out."""
        named: dict[str, Item] = {}
        seen: dict[str, int] = defaultdict(int)
        for item in self.items:
            seen[code_key(item.serial)] += 1
            named[code_key(item.serial)] = item
        named = {key: item for key, item in named.items() if seen[key] == 1}
        return named | {code_key(item.id): item for item in self.items}


def reading_order(code: str) -> tuple[tuple[int, int, str], ...]:
    """Return the sort key under which ``R-2`` comes before ``R-10``."""
    return tuple(map(_run_key, _RUNS.findall(code)))


@lru_cache(maxsize=1 << 14)  # codes are made of few words and many numbers, which come again in every noun
def _run_key(run: str) -> tuple[int, int, str]:
    return (0, int(run), "") if run[0].isdecimal() else (1, 0, run)


def _grouped(documents: Iterable[D], keys: Callable[[D], Iterable[str]]) -> Mapping[str, Sequence[D]]:
    groups: dict[str, list[D]] = defaultdict(list)
    for document in documents:
        for key in keys(document):
            groups[code_key(key)].append(document)
    return dict(groups)


@dataclass(frozen=True)
class Results:
    """What is computed from a snapshot: the status of every requirement, by its key, and points in words.

    ``as_of`` is the date of judgement (ISO), an explicit input; ``unmatched`` are tables that serve no requirement.
    ``budgets`` holds what was found of budgets that are allocated, by their key. ``outdated`` are derived tables, by
    key, that do not stand any more on what they were made from, with the reason.
    """

    as_of: str
    statuses: Mapping[str, RequirementStatus] = field(default_factory=dict)
    unmatched: Mapping[str, str] = field(default_factory=dict)
    budgets: Mapping[str, BudgetStanding] = field(default_factory=dict)
    outdated: Mapping[str, str] = field(default_factory=dict)

    def of(self, requirement: str) -> RequirementStatus:
        """Return the status of one requirement; KeyError when it was not computed."""
        return self.statuses[code_key(requirement)]
