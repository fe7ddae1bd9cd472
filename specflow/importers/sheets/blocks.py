"""The sheet of blocks: the product tree with its planes."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Sequence

from specflow.errors import UnitError
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet
from specflow.model.base import code_key
from specflow.model.block import Block, Maturity, Plane, PlanePath, Tier
from specflow.model.sheet import EXAMPLE, SheetColumn, SheetLayout
from specflow.units import parse_quantity

_PATH = re.compile(
    r"^(?P<start>.+?)\s*(?:->|→)\s*(?P<end>[^:]+?)\s*:\s*(?P<gain>[^,±]+?)\s*,\s*u\s*=?\s*(?P<u>.+)$"
)
_PLANE = re.compile(r"^(?P<name>[^()]+?)\s*(?:\((?P<convention>[^()]*)\))?$")

LAYOUT = SheetLayout(
    noun="block",
    title="Blocks",
    aliases=("Block", "Product tree", "Block list"),
    intro="The product tree: one row a block (a type, not a specimen). The block without a parent is the system.",
    columns=(
        MARK_COLUMN,
        SheetColumn(
            key="id",
            title="ID",
            aliases=("Block ID", "Block", "Identifier", "Code"),
            required=True,
            guidance="A short code that never changes, such as TX-PA. Compared without case.",
            example="TX-PA",
        ),
        SheetColumn(
            key="name",
            title="Name",
            aliases=("Block name", "Title", "Description", "Designation"),
            guidance="What people call it. Empty: the id.",
            example="Transmit power amplifier",
            width=28,
        ),
        SheetColumn(
            key="tier",
            title="Tier",
            guidance="system, assembly or block. Empty: system without a parent, assembly with children, else block.",
            choices=tuple(Tier),
            example="block",
        ),
        SheetColumn(
            key="parent",
            title="Parent",
            aliases=("Parent ID", "Parent block", "Part of"),
            guidance="ID of the block that this one is part of. Empty for the system.",
            example="TX",
        ),
        SheetColumn(
            key="kind", title="Kind", guidance="amplifier, filter, mixer ... (free text)", example="amplifier"
        ),
        SheetColumn(
            key="quantity",
            title="Quantity",
            aliases=("Qty", "Number used", "Count"),
            guidance="How many of it are used in the parent. Empty: 1.",
            example="4",
            width=10,
        ),
        SheetColumn(
            key="order",
            title="Order",
            aliases=("Position",),
            guidance="Place among the blocks of its parent: 1, 2, 3 ... Empty: the order of the rows.",
            example="3",
            width=8,
        ),
        SheetColumn(
            key="planes",
            title="Planes",
            aliases=("Ports",),
            guidance="Ports where quantities are referred to, separated by ';'. A convention in brackets: face (EIRP).",
            example="PA input; PA output",
            width=26,
        ),
        SheetColumn(
            key="paths",
            title="Plane paths",
            aliases=("Paths",),
            guidance="Known ways between planes, separated by ';': PA output -> antenna port: -0.8 dB, u 0.1 dB",
            example="PA input -> PA output: 24 dB, u 0.15 dB",
            width=34,
        ),
        SheetColumn(
            key="owner",
            title="Owner",
            aliases=("Responsible",),
            guidance="Who answers for it.",
            example="RF team",
        ),
        SheetColumn(
            key="maturity",
            title="Maturity",
            guidance="How well its figures are known. Empty: estimated.",
            choices=tuple(Maturity),
            example="simulated",
            width=20,
        ),
        SheetColumn(
            key="part_number", title="Part number", aliases=("Part no.", "P/N"), example="INV-1042-A"
        ),
        SheetColumn(key="supplier", title="Supplier", aliases=("Vendor",), example=""),
        SheetColumn(key="note", title="Note", aliases=("Notes", "Remarks", "Comment"), example="", width=28),
    ),
    more_examples=(
        {"mark": EXAMPLE, "id": "UT", "name": "User terminal (invented)", "planes": "array face (EIRP)"},
        {"mark": EXAMPLE, "id": "TX", "name": "Transmit chain", "parent": "UT"},
    ),
)


def read(rows: Sequence[SheetRow], intake: Intake) -> None:
    """Add one block a row."""
    parents = {code_key(row.text("parent")) for row in rows} | {
        code_key(block.parent) for block in intake.all(Block) if block.parent
    }
    places: Counter[str] = Counter()
    for row in rows:
        parent = code_key(row.text("parent"))
        places[parent] += 1
        block = _block(row, intake, places[parent], parents)
        if block is not None:
            intake.add(block, row.stated())


def _block(row: SheetRow, intake: Intake, place: int, parents: set[str]) -> Block | None:
    parent = intake.reference(row, "parent", Block)
    default = (
        Tier.SYSTEM if parent is None else Tier.ASSEMBLY if code_key(row.subject) in parents else Tier.BLOCK
    )
    return row.build(
        Block,
        id=row.subject,
        name=row.prose("name") or row.subject,
        tier=row.choice("tier", Tier, default),
        parent=parent,
        kind=row.prose("kind"),
        quantity=row.whole("quantity", 1, least=1),
        order=row.whole("order", place),
        planes=tuple(_plane(row, text) for text in row.lines("planes")),
        paths=tuple(path for text in row.lines("paths") if (path := _path(row, text))),
        owner=row.prose("owner"),
        maturity=row.choice("maturity", Maturity, Maturity.ESTIMATED),
        part_number=row.text("part_number"),
        supplier=row.prose("supplier"),
        note=row.prose("note"),
        origin=row.origin(),
    )


def _plane(row: SheetRow, text: str) -> Plane:
    parts = _PLANE.match(text)
    if parts is None:
        row.fault(
            "planes", f"the plane {text!r} cannot be read", "write planes as: LNA input; array face (EIRP)"
        )
        return Plane(name=text)
    return Plane(name=parts["name"], convention=parts["convention"] or "")


def _path(row: SheetRow, text: str) -> PlanePath | None:
    parts = _PATH.match(text)
    if parts is None:
        row.fault(
            "paths",
            f"the path {text!r} cannot be read: it needs both planes, the gain and its standard uncertainty u",
            "write paths as: PA output -> antenna port: -0.8 dB, u 0.1 dB",
        )
        return None
    try:
        gain, spread = _decibels(parts["gain"]), _decibels(parts["u"])
    except UnitError as error:
        row.fault("paths", error.message, error.hint or "state gain and u in dB")
        return None
    return PlanePath(start=parts["start"], end=parts["end"], gain_db=gain, standard_uncertainty_db=spread)


def _decibels(text: str) -> float:
    quantity = parse_quantity(text)
    if quantity.unit.symbol != "dB":
        raise UnitError(f"{text} is not in dB")
    return float(quantity.value)


SHEET = Sheet(LAYOUT, Block, read)
