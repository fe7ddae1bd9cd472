"""The sheet of items: the specimens of blocks."""

from __future__ import annotations

from collections.abc import Sequence

from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet, each_row
from specflow.importers.sheets.spelling import near
from specflow.model.base import code_key
from specflow.model.block import Block, HardwareType, Item
from specflow.model.sheet import SheetColumn, SheetLayout

LAYOUT = SheetLayout(
    noun="item",
    title="Items",
    aliases=("Item", "Specimens", "Serials", "DUTs"),
    intro="Physical specimens: one row each, with the build that was tested.",
    columns=(
        MARK_COLUMN,
        SheetColumn(
            key="id",
            title="ID",
            aliases=("Item ID", "Item", "Identifier", "Code"),
            required=True,
            guidance="A short code of the specimen that never changes.",
            example="PA-07",
        ),
        SheetColumn(
            key="block",
            title="Block",
            aliases=("Block ID", "Type", "Specimen of"),
            required=True,
            guidance="ID of the block that it is a specimen of.",
            example="TX-PA",
        ),
        SheetColumn(
            key="serial",
            title="Serial",
            aliases=("Serial number", "Serial no.", "S/N", "SN"),
            guidance="Serial number as it stands in measurement files. Empty: the id.",
            example="SN 007",
        ),
        SheetColumn(
            key="hardware_type",
            title="Hardware type",
            aliases=("Hardware", "Model type"),
            guidance="How representative it is. Empty: engineering.",
            choices=tuple(HardwareType),
            example="qualification",
            width=18,
        ),
        SheetColumn(
            key="hardware_revision",
            title="Hardware revision",
            aliases=("HW revision", "HW rev", "Revision"),
            example="B",
        ),
        SheetColumn(
            key="firmware",
            title="Firmware",
            aliases=("FW", "Firmware revision", "FW version"),
            example="1.4.2",
        ),
        SheetColumn(
            key="calibration",
            title="Calibration",
            aliases=("Calibration revision", "Calibration data"),
            guidance="Revision of the calibration data loaded into it.",
            example="cal 3",
        ),
        SheetColumn(
            key="built_into",
            title="Built into",
            aliases=("Installed in", "Part of item"),
            guidance="ID of the item that it was built into.",
            example="",
        ),
        SheetColumn(key="note", title="Note", aliases=("Notes", "Remarks", "Comment"), example="", width=28),
    ),
)


def build(row: SheetRow, intake: Intake) -> Item | None:
    """Make one item of one row."""
    return row.build(
        Item,
        id=row.subject,
        block=intake.link(row, "block", Block, code) if (code := row.needed("block")) else "",
        serial=row.text("serial") or row.subject,
        hardware_type=row.choice("hardware_type", HardwareType, HardwareType.ENGINEERING),
        hardware_revision=row.text("hardware_revision"),
        firmware=row.text("firmware"),
        calibration=row.prose("calibration"),
        built_into=intake.reference(row, "built_into", Item),
        note=row.prose("note"),
        origin=row.origin(),
    )


def known_items(row: SheetRow, column: str, names: Sequence[str], intake: Intake) -> tuple[str, ...]:
    """Return items named by id or serial, as their documents write them; an unknown one is a finding."""
    items = intake.all(Item)
    known = {code_key(item.serial): item.serial for item in items} | {
        code_key(item.id): item.id for item in items
    }
    for name in names:
        if code_key(name) not in known and intake.spelling(Item, name) is None:
            row.fault(
                column,
                f"there is no item or serial {name}" + near(name, known.values()),
                "write ids or serials of items of the project, or add them to the sheet Items",
                rule="workbook-unknown-reference",
            )
    return tuple(known.get(code_key(name), name) for name in names)


SHEET = Sheet(LAYOUT, Item, each_row(build))
