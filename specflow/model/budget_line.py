"""Lines of budgets: one figure of one position, how it depends on conditions, how far it may move, and how well that
is known."""

from __future__ import annotations

from enum import StrEnum
from typing import Annotated, Any, Literal, Self

from pydantic import Field, field_validator, model_validator

from specflow.model.base import Code, Document
from specflow.model.block import Maturity

MOST_TOUCHSTONE_POINTS = 4001


class Distribution(StrEnum):
    """How the values of a line spread about its figure."""

    NORMAL = "normal"
    UNIFORM = "uniform"
    TRIANGULAR = "triangular"
    U_SHAPED = "u-shaped"
    TRUNCATED_NORMAL = "truncated normal"


class Meaning(StrEnum):
    """What a tolerance says."""

    LIMITS = "limits"
    SIGMA = "k sigma"


class Constant(Document):
    """The same value under all conditions."""

    kind: Literal["constant"] = "constant"
    value: float


class ConditionTable(Document):
    """A value by one dimension of the block's own conditions, ``at`` in ``dimension_unit``, rising.

    ``between`` says what holds between two entries: the value of the lower one (step; the last entry holds at itself
    only) or a straight line, ``drawn_in`` dB or linear. Outside the entries there is no value.
    """

    kind: Literal["table"] = "table"
    dimension: str
    dimension_unit: str
    at: tuple[float, ...] = Field(min_length=2)
    values: tuple[float, ...]
    between: Literal["step", "linear"] = "linear"
    drawn_in: Literal["dB", "linear"] = "dB"

    @model_validator(mode="after")
    def _entries_rise(self) -> Self:
        if len(self.at) != len(self.values):
            raise ValueError(
                f"the table by {self.dimension} has {len(self.at)} places and {len(self.values)} values"
            )
        for low, high in zip(self.at, self.at[1:], strict=False):
            if not low < high:
                raise ValueError(
                    f"the table by {self.dimension} goes from {low:g} to {high:g}; list rising values"
                )
        return self


class WordTable(Document):
    """A value by a condition told in words (gain state, band, mode) of the block's own conditions.

    Any other word has no value.
    """

    kind: Literal["words"] = "words"
    dimension: str
    words: tuple[str, ...] = Field(min_length=1)
    values: tuple[float, ...]

    @model_validator(mode="after")
    def _words_are_single(self) -> Self:
        if len(self.words) != len(self.values):
            raise ValueError(
                f"the table by {self.dimension} has {len(self.words)} words and {len(self.values)} values"
            )
        keys = [word.casefold() for word in self.words]
        for word, key in zip(self.words, keys, strict=True):
            if keys.count(key) > 1:
                raise ValueError(f"the table by {self.dimension} has {word} twice")
        return self


class Trace(Document):
    """A column of a recorded evidence table, read along one dimension between its rows (linear in dB or linear).

    ``along`` may be left out where one dimension varies; the table's other dimensions must have the block's values.
    ``item`` names the specimen where the table has several.
    """

    kind: Literal["trace"] = "trace"
    table: Code
    column: str
    along: str = ""
    item: str = ""
    drawn_in: Literal["dB", "linear"] = "dB"


class TouchstoneTrace(Document):
    """|S| of one pair of ports of a Touchstone file over frequency, in dB, taken over with the digest of the file."""

    kind: Literal["touchstone"] = "touchstone"
    file: str
    sha256: str
    entry: str
    frequency_hz: tuple[float, ...] = Field(min_length=2, max_length=MOST_TOUCHSTONE_POINTS)
    values_db: tuple[float, ...]
    dimension: str = "frequency"

    @model_validator(mode="after")
    def _frequencies_rise(self) -> Self:
        pairs = zip(self.frequency_hz, self.frequency_hz[1:], strict=False)
        if len(self.frequency_hz) != len(self.values_db) or any(low >= high for low, high in pairs):
            raise ValueError(f"{self.file} needs one value at each of its rising frequencies")
        return self


LineValue = Annotated[
    Constant | ConditionTable | WordTable | Trace | TouchstoneTrace, Field(discriminator="kind")
]


class Drift(Document):
    """A change in proportion to a condition: ``slope`` · (condition - ``reference``), in the line's tolerance unit for
    each ``dimension_unit``. ``low`` and ``high`` bound where that is known to hold.
    """

    dimension: str
    dimension_unit: str
    slope: float
    reference: float
    low: float | None = None
    high: float | None = None


class LineTolerance(Document):
    """How far a line may move, in the tolerance unit of its unit (dB for dBm), both amounts written positive.

    ``meaning`` says whether the amounts are limits or ``k``·σ; nothing is assumed where it does not say. A truncated
    normal has limits, which lie ``k`` σ of the full normal from the figure.
    """

    minus: float = Field(ge=0)
    plus: float = Field(ge=0)
    meaning: Meaning | None = None
    k: float | None = Field(default=None, gt=0)
    distribution: Distribution | None = None

    @model_validator(mode="after")
    def _says_what_it_means(self) -> Self:
        if self.meaning is Meaning.SIGMA:
            if self.k is None:
                raise ValueError("a tolerance of k·σ says its k")
            if self.minus != self.plus:
                raise ValueError("k·σ is the same on both sides; give limits where the sides differ")
            if self.distribution not in (None, Distribution.NORMAL):
                raise ValueError(f"a {self.distribution} distribution is given by its limits, not by k·σ")
        elif self.distribution is Distribution.NORMAL:
            raise ValueError("a normal distribution has no limits: give k·σ, or say truncated normal")
        elif self.distribution is Distribution.TRUNCATED_NORMAL:
            if self.meaning is None or self.k is None:
                raise ValueError("a truncated normal says limits, and k: how many σ they are from the figure")
        elif self.k is not None:
            raise ValueError("k belongs to a tolerance of k·σ or to a truncated normal")
        elif self.distribution is not None and self.meaning is None:
            raise ValueError(
                f"a {self.distribution} distribution lies between limits: say that these are limits"
            )
        return self

    @property
    def shape(self) -> Distribution | None:
        """The distribution, which is normal for k·σ unless said."""
        return Distribution.NORMAL if self.meaning is Meaning.SIGMA else self.distribution


class BudgetLine(Document):
    """One figure of one position: what the block contributes, how far it may move, and how well that is known.

    ``shared`` says whether the N elements of a position move together (common) or each by itself (per element).
    ``growth`` is an allowance that worsens the figure; none unless it is asked for. ``sideband`` is that of a mixer's
    noise figure: single, double, or "both", a double-sideband figure where the wanted signal is in both sidebands.
    ``plane`` and ``statistic`` say what the figure is of, as requirements do, "" for not stated.
    """

    position: int
    block: Code
    parameter: Code
    value: LineValue
    unit: str
    drifts: tuple[Drift, ...] = ()
    tolerance: LineTolerance | None = None
    correlation_group: str = ""
    shared: Literal["common", "per element"] = "common"
    growth: float = Field(default=0.0, ge=0)
    sideband: Literal["", "SSB", "DSB", "both"] = ""
    plane: str = ""
    statistic: str = ""
    maturity: Maturity = Maturity.ESTIMATED
    source: str = ""

    @field_validator("value", mode="before")
    @classmethod
    def _number_is_constant(cls, value: Any) -> Any:
        return {"kind": "constant", "value": value} if isinstance(value, int | float) else value

    @model_validator(mode="after")
    def _elements_move_one_way(self) -> Self:
        if self.shared == "per element" and self.correlation_group:
            raise ValueError(f"{self.place}: elements that move each by itself are in no correlation group")
        return self

    @property
    def place(self) -> str:
        """What messages call the line."""
        return f"{self.block} {self.parameter} (position {self.position})"
