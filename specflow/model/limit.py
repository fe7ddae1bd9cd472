"""Limits: the typed tree a requirement holds, able to say every shape that published limits have.

Words: a *bound* is one side; *alternatives* are met by the looser or the stricter member; a *gate* is a condition
under which the limit counts at all; a *population* limit bounds a statistic of many values. The tree is parsed from
text by ``specflow.limits.parse_limit`` and evaluated there.
"""

from __future__ import annotations

from enum import StrEnum
from typing import Annotated, Literal

from pydantic import Field

from specflow.model.base import Document
from specflow.model.expression import Expression, Interval, Number


class LimitState(StrEnum):
    """How settled the number is: TBR computes but cannot close, TBD blocks."""

    FIRM = "firm"
    TBR = "TBR"
    TBD = "TBD"


class Side(StrEnum):
    """Which side of the value is bounded."""

    LOWER = "lower"
    UPPER = "upper"


class Bound(Document):
    """One side: at least (lower) or at most (upper) ``value`` in ``unit``; strict excludes equality."""

    kind: Literal["bound"] = "bound"
    side: Side
    value: Expression
    unit: str
    strict: bool = False


class Between(Document):
    """From ``lower`` to ``upper``, both in ``unit`` and both included."""

    kind: Literal["between"] = "between"
    lower: Expression
    upper: Expression
    unit: str


class Tolerance(Document):
    """``nominal`` with ``plus`` above and ``minus`` below it (both written positive); no nominal: about zero.

    ``tolerance_unit`` is the unit of a difference (dB for dBm), or % or ppm of a nominal that is not itself in that
    unit.
    """

    kind: Literal["tolerance"] = "tolerance"
    nominal: Expression | None = None
    plus: Expression
    minus: Expression
    unit: str
    tolerance_unit: str


class Case(Document):
    """One line of a table of limits: the condition under which it holds, and the limit."""

    when: Expression
    limit: LimitNode


class Cases(Document):
    """A table of limits by conditions: the first case that holds; without one, ``otherwise`` or nothing required."""

    kind: Literal["cases"] = "cases"
    cases: tuple[Case, ...] = Field(min_length=1)
    otherwise: LimitNode | None = None


class Slope(StrEnum):
    """How a mask runs between the two ends of a segment."""

    LINEAR = "linear"
    LOG = "log"


class Segment(Document):
    """A piece of a mask: ``start`` to ``stop`` on the axis, ``value`` (to ``end_value``), measured in ``bandwidth``.

    ``stop`` None runs on without end. ``end_value`` None: flat, or a formula of the axis. Both ends belong to the
    segment unless ``start_open`` / ``stop_open``.
    """

    start: Expression
    stop: Expression | None
    value: Expression
    end_value: Expression | None = None
    slope: Slope = Slope.LINEAR
    start_open: bool = False
    stop_open: bool = False
    bandwidth: Number | None = None


class Allowance(Document):
    """A share of the samples that may exceed the bound by so much: 10 % by 3 dB."""

    share: Number
    excess: Number


class Mask(Document):
    """A bound that is piecewise over an axis. Outside all segments and in exclusions nothing is required.

    Where several segments hold an axis value (a shared breakpoint), the most stringent applies, as 47 CFR 15.209
    has it at band edges (clause from memory); half-open segments, as 3GPP writes them, say otherwise.
    """

    kind: Literal["mask"] = "mask"
    axis: str
    axis_unit: str
    side: Side
    unit: str
    strict: bool = False
    segments: tuple[Segment, ...] = Field(min_length=1)
    exclusions: tuple[Interval, ...] = ()
    allowances: tuple[Allowance, ...] = ()


class Stringency(StrEnum):
    """Which of the alternatives governs."""

    LOOSER = "looser"
    STRICTER = "stricter"


class Alternatives(Document):
    """The less (or more) stringent of several limits, each with its own unit and quantity."""

    kind: Literal["alternatives"] = "alternatives"
    rule: Stringency
    members: tuple[LimitNode, ...] = Field(min_length=2)


class OfQuantity(Document):
    """A limit on another quantity than the requirement's own, by parameter name."""

    kind: Literal["of"] = "of"
    quantity: str
    limit: LimitNode


class Gate(Document):
    """A limit that counts only where the condition holds; elsewhere it is *not triggered*."""

    kind: Literal["gate"] = "gate"
    when: Expression
    limit: LimitNode


class PowerSum(Document):
    """The sum, as powers, of several upper limits in dB; each scaled to ``bandwidth`` when one is given."""

    kind: Literal["power_sum"] = "power_sum"
    members: tuple[LimitNode, ...] = Field(min_length=2)
    bandwidth: Number | None = None


class MeasuredIn(Document):
    """A limit with the measurement bandwidth it is stated in. Not a density: nothing is scaled."""

    kind: Literal["measured_in"] = "measured_in"
    limit: LimitNode
    bandwidth: Number


class Allowed(Document):
    """A limit that a share of the samples may exceed by so much."""

    kind: Literal["allowed"] = "allowed"
    limit: LimitNode
    allowance: Allowance


class Percentile(Document):
    """The value at ``percent`` of the cumulative distribution (CDF) or of its complement (CCDF)."""

    kind: Literal["percentile"] = "percentile"
    percent: Number
    sense: Literal["CDF", "CCDF"] = "CDF"


class Worst(Document):
    """The value nearest to (or farthest beyond) the limit."""

    kind: Literal["worst"] = "worst"


class Mean(Document):
    """The mean of so many runs, ``of_power`` or ``of_db``, or of the values as they stand."""

    kind: Literal["mean"] = "mean"
    of: Literal["values", "power", "dB", "squares"] = "values"


class ToleranceBound(Document):
    """The one-sided bound that holds ``coverage`` % of the population with ``confidence`` %: "95/95"."""

    kind: Literal["tolerance_bound"] = "tolerance_bound"
    coverage: Number
    confidence: Number


class Exceptions(Document):
    """Up to ``count`` values may exceed the limit, if they keep the relaxed one (none: without bound)."""

    kind: Literal["exceptions"] = "exceptions"
    count: int = Field(ge=1)
    relaxed: LimitNode | None = None


Statistic = Annotated[Percentile | Worst | Mean | ToleranceBound | Exceptions, Field(discriminator="kind")]


class Population(Document):
    """A limit on a statistic of many values.

    ``of``: what each value is, when it is a formula of recorded quantities (a difference of two EIRP readings);
    ``over``: the names it runs over (sphere, item, run ...); ``where``: the subset of the values that counts;
    ``least``: the fewest values that prove anything.
    """

    kind: Literal["population"] = "population"
    limit: LimitNode
    statistic: Statistic
    of: Expression | None = None
    over: tuple[str, ...] = ()
    where: Expression | None = None
    least: int | None = Field(default=None, ge=1)


class Undefined(Document):
    """No number yet: TBD, or FFS (for further study). ``side`` and ``unit`` when the text gives them."""

    kind: Literal["undefined"] = "undefined"
    label: Literal["TBD", "FFS"] = "TBD"
    side: Side | None = None
    unit: str = ""


class NoLimit(Document):
    """Said on purpose: nothing is limited, or the limit is not applicable."""

    kind: Literal["no_limit"] = "no_limit"
    label: Literal["no limit", "not applicable"] = "no limit"


LimitNode = Annotated[
    Bound
    | Between
    | Tolerance
    | Cases
    | Mask
    | Alternatives
    | OfQuantity
    | Gate
    | PowerSum
    | MeasuredIn
    | Allowed
    | Population
    | Undefined
    | NoLimit,
    Field(discriminator="kind"),
]


class Rounding(Document):
    """How the number of a computed limit is rounded: to a multiple of ``step``, ties to even (ASTM E29)."""

    step: Number
    method: Literal["nearest", "up", "down"] = "nearest"


class TestTolerance(Document):
    """What a test may relax the limit by, kept apart from the core limit; or what it adds to the stimulus.

    One amount: where it depends on conditions, each range of conditions is a requirement of its own.
    """

    __test__ = False

    amount: Number
    place: Literal["limit", "stimulus"] = "limit"


class Limit(Document):
    """The limit of a requirement: the text as typed, the tree it was read as, and how settled it is.

    ``unit`` is the canonical unit of the limit, "" when alternatives have several. ``readings`` are the sentences
    that tell what the reader supplied (a tolerance in dBm read as dB, a direction taken from the parameter).
    """

    text: str
    state: LimitState = LimitState.FIRM
    tree: LimitNode
    unit: str = ""
    rounding: Rounding | None = None
    test_tolerance: TestTolerance | None = None
    readings: tuple[str, ...] = ()
