"""Units that stand beside single readings: "900 MHz" among cells in GHz, or a column that holds the unit of each row.

A reading is brought to the unit of its column only where that needs nothing else to be known: a prefix (MHz to GHz),
or a power and its level (mW to dBm). The rest is rejected cell by cell. What was brought is said, with the cells.
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterable
from functools import lru_cache

from specflow.errors import UnitError
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.header_text import header_key, known_unit
from specflow.importers.measured.tables import FoundTable
from specflow.importers.readers import Value, is_blank, looks_numeric
from specflow.units import Kind, Unit, converter

_MOST_WORDS = 40
_HEADS = ("unit", "units", "uom", "einheit")

#: Units that are written, in radio work, far more often by a slip of the shift key than on purpose.
_SLIPS = {"mHz": "MHz", "MW": "mW"}


def slip_of(unit: str) -> str:
    """Say why a unit is not taken as it stands: mHz for MHz, MW for mW; "" for any other."""
    other = _SLIPS.get(unit.strip())
    if other is None:
        return ""
    return f"{unit.strip()} and {other} differ by nine decades, and only a capital letter tells them apart"


@lru_cache(maxsize=256)
def brought(written: Unit, unit: Unit) -> bool:
    """Whether a reading in one unit is one in the other, with nothing else known."""
    if written.measure != unit.measure or written.bandwidth_hz != unit.bandwidth_hz:
        return False
    if written.is_log != unit.is_log and not written.kind is unit.kind is Kind.LEVEL:
        return False
    if written.is_log and unit.is_log and written.kind is not Kind.LEVEL:
        return written == unit
    return written.kind is unit.kind and written.dimension == unit.dimension and _converts(written, unit)


def to_unit(value: float, written: Unit, unit: Unit) -> float:
    """Bring one end of a reading to the unit of its column; UnitError where it has no value there (0 mW in dBm)."""
    if math.isinf(value):
        return value
    found = float(converter(written, unit)(value))
    if not math.isfinite(found):
        raise UnitError(f"{value:g} {written} has no value in {unit}")
    return found


def _converts(written: Unit, unit: Unit) -> bool:
    try:
        converter(written, unit)
    except UnitError:
        return False
    return True


def one_unit(units: Counter[str]) -> str:
    """The commonest of several units, where the others can be brought to it; "" where one cannot."""
    first = units.most_common(1)[0][0]
    wanted = known_unit(first)
    others = [known_unit(unit) for unit in units]
    if wanted is None or any(one is None or not brought(one, wanted) for one in others):
        return ""
    return first


def unit_words(values: Iterable[Value]) -> Counter[str] | None:
    """How often each unit stands in a column; None where it holds anything but units."""
    words = Counter(str(value).strip() for value in values if not is_blank(value))
    if not words or len(words) > _MOST_WORDS:
        return None
    if any(known_unit(word) is None or looks_numeric(word) for word in words):
        return None
    return words


def unit_column_of(table: FoundTable, header: HeaderCell) -> HeaderCell | None:
    """The column that holds the units of another: "Gain unit", or "Unit" as the next such column to its right."""
    own = header_key(header.text)
    others = [one for one in table.headers if one.column != header.column]
    for other in others:
        key = header_key(other.text)
        if key in {f"{own}{word}" for word in _HEADS} | {f"unitof{own}", f"unitsof{own}"}:
            return other
    for other in others:
        if other.column > header.column and header_key(other.text) in _HEADS:
            between = [one for one in others if header.column < one.column < other.column]
            return None if any(table.cells(one.column).numeric.any() for one in between) else other
    return None


def is_unit_column(table: FoundTable, header: HeaderCell) -> bool:
    """Whether a header speaks of units, and all that its column holds are units."""
    key = header_key(header.text)
    if not (key in _HEADS or key.startswith(("unitof", "unitsof")) or key.endswith(_HEADS)):
        return False
    return unit_words(table.cells(header.column).at(table.rows)) is not None
