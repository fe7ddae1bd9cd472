"""Test sheets that come back filled in: recognised by their identity, held to it, and read without a mapping.

The hidden identity says of each row what it is of, and of each protected cell what stood in it. Where a protected cell
says something else now, nothing of its sheet is read: each such cell is asked about. What is filled in is read by the
same code as any other table, so that number formats, errors, placeholders and bounds mean what they mean everywhere;
and what comes out is compared with the identity once more.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from specflow.errors import FileError
from specflow.exchange import digest
from specflow.importers.measured.document import content_digest
from specflow.importers.measured.mapping_parts import ColumnMapping, LayoutMapping
from specflow.importers.measured.rejects import cell_text
from specflow.importers.measured.result import MeasuredTable, Question
from specflow.importers.measured.result import Role as ColumnRole
from specflow.importers.readers import Grid, GridFile, Value, address, column_letter, is_blank
from specflow.model.base import code_key
from specflow.model.bench_sheet import (
    COVERAGE_FACTOR,
    GUIDE_SHEET,
    IDENTITY_SHEET,
    LISTS_SHEET,
    MARK,
    BenchIdentity,
    BenchPoint,
    Role,
    RowIdentity,
    SheetIdentity,
    read_identity,
)
from specflow.model.evidence import Equipment, EvidenceTable, LeftOut
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot

#: Reads the tables of a grid by one mapping.
ReadArea = Callable[[Grid, LayoutMapping], Sequence[MeasuredTable]]

_FILLED = (Role.VALUE, Role.UNCERTAINTY, Role.DATE, Role.EQUIPMENT, Role.REMARK)
_MOST_EDITS = 50  # a sheet that was sorted has thousands; the first say it


@dataclass(frozen=True, slots=True)
class ReadBench:
    """The tables of a test sheet, what is not read of the file, and what is to be said of it."""

    tables: Sequence[MeasuredTable]
    skipped: Sequence[str] = ()
    notes: Sequence[str] = ()


def bench_identity(file: GridFile) -> BenchIdentity | None:
    """Return the identity of a test sheet; None for any other file. FileError when it is not as it was written."""
    grid = next((one for one in file if code_key(one.name) == code_key(IDENTITY_SHEET)), None)
    if grid is None or not str(grid.value(1, 1)).startswith(MARK):
        return None
    lines = [str(grid.value(row, 1)) for row in range(1, grid.last_row + 1)]
    try:
        return read_identity(lines)
    except ValueError as error:
        raise FileError(
            str(error),
            where=f"{file.fingerprint.name}, {grid.name}",
            hint="write the test sheet again (specflow testsheet) and copy the filled-in cells into it",
        ) from None


def read_bench(
    file: GridFile,
    identity: BenchIdentity,
    snapshot: Snapshot,
    read: ReadArea,
    sheets: Sequence[str] = (),
) -> ReadBench:
    """Read what is filled in; each block, quantity, method and stage is a table of its own.

    ``sheets`` limits what is read. FileError for one that is not part of the test sheet.
    """
    asked = _asked(identity, sheets, file.fingerprint.name)
    grids = {code_key(grid.name): grid for grid in file}
    own = {code_key(name) for name in (IDENTITY_SHEET, LISTS_SHEET, GUIDE_SHEET)}
    tables: list[MeasuredTable] = []
    notes = [*_other_project(identity, snapshot), *_changed_requirements(identity, snapshot)]
    sheet_id = digest(identity.model_dump(mode="json"))[:16]
    for sheet in identity.sheets:
        if code_key(sheet.name) not in asked:
            continue
        grid = grids.get(code_key(sheet.name))
        if grid is None:
            tables.append(_asking(sheet, [_missing(sheet)]))
            continue
        bench = _Sheet(grid, sheet, identity, f"{MARK} {sheet_id}")
        questions = bench.edits()
        tables += [_asking(sheet, questions)] if questions else bench.tables(read)
        notes += bench.notes
    known = own | {code_key(sheet.name) for sheet in identity.sheets}
    skipped = [
        f"sheet {grid.name}: not part of the test sheet; attach it as a file of its own"
        for grid in file
        if code_key(grid.name) not in known
    ]
    skipped += [
        f"sheet {one.name}: not asked for" for one in identity.sheets if code_key(one.name) not in asked
    ]
    return ReadBench(tables, skipped, notes)


def _asked(identity: BenchIdentity, sheets: Sequence[str], name: str) -> set[str]:
    known = {code_key(sheet.name): sheet.name for sheet in identity.sheets}
    for sheet in sheets:
        if code_key(sheet) not in known:
            names = ", ".join(map(repr, known.values()))
            raise FileError(
                f"there is no sheet {sheet!r} on this test sheet",
                where=name,
                hint=f"sheets with rows: {names}",
            )
    return set(map(code_key, sheets)) or set(known)


def _other_project(identity: BenchIdentity, snapshot: Snapshot) -> Iterator[str]:
    if identity.project != snapshot.project.name:
        yield f"the test sheet was written for the project {identity.project!r}, this is {snapshot.project.name!r}"


def _changed_requirements(identity: BenchIdentity, snapshot: Snapshot) -> Iterator[str]:
    """Say which requirements are gone, or are on something else now; their values are stored as what they are."""
    told: set[str] = set()
    for row in identity.rows:
        for code in row.point.requirements:
            if code in told:
                continue
            told.add(code)
            requirement = snapshot.find(Requirement, code)
            if requirement is None:
                yield f"{code} is no requirement of this project any more; its values are stored all the same"
            elif requirement.quantity != row.point.quantity:
                yield f"{code} is on another quantity than when the test sheet was written"


def _missing(sheet: SheetIdentity) -> Question:
    remedy = "give the sheet its name back; a sheet that was not worked on stays in the file as it was"
    return Question("", "", f"the sheet {sheet.name!r} is missing or was renamed", remedy)


def _asking(sheet: SheetIdentity, questions: Sequence[Question]) -> MeasuredTable:
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


class _Sheet:
    """One sheet that came back."""

    def __init__(self, grid: Grid, sheet: SheetIdentity, identity: BenchIdentity, layout: str) -> None:
        self.notes: list[str] = []
        self._grid = grid
        self._sheet = sheet
        self._layout = layout
        self._rows = {row.row: row for row in identity.rows if row.sheet == sheet.name}
        self._place = {
            (column.role, column.dimension, column.unit): place
            for place, column in enumerate(sheet.columns, 1)
        }

    def edits(self) -> list[Question]:
        """Ask about each protected cell that says something else, and about values beside the rows of the sheet."""
        found = [*self._edited_cells(), *self._strange_rows()]
        if len(found) > _MOST_EDITS:
            more = len(found) - _MOST_EDITS
            what = f"and {more} more cells: were rows sorted, added or deleted?"
            found = [*found[:_MOST_EDITS], Question("", "", what, "copy the values into a new test sheet")]
        return found

    def _edited_cells(self) -> Iterator[Question]:
        cells = [*self._sheet.cells, *(cell for row in self._rows.values() for cell in row.cells)]
        protected = {cell.cell: cell.value for cell in cells}
        for cell, was in protected.items():
            letters = cell.rstrip("0123456789")
            row, column = int(cell[len(letters) :]), _column_number(letters)
            now = self._grid.value(row, column)
            if not _same(was, now):
                yield _edited(cell, was, now, self._title(column))
        yield from self._filled_where_nothing_stood(protected)

    def _filled_where_nothing_stood(self, protected: Mapping[str, object]) -> Iterator[Question]:
        """A condition that a row does not have, and the item of a row that names none, may not be filled in either."""
        for row in self._rows.values():
            open_ones = {one.dimension for one in row.point.conditions if one.is_open}
            for (role, dimension, _), place in self._place.items():
                cell = address(row.row, place)
                if role is not Role.CONDITION or cell in protected or dimension in open_ones:
                    continue
                if not is_blank(now := self._grid.value(row.row, place)):
                    yield _edited(cell, "", now, self._title(place))

    def _strange_rows(self) -> Iterator[Question]:
        value = self._place[Role.VALUE, "", ""]
        for row in range(self._sheet.header_row + 1, self._grid.last_row + 1):
            if row not in self._rows and not is_blank(now := self._grid.value(row, value)):
                what = f"{_shown(now)} stands in no row of the test sheet"
                yield Question(
                    "Value", address(row, value), what, "attach it as a table of a file of its own"
                )

    def _title(self, column: int) -> str:
        columns = self._sheet.columns
        return columns[column - 1].title if column <= len(columns) else ""

    def tables(self, read: ReadArea) -> list[MeasuredTable]:
        """Read the rows with a value, each group of one block, quantity, method, stage and unit by itself."""
        groups: dict[str, list[RowIdentity]] = {}
        rejected: list[LeftOut] = []
        for row in self._rows.values():
            if is_blank(self._entry(row, Role.VALUE)):
                if any(not is_blank(self._entry(row, role)) for role in (Role.UNCERTAINTY, Role.REMARK)):
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
                replace(_asking(self._sheet, ()), rejected=tuple(rejected), rejected_cells=len(rejected))
            ]
        return tables

    def _entry(self, row: RowIdentity, role: Role) -> Value:
        return self._grid.value(row.row, self._place[role, "", ""])

    def _note_unmeasured(self, row: RowIdentity) -> None:
        remark = str(self._entry(row, Role.REMARK)).strip()
        self.notes.append(f"{self._sheet.name}, row {row.row}: no value{f' ({remark})' if remark else ''}")

    def _lacks(self, row: RowIdentity) -> LeftOut | None:
        """What a row with a value has to say, and does not."""
        value = cell_text(self._entry(row, Role.VALUE))
        cell = address(row.row, self._place[Role.VALUE, "", ""])
        if is_blank(str(self._entry(row, Role.ITEM))):
            reason = f"{address(row.row, self._place[Role.ITEM, '', ''])} names no item"
            return LeftOut(sheet=self._sheet.name, cell=cell, text=value, reason=reason)
        for one in row.point.conditions:
            place = self._place[Role.CONDITION, one.dimension, one.unit]
            if one.is_open and is_blank(self._grid.value(row.row, place)):
                reason = f"{address(row.row, place)} does not say at which {one.dimension.replace('_', ' ')} it was"
                return LeftOut(sheet=self._sheet.name, cell=cell, text=value, reason=reason)
        return None

    def _table(self, rows: Sequence[RowIdentity], read: ReadArea) -> MeasuredTable:
        found = list(read(self._only(rows), self._mapping(rows)))
        if len(found) != 1:
            what = f"the rows of {self._sheet.name} cannot be told from the others"
            return _asking(self._sheet, [Question("", "", what, "attach the values as a file of its own")])
        [table] = found
        table = replace(
            table,
            mapping="",
            mapping_from="the identity of the test sheet",
            layout_key=self._layout,
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

    def _only(self, rows: Sequence[RowIdentity]) -> Grid:
        """The sheet with nothing on it but the headers and these rows, all at their places."""
        grid, wanted = self._grid, {self._sheet.header_row, *(row.row for row in rows)}
        cells = [grid.row(row) if row in wanted else [] for row in range(1, max(wanted) + 1)]
        return replace(grid, rows=cells, first_row=1, first_column=1)

    def _mapping(self, rows: Sequence[RowIdentity]) -> LayoutMapping:
        """The mapping that the identity is."""
        point, sheet = rows[0].point, self._sheet
        last = max(row.row for row in rows)
        stated = {"block": point.block, "method": point.method.value, "stage": point.stage.value}
        for name, cell in sheet.entries:
            letters = cell.rstrip("0123456789")
            said = self._grid.value(int(cell[len(letters) :]), _column_number(letters))
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
        value = self._letter(Role.VALUE)
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
            column=self._letter(Role.UNCERTAINTY),
            role="uncertainty",
            of="Value",
            unit=point.u_unit,
            k=COVERAGE_FACTOR,
        )
        for one in point.conditions:
            place = self._place[Role.CONDITION, one.dimension, one.unit]
            yield ColumnMapping(
                column=column_letter(place), role="condition", dimension=one.dimension, unit=one.unit
            )
        yield ColumnMapping(column=self._letter(Role.ITEM), role="item")
        yield ColumnMapping(column=self._letter(Role.DATE), role="date")
        yield ColumnMapping(column=self._letter(Role.EQUIPMENT), role="remark")
        yield ColumnMapping(column=self._letter(Role.REMARK), role="remark")

    def _letter(self, role: Role) -> str:
        return column_letter(self._place[role, "", ""])

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
        key = [self._layout, self._sheet.name, _group(point)]
        read = {row: place for place, row in enumerate(table.columns.source_rows.tolist())}
        assets = dict.fromkeys(
            text
            for row in rows
            if row.row in read and (text := str(self._entry(row, Role.EQUIPMENT)).strip())
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
                "how_read": table.document.how_read.model_copy(update={"layout": self._layout}),
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


def _edited(cell: str, was: object, now: object, title: str) -> Question:
    what = f"this protected cell was edited: was {_shown(was)}, is {_shown(now)}"
    return Question(
        title, cell, what, "put back what it was, or write a new test sheet and copy the values into it"
    )


def _shown(value: object) -> str:
    if isinstance(value, float | int) and not isinstance(value, bool):
        return f"{value:.12g}"
    text = str(value)
    return "empty" if not text.strip() else repr(text if len(text) <= 60 else f"{text[:57]}...")


def _same(was: str | float, now: object) -> bool:
    if isinstance(was, str):
        return isinstance(now, str) and now.strip() == was.strip()
    return isinstance(now, float | int) and not isinstance(now, bool) and float(now) == was


def _column_number(letters: str) -> int:
    number = 0
    for letter in letters:
        number = number * 26 + ord(letter) - 64
    return number
