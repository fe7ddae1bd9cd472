"""One column: its heading, what is asked about it, and what it turned out to be."""

from __future__ import annotations

from dataclasses import dataclass

from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.header_text import HeaderText
from specflow.importers.measured.mapping import ColumnMapping
from specflow.importers.measured.readings import Spelled
from specflow.importers.measured.result import ColumnReading, Question, Role
from specflow.importers.measured.tables import FoundTable
from specflow.importers.measured.unit_source import FoundUnit, find_unit
from specflow.model.evidence import SpectrumKind
from specflow.model.parameter import Parameter, QuantityIdentity
from specflow.units import bandwidth_words


@dataclass(frozen=True, slots=True)
class ColumnMeaning:
    """One column: its role, and what the role needs.

    ``of`` is the cell of the value header that an uncertainty belongs to; ``k`` its coverage factor. ``scale`` is what
    its readings are multiplied by; ``by_row`` and ``by_cell`` say where units stand beside them (see ``Spelled``).
    ``of_file``: what the column is was read from this one file, and so was what ``said_above`` names of the quantity; a
    mapping of the layout must not hold it fast.
    """

    header: HeaderCell
    parts: HeaderText
    role: Role
    reason: str
    question: Question | None = None
    parameter: Parameter | None = None
    quantity: QuantityIdentity | None = None
    unit: str = ""
    unit_from: str = ""
    spectrum: SpectrumKind = SpectrumKind.UNKNOWN
    dimension: str = ""
    is_text: bool = False
    of: str = ""
    k: float | None = None
    fill_down: bool = False
    scale: float = 1.0
    by_row: int = 0
    by_cell: bool = False
    of_file: bool = False
    said_above: tuple[str, ...] = ()

    @property
    def spelled(self) -> Spelled:
        """How its readings are written."""
        return Spelled(self.unit, self.by_row, self.by_cell, self.scale)

    @property
    def column(self) -> int:
        """The column number."""
        return self.header.column

    @property
    def letter(self) -> str:
        """The column letter."""
        return self.header.letter

    def words(self) -> str:
        """The meaning in words."""
        if self.role is Role.VALUE and self.quantity is not None:
            return ", ".join([*_quantity_words(self.quantity), f"in {self.unit}"])
        if self.role is Role.CONDITION:
            return f"{self.dimension.replace('_', ' ')}" + (f" in {self.unit}" if self.unit else "")
        if self.role is Role.UNCERTAINTY:
            return f"uncertainty in {self.unit}, " + ("standard" if self.k == 1 else f"k = {self.k or 0:g}")
        return str(self.role)

    def reading(self) -> ColumnReading:
        """The column as it is shown to the person."""
        reason = self.question.what if self.question else self.reason
        return ColumnReading(self.header.text, self.header.cell, self.role, self.words(), reason)

    def asks(self, what: str, remedy: str) -> Question:
        """A question about this column."""
        return Question(self.header.text, self.header.cell, f"{self.header.line}: {what}", remedy)


@dataclass(frozen=True, slots=True)
class Heading:
    """A header in its table, taken apart, with what a mapping or the person says about it."""

    table: FoundTable
    header: HeaderCell
    parts: HeaderText
    hints: ColumnMapping
    said_by: str = "the mapping"

    @property
    def letter(self) -> str:
        """The column letter."""
        return self.header.letter

    def unit(self) -> FoundUnit:
        """The unit of the column, and where it stands."""
        return find_unit(self.table, self.header, self.parts, self.hints.unit, self.said_by)

    def means(self, role: Role, reason: str) -> ColumnMeaning:
        """The column as one of a plain role."""
        return ColumnMeaning(self.header, self.parts, role, reason, fill_down=self.hints.fill_down)

    def ask(self, what: str, remedy: str) -> ColumnMeaning:
        """The column as unresolved."""
        meaning = ColumnMeaning(self.header, self.parts, Role.UNRESOLVED, what)
        question = meaning.asks(what, remedy)
        return ColumnMeaning(self.header, self.parts, Role.UNRESOLVED, what, question)

    def ask_unit(self, problem: str, example: str, state: str = "") -> ColumnMeaning:
        """Unresolved for want of a (known, fitting) unit; ``state`` is the name under which it can be stated."""
        name = self.parts.name or "name"
        remedy = (
            f'write the unit into the header ("{name} ({example or "1"})"), or unit = "..." for column '
            f"{self.letter} in a mapping (--propose-mapping writes one)"
        )
        return self.ask(problem, remedy + (f"; or --state {state}={example}" if state and example else ""))

    def ask_parameter(self, problem: str, near: str = "") -> ColumnMeaning:
        """Unresolved for want of a parameter."""
        remedy = (
            f'--state "column {self.letter}=PARAMETER", or parameter, dimension or role = "not read" for column '
            f"{self.letter} in a mapping (--propose-mapping writes one)"
        )
        return self.ask(problem, remedy + (f"; near: {near}" if near else ""))


def _quantity_words(quantity: QuantityIdentity) -> list[str]:
    words = [quantity.parameter.replace("_", " ")]
    words += [f"at {quantity.plane}"] if quantity.plane else []
    words += [part for part in (quantity.statistic, quantity.polarisation) if part]
    words += [f"per {bandwidth_words(quantity.bandwidth_hz)}"] if quantity.bandwidth_hz else []
    return words
