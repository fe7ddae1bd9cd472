"""The sheet of conditions sets: one row a dimension, rows of one set grouped by its id."""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial

from specflow.conditions import expand, read_combination, read_dimension, read_exclusions, set_words
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet, by_code
from specflow.model.conditions import Combination, ConditionsSet, Dimension, Exclusion, MatchingRule
from specflow.model.sheet import EXAMPLE, SheetColumn, SheetLayout

LAYOUT = SheetLayout(
    noun="conditions_set",
    title="Conditions",
    aliases=("Conditions sets", "Condition sets", "Conditions set", "Condition set", "Test conditions"),
    intro=(
        "Under which conditions limits hold and must be proved. One row a dimension; rows with one ID are one set. "
        "A dimension that is not listed is not spoken of."
    ),
    columns=(
        MARK_COLUMN,
        SheetColumn(
            key="id",
            title="ID",
            aliases=("Set", "Set ID", "Conditions ID", "Conditions set", "Identifier"),
            required=True,
            guidance="Short code of the set. Empty below a row: the same set.",
            example="CS-TX-FULL",
        ),
        SheetColumn(
            key="title",
            title="Title",
            aliases=("Name",),
            guidance="Once a set.",
            example="Full transmit band",
            width=24,
        ),
        SheetColumn(
            key="combination",
            title="Combination",
            aliases=("Combine", "Combined as"),
            guidance="Once a set. all combinations (empty), corners, or listed rows: the n-th values belong together.",
            choices=tuple(Combination),
            open_choices=True,
            example="all combinations",
            width=18,
        ),
        SheetColumn(
            key="dimension",
            title="Dimension",
            aliases=("Condition", "Condition name"),
            field="dimensions",
            required=True,
            guidance=(
                "frequency, temperature_ambient, supply_voltage, theta, channel ... A temperature says where. "
                "Several, separated by ';', list one point a row."
            ),
            example="frequency",
            width=22,
        ),
        SheetColumn(
            key="required",
            title="Required",
            aliases=("Values", "Required values", "Value", "Points"),
            field="dimensions",
            required=True,
            guidance="27.5, 28.75, 30 GHz · -40 to 85 °C step 25 K · not required · any. A range states its step.",
            example="27.5, 28.75, 30 GHz",
            width=32,
        ),
        SheetColumn(
            key="unit",
            title="Unit",
            aliases=("Units",),
            field="dimensions",
            guidance="If not with the values.",
            width=9,
        ),
        SheetColumn(
            key="tolerance",
            title="Setting tolerance",
            aliases=("Tolerance", "±"),
            field="dimensions",
            guidance="How far the actual value may be off. Empty: exact.",
            example="10 MHz",
            width=14,
        ),
        SheetColumn(
            key="rule",
            title="Matching",
            aliases=("Rule", "Matching rule"),
            field="dimensions",
            guidance="Empty: within tolerance.",
            choices=tuple(MatchingRule),
            open_choices=True,
            example="within tolerance",
            width=18,
        ),
        SheetColumn(
            key="except",
            title="Except",
            aliases=("Exclusions", "Excluding", "Excluded"),
            field="exclusions",
            guidance="Points that are not required: frequency = 30 GHz and temperature_ambient = 85 °C because ...",
            width=28,
        ),
        SheetColumn(key="source", title="Source", aliases=("Reference",), guidance="Once a set.", width=22),
        SheetColumn(
            key="note",
            title="Note",
            aliases=("Notes", "Remarks", "Comment"),
            guidance="Once a set.",
            width=24,
        ),
    ),
    more_examples=(
        {
            "mark": EXAMPLE,
            "id": "CS-TX-FULL",
            "dimension": "temperature_ambient",
            "required": "-30 to 55 °C step 45 K",
            "tolerance": "3 K",
        },
        {"mark": EXAMPLE, "id": "CS-TX-FULL", "dimension": "humidity", "required": "not required"},
    ),
)


def read(rows: Sequence[SheetRow], intake: Intake) -> None:
    """Add one set for the rows of each id."""
    for group in by_code(rows):
        _read_set(group, intake)


def _read_set(rows: Sequence[SheetRow], intake: Intake) -> None:
    combination, named = _combination(rows)
    notes: list[str] = []
    single = [
        found
        for row in rows
        if len(row.lines("dimension")) < 2 and not _only_excepts(row)
        if (found := _dimension(row, combination is Combination.CORNERS, notes)) is not None
    ]
    listed = _listed_dimensions(rows, notes)
    dimensions = (*single, *listed)
    exclusions = [one for row in rows for one in _exclusions(row, dimensions)]
    if not all(row.sound for row in rows):
        return
    document = rows[0].build(
        ConditionsSet,
        id=rows[0].subject,
        title=_once(rows, "title"),
        dimensions=dimensions,
        combination=Combination.LISTED if listed else combination,
        listed=(*named, *(one.name for one in listed)) if listed or named else (),
        exclusions=tuple(exclusions),
        source=_once(rows, "source"),
        note=_once(rows, "note"),
        origin=rows[0].origin("required"),
    )
    points = None if document is None else rows[0].attempt("required", lambda: expand(document))
    if document is None or points is None or not all(row.sound for row in rows):
        return
    intake.add(document, rows[0].stated())
    count = f"{points.size} required point{'s' if points.size != 1 else ''}"
    intake.echo(document.id, "; ".join((f"{count}: {set_words(document)}", *dict.fromkeys(notes))))


def _combination(rows: Sequence[SheetRow]) -> tuple[Combination, tuple[str, ...]]:
    """How the dimensions are combined, and the dimensions that are named as listed."""
    text = _once(rows, "combination")
    row = next((row for row in rows if row.text("combination")), rows[0])
    return row.attempt("combination", lambda: read_combination(text)) or (Combination.ALL, ())


def _once(rows: Sequence[SheetRow], column: str) -> str:
    """The text that is said once a set, on any of its rows; another text on a later row is a finding."""
    said = [(row, text) for row in rows if (text := row.prose(column))]
    for row, text in said[1:]:
        if text != said[0][1]:
            place = said[0][0].origin(column).cell
            row.fault(column, f"{text!r} contradicts {said[0][1]!r} in {place}", "say it once a set")
    return said[0][1] if said else ""


def _only_excepts(row: SheetRow) -> bool:
    return bool(row.text("except")) and not row.text("dimension") and not row.text("required")


def _dimension(row: SheetRow, corners: bool, notes: list[str]) -> Dimension | None:
    name, values = row.needed("dimension"), row.needed("required")
    if not name or not values:
        return None
    cells = {column: row.text(column) for column in ("unit", "tolerance", "rule")}
    found = row.attempt("required", lambda: read_dimension(name, values, **cells, corners=corners))
    if found is None:
        return None
    span = found.dimension.span
    if corners and span is not None and span.step is not None:
        row.fault(
            "required",
            f"corners use the ends of the range of {found.dimension.name} only, but it states a step",
            "drop the step, or combine as all combinations",
        )
        return None
    notes.extend(found.notes)
    return found.dimension


def _listed_dimensions(rows: Sequence[SheetRow], notes: list[str]) -> list[Dimension]:
    """Dimensions named together in one cell: each row is one point, its values in the order of the names."""
    listed = [row for row in rows if len(row.lines("dimension")) > 1]
    if not listed:
        return []
    names = listed[0].lines("dimension")
    columns: list[list[str]] = [[] for _ in names]
    for row in listed:
        values = row.lines("required")
        if row.lines("dimension") != names:
            row.fault(
                "dimension",
                f"the rows of one list name the same dimensions: {'; '.join(names)}",
                "use one order",
            )
        elif len(values) != len(names):
            row.fault(
                "required", f"{len(names)} dimensions and {len(values)} values", "write one value a dimension"
            )
        else:
            for column, value in zip(columns, values, strict=True):
                column.append(value)
    tolerances = _parts(listed[0], "tolerance", len(names))
    units = _parts(listed[0], "unit", len(names))
    found = []
    for name, column, tolerance, unit in zip(names, columns, tolerances, units, strict=True):
        read = partial(read_dimension, name, "; ".join(column), tolerance=tolerance, unit=unit)
        one = listed[0].attempt("required", read)
        if one is not None:
            found.append(one.dimension)
            notes.extend(one.notes)
    return found


def _parts(row: SheetRow, column: str, count: int) -> list[str]:
    """The parts of a cell, one a dimension; an empty cell is as many empty parts."""
    text = row.text(column)
    parts = [part.strip() for part in text.split(";")] if text else [""] * count
    if len(parts) != count:
        row.fault(
            column,
            f"{row.layout.column(column).title} has {len(parts)} part{'s' * (len(parts) != 1)} for {count} dimensions",
            "write one part a dimension, separated by ';'",
        )
        return [""] * count
    return parts


def _exclusions(row: SheetRow, dimensions: Sequence[Dimension]) -> tuple[Exclusion, ...]:
    text = row.text("except")
    return row.attempt("except", lambda: read_exclusions(text, dimensions)) or () if text else ()


SHEET = Sheet(LAYOUT, ConditionsSet, read, grouped=True)
