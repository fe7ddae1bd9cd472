"""A sheet of the project workbook: its layout, how a row is identified, and how rows become documents."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.table import MARK
from specflow.model.base import Document, clean_code, code_key
from specflow.model.sheet import EXAMPLE, SheetColumn, SheetLayout

Build = Callable[[SheetRow, Intake], Document | None]
Read = Callable[[Sequence[SheetRow], Intake], None]

#: The first column of every sheet of the template.
MARK_COLUMN = SheetColumn(
    key=MARK,
    title="Mark",
    guidance=f"Leave empty. A row marked '{EXAMPLE}' is not loaded.",
    choices=(EXAMPLE,),
    example=EXAMPLE,
    width=10,
)


def own_id(row: SheetRow, intake: Intake) -> str:
    """The id that the row states in its column ``id``."""
    return row.needed("id")


@dataclass(frozen=True, slots=True)
class Sheet:
    """One sheet kind.

    ``identify`` gives the code of a row, "" when it has none; rows with the same code are one document where
    ``grouped``. ``read`` turns the rows into documents and adds them to the intake. ``may_be_another``: people use its
    name for other sheets too (a cover), so one without its headers is left aside and not refused.
    ``is_further``: another sheet of its noun is the one that is called like it.
    """

    layout: SheetLayout
    document: type[Document]
    read: Read
    identify: Callable[[SheetRow, Intake], str] = own_id
    grouped: bool = False
    may_be_another: bool = False
    is_further: bool = False

    def names(self) -> tuple[str, ...]:
        """What a worksheet of this kind may be called."""
        noun = () if self.is_further else (self.layout.noun,)
        return (self.layout.title, *self.layout.aliases, *noun)

    def identify_rows(self, rows: Sequence[SheetRow], intake: Intake) -> None:
        """Give every row its code and register it. In grouped sheets an empty id continues the row above."""
        above = ""
        doubtful = False
        for row in rows:
            continues = self.grouped and above and row.has("id") and not row.text("id")
            code = above if continues else self.identify(row, intake)
            column = "id" if row.has("id") and row.text("id") else self.layout.required[0].key
            try:
                row.subject = clean_code(code) if code else ""
            except ValueError as error:
                row.fault(column, str(error), "use a short code of letters, digits and signs such as - . / _")
            if row.subject:
                intake.register(self.document, row.subject, row, column, grouped=self.grouped)
                doubtful = doubtful or _note_decimal_id(row, column, intake)
            above = row.subject


def _note_decimal_id(row: SheetRow, column: str, intake: Intake) -> bool:
    """Say once a sheet that an id is a decimal number: typed as 4.10 it is stored as 4.1, whatever the cell shows."""
    value = row.grid.value(row.number, row.columns[column])
    if column != "id" or not isinstance(value, float) or value.is_integer():
        return False
    intake.note(
        row,
        column,
        f"the id is the number {row.subject}, which may have been typed as {row.subject}0",
        "format the column as text and type the ids again",
        rule="workbook-decimal-id",
    )
    return True


def each_row(build: Build) -> Read:
    """Return a reader that makes one document of each row."""

    def read(rows: Sequence[SheetRow], intake: Intake) -> None:
        for row in rows:
            document = build(row, intake)
            if document is not None and row.sound:
                intake.add(document, row.stated())

    return read


def by_code(rows: Sequence[SheetRow]) -> list[list[SheetRow]]:
    """Return the rows of each code together; a row without a code stands alone, so that its cells are read too."""
    groups: dict[str, list[SheetRow]] = {}
    for row in rows:
        groups.setdefault(code_key(row.subject) or f"\n{row.number}", []).append(row)
    return list(groups.values())
