"""What unit readings have once a correction is added: an antenna factor makes a field strength of a voltage."""

from __future__ import annotations

from specflow.errors import UnitError
from specflow.importers.measured.context import Context
from specflow.importers.measured.stated import MAPPING, PERSON, Stated
from specflow.model.correction import Correction
from specflow.units import Quantity, Unit, add, format_unit, parse_unit


def unit_after(unit: str, correction: str) -> Unit:
    """The unit of a reading to which a correction was added. UnitError where it cannot be added."""
    written = parse_unit(unit)
    if not written.is_log:
        raise UnitError("a reading in a linear unit")
    return add(Quantity(0.0, written), Quantity(0.0, parse_unit(correction))).unit


def unit_when_corrected(unit: str, stated: Stated, context: Context) -> str:
    """The unit that a column will have after the corrections that are named for its table; its own without any."""
    said = stated.said.get("corrections")
    if said is None or said.by not in (PERSON, MAPPING):
        return unit
    for name in said.text.replace(";", ",").split(","):
        correction = context.snapshot.find(Correction, name.strip() or None)
        try:
            unit = unit if correction is None else format_unit(unit_after(unit, correction.unit))
        except UnitError:
            return unit
    return unit
