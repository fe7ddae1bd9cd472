"""The grid that a worksheet is made on: cells put in their places, and terms by which others refer to them."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from specflow.model.formula_sheet import CellLook, FormulaCell
from specflow.model.origin import column_letters
from specflow.reports.figures import DASH

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Term:
    """A part of a formula and the value that it has."""

    text: str
    value: float

    def __add__(self, other: Term) -> Term:
        return Term(f"{self.text}+{other.text}", self.value + other.value)

    def __sub__(self, other: Term) -> Term:
        return Term(f"{self.text}-({other.text})", self.value - other.value)


def plain(value: float) -> str:
    """Return a number as formulas take it."""
    return repr(int(value)) if float(value).is_integer() and abs(value) < 1e15 else repr(float(value))


def cell_name(row: int, column: int, *, fixed: bool = False) -> str:
    """Return the reference of a cell, rows and columns counted from 0."""
    letters = column_letters(column + 1)
    return f"${letters}${row + 1}" if fixed else f"{letters}{row + 1}"


Maker = Callable[[int, Term], Term | None]
"""Makes the cell of a column at one position, from its row and the cell of its number of elements."""


@dataclass(frozen=True, slots=True)
class Varying:
    """A number that is another at every condition point: its place, what it is, and its values (n,)."""

    row: int
    column: int
    title: str
    values: Floats


@dataclass(slots=True)
class Grid:
    """Rows being filled; a cell put there returns the term by which others refer to it.

    ``place`` is the condition point whose numbers are put; ``varying`` are those that others have differently.
    """

    place: int = 0
    rows: list[list[FormulaCell | None]] = field(default_factory=list)
    varying: list[Varying] = field(default_factory=list)

    def put(self, row: int, column: int, cell: FormulaCell) -> None:
        """Put a cell in its place."""
        while len(self.rows) <= row:
            self.rows.append([])
        line = self.rows[row]
        line.extend([None] * (column + 1 - len(line)))
        line[column] = cell

    def text(self, row: int, column: int, words: str, look: CellLook = CellLook.PLAIN) -> None:
        """Put words."""
        self.put(row, column, FormulaCell(text=words, look=look))

    def number(
        self, row: int, column: int, value: float, look: CellLook = CellLook.INPUT, format: str = "0.00##"
    ) -> Term:
        """Put a number; one without a finite value becomes words."""
        if math.isfinite(value):
            self.put(row, column, FormulaCell(number=value, look=look, format=format))
        else:
            self.text(row, column, "no bound" if math.isinf(value) else DASH, look)
        return Term(cell_name(row, column, fixed=True), value)

    def by_point(
        self,
        row: int,
        column: int,
        values: Floats,
        title: str,
        look: CellLook = CellLook.INPUT,
        format: str = "0.00##",
    ) -> Term:
        """Put the number (n,) or (1,) of the condition point, and note it where it differs between points."""
        if len(values) > 1 and not np.array_equal(values, np.full(len(values), values[0]), equal_nan=True):
            self.varying.append(Varying(row, column, title, values))
        return self.number(row, column, float(values[self.place if len(values) > 1 else 0]), look, format)

    def formula(
        self, row: int, column: int, term: Term, look: CellLook = CellLook.FORMULA, format: str = "0.0000"
    ) -> Term:
        """Put a formula with its value; one without a finite value shows "no bound" instead."""
        is_finite = math.isfinite(term.value)
        # What is made of an intercept without bound has none either; a program would show an error instead.
        text = term.text if is_finite else f'IFERROR({term.text},"no bound")'
        cell = FormulaCell(
            formula=f"={text}",
            number=term.value if is_finite else None,
            text="" if is_finite else "no bound",
            look=look,
            format=format,
        )
        self.put(row, column, cell)
        return Term(cell_name(row, column, fixed=True), term.value)
