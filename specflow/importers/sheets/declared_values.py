"""The sheet of declared values: what the maker states, and limits may refer to by name."""

from __future__ import annotations

import re

from specflow.errors import UnitError
from specflow.importers.sheets.cells import CellFault, text_number
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet, each_row
from specflow.model.base import code_key
from specflow.model.declared import DeclaredValue
from specflow.model.sheet import SheetColumn, SheetLayout
from specflow.units import Quantity, format_quantity, format_unit, parse_quantity, parse_unit

_NAME = re.compile(r"[A-Za-z_][A-Za-z0-9_]*")
_LETTERS = re.compile(r"[A-Za-zµμΩ°%]")

LAYOUT = SheetLayout(
    noun="declared_value",
    title="Declared values",
    aliases=("Declared value", "Declarations", "Declared"),
    intro="Values that the maker declares, such as rated power. Limits refer to them by name: P_rated + 2 dB.",
    columns=(
        MARK_COLUMN,
        SheetColumn(
            key="name",
            title="Name",
            aliases=("Symbol", "Declared name"),
            required=True,
            guidance="The name that limits use: letters, digits and underscores.",
            example="P_rated",
        ),
        SheetColumn(
            key="value",
            title="Value",
            aliases=("Declared value", "Quantity"),
            required=True,
            guidance="Number and unit: 38 dBm. The unit may stand in the column Unit instead.",
            example="38 dBm",
        ),
        SheetColumn(
            key="unit",
            title="Unit",
            aliases=("Units",),
            guidance="Only if the value is a bare number.",
            width=10,
        ),
        SheetColumn(
            key="id", title="ID", aliases=("Declaration ID", "Identifier"), guidance="Empty: the name."
        ),
        SheetColumn(
            key="declared_on",
            title="Declared on",
            aliases=("Date", "Declaration date"),
            guidance="Date, as 2026-03-31.",
            example="2026-03-31",
        ),
        SheetColumn(
            key="declared_by", title="Declared by", aliases=("By",), example="Systems engineering", width=20
        ),
        SheetColumn(
            key="applies_to",
            title="Applies to",
            aliases=("Variant",),
            guidance="The variant or block that it holds for. Empty: all.",
            example="",
        ),
        SheetColumn(key="note", title="Note", aliases=("Notes", "Remarks", "Comment", "Meaning"), width=28),
    ),
)


def identify(row: SheetRow, intake: Intake) -> str:
    """The id, or the name where no id is given."""
    return row.text("id") or row.needed("name")


def build(row: SheetRow, intake: Intake) -> DeclaredValue | None:
    """Make one declared value of one row."""
    name = row.needed("name")
    if name and not _NAME.fullmatch(name):
        row.fault(
            "name", f"{name!r} cannot be used in a limit", "use letters, digits and underscores: P_rated"
        )
    _check_single(row, name, intake)
    quantity = unit_cell(row, "value", "unit")
    if quantity is None:
        return None
    applies_to = row.prose("applies_to")
    held = f"{name} is {format_quantity(float(quantity.value), quantity.unit)}"
    intake.echo(row.subject, held + (f" for {applies_to}" if applies_to else ""))
    return row.build(
        DeclaredValue,
        id=row.subject,
        name=name,
        value=float(quantity.value),
        text=row.text("value"),
        unit=format_unit(quantity.unit),
        declared_on=row.date("declared_on"),
        declared_by=row.prose("declared_by"),
        applies_to=applies_to,
        note=row.prose("note"),
        origin=row.origin("value"),
    )


def _check_single(row: SheetRow, name: str, intake: Intake) -> None:
    """A name that limits refer to has one value for each of what it applies to."""
    for other in intake.all(DeclaredValue):
        same = other.name == name and code_key(other.applies_to) == code_key(row.prose("applies_to"))
        if same and code_key(other.id) != code_key(row.subject):
            row.fault(
                "name",
                f"{name} is declared already, by {other.id} as {other.text or other.value}",
                f"edit {other.id}, choose another name, or say what each of the two applies to",
            )


def unit_cell(row: SheetRow, column: str, unit_column: str = "") -> Quantity | None:
    """Return the quantity of a cell, which has its unit with it, in the unit column or in the header.

    None where the cell is empty or refused. A number without any unit is refused.
    """
    text = row.text(column)
    if not text:
        if row.layout.column(column).required:
            row.needed(column)
        return None
    hint = row.text(unit_column) if unit_column else ""
    hint = hint or row.units.get(column, "")
    try:
        if _LETTERS.search(text.lower().replace("e", "")):
            return parse_quantity(text)
        number = text_number(text, row.grid.decimal)
        if not hint:
            raise CellFault(
                f"{text} has no unit",
                f"write the unit with the number, as in {row.layout.column(column).example or '3 dB'}",
            )
        return Quantity(number, parse_unit(hint))
    except UnitError as error:
        row.fault(column, error.message, error.hint or "write a number and its unit")
    except CellFault as fault:
        row.fault(column, fault.message, fault.remedy)
    return None


SHEET = Sheet(LAYOUT, DeclaredValue, each_row(build), identify)
