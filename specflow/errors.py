"""What can go wrong, as values with parts: the message, the place, and what to do about it.

The sentence is built last, by whoever shows it. Findings (a cell that cannot be read, a requirement that is not
verified) are data and are returned; an error is raised only for what stops the task in hand.
"""

from __future__ import annotations

from enum import IntEnum


class ExitCode(IntEnum):
    """What the process says when it ends; the whole contract with scripts."""

    CLEAN = 0
    FINDINGS = 1
    BAD_INPUT = 2
    ENVIRONMENT = 3
    INTERRUPTED = 130


class SpecflowError(Exception):
    """Base of all errors this package raises on purpose.

    ``message`` says what is wrong, ``where`` names the place (file, sheet, cell, document id) and ``hint`` says what
    the person can do.
    """

    exit_code = ExitCode.BAD_INPUT

    def __init__(self, message: str, *, where: str = "", hint: str = "") -> None:
        super().__init__(message)
        self.message = message
        self.where = where
        self.hint = hint

    def __str__(self) -> str:
        text = f"{self.where}: {self.message}" if self.where else self.message
        return f"{text} ({self.hint})" if self.hint else text


class UnitError(SpecflowError):
    """A unit or quantity that cannot be read, or an operation that physics refuses."""


class ExpressionError(SpecflowError):
    """A limit, applicability or filter expression that cannot be read or evaluated."""


class ConditionsError(SpecflowError):
    """A conditions set that cannot be expanded (too many points, a range without a step, ...)."""


class ParameterError(SpecflowError):
    """A parameter that the dictionary does not know, or that has several readings."""


class FileError(SpecflowError):
    """A file that cannot be read: missing, empty, encrypted, truncated, of another kind, or hostile."""


class DocumentError(SpecflowError):
    """A document that contradicts itself or the project: duplicate id, cycle, missing reference."""


class CalculationError(SpecflowError):
    """Figures that a law cannot take: lengths that differ, NaN, a loss below 0 dB, outside the range where it holds."""


class InfeasibleError(CalculationError):
    """A target that no figure of the asked-for part can meet; the message says by how much it is missed."""


class StoreError(SpecflowError):
    """The project store cannot be opened, is locked, full, or of a newer schema."""

    exit_code = ExitCode.ENVIRONMENT


class ConflictError(StoreError):
    """Somebody else changed the same document since it was read."""
