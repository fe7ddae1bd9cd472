"""What the recorded evidence says of the lines of a budget, as plain arrays for the places where it is evaluated."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from datetime import date

import numpy as np
from numpy.typing import NDArray

from specflow.budgets.chain import Chain, ReadLine
from specflow.budgets.knowledge import Knowledge, Rank
from specflow.conditions import compile_points, match, unmap_columns
from specflow.errors import ConditionsError, ExpressionError, UnitError
from specflow.limits import evaluate_condition, parse_condition
from specflow.model.base import code_key
from specflow.model.block import HardwareType
from specflow.model.columns import Columns
from specflow.model.conditions import ConditionMap, ConditionsSet
from specflow.model.evidence import EvidenceColumns, EvidenceFile, EvidenceTable, FileKind, ValueColumn
from specflow.model.requirement import Method, Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import SIDEBAND_PLANES, Dictionary
from specflow.units import convert, converter, parse_unit, tolerance_unit
from specflow.verification.map_choice import MapChoice
from specflow.verification.standing import ACCEPTED, StandingRegister
from specflow.workflows.known_pairs import everywhere, paired
from specflow.workflows.known_routes import GainAt, Route, as_noise, route_of

Floats = NDArray[np.float64]
Rows = NDArray[np.intp]
#: What the model of a recorded budget result is called: such evidence is a composite of what is known of the parts.
COMPOSITE_MODEL = "budget "
_REPRESENTATIVE = (HardwareType.QUALIFICATION, HardwareType.PRODUCTION)
_OBSERVED = (Method.TEST, Method.DEMONSTRATION)


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
    # Gains first: intercepts recorded at the other port go through them.
    for read in sorted(chain.lines, key=lambda one: one.role.figure != "gain"):
        for knowledge, table in reader.of_line(read, tuple(_joined(found))):
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

    def of_line(
        self, read: ReadLine, known: Sequence[Knowledge]
    ) -> Iterator[tuple[Knowledge, EvidenceTable]]:
        """Yield what is recorded of a line; what comes by a detour only where nothing says it straight."""
        columns = list(self._columns_of(read))
        straight: set[int] = set()
        for is_direct in (True, False):
            for table, column, route in columns:
                if route.is_direct is not is_direct:
                    continue
                one = self.knowledge(read, table, column, route, known)
                if one is not None and not is_direct:
                    one = one.at(np.array([place not in straight for place in one.place.tolist()], bool))
                if one is not None and len(one.place):
                    yield one, table
                    straight |= set(one.place.tolist()) if is_direct else set()

    def _columns_of(self, read: ReadLine) -> Iterator[tuple[EvidenceTable, ValueColumn, Route]]:
        """Yield the value columns that record what a line states of its block, with the way there."""
        for table in self.snapshot.tables_of_block.get(code_key(read.line.block), ()):
            for column in table.values:
                route = route_of(column, read.line)
                if route is None:
                    continue
                unlike = self._unlike(read, column, route)
                if unlike:
                    self.notes.append(f"{table.id} {column.name} is left out: another {unlike} than required")
                    continue
                is_mixer = read.line.sideband and read.role.figure == "noise_figure"
                if is_mixer and column.quantity.plane not in SIDEBAND_PLANES:
                    self.notes.append(
                        f"{table.id} {column.name} does not say its sideband; it is taken as "
                        f"{read.line.sideband}, as the line states"
                    )
                yield table, column, route

    def _unlike(self, read: ReadLine, column: ValueColumn, route: Route) -> str:
        """Name what the line or the requirement on the block and the column both state, and differently."""
        own, line = column.quantity.plane, read.line.sideband
        if own in SIDEBAND_PLANES and own != {"": "SSB", "both": "DSB"}.get(line, line):
            return "sideband"
        child = self._child(read)
        for part in ("plane", "statistic", "polarisation"):
            if part == "plane" and (route.gain or own in SIDEBAND_PLANES):
                continue  # the other port is what the route is for; a sideband is no port
            wanted = getattr(read.line, part, "") or (
                getattr(child.quantity, part) if child is not None else ""
            )
            found = getattr(column.quantity, part)
            if part == "plane" and wanted in SIDEBAND_PLANES:
                continue
            if wanted and found and code_key(wanted) != code_key(found):
                return part
        return ""

    def load(self, table: EvidenceTable) -> EvidenceColumns:
        """Return the arrays of a table, fetched once."""
        key = code_key(table.id)
        if key not in self.loaded:
            self.loaded[key] = next(iter(self.snapshot.load_columns([table.id]).values()))
        return self.loaded[key]

    def knowledge(
        self,
        read: ReadLine,
        table: EvidenceTable,
        column: ValueColumn,
        route: Route,
        known: Sequence[Knowledge],
    ) -> Knowledge | None:
        """Return what one column says of a line; ``known`` is what is known of the gain that a route goes through."""
        arrays = self.load(table)
        values = self._values(read, table, column, arrays, route)
        if values is None:
            return None
        value, u, usable = values
        usable &= self._accepted(table, column, arrays)
        places, rows = self._served(read, table, arrays.conditions)
        kept = usable[rows]
        places, rows = places[kept], rows[kept]
        items, codes = self._items(arrays)
        ranks = self._ranks(table, arrays, items)
        found = Knowledge(
            read.line.position,
            read.line.parameter,
            places,
            value[rows],
            u[rows],
            ranks[codes[rows]] if table.method in _OBSERVED else self._design_ranks(table, arrays)[rows],
            codes[rows],
            items,
            np.zeros(len(rows), np.intp),
            (f"{table.id} {column.name}{f' {route.words}' if route.words else ''}",),
        )
        return self._through_gain(read, table, found, rows, route, known) if route.gain else found

    def _through_gain(
        self,
        read: ReadLine,
        table: EvidenceTable,
        found: Knowledge,
        rows: Rows,
        route: Route,
        known: Sequence[Knowledge],
    ) -> Knowledge | None:
        """Return levels recorded at the other port of a block, taken through its gain at the same point."""
        at = GainAt.of(self.chain, read.row, known)
        if at is None:
            self.notes.append(f"{found.sources[0]} is left out: the position has no gain to go through")
            return None
        gain, u, rank, words = at.at(found.place, [found.items[int(code)] for code in found.item])
        recorded = self._gain_beside(table)
        source = f"the gain of the block, {words}"
        if recorded is not None:
            beside = np.isfinite(recorded[0][rows])
            gain, u = np.where(beside, recorded[0][rows], gain), np.where(beside, recorded[1][rows], u)
            rank = np.where(beside, found.rank, rank)
            source = "the gain recorded beside it" if beside.all() else source
        back = converter(parse_unit("dBm"), parse_unit(read.line.unit))
        return replace(
            found,
            value=np.asarray(back(found.value + route.gain * gain + route.offset_db)),
            u=np.where(np.isnan(found.u), np.nan, np.hypot(found.u, np.nan_to_num(u))),
            rank=np.minimum(found.rank, rank),
            sources=(f"{found.sources[0]} ({source})",),
        )

    def _gain_beside(self, table: EvidenceTable) -> tuple[Floats, Floats] | None:
        """Return the gain in dB that a table records in the same rows, with its uncertainty; None where it does not."""
        for column in table.values:
            name = code_key(column.quantity.parameter)
            if name not in ("gain", "insertion_loss") or not parse_unit(column.unit or "1").is_log:
                continue
            recorded = self.load(table).values[column.name]
            sign = 1.0 if name == "gain" else -1.0
            u = np.zeros(len(recorded.low)) if recorded.u is None else recorded.u
            return sign * (recorded.low + recorded.high) / 2.0, u
        return None

    def _values(
        self,
        read: ReadLine,
        table: EvidenceTable,
        column: ValueColumn,
        arrays: EvidenceColumns,
        route: Route,
    ) -> tuple[Floats, Floats, NDArray[np.bool_]] | None:
        recorded = arrays.values[column.name]
        parameter = self.dictionary.get(column.quantity.parameter)
        factor = parameter.log_factor if parameter is not None else None
        source, target = parse_unit(column.unit or "1"), parse_unit(route.unit or read.line.unit)
        try:
            step = converter(source, target, log_factor=factor)
            middle = (recorded.low + recorded.high) / 2.0
            usable = np.isfinite(middle)
            value = step(np.where(usable, middle, 1.0)) * route.sign
            u = self._spread(recorded.u, source, target, middle)
            if not route.is_direct and not route.gain:
                value, u = as_noise(route, value, u)
                unit = parse_unit("dB" if route.unit == "K" else "K")
                value = converter(unit, parse_unit(read.line.unit))(value)
                u = self._spread(u, unit, parse_unit(read.line.unit), middle)
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
            return everywhere(size, recorded.size)
        if own is not None and (of_budget is None or code_key(own.id) != code_key(of_budget.conditions.id)):
            assert child is not None
            points = compile_points(own)
            records = self._unmapped(self.choice.of_requirement(child), recorded, table)
            places = self.chain.own[read.row]
            found = match(points, places)
            if not len(found.record):
                found = match(points, self.chain.required.columns)
            return paired(points, found.record, found.point, records, self.chain.own[read.row])
        if of_budget is None:
            return everywhere(size, recorded.size)
        records = self._unmapped(self._map_of(read), recorded, table)
        every = np.arange(size, dtype=np.int32)
        return paired(of_budget, every, self.chain.required.point, records, self.chain.required.columns)

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
