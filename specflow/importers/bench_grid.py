"""One sheet of a test sheet that came back: the cells as they are, beside what its identity says of them."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cached_property

from specflow.importers.readers import Grid, OddKind, Value, column_letter, column_number, is_blank
from specflow.model.bench_sheet import BenchIdentity, Role, RowIdentity, SheetIdentity

_WRITTEN = (OddKind.ERROR, OddKind.NO_VALUE)  # what a reader gives as an empty cell, and is none


@dataclass(frozen=True)
class BenchGrid:
    """The cells of a sheet and its identity; ``layout`` tells this test sheet from every other."""

    grid: Grid
    sheet: SheetIdentity
    identity: BenchIdentity
    layout: str

    @cached_property
    def rows(self) -> Mapping[int, RowIdentity]:
        """The rows of the sheet by number."""
        return {row.row: row for row in self.identity.rows if row.sheet == self.sheet.name}

    @cached_property
    def places(self) -> Mapping[tuple[Role, str, str], int]:
        """The columns: role, dimension and unit → number."""
        columns = enumerate(self.sheet.columns, 1)
        return {(column.role, column.dimension, column.unit): place for place, column in columns}

    def place(self, role: Role, dimension: str = "", unit: str = "") -> int:
        """The number of a column."""
        return self.places[role, dimension, unit]

    def letter(self, role: Role, dimension: str = "", unit: str = "") -> str:
        """The letter of a column."""
        return column_letter(self.place(role, dimension, unit))

    def entry(self, row: RowIdentity, role: Role) -> Value:
        """What stands in a column of a row."""
        return self.grid.value(row.row, self.place(role))

    def is_empty(self, row: RowIdentity, role: Role) -> bool:
        """Whether nothing is written in a column of a row; an error, or a formula without a value, is something."""
        place = self.place(role)
        odd = self.grid.odd.at(row.row, place)
        return is_blank(self.grid.value(row.row, place)) and (odd is None or odd.kind not in _WRITTEN)

    def at(self, cell: str) -> Value:
        """What stands in a cell."""
        row, column = coordinates(cell)
        return self.grid.value(row, column)

    def title(self, column: int) -> str:
        """The header of a column as it was written."""
        columns = self.sheet.columns
        return columns[column - 1].title if column <= len(columns) else ""

    def only(self, rows: Sequence[RowIdentity]) -> Grid:
        """The sheet with nothing on it but the headers and these rows, all at their places."""
        wanted = {self.sheet.header_row, *(row.row for row in rows)}
        cells = [self.grid.row(row) if row in wanted else [] for row in range(1, max(wanted) + 1)]
        return replace(self.grid, rows=cells, first_row=1, first_column=1)


def coordinates(cell: str) -> tuple[int, int]:
    """``coordinates("C17")`` is (17, 3)."""
    letters = cell.rstrip("0123456789")
    return int(cell[len(letters) :]), column_number(letters)
