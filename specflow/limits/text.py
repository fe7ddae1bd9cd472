"""A limit as canonical text, which reads back to the same tree."""

from __future__ import annotations

from specflow.limits.expression_text import expression_text, interval_text, value_text
from specflow.model.expression import Expression, Interval, Negative, Number
from specflow.model.limit import (
    Allowance,
    Allowed,
    Alternatives,
    Between,
    Bound,
    Cases,
    Exceptions,
    Gate,
    Limit,
    LimitNode,
    LimitState,
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
    Statistic,
    Stringency,
    Tolerance,
    ToleranceBound,
    Undefined,
    Worst,
)

_SIGN = {
    (Side.LOWER, False): ">=",
    (Side.LOWER, True): ">",
    (Side.UPPER, False): "<=",
    (Side.UPPER, True): "<",
}


def limit_text(limit: Limit) -> str:
    """Return the canonical spelling of a limit; ``parse_limit`` reads the same tree from it."""
    parts = [node_text(limit.tree)]
    if limit.rounding is not None:
        way = "" if limit.rounding.method == "nearest" else f"{limit.rounding.method} "
        parts.append(f"rounded {way}to {expression_text(limit.rounding.step)}")
    if limit.test_tolerance is not None:
        place = " on stimulus" if limit.test_tolerance.place == "stimulus" else ""
        parts.append(f"test tolerance {expression_text(limit.test_tolerance.amount)}{place}")
    if limit.state is LimitState.TBR:
        parts.append("(TBR)")
    return " ".join(parts)


def with_unit_text(node: Expression, unit: str) -> str:
    """Return a value and the unit of the limit after it; anything but a number in parentheses."""
    written = "plain" if unit == "1" else unit
    if isinstance(node, Number) or (isinstance(node, Negative) and isinstance(node.operand, Number)):
        own = node.unit if isinstance(node, Number) else _own_unit(node)
        if not own:
            return f"{expression_text(node)} {written}"
    return f"({expression_text(node)}) {written}"


def _own_unit(node: Negative) -> str:
    return node.operand.unit if isinstance(node.operand, Number) else ""


def node_text(node: LimitNode) -> str:
    """Return the canonical spelling of a node of the tree."""
    match node:
        case Bound(side=side, value=value, unit=unit, strict=strict):
            return f"{_SIGN[side, strict]} {with_unit_text(value, unit)}"
        case Between(lower=lower, upper=upper, unit=unit):
            return f"{with_unit_text(lower, unit)}..{with_unit_text(upper, unit)}"
        case Tolerance():
            return _tolerance_text(node)
        case Cases(cases=cases, otherwise=otherwise):
            parts = [f"when {expression_text(case.when)}: {node_text(case.limit)}" for case in cases]
            if otherwise is not None:
                parts.append(f"otherwise: {node_text(otherwise)}")
            return f"cases({'; '.join(parts)})"
        case Mask():
            return _mask_text(node)
        case Alternatives(rule=rule, members=members):
            name = "looser" if rule is Stringency.LOOSER else "stricter"
            return f"{name}({'; '.join(node_text(member) for member in members)})"
        case PowerSum(members=members, bandwidth=bandwidth):
            parts = [node_text(member) for member in members]
            if bandwidth is not None:
                parts.append(f"in {expression_text(bandwidth)}")
            return f"sum({'; '.join(parts)})"
        case OfQuantity(quantity=quantity, limit=limit):
            return _of_text(quantity, limit)
        case Gate(when=when, limit=limit):
            return f"{node_text(limit)} if {expression_text(when)}"
        case MeasuredIn(limit=limit, bandwidth=bandwidth):
            return f"{node_text(limit)} in {expression_text(bandwidth)}"
        case Allowed(limit=limit, allowance=allowance):
            return f"{node_text(limit)} {allowance_text(allowance)}"
        case Population():
            return _population_text(node)
        case Undefined(label=label, side=side, unit=unit):
            if label == "FFS":
                return label
            sign = "" if side is None else f"{_SIGN[side, False]} "
            return f"{sign}{label} {unit}".strip()
        case NoLimit(label=label):
            return label


def _of_text(quantity: str, limit: LimitNode) -> str:
    return (
        f"{quantity} {node_text(limit)}"
        if isinstance(limit, Bound)
        else f"{quantity}: {{{node_text(limit)}}}"
    )


def _tolerance_text(node: Tolerance) -> str:
    if node.nominal is None:
        return f"± {with_unit_text(node.plus, node.unit)}"
    nominal = with_unit_text(node.nominal, node.unit)
    if node.plus == node.minus:
        return f"{nominal} ± {with_unit_text(node.plus, node.tolerance_unit)}"
    unit = "plain" if node.tolerance_unit == "1" else node.tolerance_unit
    return f"{nominal} +{expression_text(node.plus)} {unit}/-{expression_text(node.minus)} {unit}"


def _mask_text(mask: Mask) -> str:
    side = "max" if mask.side is Side.UPPER else "min"
    unit = "plain" if mask.unit == "1" else mask.unit
    head = f"{mask.axis}[{mask.axis_unit}], {side} {unit}{', strict' if mask.strict else ''}"
    parts = [_segment_text(segment) for segment in mask.segments]
    parts += [f"except {_exclusion_text(interval)}" for interval in mask.exclusions]
    parts += [allowance_text(allowance) for allowance in mask.allowances]
    return f"mask({head}: {'; '.join(parts)})"


def _exclusion_text(interval: Interval) -> str:
    return interval_text(interval)


def _segment_text(segment: Segment) -> str:
    start, stop = value_text(segment.start), "" if segment.stop is None else value_text(segment.stop)
    place = f"{start}{'<' if segment.start_open else ''}..{'<' if segment.stop_open else ''}{stop}"
    text = f"{place}: {expression_text(segment.value)}"
    if segment.end_value is not None:
        text += (
            f" to {expression_text(segment.end_value)} {'log' if segment.slope is Slope.LOG else 'linear'}"
        )
    return text if segment.bandwidth is None else f"{text} in {expression_text(segment.bandwidth)}"


def allowance_text(allowance: Allowance) -> str:
    """Return ``allow 10 % by 3 dB``."""
    return f"allow {expression_text(allowance.share)} by {expression_text(allowance.excess)}"


def _population_text(node: Population) -> str:
    parts = [node_text(node.limit), statistic_text(node.statistic)]
    if node.of is not None:
        parts.append(f"of ({expression_text(node.of)})")
    if node.over:
        parts.append(f"over {', '.join(node.over)}")
    if node.where is not None:
        parts.append(f"where {expression_text(node.where)}")
    if node.least is not None:
        parts.append(f"from at least {node.least}")
    return " ".join(parts)


def statistic_text(statistic: Statistic) -> str:
    """Return the spelling of a statistic."""
    match statistic:
        case Percentile(percent=percent, sense=sense):
            return f"at {percent.text} % of {sense}"
        case ToleranceBound(coverage=coverage, confidence=confidence):
            return f"at {coverage.text}/{confidence.text}"
        case Worst():
            return "worst"
        case Mean(of=of):
            return f"mean of {of}"
        case Exceptions(count=count, relaxed=relaxed):
            within = "" if relaxed is None else f" within {{{node_text(relaxed)}}}"
            return f"with {count} exception{'s' if count > 1 else ''}{within}"
