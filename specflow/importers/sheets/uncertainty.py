"""The sheet of the uncertainty register: what a set-up is good for, by quantity, frequency and level."""

from __future__ import annotations

import re

from specflow.importers.sheets.declared_values import unit_cell
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.parameters import known_parameter
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet, each_row
from specflow.model.declared import UncertaintyEntry
from specflow.model.parameter import Parameter
from specflow.model.sheet import SheetColumn, SheetLayout
from specflow.units import (
    Quantity,
    convert,
    format_quantity,
    format_unit,
    parse_quantity,
    parse_unit,
    tolerance_unit,
)

_IN_CELL = re.compile(
    r"^(?:U\s*=\s*|±\s*|\+/-\s*)?(?P<amount>.+?)\s*(?:[,;(]\s*k\s*=\s*(?P<k>[0-9.]+)\s*\)?)?$"
)
_STANDARD = re.compile(r"^u\s*=\s*(?P<amount>.+)$")
_K = re.compile(r"^(?:k\s*=\s*)?(?P<k>[0-9]+(?:\.[0-9]+)?)$", re.IGNORECASE)

LAYOUT = SheetLayout(
    noun="uncertainty",
    title="Uncertainty register",
    aliases=("Uncertainty", "Uncertainties", "Measurement uncertainty", "MU register"),
    intro=(
        "What each test set-up is good for. An expanded uncertainty needs its coverage factor: U without k is refused. "
        "Used for evidence that brings no uncertainty of its own but names its set-up."
    ),
    columns=(
        MARK_COLUMN,
        SheetColumn(
            key="id",
            title="ID",
            aliases=("Line", "Entry", "Identifier"),
            required=True,
            guidance="A short code of this line.",
            example="U-EIRP-1",
        ),
        SheetColumn(
            key="set_up",
            title="Set-up",
            aliases=("Setup", "Test set-up", "Bench", "Range"),
            required=True,
            guidance="Name of the set-up, as measurement files give it.",
            example="Far-field range A",
            width=20,
        ),
        SheetColumn(
            key="parameter",
            title="Parameter",
            aliases=("Quantity",),
            required=True,
            guidance="Key, title or alias of the parameter.",
            example="eirp",
        ),
        SheetColumn(
            key="stated",
            title="Uncertainty",
            aliases=("U", "Expanded uncertainty", "MU"),
            field="standard_uncertainty",
            required=True,
            guidance="With unit: 0.8 dB (expanded), or u = 0.4 dB (standard).",
            example="0.8 dB",
        ),
        SheetColumn(
            key="k",
            title="Coverage factor",
            aliases=("k", "Coverage factor k", "k factor"),
            field="standard_uncertainty",
            guidance="k=2, or 1 for a standard uncertainty. May stand with the uncertainty: 0.8 dB (k=2).",
            example="k=2",
        ),
        SheetColumn(
            key="frequency_from",
            title="Frequency from",
            field="frequency_from_hz",
            aliases=("From frequency", "f min", "From"),
            guidance="With unit. Empty: no lower end.",
            example="27.5 GHz",
        ),
        SheetColumn(
            key="frequency_to",
            title="Frequency to",
            field="frequency_to_hz",
            aliases=("To frequency", "f max", "To"),
            guidance="With unit. Empty: no upper end.",
            example="30 GHz",
        ),
        SheetColumn(key="level_from", title="Level from", guidance="With unit. Empty: no lower end."),
        SheetColumn(key="level_to", title="Level to", guidance="With unit. Empty: no upper end."),
        SheetColumn(
            key="residual",
            title="Residual",
            aliases=("Instrument residual", "Noise floor"),
            guidance="What the instrument shows with nothing connected; readings near it are taken as bounds.",
        ),
        SheetColumn(
            key="source",
            title="Source",
            aliases=("Reference",),
            guidance="Where the figure comes from.",
            width=28,
        ),
    ),
)


def build(row: SheetRow, intake: Intake) -> UncertaintyEntry | None:
    """Make one register line of one row."""
    named = known_parameter(row, "parameter", intake)
    parameter = named.parameter if named else None
    spread = _standard_uncertainty(row, parameter)
    level = [unit_cell(row, "level_from"), unit_cell(row, "level_to")]
    residual = unit_cell(row, "residual")
    frequency = [_hertz(row, "frequency_from"), _hertz(row, "frequency_to")]
    level_unit = next((one.unit for one in level if one is not None), None)
    low, high = (
        row.attempt("level_to", lambda one=one: convert(float(one.value), one.unit, level_unit))  # type: ignore[misc]
        if one is not None and level_unit is not None
        else None
        for one in level
    )
    if spread is None or parameter is None:
        return None
    intake.echo(row.subject, _words(row, spread, parameter))
    return row.build(
        UncertaintyEntry,
        id=row.subject,
        set_up=row.needed("set_up"),
        parameter=parameter.key,
        standard_uncertainty=spread.value,
        unit=format_unit(spread.unit),
        stated=" ".join(filter(None, (row.text("stated"), row.text("k")))),
        frequency_from_hz=frequency[0],
        frequency_to_hz=frequency[1],
        level_from=low,
        level_to=high,
        level_unit=format_unit(level_unit) if level_unit else "",
        residual=None if residual is None else residual.value,
        residual_unit="" if residual is None else format_unit(residual.unit),
        source=row.prose("source"),
        origin=row.origin("stated"),
    )


def _words(row: SheetRow, spread: Quantity, parameter: Parameter) -> str:
    """Say how the line was read: its standard uncertainty, and where it holds."""
    said = f"{parameter.title} on {row.text('set_up')}: u = {format_quantity(float(spread.value), spread.unit)} (k = 1)"
    for what in ("frequency", "level"):
        low, high = row.text(f"{what}_from"), row.text(f"{what}_to")
        if low or high:
            said += f", {what} {' '.join(filter(None, (low and f'from {low}', high and f'to {high}')))}"
    return said


def _standard_uncertainty(row: SheetRow, parameter: Parameter | None) -> Quantity | None:
    text = row.needed("stated")
    standard = _STANDARD.match(text)
    expanded = _IN_CELL.match(text)
    if not text or expanded is None:
        return None
    factor = 1.0 if standard else _factor(row, expanded["k"] or row.text("k"))
    amount = row.attempt("stated", lambda: parse_quantity((standard or expanded)["amount"]))
    if amount is None or factor is None or parameter is None:
        return None
    wanted = tolerance_unit(parse_unit(parameter.unit))
    value = row.attempt(
        "stated",
        lambda: convert(
            float(amount.value), amount.unit, wanted, log_factor=parameter.log_factor, difference=True
        ),
    )
    if value is None:
        return None
    if not float(value) > 0:
        row.fault("stated", f"an uncertainty of {text} cannot be", "write an amount greater than 0")
        return None
    return Quantity(float(value) / factor, wanted)


def _factor(row: SheetRow, text: str) -> float | None:
    if not text:
        row.fault(
            "k" if row.has("k") else "stated",
            "an expanded uncertainty U without its coverage factor k says nothing",
            "write k=2 (or whatever it is) in the column Coverage factor, or the standard uncertainty as u = 0.4 dB",
            rule="workbook-uncertainty-without-k",
        )
        return None
    found = _K.match(text)
    if found is None and text.casefold() in ("standard", "u"):
        return 1.0
    if found is None or not float(found["k"]) > 0:
        row.fault("k", f"{text!r} is no coverage factor", "write k=2, or 1 for a standard uncertainty")
        return None
    return float(found["k"])


def _hertz(row: SheetRow, column: str) -> float | None:
    quantity = unit_cell(row, column)
    if quantity is None:
        return None
    value = row.attempt(column, lambda: convert(float(quantity.value), quantity.unit, parse_unit("Hz")))
    return None if value is None else float(value)


SHEET = Sheet(LAYOUT, UncertaintyEntry, each_row(build))
