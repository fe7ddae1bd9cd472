"""Conditions sets and condition maps, as documents.

A conditions set is a small program: dimensions with a unit, required values or a range, a setting tolerance
and a matching rule; combined as all combinations, corners or listed rows; with exclusions. It expands into
required points (see ``specflow.conditions``). A condition map says how system conditions become a block's
own.
"""

from __future__ import annotations

from enum import StrEnum
from typing import Self

from pydantic import Field, model_validator

from specflow.model.base import Code, Document
from specflow.model.origin import Origin


class Need(StrEnum):
    """What a set asks of a dimension.

    ``ANY`` (don't care): the requirement holds at every value, and evidence at any one value is enough.
    ``NOT_REQUIRED``: the requirement is not stated over this dimension; nobody has to demonstrate it there.
    Neither adds required points, and neither is ever implied by silence: an unlisted dimension is simply not
    spoken of.
    """

    REQUIRED = "required"
    NOT_REQUIRED = "not required"
    ANY = "any"


class MatchingRule(StrEnum):
    """When an actual condition serves a required one."""

    WITHIN = "within tolerance"
    ANYWHERE = "anywhere in range"
    AT_OR_ABOVE = "at or above"
    AT_OR_BELOW = "at or below"
    # the lowest value or less, the highest or more, those between within tolerance
    OUTWARD = "at or beyond"


class Combination(StrEnum):
    """How the values of several dimensions make points."""

    ALL = "all combinations"
    CORNERS = "corners"  # lowest and highest of each numeric dimension, every word of the others
    LISTED = "listed rows"  # the n-th values of the listed dimensions belong together


_ABSOLUTE_ZERO = {"°C": -273.15, "K": 0.0}


class Span(Document):
    """A range of a dimension, in its unit.

    ``step`` is the largest gap allowed between neighbouring evidence values. Only a range that is matched
    anywhere, or of which only the ends count (corners), goes without.
    """

    low: float
    high: float
    step: float | None = Field(default=None, gt=0)

    @model_validator(mode="after")
    def _low_is_below_high(self) -> Self:
        if self.low >= self.high:
            raise ValueError(f"the range {self.low:g} to {self.high:g} does not rise")
        return self


class Dimension(Document):
    """One dimension of a conditions set.

    ``unit`` is canonical; ``values`` (numbers), ``words`` or ``span`` are required, exactly one of them.
    ``tolerance`` is the setting tolerance in the tolerance unit (K for °C, dB for dBm); 0 is exact; with
    ``tolerance_is_percent`` it is a percentage of each required value. ``excused`` are values said to be not
    required.
    """

    name: str
    unit: str = ""
    need: Need = Need.REQUIRED
    values: tuple[float, ...] = ()
    words: tuple[str, ...] = ()
    span: Span | None = None
    tolerance: float = Field(default=0.0, ge=0)
    tolerance_is_percent: bool = False
    rule: MatchingRule = MatchingRule.WITHIN
    excused: tuple[str, ...] = ()
    text: str = ""

    @model_validator(mode="after")
    def _says_one_thing(self) -> Self:
        kinds = [bool(self.values), bool(self.words), self.span is not None]
        if self.need is Need.REQUIRED and sum(kinds) != 1:
            raise ValueError(f"{self.name}: give values, words or a range, and only one of them")
        if self.need is not Need.REQUIRED and any(kinds):
            raise ValueError(f"{self.name}: a dimension that is '{self.need.value}' takes no values")
        if self.need is not Need.REQUIRED and (self.tolerance or self.rule is not MatchingRule.WITHIN):
            raise ValueError(
                f"{self.name}: a dimension that is '{self.need.value}' takes no tolerance and no rule"
            )
        if self.words and (self.tolerance or self.rule is not MatchingRule.WITHIN):
            raise ValueError(
                f"{self.name}: words are compared as they are; they take no tolerance and no rule"
            )
        if (self.rule is MatchingRule.ANYWHERE) and self.span is None:
            raise ValueError(f"{self.name}: 'anywhere in range' needs a range")
        if self.tolerance_is_percent and (self.tolerance >= 100 or self.span is not None):
            raise ValueError(
                f"{self.name}: a tolerance in percent is below 100 % and belongs to values, not to a range"
            )
        return self

    @model_validator(mode="after")
    def _no_temperature_is_below_absolute_zero(self) -> Self:
        zero = _ABSOLUTE_ZERO.get(self.unit)
        ends = self.values if self.span is None else (self.span.low, self.span.high)
        if zero is not None and self.name.startswith("temperature") and any(end < zero for end in ends):
            raise ValueError(f"{self.name}: {min(ends):g} {self.unit} is below absolute zero")
        return self

    @model_validator(mode="after")
    def _direction_of_beyond_is_clear(self) -> Self:
        if self.rule is MatchingRule.OUTWARD and self.span is None and len(set(self.values)) < 2:
            raise ValueError(
                f"{self.name}: one value has no outward side; say 'at or above' or 'at or below'"
            )
        if self.rule is MatchingRule.ANYWHERE and self.span is not None and self.span.step is not None:
            raise ValueError(f"{self.name}: a range that is matched anywhere has no step")
        return self


class Clause(Document):
    """A statement about one dimension of a point: one of ``values`` or ``words``, or within ``low`` to
    ``high``.
    """

    dimension: str
    values: tuple[float, ...] = ()
    words: tuple[str, ...] = ()
    low: float | None = None
    high: float | None = None
    low_is_open: bool = False
    high_is_open: bool = False

    @model_validator(mode="after")
    def _says_something(self) -> Self:
        bounded = self.low is not None or self.high is not None
        if sum([bool(self.values), bool(self.words), bounded]) != 1:
            raise ValueError(f"{self.dimension}: an exclusion names values, words or an interval")
        return self


class Exclusion(Document):
    """Points that are not required: those of which every clause is true. Values are in the dimension's unit."""

    clauses: tuple[Clause, ...] = Field(min_length=1)
    reason: str = ""
    text: str = ""


class ConditionsSet(Document):
    """The conditions under which a requirement holds and must be proved.

    ``listed`` names the dimensions whose values belong together row by row (with ``LISTED``; empty: all that
    have values); the others are combined with every row.
    """

    id: Code
    revision: int = 1
    title: str = ""
    dimensions: tuple[Dimension, ...] = ()
    combination: Combination = Combination.ALL
    listed: tuple[str, ...] = ()
    exclusions: tuple[Exclusion, ...] = ()
    source: str = ""
    note: str = ""
    origin: Origin | None = None

    @model_validator(mode="after")
    def _names_are_known_and_single(self) -> Self:
        names = [dimension.name for dimension in self.dimensions]
        for name in names:
            if names.count(name) > 1:
                raise ValueError(f"{self.id}: the dimension {name} appears twice")
        if self.listed and self.combination is not Combination.LISTED:
            raise ValueError(
                f"{self.id}: dimensions are listed, but the combination is '{self.combination.value}'"
            )
        spoken = {*self.listed, *(clause.dimension for one in self.exclusions for clause in one.clauses)}
        for name in sorted(spoken.difference(names)):
            raise ValueError(f"{self.id}: {name} is listed or excluded, but it is no dimension of this set")
        return self

    @model_validator(mode="after")
    def _ranges_can_be_proved(self) -> Self:
        corners = self.combination is Combination.CORNERS
        for dimension in self.dimensions:
            span = dimension.span
            if span is None or dimension.rule is MatchingRule.ANYWHERE:
                continue
            if span.step is None and not corners:
                raise ValueError(
                    f"{self.id}: the range of {dimension.name} states no step; "
                    "say the largest gap allowed between neighbouring evidence values, as in '27.5 to 30 step 0.25'"
                )
            if span.step is not None and corners:
                raise ValueError(
                    f"{self.id}: corners use the ends of the range of {dimension.name} only; drop its step"
                )
        return self

    @model_validator(mode="after")
    def _rows_are_complete(self) -> Self:
        if self.combination is not Combination.LISTED:
            return self
        lengths = {
            one.name: len(one.values) or len(one.words) for one in self.dimensions if self.is_listed(one)
        }
        if len({length for length in lengths.values() if length > 1}) > 1:
            counts = ", ".join(f"{name} has {length}" for name, length in lengths.items())
            raise ValueError(f"{self.id}: listed rows need as many values in each listed dimension: {counts}")
        for dimension in self.dimensions:
            if dimension.name in self.listed and not self.is_listed(dimension):
                raise ValueError(f"{self.id}: {dimension.name} has no values to list row by row")
        return self

    def is_listed(self, dimension: Dimension) -> bool:
        """Whether the values of this dimension belong to the rows of a listed set."""
        if self.combination is not Combination.LISTED or not (dimension.values or dimension.words):
            return False
        return not self.listed or dimension.name in self.listed

    def dimension(self, name: str) -> Dimension | None:
        """Return the dimension of that name, if the set speaks of it."""
        return next((one for one in self.dimensions if one.name == name), None)


class MapTerm(Document):
    """``factor`` times a system condition."""

    dimension: str
    factor: float = 1.0


class MapEntry(Document):
    """One dimension of a block as a linear function of system conditions: Σ factor · source + offset.

    ``unit`` is the unit the sum is formed in and the target's own ("" takes that of the first source).
    ``offset`` is in ``offset_unit``: a difference ("18 K") beside sources, a value ("5 V") without.
    """

    target: str
    terms: tuple[MapTerm, ...] = ()
    offset: float = 0.0
    offset_unit: str = ""
    unit: str = ""
    text: str = ""

    @model_validator(mode="after")
    def _terms_are_plain(self) -> Self:
        names = [term.dimension for term in self.terms]
        if len(set(names)) < len(names) or any(term.factor == 0 for term in self.terms):
            raise ValueError(f"{self.target}: each source appears once, with a factor other than 0")
        return self


class ConditionMap(Document):
    """How system conditions become the conditions of ``block`` (or of one position in a chain)."""

    id: Code
    revision: int = 1
    block: Code | None = None
    entries: tuple[MapEntry, ...] = Field(min_length=1)
    source: str = ""
    note: str = ""
    origin: Origin | None = None

    @model_validator(mode="after")
    def _targets_are_single(self) -> Self:
        targets = [entry.target for entry in self.entries]
        for target in targets:
            if targets.count(target) > 1:
                raise ValueError(f"{self.id}: {target} is defined twice")
        return self
