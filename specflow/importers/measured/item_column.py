"""Which item each row is of: its column, else what is stated for the table, else the name of the sheet."""

from __future__ import annotations

import numpy as np

from specflow.importers.measured.carried import ditto_question
from specflow.importers.measured.conditions import words_of_rows
from specflow.importers.measured.result import Role
from specflow.importers.measured.stated import MAPPING, PERSON
from specflow.importers.measured.subject import item_name
from specflow.importers.measured.work import TableWork
from specflow.model.base import code_key
from specflow.model.columns import TextColumn
from specflow.model.requirement import Method

_ON_AN_ITEM = (Method.TEST, Method.DEMONSTRATION, Method.INSPECTION)


def read_items(work: TableWork) -> TextColumn:
    """The item of each row, as recorded; -1 where nothing names one."""
    columns = work.of(Role.ITEM)
    if columns:
        if any(one.by == PERSON for one in work.stated.items):
            work.notes.append("items are named row by row; the one that was stated was not used")
        words = words_of_rows(work.table, columns[0], work.rows, work.rejects, work.notes)
        ditto = ditto_question(columns[0], words)
        work.questions += [ditto] if ditto else []
        return words
    item = item_name(work.stated.items, work.context)
    of_sheet = _item_of_sheet(work)
    if item:
        if item != work.stated.text("item"):
            work.notes.append(f"the item is {item}, as the project knows it")
        is_mapped = any(one.by == MAPPING for one in work.stated.items)
        if of_sheet and not is_mapped and _id(work, of_sheet) != _id(work, item):
            what = f"the sheet has the name of the item {of_sheet}, and {item} is stated"
            remedy = f'say nothing of the item for this sheet; or [table.stated] item = "{item}" in a mapping'
            work.ask("item", "", what, remedy)
    elif of_sheet:
        item = of_sheet
        work.notes.append(f"the item is {item}, by the name of the sheet")
    if item:
        return TextColumn(np.zeros(len(work.rows), np.int32), (item,))
    return TextColumn(np.full(len(work.rows), -1, np.int32), ())


def ask_for_item(work: TableWork, method: Method, items: TextColumn) -> None:
    """Ask where a test does not say of a row which item it was on."""
    unnamed = int(np.count_nonzero(items.codes < 0))
    pivot = work.mapping.pivot
    if method not in _ON_AN_ITEM or not unnamed or (pivot is not None and "{item}" in pivot.header):
        return
    if unnamed == len(work.rows):
        remedy = (
            '--state item=SERIAL, an item column, or a line "DUT: SERIAL" above the table; '
            "results of a simulation: --state method=analysis"
        )
        work.ask("item", "", f"a {method.value} must say which item it was on", remedy)
        return
    column = work.of(Role.ITEM)[0]
    first = int(work.rows[int(np.argmax(items.codes < 0))])
    work.ask(
        column.header.text,
        work.table.grid.address(first, column.column),
        f"column {column.letter} names no item in {unnamed} of {len(work.rows)} rows",
        f'write it into each row; or role = "item", fill_down = true for column {column.letter} in a mapping, where '
        "a blank cell means the one above; or skip_rows = [...] for rows that are no reading of an item",
    )


def _item_of_sheet(work: TableWork) -> str:
    """The name of the sheet, where the project knows an item of that name."""
    grid = work.table.grid
    known = grid.name != grid.file and code_key(grid.name) in work.context.snapshot.items_by_name
    return grid.name if known else ""


def _id(work: TableWork, name: str) -> str:
    item = work.context.snapshot.items_by_name.get(code_key(name))
    return item.id if item else name
