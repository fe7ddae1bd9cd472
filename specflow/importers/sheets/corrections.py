"""The sheet of correction tables: what cables, probes and antennas add to a reading, by frequency."""

from __future__ import annotations

import re
from collections.abc import Sequence

from specflow.importers.sheets.declared_values import unit_cell
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.parameters import known_parameter
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.sheet import MARK_COLUMN, Sheet, by_code
from specflow.model.correction import Correction, CorrectionPoint
from specflow.model.sheet import SheetColumn, SheetLayout
from specflow.units import Quantity, Unit, convert, format_unit, parse_quantity, parse_unit

#: Kind → whether its amount is added to a reading (+1) or taken off it (-1).
KINDS = {"correction": 1, "loss": 1, "antenna factor": 1, "gain": -1}
_UNITS = ("dB", "dB(1/m)")
_SPREAD = re.compile(r"^(?:U\s*=\s*|±\s*|\+/-\s*)?(?P<amount>.+?)\s*[,;(]?\s*k\s*=\s*(?P<k>[0-9.]+)\s*\)?$")
_STANDARD = re.compile(r"^u\s*=\s*(?P<amount>.+)$")

LAYOUT = SheetLayout(
    noun="correction",
    title="Corrections",
    aliases=("Correction tables", "Correction factors", "Cable losses", "Path losses"),
    intro=(
        "What a cable, a probe or an antenna adds to every reading, by frequency. One row a frequency; rows with one "
        "ID are one table. Applied when a file is attached with --state correction=ID: linear in dB between the rows, "
        "never beyond them."
    ),
    columns=(
        MARK_COLUMN,
        SheetColumn(
            key="id",
            title="ID",
            aliases=("Correction", "Name", "Identifier"),
            required=True,
            guidance="A short code. Empty below a row: the same table.",
            example="CABLE-3",
        ),
        SheetColumn(
            key="frequency",
            title="Frequency",
            aliases=("f", "Freq"),
            field="points",
            required=True,
            guidance="With unit, here or in the header.",
            example="27.5 GHz",
        ),
        SheetColumn(
            key="amount",
            title="Amount",
            aliases=("Value", "Factor", "Loss", "Gain"),
            field="points",
            required=True,
            guidance="In dB, or dB(1/m) for an antenna factor. What it does to a reading is said by the kind.",
            example="3.2 dB",
        ),
        SheetColumn(
            key="kind",
            title="Kind",
            aliases=("Type", "Sign"),
            required=True,
            guidance="correction, loss, antenna factor: added to the reading. gain: taken off it. Once a table.",
            choices=tuple(KINDS),
            example="loss",
        ),
        SheetColumn(
            key="uncertainty",
            title="Uncertainty",
            aliases=("U", "u"),
            field="points",
            guidance="u = 0.1 dB, or 0.2 dB (k=2).",
            example="0.2 dB (k=2)",
        ),
        SheetColumn(
            key="parameter",
            title="Parameter",
            aliases=("Quantity",),
            guidance="The quantity it is for, where a file has several. Once a table.",
            example="eirp",
        ),
        SheetColumn(
            key="set_up",
            title="Set-up",
            aliases=("Setup", "Bench", "Range"),
            guidance="The set-up it belongs to. Once a table; empty: any.",
            example="Far-field range A",
            width=20,
        ),
        SheetColumn(
            key="issue", title="Issue", aliases=("Rev", "Revision"), guidance="Once a table.", example="B"
        ),
        SheetColumn(
            key="valid_from", title="Valid from", guidance="A date. Once a table.", example="2026-01-15"
        ),
        SheetColumn(
            key="valid_until",
            title="Valid until",
            aliases=("Cal due", "Calibration due"),
            guidance="A date. Once a table.",
            example="2027-01-14",
        ),
        SheetColumn(key="title", title="Title", guidance="Once a table.", width=24),
        SheetColumn(
            key="source", title="Source", aliases=("Certificate",), guidance="Once a table.", width=24
        ),
    ),
)


def read(rows: Sequence[SheetRow], intake: Intake) -> None:
    """Add one correction for the rows of each id."""
    for group in by_code(rows):
        _read_table(group, intake)


def _read_table(rows: Sequence[SheetRow], intake: Intake) -> None:
    first = rows[0]
    kind = _once(rows, "kind").casefold()
    sign = KINDS.get(kind)
    if sign is None:
        first.fault(
            "kind",
            f"{kind!r} does not say whether the amount is added to a reading"
            if kind
            else "the kind is not stated",
            f"one of: {', '.join(KINDS)}; a gain is taken off the reading, all others are added",
        )
    unit, points = _points(rows, sign or 1)
    named = next((row for row in rows if row.text("parameter")), None)
    parameter = known_parameter(named, "parameter", intake) if named is not None else None
    dates = {
        name: next((day for row in rows if (day := row.date(name))), None)
        for name in ("valid_from", "valid_until")
    }
    if unit is None or not all(row.sound for row in rows):
        return
    document = first.build(
        Correction,
        id=first.subject,
        title=_once(rows, "title"),
        kind=kind,
        unit=format_unit(unit),
        points=tuple(sorted(points, key=lambda point: point.frequency_hz)),
        parameter=parameter.parameter.key if parameter else None,
        set_up=_once(rows, "set_up"),
        issue=_once(rows, "issue"),
        source=_once(rows, "source"),
        origin=first.origin("amount"),
        **dates,
    )
    if document is not None and all(row.sound for row in rows):
        intake.add(document, first.stated())
        intake.echo(document.id, words(document))


def _points(rows: Sequence[SheetRow], sign: int) -> tuple[Unit | None, list[CorrectionPoint]]:
    """The points of a table, in one unit; cells that cannot be read are faults of their row."""
    unit: Unit | None = None
    points = []
    for row in rows:
        frequency, amount = _hertz(row), unit_cell(row, "amount")
        spread = _spread(row)
        if amount is None or frequency is None:
            continue
        if str(amount.unit) not in _UNITS or (unit is not None and amount.unit != unit):
            row.fault(
                "amount", f"a correction in {amount.unit}", "write dB, or dB(1/m), for all rows of a table"
            )
            continue
        unit = amount.unit
        points.append(CorrectionPoint(frequency_hz=frequency, added=sign * float(amount.value), u=spread))
    return unit, points


def _hertz(row: SheetRow) -> float | None:
    quantity = unit_cell(row, "frequency")
    if quantity is None:
        return None
    found = row.attempt("frequency", lambda: convert(float(quantity.value), quantity.unit, parse_unit("Hz")))
    if found is not None and not found > 0:
        row.fault("frequency", f"{found:g} Hz is no frequency of a correction", "write one above 0 Hz")
        return None
    return found


def _spread(row: SheetRow) -> float | None:
    """The standard uncertainty in dB; an expanded one needs its coverage factor."""
    text = row.text("uncertainty")
    if not text:
        return None
    standard, expanded = _STANDARD.match(text), _SPREAD.match(text)
    if standard is None and expanded is None:
        row.fault(
            "uncertainty",
            f"{text} has no coverage factor",
            "write u = 0.1 dB, or 0.2 dB (k=2)",
            rule="workbook-uncertainty-without-k",
        )
        return None
    found = standard or expanded
    assert found is not None
    amount: Quantity | None = row.attempt("uncertainty", lambda: parse_quantity(found["amount"]))
    if amount is None or str(amount.unit) != "dB" or not float(amount.value) > 0:
        row.fault(
            "uncertainty",
            f"{text} is no uncertainty of a correction in dB",
            "write u = 0.1 dB, or 0.2 dB (k=2)",
        )
        return None
    return float(amount.value) / (1.0 if standard else float(found["k"]))


def _once(rows: Sequence[SheetRow], column: str) -> str:
    """What is said once a table; two rows that differ are a fault of the later one."""
    said = ""
    for row in rows:
        text = row.prose(column)
        if said and text and text.casefold() != said.casefold():
            row.fault(
                column, f"{text!r} here, {said!r} above", "say it once a table, or the same in all rows"
            )
        said = said or text
    return said


def words(correction: Correction) -> str:
    """Say what the table does: "adds 3.1 dB at 27.5 GHz to 3.4 dB at 30 GHz to a reading (7 points)"."""
    first, last = correction.points[0], correction.points[-1]
    said = f"adds {first.added:g} {correction.unit} at {first.frequency_hz / 1e9:g} GHz"
    if len(correction.points) > 1:
        said += f" to {last.added:g} {correction.unit} at {last.frequency_hz / 1e9:g} GHz"
    return f"{said} to a reading ({len(correction.points)} point{'s' * (len(correction.points) != 1)})"


SHEET = Sheet(LAYOUT, Correction, read, grouped=True)
