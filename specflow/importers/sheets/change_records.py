"""The sheet of change records: what changed of a block or an item, so that evidence before it is stale."""

from __future__ import annotations

from typing import get_args

from specflow.errors import ParameterError
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet, each_row
from specflow.model.block import Block, Item
from specflow.model.evidence import ItemChange
from specflow.model.sheet import SheetColumn, SheetLayout

_ASPECTS: tuple[str, ...] = get_args(ItemChange.model_fields["aspect"].annotation)

LAYOUT = SheetLayout(
    noun="item_change",
    title="Change records",
    aliases=("Change record", "Item changes", "Hardware changes"),
    intro="What changed of a block or one item, and when. Evidence of the named parameters from before it is stale.",
    columns=(
        MARK_COLUMN,
        SheetColumn(key="id", title="ID", aliases=("Change ID", "Number"), required=True, example="CR-021"),
        SheetColumn(
            key="block",
            title="Block",
            aliases=("Block ID",),
            guidance="ID of the block. Empty: the block of the item.",
            example="TX-PA",
        ),
        SheetColumn(
            key="item",
            title="Item",
            aliases=("Item ID",),
            guidance="ID of the one item that changed. Empty: all items.",
            example="PA-07",
        ),
        SheetColumn(
            key="aspect",
            title="Aspect",
            aliases=("What changed",),
            guidance="Empty: hardware.",
            choices=_ASPECTS,
            example="firmware",
        ),
        SheetColumn(
            key="parameters",
            title="Parameters",
            aliases=("Quantities", "Parameter"),
            guidance="Parameters that it touches, separated by commas. Empty: all.",
            example="psat, evm",
            width=22,
        ),
        SheetColumn(
            key="effective",
            title="Effective",
            aliases=("Date", "Effective date"),
            required=True,
            guidance="As 2026-03-31.",
            example="2026-03-31",
        ),
        SheetColumn(
            key="description",
            title="Description",
            required=True,
            guidance="What was done.",
            example="Bias table 1.4.3",
            width=36,
        ),
        SheetColumn(key="by", title="By", aliases=("Changed by",), example="RF team"),
    ),
)


def build(row: SheetRow, intake: Intake) -> ItemChange | None:
    """Make one change record of one row."""
    item = intake.reference(row, "item", Item)
    found = intake.find(Item, item)
    block = intake.reference(row, "block", Block) or (found.block if found else None)
    if block is None:
        row.fault("block", "neither block nor item is named", "write the id of what changed")
    return row.build(
        ItemChange,
        id=row.subject,
        block=block,
        item=item,
        aspect=row.one_of("aspect", _ASPECTS, "hardware"),
        parameters=_parameters(row, intake),
        effective=row.day("effective"),
        description=row.needed("description"),
        by=row.prose("by"),
        origin=row.origin("effective"),
    )


def _parameters(row: SheetRow, intake: Intake) -> tuple[str, ...]:
    keys: list[str] = []
    for name in row.words("parameters"):
        try:
            keys.append(intake.dictionary.resolve(name).key)
        except ParameterError as error:
            row.fault("parameters", error.message, error.hint, rule="workbook-unknown-parameter")
    return tuple(keys)


SHEET = Sheet(LAYOUT, ItemChange, each_row(build))
