"""The workspace of one evaluation: what many requirements share, looked up or computed once.

Points of a conditions set, matching of a set with the rows of tables, arrays and standing of tables, declared values.
Nothing here outlives the evaluation.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from datetime import date
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from specflow.conditions.expand import expand
from specflow.conditions.match import Matching, match
from specflow.conditions.points import Points
from specflow.conditions.spans import speaking
from specflow.errors import ConditionsError, UnitError
from specflow.limits import LimitContext, evaluate_limit
from specflow.model.base import code_key
from specflow.model.block import Block, HardwareType, Item
from specflow.model.columns import Columns, TextColumn
from specflow.model.conditions import ConditionMap, ConditionsSet
from specflow.model.declared import DeclaredValue
from specflow.model.evidence import EvidenceColumns, EvidenceFile, EvidenceTable, FileKind, ItemChange
from specflow.model.project import Policy
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import Mismatch
from specflow.parameters import Dictionary
from specflow.parameters.relations import related_to
from specflow.statistics.decision import AcceptanceInterval
from specflow.units import Quantity, parse_unit
from specflow.verification.changed import changes_below
from specflow.verification.comparable import IDENTITY, Fit, Wanted, fit
from specflow.verification.limit_inputs import is_plain
from specflow.verification.map_choice import MapChoice
from specflow.verification.peak_lists import scanned
from specflow.verification.records import Held, Records, SourceColumn, gather, no_records
from specflow.verification.residuals import Residuals
from specflow.verification.stacking import stack
from specflow.verification.standing import RowStanding, StandingRegister

#: The one point of a requirement without a conditions set: every record serves it.
NOWHERE = ConditionsSet(id="(no conditions)")


@dataclass(frozen=True, slots=True)
class Matched:
    """A matching with its pairs ready to be used as indices."""

    matching: Matching
    record: NDArray[np.intp]
    point: NDArray[np.intp]


@dataclass
class Workspace:
    """Shared look-ups and memos of one evaluation. ``served``: ids of tables that serve a required point."""

    snapshot: Snapshot
    dictionary: Dictionary
    as_of: date
    served: set[str] = field(default_factory=set)
    _points: dict[str, Points] = field(default_factory=dict)
    _matchings: dict[tuple[int, int], tuple[Points, Columns, Matched]] = field(default_factory=dict)
    _stacks: dict[tuple[str, ...], Columns] = field(default_factory=dict)
    _mapped: dict[tuple[int, int], tuple[ConditionMap, Columns, Columns]] = field(default_factory=dict)
    _records: dict[tuple[str, tuple[object, ...], str], Records] = field(default_factory=dict)
    _items: dict[str, tuple[NDArray[np.intp], tuple[str, ...]]] = field(default_factory=dict)
    _standings: dict[tuple[str, str], RowStanding] = field(default_factory=dict)
    _columns: dict[str, EvidenceColumns] = field(default_factory=dict)

    @cached_property
    def policy(self) -> Policy:
        """The rules of the house."""
        return self.snapshot.project.policy

    @cached_property
    def register(self) -> StandingRegister:
        """What people recorded about the standing of evidence."""
        return StandingRegister.of(self.snapshot, self.as_of)

    @cached_property
    def changes_below(self) -> Mapping[str, Sequence[ItemChange]]:
        """What changed below a block, by its key."""
        return changes_below(self.snapshot, self.as_of)

    @cached_property
    def declared(self) -> Mapping[str, Quantity]:
        """Declared values by name, for limits and applicability."""
        found: dict[str, Quantity] = {}
        for value in self.snapshot.all(DeclaredValue):
            try:
                found[value.name] = Quantity(value.value, parse_unit(value.unit or "1"))
            except UnitError:
                continue  # the name stays undeclared, and the limit says so
        return found

    @cached_property
    def sources(self) -> Mapping[tuple[str, str], Sequence[SourceColumn]]:
        """All value columns, by block and parameter."""
        found: dict[tuple[str, str], list[SourceColumn]] = defaultdict(list)
        for table in self.snapshot.tables:
            for place, column in enumerate(table.values):
                key = code_key(table.block), code_key(column.quantity.parameter)
                found[key].append(SourceColumn(table, column, place))
        return dict(found)

    def sources_for(self, block: str, parameter: str) -> Sequence[SourceColumn]:
        """Return the value columns of a parameter of a block, then those of parameters that tell it by a relation."""
        of_block, own = code_key(block), code_key(parameter)
        found = self.sources.get((of_block, own), ())
        related = [one for key in related_to(own) for one in self.sources.get((of_block, key), ())]
        return [*found, *related] if related else found

    @cached_property
    def datasheets(self) -> frozenset[str]:
        """Keys of the files whose figures are a maker's, not a reading of a specimen."""
        files = self.snapshot.all(EvidenceFile)
        return frozenset(code_key(file.id) for file in files if file.kind is FileKind.DATASHEET)

    def fetch(self, requirements: Iterable[Requirement]) -> None:
        """Load the arrays of all tables that may serve these requirements, in one go."""
        tables: dict[str, None] = {}
        for requirement in requirements:
            sources = self.sources_for(requirement.block, requirement.quantity.parameter)
            tables.update(dict.fromkeys(source.table.id for source in sources))
        wanted = [table for table in tables if table not in self._columns]
        if wanted:
            self._load(wanted)

    def columns(self, table: str) -> EvidenceColumns:
        """Return the arrays of one table."""
        if table not in self._columns:
            self._load([table])
        return self._columns[table]

    def _load(self, tables: Sequence[str]) -> None:
        """Load arrays; rows of a table derived over a range speak for that range, floors of a list for their scans."""
        loaded = dict(self.snapshot.load_columns(tables))
        for code in tables:
            table = self.snapshot.find(EvidenceTable, code)
            if table is not None and table.covers:
                loaded[code] = speaking(table.covers, loaded[code])
            if table is not None and table.peaks is not None:
                loaded[code] = scanned(table.peaks, loaded[code])
        self._columns.update(loaded)

    def item(self, name: str) -> Item | None:
        """Return a registered item by its id or serial."""
        return self.snapshot.items_by_name.get(code_key(name))

    def hardware_type(self, name: str) -> HardwareType:
        """Return how representative an item is; one that is not registered is taken as the default of an item."""
        item = self.item(name)
        return HardwareType.ENGINEERING if item is None else item.hardware_type

    def points(self, requirement: Requirement) -> Points:
        """Return the required points; ConditionsError when the set is unknown or cannot be expanded."""
        key = code_key(requirement.conditions or "")
        found = self._points.get(key)
        if found is None:
            found = self._points[key] = expand(self._conditions_set(requirement))
        return found

    def _conditions_set(self, requirement: Requirement) -> ConditionsSet:
        if requirement.conditions is None:
            return NOWHERE
        conditions = self.snapshot.find(ConditionsSet, requirement.conditions)
        if conditions is None:
            raise ConditionsError(
                f"the conditions set {requirement.conditions} is not in the project",
                where=requirement.id,
                hint="load it, or name another one",
            )
        return conditions

    def matching(self, points: Points, conditions: Columns) -> Matched:
        """Return which record serves which point; shared by all quantities recorded in the same rows."""
        key = id(points), id(conditions)
        known = self._matchings.get(key)
        if known is None:
            found = match(points, conditions)
            matched = Matched(found, found.record.astype(np.intp), found.point.astype(np.intp))
            known = self._matchings[key] = points, conditions, matched
        return known[2]

    def conditions_of(self, requirement: Requirement, records: Records) -> Columns:
        """Return the conditions of the records in the terms of the requirement's set (see ``mapping``)."""
        how = self.mapping.of_requirement(requirement)
        if how is None:
            return records.conditions
        # Reading and solving maps takes long to load; few requirements are proved through one.
        from specflow.conditions.maps import unmap_columns

        key = id(how), id(records.conditions)
        known = self._mapped.get(key)
        if known is None:
            known = self._mapped[key] = how, records.conditions, unmap_columns(how, records.conditions)
        return known[2]

    @cached_property
    def mapping(self) -> MapChoice:
        """Which condition map takes the evidence of a requirement to the terms of its conditions set."""
        return MapChoice.of(self.snapshot)

    def records(self, requirement: Requirement, want: Wanted) -> Records:
        """Return the readings of a quantity of the requirement's block; what may not be compared apart.

        Tables recorded for this requirement before its plane, statistic, bandwidth or polarisation was changed are
        among them, as stale: their fails stay open until they are re-verified.
        """
        sources = self.sources_for(requirement.block, want.quantity.parameter)
        own = code_key(requirement.id) if requirement.revision > 1 else ""
        if own and not any(code_key(source.table.requirement or "") == own for source in sources):
            own = ""
        key = code_key(requirement.block), want.key, own
        found = self._records.get(key)
        if found is None:
            found = self._records[key] = self._gathered(requirement.block, want, sources, own)
        return found

    def _gathered(self, block_id: str, want: Wanted, sources: Sequence[SourceColumn], own: str) -> Records:
        held: list[Held] = []
        mismatches: list[Mismatch] = []
        aside: list[
            Mismatch
        ] = []  # of other parameters that are related: worth a word only where nothing serves
        for source in sources:
            found = self._fit(source, want, block_id)
            if not isinstance(found, Mismatch):
                held.append(self._held(source, found))
                continue
            (mismatches if source.is_of(want.quantity.parameter) else aside).append(found)
            if own and code_key(source.table.requirement or "") == own and found.kind in IDENTITY:
                before = self._fit(source, _of(source, want), block_id)
                if not isinstance(before, Mismatch):
                    reason = f"{source.table.id}: recorded for {source.table.requirement}, but {found.what}"
                    held.append(self._held(source, before, reason))
        if not held:
            return no_records([*mismatches, *aside])
        return gather(held, self._stack([one.source.table.id for one in held]), mismatches)

    def _fit(self, source: SourceColumn, want: Wanted, block_id: str) -> Fit | Mismatch:
        block, parameter = (
            self.snapshot.find(Block, block_id),
            self.dictionary.get(want.quantity.parameter),
        )
        return fit(source.table, source.column, want, block, parameter)

    def _held(self, source: SourceColumn, how: Fit, outdated: str = "") -> Held:
        columns = self.columns(source.table.id)
        codes, items = self._item_codes(source.table.id, columns.items)
        standing = self._standing(source, columns)
        arrays = self.residuals.bounded(source, columns)
        if outdated:
            standing = standing.outdated(outdated)
        return Held(source, how, arrays, columns.conditions, codes, items, standing)

    def misses_elsewhere(self, source: SourceColumn, requirement: Requirement) -> bool:
        """Whether a source fails a plain limit that it may not be held against because its identity differs."""
        limit, want = requirement.limit, Wanted(requirement.quantity, requirement.limit.unit)
        found = self._fit(source, want, requirement.block)
        if not isinstance(found, Mismatch) or found.kind not in IDENTITY or not is_plain(limit):
            return False
        how = self._fit(source, _of(source, want), requirement.block)
        if isinstance(how, Mismatch):
            return False
        try:
            values = how.apply(self.columns(source.table.id).values[source.column.name])
        except UnitError:
            return False
        bounds = evaluate_limit(limit, LimitContext(Columns(1)))
        return bool(AcceptanceInterval(bounds.lower, bounds.upper).missed(values.low, values.high).any())

    @cached_property
    def residuals(self) -> Residuals:
        """What instruments show with nothing connected, by set-up."""
        return Residuals.of(self.snapshot, self.dictionary)

    def _stack(self, tables: Sequence[str]) -> Columns:
        key = tuple(tables)
        found = self._stacks.get(key)
        if found is None:
            found = self._stacks[key] = stack([self.columns(table).conditions for table in tables])
        return found

    def _item_codes(self, table: str, names: TextColumn) -> tuple[NDArray[np.intp], tuple[str, ...]]:
        """Return the item of each row as codes into item ids; serials and ids are one, "" is no item named."""
        found = self._items.get(table)
        if found is None:
            found = self._items[table] = _coded(names, lambda name: getattr(self.item(name), "id", name))
        return found

    def _standing(self, source: SourceColumn, columns: EvidenceColumns) -> RowStanding:
        changed = code_key(source.table.block) in self.register.changes
        key = source.table.id, code_key(source.column.quantity.parameter) if changed else ""
        found = self._standings.get(key)
        if found is None:
            found = self.register.standing(
                source.table, source.column.quantity.parameter, columns.items, columns.dates
            )
            self._standings[key] = found
        return found


def _of(source: SourceColumn, want: Wanted) -> Wanted:
    """Return what is wanted with the plane, statistic, bandwidth and polarisation that the source has."""
    recorded = source.column.quantity
    return replace(want, quantity=recorded.model_copy(update={"parameter": want.quantity.parameter}))


def _coded(names: TextColumn, identify: Callable[[str], str]) -> tuple[NDArray[np.intp], tuple[str, ...]]:
    """Return codes into item names; spellings that differ in case only are one item, the first is shown."""
    ids: dict[str, tuple[int, str]] = {}
    found = [identify(label) for label in names.labels]
    places = [ids.setdefault(code_key(name), (len(ids), name))[0] for name in found]
    nobody = 0
    if np.count_nonzero(names.codes < 0) or not places:
        nobody = ids.setdefault("", (len(ids), ""))[0]
    return np.array([*places, nobody], np.intp).take(names.codes), tuple([name for _, name in ids.values()])
