"""A row of a sheet: its cells by column key, typed; what cannot be read becomes a finding and the row is unsound."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, field
from datetime import date as Date  # noqa: N812  (``date`` is what a row is asked for)
from enum import StrEnum
from typing import TypeVar

from pydantic import ValidationError

from specflow.errors import SpecflowError
from specflow.importers.readers.grid import Grid
from specflow.importers.sheets.cells import CellFault, cell_date, cell_number, cell_text
from specflow.model.base import Document
from specflow.model.finding import Finding, Severity
from specflow.model.origin import Origin
from specflow.model.sheet import SheetLayout, header_key

D = TypeVar("D", bound=Document)
E = TypeVar("E", bound=StrEnum)
T = TypeVar("T")

_YES = frozenset({"yes", "y", "true", "x", "1"})
_NO = frozenset({"no", "n", "false", "0", "-"})


@dataclass
class SheetRow:
    """One row.

    ``columns`` maps column keys to column numbers; ``units`` holds units found in headers ("Limit [dBm]");
    ``spoiled`` are the columns whose cell was reported already; ``sound`` is False once anything was refused.
    """

    grid: Grid
    layout: SheetLayout
    number: int
    columns: dict[str, int]
    units: dict[str, str]
    sha256: str
    findings: list[Finding]
    subject: str = ""
    sound: bool = True
    spoiled: set[str] = field(default_factory=set)

    def has(self, column: str) -> bool:
        """Whether the sheet has that column."""
        return column in self.columns

    def origin(self, column: str = "") -> Origin:
        """Return the place of a cell; of the first column that must be there where the sheet lacks that column."""
        place = self.columns.get(column) or self.columns.get(self.layout.required[0].key)
        sheet = "" if self.grid.name == self.grid.file else self.grid.name
        return Origin(
            file=self.grid.file,
            sha256=self.sha256,
            sheet=sheet,
            row=self.number,
            column=place,
        )

    def report(
        self,
        column: str,
        message: str,
        remedy: str,
        *,
        rule: str,
        severity: Severity,
        why: str = "",
        related: tuple[str, ...] = (),
    ) -> None:
        """Add a finding about one cell of this row."""
        origin = self.origin(column)
        self.findings.append(
            Finding(
                rule=rule,
                severity=severity,
                subject=self.subject or f"{self.layout.title} row {self.number}",
                subject_kind=self.layout.noun,
                message=message,
                why=why,
                remedy=remedy,
                origin=origin,
                related=related,
            )
        )

    def fault(
        self,
        column: str,
        message: str,
        remedy: str,
        *,
        rule: str = "workbook-cell",
        why: str = "",
        related: tuple[str, ...] = (),
    ) -> None:
        """Refuse a cell: one finding, and the row gives no document. A cell is refused once."""
        self.sound = False
        if column in self.spoiled:
            return
        self.spoiled.add(column)
        self.report(column, message, remedy, rule=rule, severity=Severity.ERROR, why=why, related=related)

    def text(self, column: str, *, dates: bool = False) -> str:
        """Return the text of a cell, "" where it is empty, refused or not in the sheet."""
        return self._read(column, lambda grid, row, place: cell_text(grid, row, place, dates=dates)) or ""

    def prose(self, column: str) -> str:
        """Return free text, in which a date may stand."""
        return self.text(column, dates=True)

    def needed(self, column: str) -> str:
        """Return the text of a cell that may not be empty; an empty one is a finding."""
        text = self.text(column)
        if not text:
            self.fault(
                column, f"{self.layout.column(column).title} is empty", self.layout.column(column).guidance
            )
        return text

    def words(self, column: str) -> tuple[str, ...]:
        """Return the parts of a cell that are separated by commas, semicolons or line breaks, each once."""
        parts = self.text(column).replace(";", ",").replace("\n", ",").split(",")
        return tuple(dict.fromkeys(part.strip() for part in parts if part.strip()))

    def lines(self, column: str) -> tuple[str, ...]:
        """Return the parts of a cell that are separated by semicolons or line breaks."""
        parts = self.text(column).replace("\n", ";").split(";")
        return tuple(part.strip() for part in parts if part.strip())

    def number_or(self, column: str, default: T) -> float | T:
        """Return the number in a cell, the default where it is empty or refused."""
        number = self._read(column, cell_number)
        return default if number is None else number

    def whole(self, column: str, default: int, *, least: int = 0) -> int:
        """Return the whole number in a cell, at least ``least``."""
        number = self.number_or(column, None)
        if number is None:
            return default
        if not number.is_integer() or number < least:
            self.fault(
                column, f"{number:g} is not a whole number from {least}", f"write {least}, {least + 1} ..."
            )
            return default
        return int(number)

    def date(self, column: str) -> Date | None:
        """Return the date in a cell, None where it is empty or refused."""
        return self._read(column, cell_date)

    def day(self, column: str) -> Date:
        """Return the date in a cell that may not be empty."""
        found = self.date(column)
        if found is None:
            self.fault(column, f"{self.layout.column(column).title} is empty", "write a date, as 2026-03-31")
        return found or Date.min

    def yes(self, column: str, default: T) -> bool | T:
        """Return whether a cell says yes, the default where it is empty."""
        text = self.text(column)
        word = text.casefold()
        if word and word not in _YES and word not in _NO:
            self.fault(column, f"{text!r} is neither yes nor no", "write yes or no")
        return word in _YES if word in _YES or word in _NO else default

    def choice(self, column: str, words: type[E], default: E) -> E:
        """Return the member of an enumeration that a cell names, the default where it is empty or refused."""
        text = self.text(column)
        return self.choose(column, text, words) or default if text else default

    def choose(self, column: str, text: str, words: type[E]) -> E | None:
        """Return the member that a word names; a word that names none is a finding that lists what there is."""
        return next(
            (member for member in words if member.value == self.pick(column, text, list(words))), None
        )

    def pick(self, column: str, text: str, words: Iterable[str]) -> str | None:
        """Return the one of ``words`` that a text writes, whatever its case, blanks and hyphens."""
        known = {header_key(word): str(word) for word in words}
        found = known.get(header_key(text))
        if found is None:
            self.fault(
                column,
                f"{text!r} is none of the words known here",
                "write one of: " + ", ".join(known.values()),
            )
        return found

    def one_of(self, column: str, words: tuple[str, ...], default: str) -> str:
        """Return the one of ``words`` that a cell writes, the default where it is empty or refused."""
        text = self.text(column)
        return self.pick(column, text, words) or default if text else default

    def attempt(self, column: str, make: Callable[[], T], *, said: str = "") -> T | None:
        """Return what ``make`` gives; an error of this package becomes a finding about the cell.

        ``said`` is the text that was read, where it is not that of the cell.
        """
        try:
            return make()
        except SpecflowError as error:
            message = error.message
            if error.where.startswith("column "):
                message += f", at {error.where} of {said or self.text(column)!r}"
            self.fault(column, message, error.hint or self._guidance(column))
        except ValidationError as error:
            for detail in error.errors():
                self.fault(column, _plain(detail["msg"]), self._guidance(column))
        return None

    def build(self, document: type[D], **fields: object) -> D | None:
        """Return the document, None when the row is unsound or the document refuses its fields."""
        if not self.sound:
            return None
        try:
            return document(**fields)
        except ValidationError as error:
            for detail in error.errors():
                name = str(detail["loc"][0]) if detail["loc"] else ""
                self.fault(
                    self._column_of(name), _plain(detail["msg"]), self._guidance(self._column_of(name))
                )
        return None

    def stated(self) -> set[str]:
        """Return the document fields that the columns of this sheet state."""
        return {column.fills for column in self.layout.columns if column.key in self.columns}

    def _read(self, column: str, read: Callable[[Grid, int, int], T | None]) -> T | None:
        place = self.columns.get(column)
        if place is None or column in self.spoiled:
            return None
        try:
            return read(self.grid, self.number, place)
        except CellFault as fault:
            self.fault(column, fault.message, fault.remedy)
            return None

    def _column_of(self, name: str) -> str:
        return next((column.key for column in self.layout.columns if column.fills == name), name)

    def _guidance(self, column: str) -> str:
        return next((one.guidance for one in self.layout.columns if one.key == column), "")


def _plain(message: str) -> str:
    return message.removeprefix("Value error, ")
