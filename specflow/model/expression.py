"""Expressions: the typed tree behind formulas, gates, applicability, project rules and filters.

The tree is data: it is parsed from text by ``specflow.limits``, kept as JSON and evaluated there on numpy arrays.
Numbers keep their text, because the trailing zero of "4.0" says how well the number is meant.
"""

from __future__ import annotations

from math import isfinite
from typing import Annotated, Literal

from pydantic import Field, model_validator

from specflow.model.base import Document

Arithmetic = Literal["+", "-", "*", "/", "^"]
Comparison = Literal["<", "<=", ">", ">=", "==", "!="]
Function = Literal[
    "min", "max", "abs", "sqrt", "exp", "ln", "log10", "log2", "floor", "ceil", "round", "powersum"
]

#: Function name -> (fewest, most) arguments. ``powersum`` is 10*log10 of the sum of 10^(x/10).
FUNCTIONS: dict[str, tuple[int, int]] = {
    "min": (2, 50),
    "max": (2, 50),
    "powersum": (2, 50),
    "abs": (1, 1),
    "sqrt": (1, 1),
    "exp": (1, 1),
    "ln": (1, 1),
    "log10": (1, 1),
    "log2": (1, 1),
    "floor": (1, 1),
    "ceil": (1, 1),
    "round": (1, 1),
}


class Number(Document):
    """A number as written (decimal point, ASCII minus), with its own unit or none."""

    kind: Literal["number"] = "number"
    text: str
    unit: str = ""

    @model_validator(mode="after")
    def _is_a_number(self) -> Number:
        if not isfinite(float(self.text)):
            raise ValueError(f"{self.text} is not a finite number")
        return self

    @property
    def value(self) -> float:
        """The number as a float, in ``unit``."""
        return float(self.text)


class Name(Document):
    """A named input: a condition, an axis or a declared value.

    With a ``unit`` (``P_rated[dBm]``, ``f_offset_MHz``) it stands for the plain number of that unit; without one it
    is read in the unit of the limit it stands in, or compared in the unit its column has.
    """

    kind: Literal["name"] = "name"
    name: str
    unit: str = ""


class Word(Document):
    """A word that a text condition is compared with: ``band == n257``."""

    kind: Literal["word"] = "word"
    text: str


class Negative(Document):
    """The negative of an expression."""

    kind: Literal["negative"] = "negative"
    operand: Expression


class Operation(Document):
    """Two expressions and an arithmetic sign between them."""

    kind: Literal["operation"] = "operation"
    sign: Arithmetic
    left: Expression
    right: Expression


class Call(Document):
    """One of the functions of ``FUNCTIONS``."""

    kind: Literal["call"] = "call"
    function: Function
    arguments: tuple[Expression, ...]

    @model_validator(mode="after")
    def _argument_count(self) -> Call:
        fewest, most = FUNCTIONS[self.function]
        if not fewest <= len(self.arguments) <= most:
            raise ValueError(f"{self.function} takes {fewest} argument{'s or more' if most > 1 else ''}")
        return self


class Share(Document):
    """A share of a named input: ``0.05 ppm of carrier``, ``10 % of BW``. It has the unit of that input."""

    kind: Literal["share"] = "share"
    share: Number
    of: Name


class Compare(Document):
    """Two expressions and a comparison between them; true, false, or unknown where an input is unstated."""

    kind: Literal["compare"] = "compare"
    sign: Comparison
    left: Expression
    right: Expression


class Interval(Document):
    """A closed or half-open interval of numbers: ``27.5..30 GHz``, ``3<..4.2``. ``None`` is an open end."""

    kind: Literal["interval"] = "interval"
    low: Expression | None = None
    high: Expression | None = None
    low_open: bool = False
    high_open: bool = False


class Member(Document):
    """True where the expression equals one of the values or lies in one of the intervals."""

    kind: Literal["member"] = "member"
    operand: Expression
    values: tuple[Expression, ...]


class Logic(Document):
    """``and`` / ``or`` of conditions (three-valued: unknown only where the unstated input matters)."""

    kind: Literal["logic"] = "logic"
    sign: Literal["and", "or"]
    terms: tuple[Expression, ...]


class Not(Document):
    """The opposite of a condition."""

    kind: Literal["not"] = "not"
    operand: Expression


class Choice(Document):
    """``a if condition else b``."""

    kind: Literal["choice"] = "choice"
    when: Expression
    then: Expression
    otherwise: Expression


Expression = Annotated[
    Number
    | Name
    | Word
    | Negative
    | Operation
    | Call
    | Share
    | Compare
    | Interval
    | Member
    | Logic
    | Not
    | Choice,
    Field(discriminator="kind"),
]
