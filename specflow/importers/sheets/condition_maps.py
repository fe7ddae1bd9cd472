"""The sheet of condition maps: how system conditions become a block's own, one formula a row."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from specflow.conditions import KNOWN_DIMENSIONS, find_dimension, map_columns, parse_map_entry
from specflow.errors import ConditionsError
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet, by_code
from specflow.importers.sheets.spelling import near
from specflow.model.block import Block
from specflow.model.columns import Columns
from specflow.model.conditions import ConditionMap, ConditionsSet, Dimension, MapEntry
from specflow.model.sheet import SheetColumn, SheetLayout
from specflow.units import compatible, parse_unit

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
    entries = [_entry(row, intake) for row in rows]
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


def _entry(row: SheetRow, intake: Intake) -> MapEntry | None:
    text = row.needed("formula")
    entry = row.attempt("formula", lambda: parse_map_entry(text)) if text else None
    if entry is not None:
        units = _units(entry, intake)
        _note_unknown(row, intake, entry, units)
        row.attempt("formula", lambda: _check_units(entry, units))
    return entry


def _units(entry: MapEntry, intake: Intake) -> dict[str, str]:
    """The units of the conditions in a formula, of those that are known to a conditions set or to the dictionary."""
    own: dict[str, Dimension] = {
        dimension.name: dimension for known in intake.all(ConditionsSet) for dimension in known.dimensions
    }
    units: dict[str, str] = {}
    for name in _names(entry):
        known = own.get(name) or find_dimension(name)
        if known is not None:
            units[name] = known.unit
    return units


def _names(entry: MapEntry) -> list[str]:
    return [entry.target, *(term.dimension for term in entry.terms)]


def _note_unknown(row: SheetRow, intake: Intake, entry: MapEntry, units: dict[str, str]) -> None:
    spellings = [spelling for known in KNOWN_DIMENSIONS for spelling in (known.name, *known.aliases)]
    for name in _names(entry):
        if name not in units:
            intake.note(
                row,
                "formula",
                f"{name} is no known condition, and no conditions set has it" + near(name, spellings),
                "write the condition as the sheet Conditions or the evidence names it",
                rule="workbook-unknown-input",
                why="what no record and no conditions set states stays unstated, and with it what is made of it",
            )


def _check_units(entry: MapEntry, units: dict[str, str]) -> None:
    """Work the formula out once, in the units of its conditions; ConditionsError where they do not go together."""
    if any(term.dimension not in units for term in entry.terms):
        return
    stated = {term.dimension: np.ones(1) for term in entry.terms}
    trial = ConditionMap(id="trial", entries=(entry,))
    made = map_columns(trial, Columns(1, stated, {}, {name: units[name] for name in stated})).units
    unit, usual = made[entry.target], units.get(entry.target)
    if usual is not None and not _suits(unit, usual):
        raise ConditionsError(
            f"the formula gives {entry.target} in {unit or 'plain numbers'}, "
            f"but it is in {usual or 'plain numbers'}",
            hint=f"write the parts of the formula so that {usual or 'a plain number'} comes of them",
        )


def _suits(unit: str, usual: str) -> bool:
    if not unit or not usual:
        return unit == usual
    return compatible(parse_unit(unit), parse_unit(usual))


SHEET = Sheet(LAYOUT, ConditionMap, read, grouped=True)
