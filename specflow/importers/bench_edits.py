"""What was edited on a test sheet that may not be: protected cells, and values beside its rows."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from specflow.importers.bench_grid import BenchGrid, coordinates
from specflow.importers.measured.result import Question
from specflow.importers.readers import address, is_blank
from specflow.model.bench_sheet import Role

_MOST_EDITS = 50  # a sheet that was sorted has thousands; the first say it


def edits(bench: BenchGrid) -> list[Question]:
    """Ask about each protected cell that says something else, and about values beside the rows of the sheet."""
    found = [*_edited_cells(bench), *_strange_rows(bench)]
    if len(found) > _MOST_EDITS:
        more = len(found) - _MOST_EDITS
        what = f"and {more} more cells: were rows sorted, added or deleted?"
        found = [*found[:_MOST_EDITS], Question("", "", what, "copy the values into a new test sheet")]
    return found


def _edited_cells(bench: BenchGrid) -> Iterator[Question]:
    cells = [*bench.sheet.cells, *(cell for row in bench.rows.values() for cell in row.cells)]
    protected = {cell.cell: cell.value for cell in cells}
    for cell, was in protected.items():
        now = bench.at(cell)
        if not _same(was, now):
            yield _edited(cell, was, now, bench.title(coordinates(cell)[1]))
    yield from _filled_where_nothing_stood(bench, protected)


def _filled_where_nothing_stood(bench: BenchGrid, protected: Mapping[str, object]) -> Iterator[Question]:
    """A condition that a row does not have, and the item of a row that names none, may not be filled in either."""
    for row in bench.rows.values():
        open_ones = {one.dimension for one in row.point.conditions if one.is_open}
        for (role, dimension, _), place in bench.places.items():
            cell = address(row.row, place)
            if role is not Role.CONDITION or cell in protected or dimension in open_ones:
                continue
            if not is_blank(now := bench.grid.value(row.row, place)):
                yield _edited(cell, "", now, bench.title(place))


def _strange_rows(bench: BenchGrid) -> Iterator[Question]:
    value = bench.place(Role.VALUE)
    for row in range(bench.sheet.header_row + 1, bench.grid.last_row + 1):
        if row not in bench.rows and not is_blank(now := bench.grid.value(row, value)):
            what = f"{_shown(now)} stands in no row of the test sheet"
            yield Question("Value", address(row, value), what, "attach it as a table of a file of its own")


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
