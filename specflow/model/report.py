"""A report: a table as data, made once, so that every renderer shows the same figures with the same rounding."""

from __future__ import annotations

from enum import StrEnum

from specflow.model.base import Document
from specflow.model.formula_sheet import FormulaSheet
from specflow.model.origin import Origin
from specflow.model.picture import Picture


class CellTone(StrEnum):
    """What a cell says about the state of things; a renderer decides how to show it."""

    PLAIN = ""
    GOOD = "good"
    DOUBTFUL = "doubtful"
    BAD = "bad"
    QUIET = "quiet"


class Align(StrEnum):
    """How a column is set."""

    LEFT = "left"
    RIGHT = "right"


class ReportColumn(Document):
    """A column: ``key`` for scripts, ``title`` for people, ``explains`` is the note under it.

    A ``detail`` describes; paper leaves it out where a table is wider than a page.
    """

    key: str
    title: str
    align: Align = Align.LEFT
    width: int = 14
    explains: str = ""
    detail: bool = False


class ReportCell(Document):
    """A cell: the text shown (rounded once, here), the number behind it if there is one, and where it came from.

    ``link`` leads to the first row about something in another table of the report: ``points/R-1``.
    """

    text: str = ""
    number: float | None = None
    tone: CellTone = CellTone.PLAIN
    origin: Origin | None = None
    link: str = ""


class ReportRow(Document):
    """A row; ``id`` is what it is about (a requirement id, a finding), ``depth`` its place in a tree."""

    id: str
    cells: tuple[ReportCell, ...]
    depth: int = 0


class ReportTable(Document):
    """One table of a report; ``rows`` have as many cells as there are columns."""

    key: str
    title: str
    intro: str = ""
    columns: tuple[ReportColumn, ...]
    rows: tuple[ReportRow, ...]

    def without(self, *keys: str) -> ReportTable:
        """Return the same table without some columns, for where there is less room."""
        kept = [place for place, column in enumerate(self.columns) if column.key not in keys]
        rows = (
            row.model_copy(update={"cells": tuple(row.cells[place] for place in kept)}) for row in self.rows
        )
        columns = tuple(self.columns[place] for place in kept)
        return self.model_copy(update={"columns": columns, "rows": tuple(rows)})


class ReportPicture(Document):
    """A picture and the key of the table that it stands above."""

    table: str
    picture: Picture


class Report(Document):
    """Several tables under one title, with the facts that state what it was made from and the caution.

    ``sheets`` are calculations to be followed by hand; only a workbook shows them as they are.
    """

    title: str
    subtitle: str = ""
    facts: tuple[tuple[str, str], ...] = ()
    cautions: tuple[str, ...] = ()
    tables: tuple[ReportTable, ...] = ()
    pictures: tuple[ReportPicture, ...] = ()
    sheets: tuple[FormulaSheet, ...] = ()

    def table(self, key: str) -> ReportTable:
        """Return one table by its key; KeyError when there is none."""
        for table in self.tables:
            if table.key == key:
                return table
        raise KeyError(key)
