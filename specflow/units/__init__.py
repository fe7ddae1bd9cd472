"""Quantities of radio engineering: parse, format, convert, add, subtract, compare, and refuse what physics refuses.

Where things live:

- ``kinds``       what a unit measures, and how a signal fills its bandwidth
- ``unit``        the unit itself, compared by meaning
- ``table``       every unit we know, as data; ``dimension`` names products of base quantities
- ``spelling``    texts brought to plain signs; ``names`` and ``factors`` look up and take apart; ``compose`` puts the
                  unit together; ``parse`` is the entrance; ``foreign`` asks pint for what the table lacks
- ``convert``     the resolved conversion; ``bridge`` bandwidth, impedance and gauge; ``density`` reference bandwidths;
                  ``refusal`` names the missing piece
- ``quantity``    a value with its unit; ``number`` and ``reading`` the text of a cell
- ``arithmetic``  add, subtract, compare; ``sums`` power sums and the two means of levels
- ``tolerance``   the unit of a difference and how close is equal; ``planes`` what is missing between planes

No formula of a particular parameter belongs here (return loss and VSWR, noise figure and temperature): those are
relations between parameters.
"""

from typing import TYPE_CHECKING

from specflow.late import late_names
from specflow.units.bridge import FREE_SPACE_OHM
from specflow.units.convert import Converter, bandwidth_bounds, compatible, convert, converter
from specflow.units.density import density_of, level_of
from specflow.units.kinds import Kind, Spectrum
from specflow.units.number import parse_number
from specflow.units.parse import parse_unit
from specflow.units.planes import missing_between_planes
from specflow.units.quantity import (
    Quantity,
    bandwidth_words,
    format_quantity,
    format_value,
    parse_quantity,
    split_quantity,
)
from specflow.units.tolerance import closeness, same_within, to_tolerance, tolerance_unit
from specflow.units.unit import DB_HERTZ, DECIBEL, KELVIN, ONE, PERCENT, Unit, format_unit

if TYPE_CHECKING:
    from specflow.units.arithmetic import add, compare, subtract
    from specflow.units.reading import Blank, Reading, parse_reading, parse_reading_with_unit
    from specflow.units.sums import mean, mean_of_db, mean_of_power, power_sum

# Judging stored values reads no cells and adds no quantities: status does not wait for what does.
__getattr__ = late_names(
    __name__,
    {
        "Blank": "reading",
        "Reading": "reading",
        "add": "arithmetic",
        "compare": "arithmetic",
        "mean": "sums",
        "mean_of_db": "sums",
        "mean_of_power": "sums",
        "parse_reading": "reading",
        "parse_reading_with_unit": "reading",
        "power_sum": "sums",
        "subtract": "arithmetic",
    },
)

__all__ = [
    "DB_HERTZ",
    "DECIBEL",
    "FREE_SPACE_OHM",
    "KELVIN",
    "ONE",
    "PERCENT",
    "Blank",
    "Converter",
    "Kind",
    "Quantity",
    "Reading",
    "Spectrum",
    "Unit",
    "add",
    "bandwidth_bounds",
    "bandwidth_words",
    "closeness",
    "compare",
    "compatible",
    "convert",
    "converter",
    "density_of",
    "format_quantity",
    "format_unit",
    "format_value",
    "level_of",
    "mean",
    "mean_of_db",
    "mean_of_power",
    "missing_between_planes",
    "parse_number",
    "parse_quantity",
    "parse_reading",
    "parse_reading_with_unit",
    "parse_unit",
    "power_sum",
    "same_within",
    "split_quantity",
    "subtract",
    "to_tolerance",
    "tolerance_unit",
]
