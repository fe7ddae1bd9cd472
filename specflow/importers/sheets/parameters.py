"""The sheet of the project's own parameters, and how a cell names a parameter of the dictionary."""

from __future__ import annotations

from collections.abc import Sequence

from specflow.errors import ParameterError
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet
from specflow.model.parameter import Better, Parameter
from specflow.model.sheet import SheetColumn, SheetLayout
from specflow.parameters import Candidate
from specflow.units import format_unit, parse_unit

LAYOUT = SheetLayout(
    noun="parameter",
    title="Parameters",
    aliases=("Parameter", "Own parameters", "Parameter dictionary"),
    intro="Only quantities that the built-in dictionary lacks. Everything else is known already.",
    columns=(
        MARK_COLUMN,
        SheetColumn(
            key="key",
            title="Key",
            aliases=("ID", "Parameter key"),
            required=True,
            guidance="Short name in small letters, digits and underscores.",
            example="beam_table_load_time",
            width=22,
        ),
        SheetColumn(
            key="title",
            title="Title",
            aliases=("Name",),
            guidance="As people say it.",
            example="Beam table load time",
            width=26,
        ),
        SheetColumn(
            key="unit",
            title="Unit",
            aliases=("Units",),
            required=True,
            guidance="The unit that it is kept in.",
            example="µs",
            width=12,
        ),
        SheetColumn(
            key="better",
            title="Better",
            aliases=("Better direction", "Direction"),
            required=True,
            guidance="Which way is the better one.",
            choices=tuple(Better),
            example="lower",
        ),
        SheetColumn(
            key="log_factor",
            title="Ratio is",
            guidance="How a ratio or % of it becomes dB: power (10 log) or amplitude (20 log). Empty: it is no ratio.",
            choices=("power", "amplitude"),
            example="",
        ),
        SheetColumn(
            key="aliases", title="Aliases", guidance="Other names met in sheets, separated by ';'.", width=28
        ),
        SheetColumn(key="planes", title="Planes", guidance="Planes that make sense, separated by ';'."),
        SheetColumn(
            key="statistics", title="Statistics", guidance="Statistics that make sense, separated by ';'."
        ),
        SheetColumn(
            key="needs_bandwidth",
            title="Needs a bandwidth",
            guidance="yes for densities, noise and emissions.",
            choices=("yes", "no"),
            example="no",
        ),
        SheetColumn(
            key="radiated",
            title="Radiated power",
            guidance="yes if it is power sent out.",
            choices=("yes", "no"),
            example="no",
        ),
        SheetColumn(key="group", title="Group", guidance="Under what it is listed.", example="own"),
        SheetColumn(key="description", title="Description", aliases=("Note", "Definition"), width=34),
    ),
)


def identify(row: SheetRow, intake: Intake) -> str:
    """The key."""
    return row.needed("key")


def read(rows: Sequence[SheetRow], intake: Intake) -> None:
    """Add one parameter a row, and let the dictionary know them from here on."""
    for row in rows:
        parameter = _parameter(row, intake)
        if parameter is not None:
            intake.add(parameter, row.stated())
    intake.extend_dictionary()


def _parameter(row: SheetRow, intake: Intake) -> Parameter | None:
    unit = row.attempt("unit", lambda: format_unit(parse_unit(row.needed("unit"))))
    factor = row.one_of("log_factor", ("power", "amplitude"), "")
    if (
        intake.snapshot.find(Parameter, row.subject) is None
        and intake.dictionary.get(row.subject) is not None
    ):
        intake.note(
            row,
            "key",
            f"{row.subject} replaces the parameter of the same key in the built-in dictionary",
            "choose another key if that is not meant",
            rule="workbook-replaces-parameter",
        )
    row.needed("better")
    return row.build(
        Parameter,
        key=row.subject,
        title=row.prose("title") or row.subject,
        group=row.prose("group") or "own",
        unit=unit,
        better=row.choice("better", Better, Better.NEITHER),
        log_factor={"power": 10, "amplitude": 20}.get(factor),
        planes=row.words("planes"),
        statistics=row.words("statistics"),
        aliases=row.words("aliases"),
        needs_bandwidth=row.yes("needs_bandwidth", False),
        radiated=row.yes("radiated", False),
        description=row.prose("description"),
    )


def known_parameter(row: SheetRow, column: str, intake: Intake) -> Candidate | None:
    """Return the parameter that a cell names by key, title or alias; none or several is a finding."""
    text = row.needed(column)
    unit = row.text("unit") if row.has("unit") else ""
    found = intake.dictionary.match(text, unit=unit) if text else []
    if text and len(found) != 1:
        try:
            intake.dictionary.resolve(text, unit=unit)
        except ParameterError as error:
            row.fault(
                column,
                error.message,
                error.hint
                or "write the key, title or alias of a known parameter, or define it on the sheet Parameters",
                rule="workbook-unknown-parameter",
            )
    return found[0] if len(found) == 1 else None


SHEET = Sheet(LAYOUT, Parameter, read, identify)
