"""Where a fact came from, down to the cell."""

from __future__ import annotations

from specflow.model.base import Document


def column_letters(column: int) -> str:
    """Return the spreadsheet name of a 1-based column: 1 is A, 27 is AA."""
    letters = ""
    while column > 0:
        column, rest = divmod(column - 1, 26)
        letters = chr(ord("A") + rest) + letters
    return letters


def column_number(letters: str) -> int:
    """Return the 1-based column of a spreadsheet name: A is 1, AA is 27."""
    number = 0
    for letter in letters.upper():
        number = number * 26 + ord(letter) - 64
    return number


class Origin(Document):
    """A place in a file: rows and columns count from 1; ``sheet`` is "" in a text file."""

    file: str
    sha256: str = ""
    sheet: str = ""
    row: int | None = None
    column: int | None = None

    @property
    def cell(self) -> str:
        """Return the address as people write it: ``C17``, or ``line 17`` where there is no column."""
        if self.row is None:
            return ""
        return f"{column_letters(self.column)}{self.row}" if self.column else f"line {self.row}"

    def __str__(self) -> str:
        return " · ".join(part for part in (self.file, self.sheet, self.cell) if part)
