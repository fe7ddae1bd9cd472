"""What is known while a limit is being read: the reader, the parameter's hints, and what was supplied on the way."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from typing import TypeVar

from specflow.errors import ExpressionError
from specflow.limits.reader import Reader
from specflow.limits.settling import settle
from specflow.model.expression import Expression
from specflow.model.limit import LimitState, Rounding, TestTolerance
from specflow.model.parameter import Better

T = TypeVar("T")


@dataclass(frozen=True, slots=True)
class Bare:
    """A value without a direction, until its neighbour or the parameter gives one."""

    value: Expression
    written: str
    place: int


@dataclass(frozen=True, slots=True)
class Typical:
    """A value that is said to be typical: it limits nothing and is left out."""

    written: str
    place: int


@dataclass(slots=True)
class Draft:
    """A limit while it is being read."""

    reader: Reader
    hint: str = ""
    better: Better | None = None
    own_names: frozenset[str] = frozenset()
    state: LimitState = LimitState.FIRM
    rounding: Rounding | None = None
    test_tolerance: TestTolerance | None = None
    readings: list[str] = field(default_factory=list)
    inner: int = 0

    def say(self, reading: str) -> None:
        """Note something the text did not say itself."""
        if reading and reading not in self.readings:
            self.readings.append(reading)

    def settle(self, values: list[Expression], written: str, place: int) -> str:
        """Settle the unit of values, with the place of the value in any error."""
        return self.placed(place, lambda: settle(values, written, self.hint))

    def placed(self, place: int, act: Callable[[], T]) -> T:
        """Do something and name the column in its error."""
        try:
            return act()
        except ExpressionError as error:
            self.reader.fail(error.message, hint=error.hint, place=place)

    @contextmanager
    def inside(self) -> Iterator[None]:
        """Read something inside parentheses: what belongs to the whole limit may not stand there."""
        self.inner += 1
        with self.reader.deeper():
            yield
        self.inner -= 1

    def whole_only(self, what: str, place: int) -> None:
        """Fail when something that belongs to the whole limit stands inside parentheses."""
        if self.inner:
            self.reader.fail(f"{what} belongs after the whole limit, not inside", place=place)
