"""Pictures as data, made once: the page draws them, the terminal draws them, and a script reads the figures.

Every picture has a ``title`` and ``words``, one sentence that says what is to be seen for those who cannot see it.
"""

from __future__ import annotations

from typing import Annotated, Literal, Self

from pydantic import Field, model_validator

from specflow.model.base import Document


class Series(Document):
    """One line of a level diagram: a value for each station, None where there is none.

    ``look``: signal is what the chain is for, noise what lies below it, bound what it must stay clear of.
    """

    name: str
    values: tuple[float | None, ...]
    texts: tuple[str, ...]
    look: Literal["signal", "noise", "bound"] = "signal"


class LevelDiagram(Document):
    """Levels along a chain: at its input and behind each position."""

    kind: Literal["levels"] = "levels"
    title: str
    words: str
    unit: str
    stations: tuple[str, ...]
    series: tuple[Series, ...]

    @model_validator(mode="after")
    def _one_value_a_station(self) -> Self:
        for one in self.series:
            if len(one.values) != len(self.stations) or len(one.texts) != len(self.stations):
                raise ValueError(f"{one.name} needs one value and one text for each of the stations")
        return self

    @property
    def span(self) -> tuple[float, float]:
        """The least and the greatest value, apart from each other."""
        known = [value for one in self.series for value in one.values if value is not None]
        low, high = (min(known), max(known)) if known else (0.0, 1.0)
        return (low, high) if high > low else (low - 1.0, high + 1.0)


class Bar(Document):
    """One contribution: its part of the whole (0 to 1) and how the number is shown."""

    name: str
    part: float
    text: str


class ContributionBars(Document):
    """Who makes how much of a quantity, or moves it how far, in the order of the chain."""

    kind: Literal["contributions"] = "contributions"
    title: str
    words: str
    bars: tuple[Bar, ...]


class Mark(Document):
    """A place on the axis of a distribution with what stands there."""

    at: float
    text: str


class Distribution(Document):
    """How often which worst margin: ``counts`` between ``edges``; the limit is where the margin is 0."""

    kind: Literal["distribution"] = "distribution"
    title: str
    words: str
    unit: str
    edges: tuple[float, ...]
    counts: tuple[int, ...]
    marks: tuple[Mark, ...] = ()

    @model_validator(mode="after")
    def _counts_between_edges(self) -> Self:
        if len(self.edges) != len(self.counts) + 1:
            raise ValueError("a distribution has one edge more than counts")
        return self

    @property
    def shows_limit(self) -> bool:
        """Whether the limit is near enough to stand on the axis without squeezing the counts together."""
        low, high = self.edges[0], self.edges[-1]
        return max(low, -high, 0.0) <= 1.5 * (high - low)

    @property
    def span(self) -> tuple[float, float]:
        """The ends of the axis, apart from each other: all margins, and the limit where it is near."""
        low, high = self.edges[0], self.edges[-1]
        if self.shows_limit:
            low, high = min(low, 0.0), max(high, 0.0)
        return (low, high) if high > low else (low - 1.0, high + 1.0)


class TraceLine(Document):
    """Readings along an axis: ``x`` rises, one ``y`` for each. A bound of a limit is drawn as one, too."""

    name: str
    x: tuple[float, ...]
    y: tuple[float, ...]
    look: Literal["reading", "bound"] = "reading"

    @model_validator(mode="after")
    def _one_value_a_place(self) -> Self:
        if len(self.x) != len(self.y) or not self.x:
            raise ValueError(f"{self.name} needs one value for each place")
        return self


class TraceMark(Document):
    """A place of a trace with what was found there."""

    x: float
    y: float
    text: str


class TracePicture(Document):
    """Raw readings along one axis, with the limit where it is one on them, and what was derived from them."""

    kind: Literal["trace"] = "trace"
    title: str
    words: str
    axis: str
    axis_unit: str
    unit: str
    lines: tuple[TraceLine, ...] = Field(min_length=1)
    marks: tuple[TraceMark, ...] = ()

    @property
    def across(self) -> tuple[float, float]:
        """The ends of the axis, apart from each other."""
        return _apart([place for line in self.lines for place in line.x])

    @property
    def span(self) -> tuple[float, float]:
        """The least and the greatest value, apart from each other."""
        return _apart([value for line in self.lines for value in line.y])


def _apart(values: list[float]) -> tuple[float, float]:
    low, high = min(values), max(values)
    return (low, high) if high > low else (low - 1.0, high + 1.0)


Picture = Annotated[
    LevelDiagram | ContributionBars | Distribution | TracePicture, Field(discriminator="kind")
]
