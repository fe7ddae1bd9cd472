"""A limit in plain English, as it is echoed to the person who typed it."""

from __future__ import annotations

from specflow.limits.expression_text import expression_words
from specflow.model.expression import Expression, Number
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
from specflow.model.parameter import Parameter

_SIDE = {
    (Side.LOWER, False): "at least",
    (Side.LOWER, True): "more than",
    (Side.UPPER, False): "at most",
    (Side.UPPER, True): "less than",
}
_STATE = {
    LimitState.FIRM: "",
    LimitState.TBR: "to be reviewed (TBR): it computes but cannot close",
    LimitState.TBD: "to be determined (TBD): it blocks",
}


def limit_words(limit: Limit, parameter: Parameter | None = None) -> str:
    """Say a limit in words, with what the reader supplied: "at least 45 dBm". ``parameter`` names what is bounded."""
    parts = [node_words(limit.tree)]
    if parameter is not None:
        parts[0] = f"{parameter.title}: {parts[0]}"
    if limit.rounding is not None:
        way = "" if limit.rounding.method == "nearest" else f"{limit.rounding.method} "
        step = limit.rounding.step
        parts.append(
            f"the limit rounded {way}to {_amount(step) if step.unit else f'{step.text} {limit.unit}'.strip()}"
        )
    if limit.test_tolerance is not None:
        place = "the stimulus" if limit.test_tolerance.place == "stimulus" else "the limit"
        parts.append(f"test tolerance {expression_words(limit.test_tolerance.amount)} on {place}, kept apart")
    if limit.state is not LimitState.FIRM and not isinstance(limit.tree, Undefined):
        parts.append(_STATE[limit.state])
    text = "; ".join(parts)
    return f"{text} ({'; '.join(limit.readings)})" if limit.readings else text


def _amount(number: Number) -> str:
    return f"{number.text} {number.unit}".strip()


def value_words(value: Expression, unit: str) -> str:
    """Say a value and its unit; a plain number of a dimensionless quantity has none."""
    return expression_words(value, "" if unit == "1" else unit)


def node_words(node: LimitNode) -> str:
    """Say one node of the tree."""
    match node:
        case Bound(side=side, value=value, unit=unit, strict=strict):
            return f"{_SIDE[side, strict]} {value_words(value, unit)}"
        case Between(lower=lower, upper=upper, unit=unit):
            return f"from {value_words(lower, unit)} to {value_words(upper, unit)}"
        case Tolerance():
            return _tolerance_words(node)
        case Cases(cases=cases, otherwise=otherwise):
            parts = [f"where {expression_words(case.when)}: {node_words(case.limit)}" for case in cases]
            parts.append(
                f"otherwise {node_words(otherwise)}" if otherwise else "otherwise nothing is required"
            )
            return "; ".join(parts)
        case Mask():
            return _mask_words(node)
        case Alternatives(rule=rule, members=members):
            return _alternatives_words(rule, members)
        case PowerSum(members=members, bandwidth=bandwidth):
            scaled = "" if bandwidth is None else f", each scaled to {_amount(bandwidth)}"
            return f"the power sum of ({'; '.join(node_words(member) for member in members)}){scaled}"
        case OfQuantity(quantity=quantity, limit=limit):
            return f"{quantity} {node_words(limit)}"
        case Gate(when=when, limit=limit):
            return f"{node_words(limit)}, only where {expression_words(when)}"
        case MeasuredIn(limit=limit, bandwidth=bandwidth):
            return f"{node_words(limit)} in {_amount(bandwidth)}"
        case Allowed(limit=limit, allowance=allowance):
            return f"{node_words(limit)}; {allowance_words(allowance)}"
        case Population():
            return _population_words(node)
        case Undefined(label=label, side=side, unit=unit):
            what = "for further study (FFS): it blocks" if label == "FFS" else _STATE[LimitState.TBD]
            bound = "" if side is None else f"{_SIDE[side, False]} a value "
            return f"{bound}{what}{f', in {unit}' if unit else ''}"
        case NoLimit(label=label):
            return label


def _tolerance_words(node: Tolerance) -> str:
    plus, minus = value_words(node.plus, node.tolerance_unit), value_words(node.minus, node.tolerance_unit)
    if node.nominal is None:
        return f"within ± {plus}"
    nominal = value_words(node.nominal, node.unit)
    if node.plus == node.minus:
        return f"{nominal} ± {plus}"
    return f"{nominal}, up to {plus} above and up to {minus} below"


def _alternatives_words(rule: Stringency, members: tuple[LimitNode, ...]) -> str:
    if rule is Stringency.LOOSER:
        return f"{' or '.join(_part(member) for member in members)}, whichever is less stringent"
    return " and ".join(_part(member) for member in members)


def _part(node: LimitNode) -> str:
    words = node_words(node)
    return f"({words})" if isinstance(node, Alternatives | Cases | Mask | Gate | Population) else words


def _mask_words(mask: Mask) -> str:
    bound = _SIDE[mask.side, mask.strict]
    parts = [_segment_words(mask, segment, bound) for segment in mask.segments]
    parts += [
        f"nothing is required for {expression_words(interval)} {mask.axis_unit}"
        for interval in mask.exclusions
    ]
    parts += [allowance_words(allowance) for allowance in mask.allowances]
    return f"over {mask.axis} in {mask.axis_unit}: {'; '.join(parts)}; elsewhere nothing is required"


def _segment_words(mask: Mask, segment: Segment, bound: str) -> str:
    start = f"{'above' if segment.start_open else 'from'} {expression_words(segment.start)}"
    below = "below " if segment.stop_open else ""
    stop = "" if segment.stop is None else f" to {below}{expression_words(segment.stop)}"
    text = f"{start}{stop} {bound} {value_words(segment.value, mask.unit)}"
    if segment.end_value is not None:
        way = "the logarithm of the axis" if segment.slope is Slope.LOG else "a straight line"
        text += f" changing to {value_words(segment.end_value, mask.unit)} in {way}"
    return text if segment.bandwidth is None else f"{text} in {_amount(segment.bandwidth)}"


def allowance_words(allowance: Allowance) -> str:
    """Say how many samples may exceed the limit by how much."""
    return f"{_amount(allowance.share)} of the samples may exceed it by {_amount(allowance.excess)}"


def _population_words(node: Population) -> str:
    words = f"{statistic_words(node.statistic)}"
    if node.of is not None:
        words += f" of ({expression_words(node.of)})"
    if node.over:
        words += f" over {', '.join(node.over)}"
    if node.where is not None:
        words += f", where {expression_words(node.where)}"
    if node.least is not None:
        words += f", from at least {node.least} values"
    if isinstance(node.statistic, Exceptions):
        return f"{node_words(node.limit)}, {words}"
    return f"{words}: {node_words(node.limit)}"


def statistic_words(statistic: Statistic) -> str:
    """Say what is taken of the population."""
    match statistic:
        case Percentile(percent=percent, sense="CDF"):
            return f"the value that {percent.text} % do not exceed (CDF)"
        case Percentile(percent=percent):
            return f"the value that {percent.text} % exceed (CCDF)"
        case ToleranceBound(coverage=coverage, confidence=confidence):
            return f"the bound for {coverage.text} % of the population at {confidence.text} % confidence"
        case Worst():
            return "the worst value"
        case Mean(of=of):
            kind = {
                "values": "the mean",
                "power": "the mean of power",
                "dB": "the mean of dB",
                "squares": "the RMS",
            }
            return kind[of]
        case Exceptions(count=count, relaxed=relaxed):
            kept = "" if relaxed is None else f", which keep {node_words(relaxed)}"
            return f"with up to {count} exception{'s' if count > 1 else ''}{kept}"
