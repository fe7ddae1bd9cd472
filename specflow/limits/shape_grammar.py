"""The grammar of limits with several parts.

cases(when CONDITION: LIMIT; ...; otherwise: LIMIT)
by NAME[unit] (VALUE | VALUE: LIMIT; LOW..HIGH: LIMIT; <= VALUE: LIMIT; otherwise: LIMIT)
looser(LIMIT; LIMIT) | stricter(LIMIT; LIMIT) | sum(LIMIT; LIMIT; in 1 MHz)
mask(AXIS[unit], max dBm, in 1 MHz: 0..<5: -5; 5..100: -13 to -20 log in 10 MHz; except 40..50; allow 10 % by 3 dB)
mask(AXIS[unit], max dBr, linear: 9: 0; 11: -20; 20: -28; 30: -40)          breakpoints
"""

from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise

from specflow.limits.draft import Draft
from specflow.limits.expression_grammar import (
    read_after_name,
    read_condition,
    read_interval_or_value,
    read_sum,
    same_unit,
)
from specflow.limits.expression_shape import is_condition
from specflow.limits.value_grammar import plain
from specflow.model.expression import Expression, Interval, Member, Name, Number
from specflow.model.limit import (
    Allowance,
    Alternatives,
    Case,
    Cases,
    LimitNode,
    Mask,
    PowerSum,
    Segment,
    Side,
    Slope,
    Stringency,
)

ReadLimit = Callable[[Draft], LimitNode]


def read_cases(draft: Draft, read_limit: ReadLimit) -> LimitNode:
    """Read the inside of ``cases(...)``."""
    reader = draft.reader
    cases: list[Case] = []
    otherwise = None
    while True:
        if reader.take_words("otherwise", "else") is not None:
            otherwise = _after_colon(draft, read_limit, "'otherwise'")
            break
        if reader.take_words("when") is None:
            reader.fail(
                "a case begins with 'when' or 'otherwise'", hint="cases(when band == n257: >= 20 dBm; ...)"
            )
        when = _condition(draft)
        cases.append(Case(when=when, limit=_after_colon(draft, read_limit, "the condition")))
        if reader.take(";") is None or reader.sees(")"):
            break
    reader.expect(")", "the cases")
    if not cases:
        reader.fail("a table of cases needs at least one 'when'")
    return Cases(cases=tuple(cases), otherwise=otherwise)


def _condition(draft: Draft) -> Expression:
    place = draft.reader.place
    condition = read_condition(draft.reader)
    if not is_condition(condition):
        draft.reader.fail("a value stands where a condition belongs", hint="band == n257", place=place)
    return condition


def _after_colon(draft: Draft, read_limit: ReadLimit, after: str) -> LimitNode:
    draft.reader.expect(":", after)
    return read_limit(draft)


def read_by(draft: Draft, read_limit: ReadLimit) -> LimitNode:
    """Read ``NAME[unit] (VALUE | VALUE: LIMIT; ...)`` after ``by``."""
    reader = draft.reader
    word = reader.take_name()
    if word is None:
        reader.fail("'by' is followed by the name of a condition", hint="by band (n257: >= 20 dBm; ...)")
    name = read_after_name(reader, word)
    reader.expect("(", f"'by {name.name}'")
    with draft.inside():
        cases: list[Case] = []
        otherwise = None
        while True:
            if reader.take_words("otherwise", "else") is not None:
                otherwise = _after_colon(draft, read_limit, "'otherwise'")
                break
            values = [read_interval_or_value(reader)]
            while reader.take("|", ",") is not None:
                values.append(read_interval_or_value(reader))
            limit = _after_colon(draft, read_limit, "the value")
            cases.append(Case(when=Member(operand=name, values=tuple(values)), limit=limit))
            if reader.take(";") is None or reader.sees(")"):
                break
    reader.expect(")", "the cases")
    if not cases:
        reader.fail("a table of cases needs at least one value")
    return Cases(cases=tuple(cases), otherwise=otherwise)


def read_members(draft: Draft, read_limit: ReadLimit, rule: Stringency) -> LimitNode:
    """Read the inside of ``looser(...)`` or ``stricter(...)``."""
    members = _members(draft, read_limit)
    draft.reader.expect(")", "the alternatives")
    return Alternatives(rule=rule, members=members)


def _members(draft: Draft, read_limit: ReadLimit) -> tuple[LimitNode, ...]:
    members = [read_limit(draft)]
    while draft.reader.take(";") is not None and not draft.reader.sees_words("in"):
        members.append(read_limit(draft))
    if len(members) < 2:
        draft.reader.fail("at least two limits belong here, parted by ';'")
    return tuple(members)


def read_power_sum(draft: Draft, read_limit: ReadLimit) -> LimitNode:
    """Read the inside of ``sum(...)``."""
    members = _members(draft, read_limit)
    bandwidth = read_bandwidth(draft) if draft.reader.take_words("in") is not None else None
    draft.reader.expect(")", "the limits to be summed")
    return PowerSum(members=members, bandwidth=bandwidth)


def read_bandwidth(draft: Draft) -> Number:
    """Read a measurement bandwidth: a number and its unit."""
    place = draft.reader.place
    text = draft.reader.take_number()
    unit = draft.reader.take_unit() if text is not None else None
    if text is None or unit is None or not unit.endswith("Hz"):
        draft.reader.fail("expected a measurement bandwidth", hint="in 1 MHz", place=place)
    return Number(text=text, unit=unit)


def read_amount(draft: Draft, what: str) -> Number:
    """Read a number with a unit."""
    place = draft.reader.place
    text = draft.reader.take_number()
    unit = draft.reader.take_unit() if text is not None else None
    if text is None or unit is None:
        draft.reader.fail(f"expected {what} with its unit", place=place)
    return Number(text=text, unit=unit)


def read_allowance(draft: Draft) -> Allowance:
    """Read ``10 % by 3 dB`` after ``allow``."""
    share = read_amount(draft, "the share that may exceed, as in 'allow 10 % by 3 dB',")
    if draft.reader.take_words("by") is None:
        draft.reader.fail("expected 'by' and how far the share may exceed", hint="allow 10 % by 3 dB")
    return Allowance(share=share, excess=read_amount(draft, "how far the share may exceed"))


def read_mask(draft: Draft) -> LimitNode:
    """Read the inside of ``mask(...)``."""
    reader = draft.reader
    place = reader.place
    axis = read_sum(reader)
    if not isinstance(axis, Name) or not axis.unit:
        reader.fail(
            "a mask begins with its axis and unit", hint="mask(offset[MHz], max dBm: ...)", place=place
        )
    side, strict, unit, slope, bandwidth = _mask_header(draft)
    segments, exclusions, allowances = _mask_body(draft, slope, bandwidth, axis.unit, unit)
    reader.expect(")", "the mask")
    return Mask(
        axis=axis.name,
        axis_unit=axis.unit,
        side=side,
        unit=unit,
        strict=strict,
        segments=segments,
        exclusions=exclusions,
        allowances=allowances,
    )


def _mask_header(draft: Draft) -> tuple[Side, bool, str, Slope, Number | None]:
    reader = draft.reader
    reader.expect(",", "the axis of the mask")
    side = reader.take_words("max", "min")
    unit = reader.take_unit() if side is not None else None
    if unit is None:
        reader.fail("the mask needs its side and unit", hint="mask(offset[MHz], max dBm: ...)")
    strict, slope, bandwidth = False, Slope.LINEAR, None
    while reader.take(",") is not None:
        if reader.take_words("strict") is not None:
            strict = True
        elif reader.take_words("in") is not None:
            bandwidth = read_bandwidth(draft)
        else:
            word = reader.take_words("linear", "log")
            if word is None:
                reader.fail("expected 'strict', 'linear', 'log' or 'in' and a bandwidth")
            slope = Slope(word)
    reader.expect(":", "the head of the mask")
    return Side.UPPER if side == "max" else Side.LOWER, strict, unit, slope, bandwidth


def _mask_body(
    draft: Draft, slope: Slope, bandwidth: Number | None, axis_unit: str, unit: str
) -> tuple[tuple[Segment, ...], tuple[Interval, ...], tuple[Allowance, ...]]:
    reader = draft.reader
    pieces: list[Segment] = []
    points: list[tuple[Expression, Expression]] = []
    exclusions: list[Interval] = []
    allowances: list[Allowance] = []
    while not reader.sees(")") and not reader.done():
        if reader.take_words("except") is not None:
            exclusions += _exclusions(draft)
        elif reader.take_words("allow") is not None:
            allowances.append(read_allowance(draft))
        else:
            _read_piece(draft, pieces, points, (slope, bandwidth, axis_unit, unit))
        if reader.take(";") is None:
            break
    pieces += _between_points(points, slope, bandwidth)
    if not pieces:
        reader.fail(
            "a mask needs a segment or two breakpoints", hint="0..5: -5; 5..100: -13  or  9: 0; 11: -20"
        )
    return tuple(pieces), tuple(exclusions), tuple(allowances)


def _exclusions(draft: Draft) -> list[Interval]:
    found = []
    while True:
        place = draft.reader.place
        interval = read_interval_or_value(draft.reader)
        if not isinstance(interval, Interval):
            draft.reader.fail("an exclusion is a range", hint="except 40..50", place=place)
        found.append(interval)
        if draft.reader.take(",") is None:
            return found


def _read_piece(
    draft: Draft,
    pieces: list[Segment],
    points: list[tuple[Expression, Expression]],
    settings: tuple[Slope, Number | None, str, str],
) -> None:
    reader = draft.reader
    slope, bandwidth, axis_unit, unit = settings
    start = read_sum(reader)
    start_open = reader.sees("<..")
    ranged = reader.take("<..", "..", "–") is not None
    stop_open = ranged and reader.take("<") is not None
    stop = None if not ranged or reader.sees(":") else read_sum(reader)
    if ranged and stop is not None:
        ends = same_unit(Interval(low=start, high=stop))
        start, stop = plain(ends.low or start, axis_unit), plain(stop, axis_unit)
    reader.expect(":", "the range on the axis")
    place = reader.place
    value = read_sum(reader)
    if not ranged:
        draft.settle([value], unit, place)
        points.append((plain(start, axis_unit), plain(value, unit)))
        return
    end_value = read_sum(reader) if reader.take_words("to") is not None else None
    own_slope = reader.take_words("linear", "log")
    if reader.take_words("in") is not None:
        bandwidth = read_bandwidth(draft)
    draft.settle([value] if end_value is None else [value, end_value], unit, place)
    pieces.append(
        Segment(
            start=start,
            stop=stop,
            value=plain(value, unit),
            end_value=None if end_value is None else plain(end_value, unit),
            slope=Slope(own_slope) if own_slope else slope if end_value is not None else Slope.LINEAR,
            start_open=start_open,
            stop_open=stop_open,
            bandwidth=bandwidth,
        )
    )


def _between_points(
    points: list[tuple[Expression, Expression]], slope: Slope, bandwidth: Number | None
) -> list[Segment]:
    """Join neighbouring breakpoints; two at one place are a step."""
    return [
        Segment(start=start, stop=stop, value=value, end_value=end_value, slope=slope, bandwidth=bandwidth)
        for (start, value), (stop, end_value) in pairwise(points)
        if start != stop
    ]
