"""Random expressions, limit trees and contexts for the property tests."""

from __future__ import annotations

from hypothesis import strategies as st

from specflow.model.expression import (
    Call,
    Choice,
    Compare,
    Expression,
    Interval,
    Logic,
    Member,
    Name,
    Negative,
    Not,
    Number,
    Operation,
    Word,
)
from specflow.model.limit import (
    Allowance,
    Allowed,
    Alternatives,
    Between,
    Bound,
    Case,
    Cases,
    Exceptions,
    Gate,
    LimitNode,
    Mask,
    Mean,
    MeasuredIn,
    NoLimit,
    OfQuantity,
    Percentile,
    Population,
    PowerSum,
    Segment,
    Side,
    Slope,
    Stringency,
    Tolerance,
    ToleranceBound,
    Undefined,
    Worst,
)

NAMES = ("alpha", "beta", "gamma_1")
numbers = st.builds(
    Number,
    text=st.one_of(
        st.integers(0, 500).map(str),
        st.decimals(0, 100, places=1, allow_nan=False).map(str),
        st.decimals(0, 2, places=3, allow_nan=False).map(str),
    ),
)
names = st.builds(Name, name=st.sampled_from(NAMES), unit=st.sampled_from(["", "dBm"]))
signed = st.one_of(numbers, numbers.map(lambda number: Negative(operand=number)))


def _larger(inner: st.SearchStrategy[Expression]) -> st.SearchStrategy[Expression]:
    pairs = st.lists(inner, min_size=2, max_size=3).map(tuple)
    return st.one_of(
        st.builds(Negative, operand=inner),
        st.builds(Operation, sign=st.sampled_from(["+", "-", "*", "/", "^"]), left=inner, right=inner),
        st.builds(Call, function=st.sampled_from(["min", "max"]), arguments=pairs),
        st.builds(Call, function=st.sampled_from(["abs", "sqrt", "log10"]), arguments=st.tuples(inner)),
        st.builds(Choice, when=st.deferred(lambda: conditions), then=inner, otherwise=inner),
    )


values: st.SearchStrategy[Expression] = st.recursive(st.one_of(numbers, names), _larger, max_leaves=8)
intervals = st.builds(
    Interval,
    low=st.one_of(st.none(), signed),
    high=signed,
    low_open=st.just(False),
    high_open=st.booleans(),
)
members = st.builds(
    Member,
    operand=st.builds(Name, name=st.sampled_from(NAMES)),
    values=st.lists(
        st.one_of(signed, st.builds(Word, text=st.sampled_from(["n257", "16QAM", "two words"])), intervals),
        min_size=1,
        max_size=3,
    ).map(tuple),
)
comparisons = st.builds(
    Compare,
    sign=st.sampled_from(["<", "<=", ">", ">=", "==", "!="]),
    left=st.one_of(names, numbers),
    right=names,
)
conditions: st.SearchStrategy[Expression] = st.recursive(
    st.one_of(comparisons, members),
    lambda inner: st.one_of(
        st.builds(Not, operand=inner),
        st.builds(
            Logic,
            sign=st.sampled_from(["and", "or"]),
            terms=st.lists(inner, min_size=2, max_size=3).map(tuple),
        ),
    ),
    max_leaves=4,
)
expressions = st.one_of(values, conditions)

_units = st.sampled_from(["dBm", "dB", "dBm/MHz", "MHz", "1"])
_amount = numbers.map(lambda number: Number(text=number.text, unit="dB"))
_bandwidth = st.sampled_from([Number(text="1", unit="MHz"), Number(text="100", unit="kHz")])
_allowance = st.builds(Allowance, share=st.just(Number(text="10", unit="%")), excess=_amount)
_bounds = st.builds(
    Bound, side=st.sampled_from(Side), value=st.one_of(signed, values), unit=_units, strict=st.booleans()
)
_betweens = st.builds(
    Between, lower=numbers.map(lambda number: Negative(operand=number)), upper=numbers, unit=_units
)
_tolerances = st.one_of(
    st.builds(
        Tolerance,
        nominal=signed,
        plus=numbers,
        minus=numbers,
        unit=st.just("dBm"),
        tolerance_unit=st.just("dB"),
    ),
    numbers.map(lambda number: Tolerance(plus=number, minus=number, unit="ppm", tolerance_unit="ppm")),
)
_segments = st.builds(
    Segment,
    start=signed,
    stop=st.one_of(st.none(), signed),
    value=signed,
    end_value=st.none(),
    start_open=st.booleans(),
    stop_open=st.just(False),
    bandwidth=st.one_of(st.none(), _bandwidth),
)
_sloped = st.builds(
    Segment, start=numbers, stop=numbers, value=signed, end_value=signed, slope=st.sampled_from(Slope)
)
_masks = st.builds(
    Mask,
    axis=st.just("offset"),
    axis_unit=st.just("MHz"),
    side=st.sampled_from(Side),
    unit=st.sampled_from(["dBm", "dBr"]),
    strict=st.booleans(),
    segments=st.lists(st.one_of(_segments, _sloped), min_size=1, max_size=4).map(tuple),
    exclusions=st.lists(intervals, max_size=2).map(tuple),
    allowances=st.lists(_allowance, max_size=1).map(tuple),
)
_simple = st.one_of(
    _bounds,
    _betweens,
    _tolerances,
    _masks,
    st.builds(NoLimit, label=st.sampled_from(["no limit", "not applicable"])),
    st.sampled_from([Undefined(), Undefined(label="FFS"), Undefined(side=Side.UPPER, unit="dBm")]),
)
_statistics = st.one_of(
    st.builds(
        Percentile,
        percent=numbers.filter(lambda number: number.value <= 100),
        sense=st.sampled_from(["CDF", "CCDF"]),
    ),
    st.just(Worst()),
    st.builds(Mean, of=st.sampled_from(["values", "power", "dB", "squares"])),
    st.just(ToleranceBound(coverage=Number(text="95"), confidence=Number(text="95"))),
    st.builds(Exceptions, count=st.integers(1, 9), relaxed=st.one_of(st.none(), _tolerances)),
)


def _composed(inner: st.SearchStrategy[LimitNode]) -> st.SearchStrategy[LimitNode]:
    several = st.lists(inner, min_size=2, max_size=3).map(tuple)
    cases = st.lists(st.builds(Case, when=conditions, limit=inner), min_size=1, max_size=3).map(tuple)
    return st.one_of(
        st.builds(Cases, cases=cases, otherwise=st.one_of(st.none(), inner)),
        st.builds(Alternatives, rule=st.sampled_from(Stringency), members=several),
        st.builds(PowerSum, members=several, bandwidth=st.one_of(st.none(), _bandwidth)),
        st.builds(Gate, when=conditions, limit=inner),
        st.builds(MeasuredIn, limit=inner, bandwidth=_bandwidth),
        st.builds(Allowed, limit=inner, allowance=_allowance),
        st.builds(OfQuantity, quantity=st.sampled_from(NAMES), limit=inner),
        _populations(inner),
    )


def _populations(inner: st.SearchStrategy[LimitNode]) -> st.SearchStrategy[LimitNode]:
    plain = st.builds(
        Population,
        limit=inner,
        statistic=_statistics.filter(lambda statistic: not isinstance(statistic, Exceptions)),
        of=st.one_of(st.none(), values),
        over=st.lists(st.sampled_from(["sphere", "item"]), max_size=2).map(tuple),
        where=st.one_of(st.none(), conditions),
        least=st.one_of(st.none(), st.integers(1, 99)),
    )
    excepted = st.builds(
        Population,
        limit=inner,
        statistic=_statistics.filter(lambda statistic: isinstance(statistic, Exceptions)),
    )
    return st.one_of(plain, excepted)


trees: st.SearchStrategy[LimitNode] = st.recursive(_simple, _composed, max_leaves=5)
