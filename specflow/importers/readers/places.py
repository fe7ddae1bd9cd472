"""Places on a sheet: addresses as people write them, and rectangles of cells."""

from __future__ import annotations

from dataclasses import dataclass


def address(row: int, column: int) -> str:
    """``address(17, 3)`` is ``"C17"``."""
    return f"{column_letter(column)}{row}"


def column_letter(column: int) -> str:
    """``column_letter(28)`` is ``"AB"``."""
    letters = ""
    while column > 0:
        column, place = divmod(column - 1, 26)
        letters = chr(65 + place) + letters
    return letters


def column_number(letters: str) -> int:
    """``column_number("AB")`` is 28."""
    number = 0
    for letter in letters.upper():
        number = number * 26 + ord(letter) - 64
    return number


@dataclass(frozen=True, slots=True)
class CellRange:
    """A rectangle of cells, both corners included."""

    first_row: int
    first_column: int
    last_row: int
    last_column: int

    def __contains__(self, cell: tuple[int, int]) -> bool:
        return self.first_row <= cell[0] <= self.last_row and self.first_column <= cell[1] <= self.last_column

    def touches(self, other: CellRange) -> bool:
        """Whether the two have a cell in common."""
        return (
            self.first_row <= other.last_row
            and other.first_row <= self.last_row
            and self.first_column <= other.last_column
            and other.first_column <= self.last_column
        )

    def turn(self) -> CellRange:
        """The rectangle with rows and columns changed."""
        return CellRange(self.first_column, self.first_row, self.last_column, self.last_row)

    def __str__(self) -> str:
        return f"{address(self.first_row, self.first_column)}:{address(self.last_row, self.last_column)}"
