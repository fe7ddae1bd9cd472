"""Test sheets: a workbook that goes out to the bench with the points still missing, and comes back filled in.

``BenchWorkbook`` is what is written: sheets of rows, with what stands in every cell. ``BenchIdentity`` is what a hidden
sheet of the same workbook says of it, so that it is recognised when it comes back and edits of protected cells are
found: of each row what it is of, and of each protected cell what stands in it, under one digest.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable, Sequence
from enum import StrEnum
from typing import Literal

from pydantic import ValidationError

from specflow.model.base import Code, Document
from specflow.model.origin import column_letters
from specflow.model.parameter import QuantityIdentity
from specflow.model.requirement import Method, Stage

IDENTITY_SHEET = "specflow identity"
LISTS_SHEET = "specflow lists"
GUIDE_SHEET = "How to fill in"
MARK = "specflow test sheet"
FORMAT = 1
COVERAGE_FACTOR = 2.0
NOTHING_FILLED_IN = "attach-test-sheet-empty"  # the rule of the finding about a test sheet without a value


class BenchCondition(Document):
    """What a row asks of one dimension: a value, a word, or any value from ``low`` to ``high``, which is filled in.

    With neither, it is not required and only to be noted, because the limit depends on it.
    """

    dimension: str
    unit: str = ""
    value: float | None = None
    word: str = ""
    low: float | None = None
    high: float | None = None

    @property
    def is_open(self) -> bool:
        """Whether the bench writes down the value that it had."""
        return self.value is None and not self.word


class BenchPoint(Document):
    """One value to be measured: what of, at which conditions, on which item, and for which requirements.

    ``item`` "" is any item of the block; ``must_be_item``: it may not be another one. ``limits`` has the limit in words
    of each requirement, ``why`` what is known at the point so far, ``at_block`` what the conditions come to at the
    block itself where a condition map says it (an intermediate frequency, a baseplate).
    """

    block: Code
    quantity: QuantityIdentity
    method: Method
    stage: Stage
    unit: str
    u_unit: str
    item: str = ""
    must_be_item: bool = False
    conditions: tuple[BenchCondition, ...] = ()
    requirements: tuple[Code, ...]
    limits: tuple[str, ...]
    why: tuple[str, ...] = ()
    at_block: str = ""


class Role(StrEnum):
    """What a column of a test sheet is."""

    NUMBER = "number"
    REQUIREMENT = "requirement"
    QUANTITY = "quantity"
    CONDITION = "condition"
    AT_BLOCK = "at the block"
    LIMIT = "limit"
    UNIT = "unit"
    SO_FAR = "so far"
    ITEM = "item"
    VALUE = "value"
    UNCERTAINTY = "uncertainty"
    U_UNIT = "unit of u"
    DATE = "date"
    EQUIPMENT = "equipment"
    REMARK = "remark"


class BenchColumn(Document):
    """One column of a test sheet."""

    role: Role
    title: str
    width: int
    dimension: str = ""
    unit: str = ""


class BenchCell(Document):
    """One cell: what stands in it (None: nothing yet), and whether the bench writes into it.

    ``kind`` is how it looks and what may be entered: title, text, caution, label, header, heading, cell, item,
    value, uncertainty, date, equipment, remark, range, and the names of ``ENTRIES``.
    ``low`` and ``high`` bound a number that may be entered.
    """

    row: int
    column: int
    kind: str
    value: str | float | None = None
    is_open: bool = False
    low: float | None = None
    high: float | None = None

    @property
    def address(self) -> str:
        """The address as people write it."""
        return f"{column_letters(self.column)}{self.row}"


class BenchSheet(Document):
    """The sheet of one block: its cells, its rows by number, and what drop-downs offer."""

    name: str
    block: Code
    title: str
    columns: tuple[BenchColumn, ...]
    header_row: int
    cells: tuple[BenchCell, ...]
    rows: tuple[tuple[int, BenchPoint], ...]
    items: tuple[str, ...] = ()
    set_ups: int = 1


class BenchWorkbook(Document):
    """A whole test sheet. ``notes`` say what is not on it and why; ``guide`` is what the first sheet says."""

    project: str
    revision: int
    as_of: str
    guide: tuple[str, ...]
    sheets: tuple[BenchSheet, ...]
    notes: tuple[str, ...] = ()

    @property
    def points(self) -> int:
        """How many values are to be measured."""
        return sum(len(sheet.rows) for sheet in self.sheets)


class ProtectedCell(Document):
    """A cell that is not to be edited, and what stands in it."""

    cell: str
    value: str | float


class SheetIdentity(Document):
    """What identifies one sheet of a test sheet; ``entries`` are cells filled in for the whole sheet, by name."""

    kind: Literal["sheet"] = "sheet"
    name: str
    block: Code
    header_row: int
    columns: tuple[BenchColumn, ...]
    cells: tuple[ProtectedCell, ...]
    entries: tuple[tuple[str, str], ...] = ()


class RowIdentity(Document):
    """What identifies one row: its sheet and number, its point, and its protected cells."""

    kind: Literal["row"] = "row"
    sheet: str
    row: int
    point: BenchPoint
    cells: tuple[ProtectedCell, ...]


class BenchIdentity(Document):
    """The identity of a test sheet: where it is from, and all that is protected in it."""

    project: str
    revision: int
    as_of: str
    sheets: tuple[SheetIdentity, ...]
    rows: tuple[RowIdentity, ...]


def identity_lines(identity: BenchIdentity) -> list[str]:
    """Return an identity as lines of ASCII, each short enough for one cell: mark, digest, then one line a part."""
    head = {"project": identity.project, "revision": identity.revision, "as_of": identity.as_of}
    parts = [head, *(one.model_dump(mode="json") for one in (*identity.sheets, *identity.rows))]
    lines = [json.dumps(part, ensure_ascii=True, sort_keys=True, separators=(",", ":")) for part in parts]
    return [f"{MARK} {FORMAT}", _digest(lines), *lines]


def read_identity(lines: Sequence[str]) -> BenchIdentity:
    """Read an identity back. ValueError, in words, when it is of another format, or not as it was written."""
    mark, digest, *parts = [*lines[:2], *([""] * (2 - len(lines[:2]))), *lines[2:]]
    if mark != f"{MARK} {FORMAT}":
        raise ValueError(
            f"the test sheet is of another format ({mark!r}); this program reads {MARK} {FORMAT}"
        )
    if digest != _digest(parts):
        raise ValueError("the hidden sheet that identifies it was edited")
    try:
        head, *rest = [json.loads(part) for part in parts]
        sheets = tuple(SheetIdentity.model_validate(one) for one in rest if one.get("kind") == "sheet")
        rows = tuple(RowIdentity.model_validate(one) for one in rest if one.get("kind") == "row")
        return BenchIdentity(sheets=sheets, rows=rows, **head)
    except (ValidationError, ValueError, TypeError, AttributeError) as error:
        raise ValueError("the hidden sheet that identifies it cannot be read") from error


def _digest(lines: Iterable[str]) -> str:
    return hashlib.sha256("\n".join(lines).encode("ascii", "replace")).hexdigest()


def identity_of(workbook: BenchWorkbook) -> BenchIdentity:
    """Return what identifies a workbook that is to be written."""
    sheets, rows = [], []
    for sheet in workbook.sheets:
        points = dict(sheet.rows)
        protected = [cell for cell in sheet.cells if not cell.is_open and cell.value is not None]
        entries = [(str(cell.kind), cell.address) for cell in sheet.cells if cell.kind in ENTRIES]
        sheets.append(
            SheetIdentity(
                name=sheet.name,
                block=sheet.block,
                header_row=sheet.header_row,
                columns=sheet.columns,
                cells=tuple(_protected(cell) for cell in protected if cell.row not in points),
                entries=tuple(entries),
            )
        )
        by_row: dict[int, list[BenchCell]] = {row: [] for row in points}
        for cell in protected:
            if cell.row in by_row:
                by_row[cell.row].append(cell)
        rows += [
            RowIdentity(sheet=sheet.name, row=row, point=point, cells=tuple(map(_protected, by_row[row])))
            for row, point in sheet.rows
        ]
    head = {"project": workbook.project, "revision": workbook.revision, "as_of": workbook.as_of}
    return BenchIdentity.model_validate({**head, "sheets": tuple(sheets), "rows": tuple(rows)})


#: Cells filled in once for a sheet: kind -> what it says of all its rows, in the words of stated facts.
ENTRIES = {"performer": "Performed by", "set_up": "Set-up", "procedure": "Procedure"}


def _protected(cell: BenchCell) -> ProtectedCell:
    return ProtectedCell(cell=cell.address, value="" if cell.value is None else cell.value)
