"""What the recorded evidence says of the lines of a budget, as plain arrays for the places where it is evaluated."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import date

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain, ReadLine
from specflow.budgets.knowledge import Knowledge, Rank
from specflow.conditions import Points, compile_points, match, unmap_columns
from specflow.errors import ConditionsError, ExpressionError, UnitError
from specflow.limits import evaluate_condition, parse_condition
from specflow.model.base import code_key
from specflow.model.block import HardwareType
from specflow.model.columns import Columns
from specflow.model.conditions import ConditionMap, ConditionsSet
from specflow.model.evidence import EvidenceColumns, EvidenceFile, EvidenceTable, FileKind, ValueColumn
from specflow.model.requirement import Method, Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.units import convert, converter, parse_unit, tolerance_unit
from specflow.verification.map_choice import MapChoice
from specflow.verification.standing import ACCEPTED, StandingRegister

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]
#: What the model of a recorded budget result is called: such evidence is a composite of what is known of the parts.
COMPOSITE_MODEL = "budget "
_REPRESENTATIVE = (HardwareType.QUALIFICATION, HardwareType.PRODUCTION)
_OBSERVED = (Method.TEST, Method.DEMONSTRATION)
_LOSSES = ("insertion_loss", "conversion_loss", "attenuation")


@dataclass(frozen=True, slots=True)
class Gathered:
    """Readings of lines, and why others were left out."""

    knowledge: tuple[Knowledge, ...]
    tables: tuple[str, ...]
    notes: tuple[str, ...]


def gather_knowledge(
    chain: Chain,
    snapshot: Snapshot,
    dictionary: Dictionary,
    children: Sequence[Requirement],
    as_of: date,
) -> Gathered:
    """Return all accepted readings of the lines of a budget, as of a date.

    A reading serves a place where its conditions meet those that the requirement on the block states (else those of the
    budget); stale, provisional, superseded and withdrawn rows are left out and said.
    """
    reader = _Reader(chain, snapshot, dictionary, children, as_of)
    found: list[Knowledge] = []
    tables: dict[str, None] = {}
    for read in chain.lines:
        for table, column in reader.columns_of(read):
            knowledge = reader.knowledge(read, table, column)
            if knowledge is not None and len(knowledge.place):
                found.append(knowledge)
                tables[table.id] = None
    return Gathered(tuple(_joined(found)), tuple(tables), tuple(dict.fromkeys(reader.notes)))


class _Reader:
    """Reads evidence tables, each once."""

    def __init__(
        self,
        chain: Chain,
        snapshot: Snapshot,
        dictionary: Dictionary,
        children: Sequence[Requirement],
        as_of: date,
    ) -> None:
        self.chain = chain
        self.snapshot = snapshot
        self.dictionary = dictionary
        self.children = children
        self.register = StandingRegister.of(snapshot, as_of)
        self.choice = MapChoice.of(snapshot)
        self.files = {code_key(one.id): one for one in snapshot.all(EvidenceFile)}
        self.loaded: dict[str, EvidenceColumns] = {}
        self.notes: list[str] = []

    def columns_of(self, read: ReadLine) -> Iterator[tuple[EvidenceTable, ValueColumn]]:
        """Yield the value columns that record the parameter of a line on its block."""
        for table in self.snapshot.tables_of_block.get(code_key(read.line.block), ()):
            for column in table.values:
                if not _records(column, read):
                    continue
                unlike = self._unlike(read, column)
                if unlike:
                    self.notes.append(f"{table.id} {column.name} is left out: another {unlike} than required")
                else:
                    yield table, column

    def _unlike(self, read: ReadLine, column: ValueColumn) -> str:
        """Name what the requirement on the block and the column both state, and differently."""
        child = self._child(read)
        if child is None:
            return ""
        for part in ("plane", "statistic", "polarisation"):
            wanted, found = getattr(child.quantity, part), getattr(column.quantity, part)
            if wanted and found and code_key(wanted) != code_key(found):
                return part
        return ""

    def load(self, table: EvidenceTable) -> EvidenceColumns:
        """Return the arrays of a table, fetched once."""
        key = code_key(table.id)
        if key not in self.loaded:
            self.loaded[key] = next(iter(self.snapshot.load_columns([table.id]).values()))
        return self.loaded[key]

    def knowledge(self, read: ReadLine, table: EvidenceTable, column: ValueColumn) -> Knowledge | None:
        """Return what one column says of a line."""
        arrays = self.load(table)
        values = self._values(read, table, column, arrays)
        if values is None:
            return None
        value, u, usable = values
        usable &= self._accepted(table, column, arrays)
        places, rows = self._served(read, table, arrays.conditions)
        kept = usable[rows]
        places, rows = places[kept], rows[kept]
        items, codes = self._items(arrays)
        ranks = self._ranks(table, arrays, items)
        return Knowledge(
            read.line.position,
            read.line.parameter,
            places,
            value[rows],
            u[rows],
            ranks[codes[rows]] if table.method in _OBSERVED else self._design_ranks(table, arrays)[rows],
            codes[rows],
            items,
            np.zeros(len(rows), np.intp),
            (f"{table.id} {column.name}",),
        )

    def _values(
        self, read: ReadLine, table: EvidenceTable, column: ValueColumn, arrays: EvidenceColumns
    ) -> tuple[Floats, Floats, NDArray[np.bool_]] | None:
        recorded = arrays.values[column.name]
        parameter = self.dictionary.get(column.quantity.parameter)
        factor = parameter.log_factor if parameter is not None else None
        source, target = parse_unit(column.unit or "1"), parse_unit(read.line.unit)
        try:
            step = converter(source, target, log_factor=factor)
            middle = (recorded.low + recorded.high) / 2.0
            usable = np.isfinite(middle)
            value = step(np.where(usable, middle, 1.0)) * _sign(column, read)
            u = self._spread(recorded.u, source, target, middle)
        except UnitError as error:
            self.notes.append(f"{table.id} {column.name} is left out: {error.message}")
            return None
        if not usable.all():
            self.notes.append(
                f"{table.id} {column.name}: {int(np.count_nonzero(~usable))} rows without a finite value are left out"
            )
        return np.asarray(value), u, usable

    def _spread(self, u: Floats | None, source: object, target: object, middle: Floats) -> Floats:
        if u is None:
            return np.full(len(middle), np.nan)
        first, second = tolerance_unit(source), tolerance_unit(target)  # type: ignore[arg-type]
        return np.asarray(convert(u, first, second, difference=True), np.float64)

    def _accepted(
        self, table: EvidenceTable, column: ValueColumn, arrays: EvidenceColumns
    ) -> NDArray[np.bool_]:
        standing = self.register.standing(table, column.quantity.parameter, arrays.items, arrays.dates)
        self.notes += [f"left out: {reason}" for reason in standing.reasons]
        return np.asarray(standing.codes == ACCEPTED)

    def _items(self, arrays: EvidenceColumns) -> tuple[tuple[str, ...], Rows]:
        known = self.snapshot.items_by_name
        names = [
            found.id if (found := known.get(code_key(label))) is not None else label
            for label in arrays.items.labels
        ]
        codes = np.where(arrays.items.codes < 0, len(names), arrays.items.codes)
        return (*names, ""), codes.astype(np.intp)

    def _ranks(self, table: EvidenceTable, arrays: EvidenceColumns, items: Sequence[str]) -> Rows:
        """Return the rank of a test on each item."""
        known = self.snapshot.items_by_name
        found = []
        for name in items:
            item = known.get(code_key(name)) if name else None
            is_good = item is not None and item.hardware_type in _REPRESENTATIVE
            found.append(int(Rank.TEST if is_good else Rank.EARLIER_TEST))
        return np.array(found, np.intp)

    def _design_ranks(self, table: EvidenceTable, arrays: EvidenceColumns) -> Rows:
        """Return the rank of each row of what is not a test."""
        file = self.files.get(code_key(table.file))
        if file is not None and file.kind is FileKind.DATASHEET:
            return np.full(table.rows, int(Rank.DATASHEET))
        if table.method is Method.SIMILARITY:
            return np.full(table.rows, int(Rank.SIMILARITY))
        if table.method is not Method.ANALYSIS:
            return np.full(table.rows, int(Rank.ESTIMATE))
        if table.simulation_model.startswith(COMPOSITE_MODEL):
            return np.full(table.rows, int(Rank.COMPOSITE))
        inside = _validated(table.simulation_validated, arrays.conditions)
        return np.where(inside, int(Rank.VALIDATED_ANALYSIS), int(Rank.ANALYSIS)).astype(np.intp)

    def _served(self, read: ReadLine, table: EvidenceTable, recorded: Columns) -> tuple[Rows, Rows]:
        """Return pairs of place and row: which reading serves which place of evaluation."""
        child = self._child(read)
        own = self.snapshot.find(ConditionsSet, child.conditions) if child is not None else None
        of_budget = self.chain.required.points
        size = self.chain.size
        if child is not None and own is None and child.conditions is None:
            return _everywhere(size, recorded.size)
        if own is not None and (of_budget is None or code_key(own.id) != code_key(of_budget.conditions.id)):
            assert child is not None
            points = compile_points(own)
            records = self._unmapped(self.choice.of_requirement(child), recorded, table)
            places = self.chain.own[read.row]
            found = match(points, places)
            if not len(found.record):
                found = match(points, self.chain.required.columns)
            return _paired(points, found.record, found.point, records, self.chain.own[read.row])
        if of_budget is None:
            return _everywhere(size, recorded.size)
        records = self._unmapped(self._map_of(read), recorded, table)
        every = np.arange(size, dtype=np.int32)
        return _paired(of_budget, every, self.chain.required.point, records, self.chain.required.columns)

    def _child(self, read: ReadLine) -> Requirement | None:
        for child in self.children:
            same = code_key(child.block) == code_key(read.line.block)
            if same and code_key(child.quantity.parameter) == code_key(read.line.parameter):
                return child
        return None

    def _map_of(self, read: ReadLine) -> ConditionMap | None:
        position = self.chain.positions[read.row]
        if position.condition_map is not None:
            return self.snapshot.find(ConditionMap, position.condition_map)
        return self.choice.full.get(code_key(position.block))

    def _unmapped(
        self, condition_map: ConditionMap | None, recorded: Columns, table: EvidenceTable
    ) -> Columns:
        if condition_map is None:
            return recorded
        try:
            return unmap_columns(condition_map, recorded)
        except ConditionsError as error:
            self.notes.append(f"{table.id}: its conditions cannot be taken to the system's: {error.message}")
            return recorded


def _records(column: ValueColumn, read: ReadLine) -> bool:
    """Whether a column records what a line states: the same parameter, or a gain where it states a loss."""
    found, wanted = code_key(column.quantity.parameter), code_key(read.line.parameter)
    return found == wanted or _sign(column, read) < 0


def _sign(column: ValueColumn, read: ReadLine) -> float:
    """Return -1 for a gain recorded of what a line states as a loss (or the other way), in dB; else 1."""
    found, wanted = code_key(column.quantity.parameter), code_key(read.line.parameter)
    turned = (found == "gain" and wanted in _LOSSES) or (wanted == "gain" and found in _LOSSES)
    return -1.0 if turned and parse_unit(column.unit or "1").is_log else 1.0


def _everywhere(places: int, rows: int) -> tuple[Rows, Rows]:
    return np.repeat(np.arange(places), rows), np.tile(np.arange(rows), places)


def _paired(
    points: Points,
    place: NDArray[np.int32],
    point: NDArray[np.int32] | Rows,
    records: Columns,
    columns: Columns,
) -> tuple[Rows, Rows]:
    """Join places and rows that serve the same required point; along a range, each place with its nearest rows."""
    found = match(points, records)
    if found.along is None:
        order = np.argsort(point, kind="stable")
        ordered = np.asarray(point)[order]
        first = np.searchsorted(ordered, found.point, side="left")
        count = np.searchsorted(ordered, found.point, side="right") - first
        rows = np.repeat(found.record, count)
        start = np.repeat(first - np.cumsum(count) + count, count)
        return np.asarray(place)[order[start + np.arange(len(rows))]].astype(np.intp), rows.astype(np.intp)
    return _along(points, place, np.asarray(point), found.record, found.point, found.along, columns)


def _along(
    points: Points,
    place: NDArray[np.int32],
    point: NDArray[np.int32],
    record: NDArray[np.int32],
    served: NDArray[np.int32],
    along: Floats,
    columns: Columns,
) -> tuple[Rows, Rows]:
    """Give each place of a range the rows that are nearest to it along the range, within the step that is required."""
    name = points.range_dimension
    step = points.step.get(name, np.inf)
    at = columns.numeric[name]
    places: list[int] = []
    rows: list[int] = []
    for one, here in zip(place.tolist(), point.tolist(), strict=True):
        mine = np.flatnonzero(served == here)
        if not len(mine):
            continue
        gap = np.abs(along[mine] - at[one])
        least = float(gap.min())
        if least <= step:
            near = record[mine[gap <= least + 1e-9 * max(1.0, abs(float(at[one])))]]
            places += [one] * len(near)
            rows += near.tolist()
    return np.array(places, np.intp), np.array(rows, np.intp)


def _validated(text: str, conditions: Columns) -> NDArray[np.bool_]:
    """Return for which rows the model is validated; a text that is no condition says: for what the table holds."""
    if not text.strip():
        return np.zeros(conditions.size, bool)
    try:
        holds, known = evaluate_condition(parse_condition(text), conditions)
    except ExpressionError:
        return np.ones(conditions.size, bool)
    return np.broadcast_to(holds & known, (conditions.size,))


def _joined(parts: Sequence[Knowledge]) -> Iterator[Knowledge]:
    """Join what several tables say of one line, so that specimens of all of them count together."""
    groups: dict[tuple[int, str], list[Knowledge]] = {}
    for part in parts:
        groups.setdefault((part.position, code_key(part.parameter)), []).append(part)
    for group in groups.values():
        yield group[0] if len(group) == 1 else _one(group)


def _one(group: Sequence[Knowledge]) -> Knowledge:
    items: dict[str, int] = {}
    item = [
        np.array([items.setdefault(name, len(items)) for name in one.items], np.intp)[one.item]
        for one in group
    ]
    source = [np.full(len(one.place), number, np.intp) for number, one in enumerate(group)]
    return Knowledge(
        group[0].position,
        group[0].parameter,
        np.concatenate([one.place for one in group]),
        np.concatenate([one.value for one in group]),
        np.concatenate([one.u for one in group]),
        np.concatenate([one.rank for one in group]),
        np.concatenate(item),
        tuple(items),
        np.concatenate(source),
        tuple(one.sources[0] for one in group),
    )
