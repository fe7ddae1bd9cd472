"""The sheet of condition maps: how system conditions become a block's own, one formula a row."""

from __future__ import annotations

from collections.abc import Sequence

from specflow.conditions import parse_map_entry
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet, by_code
from specflow.model.block import Block
from specflow.model.conditions import ConditionMap
from specflow.model.sheet import SheetColumn, SheetLayout

LAYOUT = SheetLayout(
    noun="condition_map",
    title="Condition maps",
    aliases=("Condition map", "Conditions maps"),
    intro="How system conditions become the conditions of a block. One formula a row; rows with one ID are one map.",
    columns=(
        MARK_COLUMN,
        SheetColumn(
            key="id",
            title="ID",
            aliases=("Map", "Map ID", "Identifier"),
            required=True,
            guidance="Short code of the map. Empty below a row: the same map.",
            example="CM-TX-PA",
        ),
        SheetColumn(
            key="block",
            title="Block",
            aliases=("Block ID",),
            guidance="ID of the block whose conditions these are. Once a map.",
            example="TX-PA",
        ),
        SheetColumn(
            key="formula",
            title="Formula",
            aliases=("Map entry", "Rule", "Mapping"),
            field="entries",
            required=True,
            guidance="if_frequency = frequency - lo_frequency · temperature_baseplate = temperature_ambient + 18 K",
            example="temperature_baseplate = temperature_ambient + 18 K",
            width=46,
        ),
        SheetColumn(key="source", title="Source", aliases=("Reference",), guidance="Once a map.", width=24),
        SheetColumn(
            key="note",
            title="Note",
            aliases=("Notes", "Remarks", "Comment"),
            guidance="Once a map.",
            width=24,
        ),
    ),
)


def read(rows: Sequence[SheetRow], intake: Intake) -> None:
    """Add one map for the rows of each id."""
    for group in by_code(rows):
        document = _map(group, intake)
        if document is not None:
            intake.add(document, group[0].stated())
            intake.echo(document.id, "; ".join(entry.text for entry in document.entries))


def _map(rows: Sequence[SheetRow], intake: Intake) -> ConditionMap | None:
    entries = [_entry(row) for row in rows]
    blocks = list(filter(None, (intake.reference(row, "block", Block) for row in rows)))
    if len(set(blocks)) > 1:
        rows[0].fault(
            "block", f"one map names several blocks: {', '.join(blocks)}", "give each block a map of its own"
        )
    if not all(row.sound for row in rows):
        return None
    return rows[0].build(
        ConditionMap,
        id=rows[0].subject,
        block=blocks[0] if blocks else None,
        entries=tuple(filter(None, entries)),
        source=next(filter(None, (row.prose("source") for row in rows)), ""),
        note=next(filter(None, (row.prose("note") for row in rows)), ""),
        origin=rows[0].origin("formula"),
    )


def _entry(row: SheetRow) -> object:
    text = row.needed("formula")
    return row.attempt("formula", lambda: parse_map_entry(text)) if text else None


SHEET = Sheet(LAYOUT, ConditionMap, read, grouped=True)
