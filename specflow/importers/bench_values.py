"""The values that were filled in on a sheet of a test sheet, read by the same code as any other table."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import replace

import numpy as np

from specflow.exchange import digest
from specflow.importers.bench_grid import BenchGrid
from specflow.importers.measured.document import content_digest
from specflow.importers.measured.mapping_parts import ColumnMapping, LayoutMapping
from specflow.importers.measured.rejects import cell_text
from specflow.importers.measured.result import MeasuredTable, Question
from specflow.importers.measured.result import Role as ColumnRole
from specflow.importers.readers import Grid, address, column_letter, is_blank
from specflow.model.bench_sheet import COVERAGE_FACTOR, MARK, BenchPoint, Role, RowIdentity, SheetIdentity
from specflow.model.evidence import Equipment, EvidenceTable, LeftOut

#: Reads the tables of a grid by one mapping.
ReadArea = Callable[[Grid, LayoutMapping], Sequence[MeasuredTable]]


def asking(sheet: SheetIdentity, questions: Sequence[Question]) -> MeasuredTable:
    """Return a sheet of which nothing is read before these questions are settled."""
    return MeasuredTable(
        sheet=sheet.name,
        place=f"A{sheet.header_row}",
        title=f"test sheet of {sheet.block}",
        layout_key=MARK,
        rows=0,
        values=0,
        questions=tuple(questions),
        mapping_from="the identity of the test sheet",
    )


class BenchValues:
    """Reads the rows of one sheet that have a value; ``notes`` tell of rows that have none and say why."""

    def __init__(self, bench: BenchGrid) -> None:
        self.notes: list[str] = []
        self._bench = bench

    def tables(self, read: ReadArea) -> list[MeasuredTable]:
        """Read the rows with a value, each group of one block, quantity, method, stage and unit by itself."""
        groups: dict[str, list[RowIdentity]] = {}
        rejected: list[LeftOut] = []
        for row in self._bench.rows.values():
            if self._bench.is_empty(row, Role.VALUE):
                if not all(self._bench.is_empty(row, role) for role in (Role.UNCERTAINTY, Role.REMARK)):
                    self._note_unmeasured(row)
                continue
            lacks = self._lacks(row)
            if lacks is not None:
                rejected.append(lacks)
            else:
                groups.setdefault(_group(row.point), []).append(row)
        tables = [self._table(rows, read) for rows in groups.values()]
        if rejected and tables:
            tables[0] = _with_rejected(tables[0], rejected)
        elif rejected:
            tables = [
                replace(asking(self._bench.sheet, ()), rejected=tuple(rejected), rejected_cells=len(rejected))
            ]
        return tables

    def _note_unmeasured(self, row: RowIdentity) -> None:
        remark = str(self._bench.entry(row, Role.REMARK)).strip()
        self.notes.append(
            f"{self._bench.sheet.name}, row {row.row}: no value{f' ({remark})' if remark else ''}"
        )

    def _lacks(self, row: RowIdentity) -> LeftOut | None:
        """What a row with a value has to say, and does not."""
        value = cell_text(self._bench.entry(row, Role.VALUE))
        cell = address(row.row, self._bench.place(Role.VALUE))
        if self._bench.is_empty(row, Role.ITEM):
            reason = f"{address(row.row, self._bench.place(Role.ITEM))} names no item"
            return LeftOut(sheet=self._bench.sheet.name, cell=cell, text=value, reason=reason)
        for one in row.point.conditions:
            place = self._bench.place(Role.CONDITION, one.dimension, one.unit)
            if one.is_open and is_blank(self._bench.grid.value(row.row, place)):
                reason = f"{address(row.row, place)} does not say at which {one.dimension.replace('_', ' ')} it was"
                return LeftOut(sheet=self._bench.sheet.name, cell=cell, text=value, reason=reason)
        return None

    def _table(self, rows: Sequence[RowIdentity], read: ReadArea) -> MeasuredTable:
        found = list(read(self._bench.only(rows), self._mapping(rows)))
        if len(found) != 1:
            what = f"the rows of {self._bench.sheet.name} cannot be told from the others"
            return asking(
                self._bench.sheet, [Question("", "", what, "attach the values as a file of its own")]
            )
        [table] = found
        table = replace(
            table,
            mapping="",
            mapping_from="the identity of the test sheet",
            layout_key=self._bench.layout,
            recognised=tuple(
                replace(one, reason=_by_the_sheet(one.reason))
                for one in table.recognised
                if one.role is not ColumnRole.NOT_READ
            ),
        )
        if table.document is None or table.columns is None:
            return table
        differs = self._differs(table, rows)
        if differs:
            question = Question(
                "", table.place, differs, "report this with the file; nothing of it is stored"
            )
            return replace(table, document=None, columns=None, questions=(*table.questions, question))
        return replace(table, document=self._document(table, rows))

    def _mapping(self, rows: Sequence[RowIdentity]) -> LayoutMapping:
        """The mapping that the identity is."""
        point, sheet = rows[0].point, self._bench.sheet
        last = max(row.row for row in rows)
        stated = {"block": point.block, "method": point.method.value, "stage": point.stage.value}
        for name, cell in sheet.entries:
            said = self._bench.at(cell)
            stated |= {} if is_blank(said) else {name: str(said).strip()}
        return LayoutMapping(
            title=f"{sheet.block}: {point.quantity.parameter.replace('_', ' ')}",
            area=f"A{sheet.header_row}:{column_letter(len(sheet.columns))}{last}",
            alone=True,
            others="not read",
            stated=stated,
            columns=tuple(self._columns(point)),
        )

    def _columns(self, point: BenchPoint) -> Iterator[ColumnMapping]:
        quantity = point.quantity
        value = self._bench.letter(Role.VALUE)
        yield ColumnMapping(
            column=value,
            role="value",
            parameter=quantity.parameter,
            plane=quantity.plane,
            statistic=quantity.statistic,
            polarisation=quantity.polarisation,
            unit=point.unit,
            bandwidth=f"{quantity.bandwidth_hz!r} Hz" if quantity.bandwidth_hz else "",
        )
        yield ColumnMapping(
            column=self._bench.letter(Role.UNCERTAINTY),
            role="uncertainty",
            of="Value",
            unit=point.u_unit,
            k=COVERAGE_FACTOR,
        )
        for one in point.conditions:
            place = self._bench.place(Role.CONDITION, one.dimension, one.unit)
            yield ColumnMapping(
                column=column_letter(place), role="condition", dimension=one.dimension, unit=one.unit
            )
        yield ColumnMapping(column=self._bench.letter(Role.ITEM), role="item")
        yield ColumnMapping(column=self._bench.letter(Role.DATE), role="date")
        yield ColumnMapping(column=self._bench.letter(Role.EQUIPMENT), role="remark")
        yield ColumnMapping(column=self._bench.letter(Role.REMARK), role="remark")

    def _differs(self, table: MeasuredTable, rows: Sequence[RowIdentity]) -> str:
        """What was read beside what the identity says; "" when they agree."""
        assert table.document is not None and table.columns is not None
        point, columns = rows[0].point, table.columns
        if len(table.document.values) != 1 or table.document.values[0].quantity != point.quantity:
            return "the quantity that was read is not that of the test sheet"
        said = table.document.block, table.document.method, table.document.stage
        if said != (point.block, point.method, point.stage):
            return f"it was stated to be of {', '.join(said)}, the test sheet is of another block, method or stage"
        points = {row.row: row.point for row in rows}
        for place, number in enumerate(columns.source_rows.tolist()):
            if number not in points:
                return f"row {number} was read, which is another one of the test sheet"
            for one in points[number].conditions:
                numbers = columns.conditions.numeric.get(one.dimension)
                if one.value is not None and (
                    numbers is None or not np.isclose(numbers[place], one.value, 1e-12, 0)
                ):
                    return f"row {number}: {one.dimension} was read as something else than {one.value:g} {one.unit}"
        return ""

    def _document(self, table: MeasuredTable, rows: Sequence[RowIdentity]) -> EvidenceTable:
        """The document with what the test sheet adds: its identity, and the instruments of its rows."""
        assert table.document is not None and table.columns is not None
        point = rows[0].point
        key = [self._bench.layout, self._bench.sheet.name, _group(point)]
        read = {row: place for place, row in enumerate(table.columns.source_rows.tolist())}
        assets = dict.fromkeys(
            text
            for row in rows
            if row.row in read and (text := str(self._bench.entry(row, Role.EQUIPMENT)).strip())
        )
        requirements = {code for row in rows for code in row.point.requirements}
        values = [
            one.model_copy(update={"unit_from": _by_the_sheet(one.unit_from)})
            for one in table.document.values
        ]
        conditions = [
            one.model_copy(update={"unit_from": _by_the_sheet(one.unit_from)})
            for one in table.document.conditions
        ]
        document = table.document.model_copy(
            update={
                "values": tuple(values),
                "conditions": tuple(conditions),
                "table_key": f"T-{digest(key)[:16]}",
                "equipment": (*table.document.equipment, *(Equipment(asset=asset) for asset in assets)),
                "requirement": requirements.pop() if len(requirements) == 1 else None,
                "how_read": table.document.how_read.model_copy(update={"layout": self._bench.layout}),
            }
        )
        return document.model_copy(update={"digest": content_digest(document, table.columns)})


def _by_the_sheet(words: str) -> str:
    return words.replace("the mapping", "the test sheet")


def _group(point: BenchPoint) -> str:
    parts = [point.block, point.method.value, point.stage.value, point.unit, point.quantity.model_dump_json()]
    return "|".join([*parts, *sorted(f"{one.dimension} {one.unit}" for one in point.conditions)])


def _with_rejected(table: MeasuredTable, rejected: Sequence[LeftOut]) -> MeasuredTable:
    document = table.document
    if document is not None:
        document = document.model_copy(update={"left_out": (*document.left_out, *rejected)})
    return replace(
        table,
        rejected=(*table.rejected, *rejected),
        rejected_cells=table.rejected_cells + len(rejected),
        document=document,
    )
