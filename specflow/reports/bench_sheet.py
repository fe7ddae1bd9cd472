"""A test sheet laid out cell by cell: one sheet a block, its rows by set-up, what is open and what is not."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator, Sequence

from specflow.conditions import known_dimension
from specflow.model.base import code_key
from specflow.model.bench_sheet import (
    ENTRIES,
    GUIDE_SHEET,
    IDENTITY_SHEET,
    LISTS_SHEET,
    BenchCell,
    BenchColumn,
    BenchCondition,
    BenchPoint,
    BenchSheet,
    BenchWorkbook,
    Role,
)
from specflow.model.block import Block, Item
from specflow.model.parameter import QuantityIdentity
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.reports.about import CAUTION, EXPOSURE_CAUTION, INVENTED
from specflow.reports.set_ups import is_slow, merged, set_ups
from specflow.units import compatible, convert, format_value, parse_unit

HIGH_POWER_CAUTION = (
    "High power: terminate every port before power is switched on, with loads and attenuators that bear it; switch off "
    "before a connection is changed. Local rules and qualified practice decide."
)
HIGH_VOLTAGE_CAUTION = (
    "High voltage: what is supplied with more than 60 V can injure; work on it only as local rules and qualified "
    "practice allow."
)
_HIGH_POWER_DBM = 30.0  # 1 W; common practice, no source
_HIGH_VOLTAGE = 60.0  # V DC; common practice for what may be touched, no source

GUIDE = (
    "One sheet for each block. Its rows are grouped by set-up, in an order in which temperature and supply change as "
    "rarely as possible; a row is one value that is still missing, for one requirement or for several.",
    "Fill in the yellow cells: the value in the unit of its row (a bound as '<-90' is a value, too), the expanded "
    "uncertainty with k = 2 in the unit beside it (or leave it to the uncertainty register), the item, the date, the "
    "equipment, and a remark. Leave the value empty where nothing was measured; a half-filled sheet may be attached, "
    "and filled in further later.",
    "A value counts at the conditions that its row states. What was measured at others does not belong here: attach it "
    "as a file of its own. Where a condition is yellow, any value (within the range that is shown) will do: write down "
    "which it was.",
    "All other cells are protected, without a password, so that nothing is changed by accident: requirement, quantity, "
    "conditions, limit and unit of a row belong together. A protected cell that was edited is found when the sheet is "
    "attached, and the sheet is refused with the cell named. Rows are not to be added, deleted or sorted.",
    "Back with it: specflow attach FILE. No mapping is needed.",
)
REMARKS = ("as required", "set-up not available", "item not available", "item damaged", "to be repeated")


def bench_workbook(
    points: Sequence[BenchPoint], snapshot: Snapshot, dictionary: Dictionary, as_of: str, notes: Sequence[str]
) -> BenchWorkbook:
    """Return the workbook of these points: blocks in the order of the project, each on a sheet of its own."""
    by_block: dict[str, list[BenchPoint]] = {}
    for point in merged(points):
        by_block.setdefault(code_key(point.block), []).append(point)
    names = _SheetNames()
    sheets = [
        _Layout(block, by_block[code_key(block.id)], snapshot, dictionary).sheet(names.of(block.id))
        for block in snapshot.blocks
        if code_key(block.id) in by_block
    ]
    guide = (*GUIDE, CAUTION, *((INVENTED,) if snapshot.project.invented else ()))
    return BenchWorkbook(
        project=snapshot.project.name,
        revision=snapshot.revision,
        as_of=as_of,
        guide=guide,
        sheets=tuple(sheets),
        notes=tuple(notes),
    )


class _SheetNames:
    """Names that a workbook takes: 31 signs, none of a few, each once without regard to case."""

    def __init__(self) -> None:
        self._taken = {code_key(name) for name in (IDENTITY_SHEET, LISTS_SHEET, GUIDE_SHEET, "history")}

    def of(self, block: str) -> str:
        plain = re.sub(r"[\[\]:*?/\\]", "-", block).strip("'")[:31] or "block"
        name, number = plain, 1
        while code_key(name) in self._taken:
            number += 1
            name = f"{plain[:27]} {number}"
        self._taken.add(code_key(name))
        return name


class _Layout:
    """Lays out the sheet of one block."""

    def __init__(
        self, block: Block, points: Sequence[BenchPoint], snapshot: Snapshot, dictionary: Dictionary
    ) -> None:
        self._block = block
        self._points = points
        self._snapshot = snapshot
        self._dictionary = dictionary
        self._columns = tuple(self._all_columns())
        self._cells: list[BenchCell] = []

    def sheet(self, name: str) -> BenchSheet:
        """Return the sheet."""
        row = self._head()
        header_row = row
        for place, column in enumerate(self._columns, 1):
            self._put(row, place, "header", column.title)
        rows: list[tuple[int, BenchPoint]] = []
        found = set_ups(self._points)
        for number, one in enumerate(found, 1):
            row += 1
            words = f"Set-up {number} of {len(found)}: {one.words}"
            self._put(row, 1, "heading", f"{words} ({len(one.points)} value{'s' * (len(one.points) != 1)})")
            for point in one.points:
                row += 1
                self._row(row, len(rows) + 1, point)
                rows.append((row, point))
        return BenchSheet(
            name=name,
            block=self._block.id,
            title=f"{self._block.id}: {self._block.name}",
            columns=self._columns,
            header_row=header_row,
            cells=tuple(self._cells),
            rows=tuple(rows),
            items=tuple(item.id for item in self._items()),
            set_ups=len(found),
        )

    def _head(self) -> int:
        """Put what stands above the header; return the row of the header."""
        snapshot = self._snapshot
        self._put(1, 1, "title", f"Test sheet of block {self._block.id}: {self._block.name}")
        self._put(
            2,
            1,
            "text",
            f"Project {snapshot.project.name}, revision {snapshot.revision}. {self._items_words()}",
        )
        row = 3
        for kind, label in ENTRIES.items():
            self._put(row, 1, "label", label)
            self._cells.append(BenchCell(row=row, column=3, kind=kind, is_open=True))
            row += 1
        for caution in self._cautions():
            self._put(row, 1, "caution", caution)
            row += 1
        return row + 1

    def _row(self, row: int, number: int, point: BenchPoint) -> None:
        said = {(one.dimension, one.unit): one for one in point.conditions}
        for place, column in enumerate(self._columns, 1):
            match column.role:
                case Role.CONDITION:
                    self._condition(row, place, said.get((column.dimension, column.unit)))
                case Role.ITEM:
                    open_ = not point.must_be_item
                    value = point.item or None
                    self._cells.append(
                        BenchCell(row=row, column=place, kind="item", value=value, is_open=open_)
                    )
                case Role.VALUE | Role.UNCERTAINTY | Role.DATE | Role.REMARK | Role.EQUIPMENT:
                    self._cells.append(BenchCell(row=row, column=place, kind=column.role.value, is_open=True))
                case _:
                    self._put(row, place, "cell", self._text(column.role, number, point))

    def _text(self, role: Role, number: int, point: BenchPoint) -> str | float:
        match role:
            case Role.NUMBER:
                return float(number)
            case Role.REQUIREMENT:
                return ", ".join(point.requirements)
            case Role.QUANTITY:
                return self._quantity(point.quantity)
            case Role.LIMIT:
                alone = len(point.limits) == 1
                pairs = zip(point.requirements, point.limits, strict=True)
                return point.limits[0] if alone else "; ".join(f"{code}: {words}" for code, words in pairs)
            case Role.SO_FAR:
                return "; ".join(point.why)
            case Role.AT_BLOCK:
                return point.at_block
            case Role.U_UNIT:
                return point.u_unit
            case _:
                return point.unit

    def _condition(self, row: int, place: int, condition: BenchCondition | None) -> None:
        if condition is None:
            self._cells.append(BenchCell(row=row, column=place, kind="cell"))
        elif condition.is_open:
            self._cells.append(
                BenchCell(
                    row=row,
                    column=place,
                    kind="range",
                    is_open=True,
                    low=condition.low,
                    high=condition.high,
                )
            )
        else:
            self._put(row, place, "cell", condition.word or condition.value)

    def _put(self, row: int, column: int, kind: str, value: str | float | None) -> None:
        if value != "" and value is not None:
            self._cells.append(BenchCell(row=row, column=column, kind=kind, value=value))

    def _all_columns(self) -> Iterator[BenchColumn]:
        yield BenchColumn(role=Role.NUMBER, title="No.", width=5)
        yield BenchColumn(role=Role.REQUIREMENT, title="Requirement", width=16)
        yield BenchColumn(role=Role.QUANTITY, title="Quantity", width=30)
        for name, unit in self._dimensions():
            yield BenchColumn(
                role=Role.CONDITION, title=_dimension_title(name, unit), width=12, dimension=name, unit=unit
            )
        if any(point.at_block for point in self._points):
            yield BenchColumn(role=Role.AT_BLOCK, title="That is, at the block", width=34)
        yield BenchColumn(role=Role.LIMIT, title="Limit", width=24)
        yield BenchColumn(role=Role.SO_FAR, title="So far", width=16)
        yield BenchColumn(role=Role.ITEM, title="Item", width=14)
        yield BenchColumn(role=Role.VALUE, title="Value", width=12)
        yield BenchColumn(role=Role.UNIT, title="Unit of the value", width=10)
        yield BenchColumn(role=Role.UNCERTAINTY, title="U (k = 2)", width=10)
        yield BenchColumn(role=Role.U_UNIT, title="Unit of U", width=8)
        yield BenchColumn(role=Role.DATE, title="Date", width=12)
        yield BenchColumn(role=Role.EQUIPMENT, title="Equipment", width=20)
        yield BenchColumn(role=Role.REMARK, title="Remark", width=28)

    def _dimensions(self) -> list[tuple[str, str]]:
        """The dimensions of all points: what is slow first, then in the order in which sets name them."""
        names = dict.fromkeys((one.dimension, one.unit) for point in self._points for one in point.conditions)
        return sorted(names, key=lambda pair: not is_slow(pair[0]))

    def _quantity(self, quantity: QuantityIdentity) -> str:
        parameter = self._dictionary.get(quantity.parameter)
        parts = [parameter.title if parameter else quantity.parameter.replace("_", " ")]
        parts += [f"at {quantity.plane}"] if quantity.plane else []
        parts += [part for part in (quantity.statistic, quantity.polarisation) if part]
        parts += [f"in {_bandwidth(quantity.bandwidth_hz)}"] if quantity.bandwidth_hz else []
        return ", ".join(parts)

    def _items(self) -> list[Item]:
        return [item for item in self._snapshot.items if code_key(item.block) == code_key(self._block.id)]

    def _items_words(self) -> str:
        words = [f"{item.id} (serial {item.serial})" if item.serial else item.id for item in self._items()]
        return f"Items: {', '.join(words)}." if words else "No item of this block is known yet."

    def _cautions(self) -> Iterable[str]:
        known = (self._dictionary.get(point.quantity.parameter) for point in self._points)
        if any(parameter is not None and parameter.radiated for parameter in known):
            yield EXPOSURE_CAUTION
        if any(map(self._is_high_power, self._points)):
            yield HIGH_POWER_CAUTION
        if any(_is_high_voltage(one) for point in self._points for one in point.conditions):
            yield HIGH_VOLTAGE_CAUTION

    def _is_high_power(self, point: BenchPoint) -> bool:
        """Whether RF power of 1 W or more is to be expected: by a limit on it, or by what is fed in or out."""
        parameter = self._dictionary.get(point.quantity.parameter)
        power = parameter is not None and parameter.unit in ("dBm", "dBW")
        levels = [_dbm(one.value, one.unit) for one in point.conditions if one.dimension.endswith("_level")]
        if power:
            numbers = (re.findall(r"-?\d+(?:\.\d+)?", words) for words in point.limits)
            levels += [_dbm(float(one), point.unit) for found in numbers for one in found]
        return any(level is not None and level >= _HIGH_POWER_DBM for level in levels)


def _dbm(value: float | None, unit: str) -> float | None:
    if value is None or not compatible(parse_unit(unit or "1"), parse_unit("dBm")):
        return None
    return float(convert(value, parse_unit(unit), parse_unit("dBm")))


def _is_high_voltage(condition: BenchCondition) -> bool:
    if "voltage" not in condition.dimension or condition.value is None:
        return False
    return float(convert(condition.value, parse_unit(condition.unit or "V"), parse_unit("V"))) > _HIGH_VOLTAGE


def _dimension_title(name: str, unit: str) -> str:
    known = known_dimension(name)
    title = known.title if known else name.replace("_", " ")
    return f"{title[:1].upper()}{title[1:]}" + (f" ({unit})" if unit and unit != "1" else "")


def _bandwidth(hertz: float) -> str:
    for size, unit in ((1e9, "GHz"), (1e6, "MHz"), (1e3, "kHz")):
        if hertz >= size:
            return f"{format_value(hertz / size)} {unit}"
    return f"{format_value(hertz)} Hz"
