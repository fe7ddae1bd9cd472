"""Network files to evidence: the entries as recorded, the noise block, and what is to be derived from them."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from specflow.exchange import digest
from specflow.importers.measured.conditions import read_conditions
from specflow.importers.measured.context import Context
from specflow.importers.measured.derivation_plan import DerivationPlan
from specflow.importers.measured.document import Identity, make_document
from specflow.importers.measured.mapping import LayoutMapping, write_mapping
from specflow.importers.measured.network_columns import NetworkTable, noise_table, scattering_table
from specflow.importers.measured.network_derivations import derivation_plans
from specflow.importers.measured.network_doubts import NETWORK_KEYS, Axis, SettledNetwork, settle
from specflow.importers.measured.network_facts import CommentFacts, comment_facts
from specflow.importers.measured.network_plans import Plans, plans_for
from specflow.importers.measured.network_ports import KEY, named_ports, unknown_ports
from specflow.importers.measured.rejects import Rejects
from specflow.importers.measured.result import ColumnReading, MeasuredTable, Role
from specflow.importers.measured.settled import GivenMappings, Mappings
from specflow.importers.measured.stating import collect
from specflow.importers.measured.subject import find_block, item_name, item_notes
from specflow.importers.measured.tables import FoundTable
from specflow.importers.measured.work import TableWork
from specflow.importers.readers.grid import Grid
from specflow.importers.readers.touchstone_network import NetworkFile
from specflow.importers.readers.touchstone_shape import outside_data
from specflow.model.block import Block
from specflow.model.columns import Columns, TextColumn
from specflow.model.evidence import ConditionColumn, EvidenceColumns, EvidenceTable, HowRead
from specflow.model.finding import Finding, Severity
from specflow.model.origin import Origin
from specflow.model.requirement import Method, Stage

_ON_AN_ITEM = (Method.TEST, Method.DEMONSTRATION, Method.INSPECTION)
_MOST_UNUSED = 12


@dataclass(frozen=True)
class NetworkReading:
    """The tables of a network file, why it is skipped, findings about the file, and a mapping to be edited."""

    tables: tuple[MeasuredTable, ...]
    skipped: tuple[str, ...]
    findings: tuple[Finding, ...]
    unused_layouts: tuple[str, ...]
    proposal: str


def read_network_tables(
    network: NetworkFile,
    context: Context,
    given: GivenMappings,
    person: Mapping[str, str],
    importer: str,
) -> NetworkReading:
    """Return what a network file says: the raw table with plans of what is derived from it, and its noise block."""
    reading = _Reading(network, context, given, person, importer)
    tables = reading.tables()
    findings = [_finding(network, remark.line, remark.what) for remark in network.remarks if remark.warns]
    where = network.fingerprint.name
    skipped = () if tables else (f"{where}: {reading.mapping_from} says skip",)
    unused = tuple(reading.mappings.unused())
    return NetworkReading(tuple(tables), skipped, tuple(findings), unused, reading.proposal())


def network_layout(network: NetworkFile) -> str:
    """Return the key by which files of this kind are known again: ports, format, and the shape of their comments.

    Figures, and what stands after a colon or an equals sign, are left out.
    """
    first = int(network.lines[0])
    shape = [
        re.sub(r"[\d.+\-]+", "#", re.split(r"[:=]", one.text)[0]).strip().casefold()
        for one in network.comments
        if one.line < first
    ]
    return "N-" + digest([network.ports, network.parameter, network.pair_format.value, shape])[:16]


class _Reading:
    """One network file while it is read."""

    def __init__(
        self,
        network: NetworkFile,
        context: Context,
        given: GivenMappings,
        person: Mapping[str, str],
        importer: str,
    ) -> None:
        self.context, self.person, self.importer = context, person, importer
        self.mappings = Mappings(given, context)
        self.key = network_layout(network)
        facts = comment_facts(outside_data(network.comments, network.lines))
        found = self.mappings.of_table(self.key, facts.facts, True)
        self.mapping = found.mapping if found else LayoutMapping()
        self.mapping_from = found.source if found else ""
        of_network, _ = _parted(self.mapping.stated)
        said, rest = _parted(person)
        self.said = {**of_network, **said}
        self.settled: SettledNetwork = settle(network, self.said)
        self.network = self.settled.network
        names = network.port_modes or network.port_names
        by_file = "[Mixed-Mode Order]" if network.port_modes else "a comment of the file"
        self.ports = named_ports(network.ports, said, of_network, names, by_file)
        self.facts: CommentFacts = facts
        self.stated = collect(
            facts.facts, _parted(self.mapping.stated)[1], rest, own_dimensions=context.dimensions
        )
        self.stated.conditions.pop(self.settled.axis.dimension, None)

    def tables(self) -> list[MeasuredTable]:
        """The raw table, and the noise block once nothing is open; none where the mapping says skip."""
        if self.mapping.skip:
            return []
        work = self._work()
        if self.mapping.columns or self.mapping.pivots or self.mapping.long or self.mapping.matrix:
            work.notes.append("the mapping speaks of columns; a network file has none, and they are not used")
        for key in unknown_ports(self.network.ports, self.said):
            work.ask(key, "", f"the file has {self.network.ports} ports and no {key}", "name another port")
        raw = self._table(work, scattering_table(self.network), self.settled.axis)
        if self.network.noise is None:
            return [raw]
        if raw.questions:
            return [
                replace(raw, notes=(*raw.notes, "the noise block is read once the questions are settled"))
            ]
        return [raw, self._table(self._work(), noise_table(self.network), self.settled.axis)]

    def proposal(self) -> str:
        """A mapping with the names of the ports, to be edited."""
        stated = {f"port {place + 1}": name or "?" for place, name in enumerate(self.ports.names)}
        return write_mapping(LayoutMapping(layout=self.key, title=self._title(), stated=stated))

    def _work(self) -> TableWork:
        """A network has no cells; the empty sheet stands for its lines, so that questions and rejects have a place."""
        name = self.network.fingerprint.name
        nothing = np.zeros(0, np.int32)
        table = FoundTable(Grid(name=name, rows=[], file=name), 1, 1, None, 1, 1, (), nothing)
        work = TableWork(table, self.context, self.mapping, self.stated, Rejects(""))
        work.questions += [*self.stated.questions, *self.stated.doubts.values(), *self.facts.questions]
        work.questions += self.settled.questions
        self._ask_about_uncertainty(work)
        return work

    def _ask_about_uncertainty(self, work: TableWork) -> None:
        """A statement for all entries would be wrong for most: a reflection is less sure than a transmission."""
        said = [*self.stated.uncertainties]
        if "uncertainty" in self.stated.said:
            said.append(self.stated.said["uncertainty"])
        for one in said:
            remedy = "give it in the uncertainty register by set-up and quantity, state set_up, and leave it out here"
            work.ask(
                one.key,
                "",
                f"the uncertainty {one.text!r} ({one.by}) does not say of which entries it is",
                remedy,
            )

    def _table(self, work: TableWork, columns: NetworkTable, axis: Axis) -> MeasuredTable:
        work.rows = columns.lines
        for hole in columns.holes:
            work.rejects.add(hole.line, hole.token, hole.text, "this is no number; the entry was left out")
        items = self._items(work, len(columns.lines))
        block, block_from, question = find_block(work.table, self.context, self.stated, items)
        work.questions += [question] if question else []
        work.notes += item_notes(items, self.context, block)
        plans = self._plans(work, columns, block)
        arrays, documents = self._arrays(work, columns, axis, items)
        document = self._document(work, columns, block, arrays, documents)
        return MeasuredTable(
            sheet="",
            place=columns.place,
            title=columns.title,
            layout_key=self.key,
            rows=len(columns.lines),
            values=sum(int(np.count_nonzero(~np.isnan(one.low))) for one in columns.arrays.values()),
            recognised=self._recognised(columns, axis, block, block_from),
            questions=tuple(dict.fromkeys(work.questions)),
            rejected=work.rejects.rejected(),
            rejected_cells=len(work.rejects.cells),
            notes=self._notes(work, columns),
            mapping=write_mapping(replace(self.mapping, layout=self.key)) if self.mapping_from else "",
            mapping_from=self.mapping_from,
            document=document,
            columns=None if document is None else arrays,
            plans=tuple(plans) if document is not None else (),
            asked=() if columns.is_noise else tuple(self.mapping.derive),
        )

    def _arrays(
        self, work: TableWork, columns: NetworkTable, axis: Axis, items: TextColumn
    ) -> tuple[EvidenceColumns, list[ConditionColumn]]:
        """The arrays of a table, and the documents of its axis and of the conditions stated for it."""
        conditions = read_conditions(work.table, (), self.stated, work.rows, work.rejects)
        numeric = {axis.dimension: columns.axis, **conditions.columns.numeric}
        units = {**conditions.columns.units, **({axis.dimension: axis.unit} if axis.unit else {})}
        stated = Columns(len(columns.lines), numeric, conditions.columns.text, units)
        first = ConditionColumn(
            dimension=axis.dimension, kind="numeric", unit=axis.unit, column=1, header=axis.dimension,
            unit_from=axis.by,
        )  # fmt: skip
        return EvidenceColumns(stated, columns.arrays, columns.lines, items), [first, *conditions.documents]

    def _document(
        self,
        work: TableWork,
        columns: NetworkTable,
        block: Block | None,
        arrays: EvidenceColumns,
        conditions: list[ConditionColumn],
    ) -> EvidenceTable | None:
        """The document of a table, None while something is to be settled."""
        if block is None or work.questions or not len(columns.lines):
            return None
        method = Method(self.stated.text("method").casefold() or "test")
        stage = Stage(self.stated.text("stage").casefold() or "qualification")
        identity = Identity(block, method, stage, f"{self.key}{columns.part}", columns.title, "")
        document = make_document(work, identity, columns.documents, conditions, arrays)
        if document is None or work.questions:
            return None
        how = HowRead(importer=self.importer, layout=self.key, place=columns.place,
                      stated=tuple(sorted(self.person.items())))  # fmt: skip
        return document.model_copy(update={"how_read": how})

    def _items(self, work: TableWork, rows: int) -> TextColumn:
        item = item_name(self.stated.items, self.context)
        method = self.stated.text("method").casefold() or "test"
        if item:
            if item != self.stated.text("item"):
                work.notes.append(f"the item is {item}, as the project knows it")
            return TextColumn(np.zeros(rows, np.int32), (item,))
        if method in _ON_AN_ITEM:
            remedy = "--state item=SERIAL; results of a simulation: --state method=analysis"
            work.ask("item", "", f"a {method} must say which item it was on", remedy)
        return TextColumn(np.full(rows, -1, np.int32), ())

    def _plans(self, work: TableWork, columns: NetworkTable, block: Block | None) -> list[DerivationPlan]:
        """What is derived from this table, with the columns that it reads; what names no port is asked."""
        if block is None:
            return []
        found: Plans = plans_for(block, self.ports, self.context, self.said, self.network.noise is not None)
        if not columns.is_noise:
            work.notes += [f"not derived: {one}" for one in found.left]
            for why in found.asked:
                remedy = f"{self.ports.needed()}; --state derive=none keeps the raw data only"
                work.ask("ports", "", f"to be derived for {why}", remedy)
        mine = [plan for plan in found.plans if plan.noise == columns.is_noise]
        made, notes = derivation_plans(mine, columns, self.settled.axis, float(self.network.reference_ohm[0]))
        work.notes += notes
        return made

    def _recognised(
        self, columns: NetworkTable, axis: Axis, block: Block | None, block_from: str
    ) -> tuple[ColumnReading, ...]:
        shown = [*self.stated.readings]
        if block is not None and not self.stated.text("block"):
            shown.append(ColumnReading("block", "", Role.STATED, f"block: {block.id}", block_from))
        for place, name in enumerate(self.ports.names):
            if name:
                shown.append(ColumnReading(f"port {place + 1}", "", Role.STATED, name, self.ports.by[place]))
        words = f"{axis.dimension.replace('_', ' ')} in {axis.unit}" if axis.unit else axis.dimension
        shown.append(ColumnReading(axis.dimension, "", Role.CONDITION, words, axis.by))
        return (*shown, *columns.recognised)

    def _notes(self, work: TableWork, columns: NetworkTable) -> tuple[str, ...]:
        network = self.network
        notes = [*work.notes, *columns.notes, *self.settled.notes]
        if columns.is_noise:
            return tuple(notes)
        ports = f"{network.ports} port{'s' * (network.ports != 1)}"
        notes.insert(0, f"Touchstone {network.version}, {ports}, reference {network.reference_words}")
        notes += [f"line {remark.line}: {remark.what}" for remark in network.remarks]
        notes += network.notes
        unused = [*self.facts.unused, *self.stated.unused]
        notes += [f"not used: {one}" for one in unused[:_MOST_UNUSED]]
        if len(unused) > _MOST_UNUSED:
            notes.append(f"not used: {len(unused) - _MOST_UNUSED} more comments")
        return tuple(notes)

    def _title(self) -> str:
        return f"{self.network.parameter} parameters of {self.network.ports} ports"


def _parted(said: Mapping[str, str]) -> tuple[dict[str, str], dict[str, str]]:
    """What is said of a network, and what may be said of any table."""
    mine = {key for key in said if key.strip().casefold() in NETWORK_KEYS or KEY.match(key.strip())}
    return (
        {key.strip().casefold(): text for key, text in said.items() if key in mine},
        {key: text for key, text in said.items() if key not in mine},
    )


def _finding(network: NetworkFile, line: int, what: str) -> Finding:
    return Finding(
        rule="attach-reading",
        severity=Severity.WARNING,
        subject=network.fingerprint.name,
        subject_kind="file",
        message=f"line {line}: {what}" if line else what,
        origin=Origin(file=network.fingerprint.name, row=line or None),
    )
