"""What is said for all rows of a table, and by whom: the form in which the columns are read."""

from __future__ import annotations

from dataclasses import dataclass, field
from datetime import date

from specflow.importers.measured.day import read_day
from specflow.importers.measured.result import ColumnReading, Question
from specflow.model.evidence import Equipment

PERSON = "stated by the person"
MAPPING = "stated by the mapping"


@dataclass(frozen=True, slots=True)
class Said:
    """One thing said: the text, who said it, and the key as written.

    ``doubtful``: a serial number in the export of an instrument, which may be that of the instrument.
    """

    text: str
    by: str
    key: str = ""
    doubtful: bool = False


@dataclass(frozen=True, slots=True)
class StatedCondition:
    """A condition that holds for all rows: a number in ``unit``, or a word."""

    dimension: str
    value: float | str
    unit: str
    by: str

    def words(self) -> str:
        """The value with its unit."""
        value = f"{self.value:.12g}" if isinstance(self.value, float) else self.value
        return f"{value} {self.unit}".strip()


@dataclass
class Stated:
    """All that is said for a table.

    ``said`` is by the names of ``NAMES``, ``conditions`` by dimension; ``items`` are all that were named. ``columns``
    is what the person says of columns, ``uncertainties`` what is said of single quantities. ``corrected`` are
    lines that say a correction is in the readings already. ``doubts`` are questions about a condition, which are idle
    where a column gives it row by row. ``of_instrument``: the lines above are the settings of an instrument.
    """

    said: dict[str, Said] = field(default_factory=dict)
    conditions: dict[str, StatedCondition] = field(default_factory=dict)
    items: list[Said] = field(default_factory=list)
    equipment: list[Equipment] = field(default_factory=list)
    columns: dict[str, str] = field(default_factory=dict)
    uncertainties: list[Said] = field(default_factory=list)
    corrected: list[Said] = field(default_factory=list)
    readings: list[ColumnReading] = field(default_factory=list)
    questions: list[Question] = field(default_factory=list)
    doubts: dict[str, Question] = field(default_factory=dict)
    of_instrument: bool = False
    unused: list[str] = field(default_factory=list)

    def text(self, name: str) -> str:
        """What is said under a name, "" if nothing."""
        found = self.said.get(name)
        return found.text if found else ""

    def by(self, name: str) -> str:
        """Who said it."""
        found = self.said.get(name)
        return found.by if found else ""

    def day(self, name: str) -> date | None:
        """What is said under a name as a date."""
        return read_day(self.text(name))
