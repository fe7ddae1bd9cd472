"""Dimensions of a conditions set from the conditions of a published limit.

A condition becomes a dimension when it selects where the limit holds (band, bandwidth, class ...) and its value can be
required of a record. What says something else about the limit (who asks for it, from when, how it was derived) or
cannot be required as it is written stays text.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from specflow.conditions import Comparison, KnownDimension, find_dimension
from specflow.errors import UnitError
from specflow.importers.published_conditions import PublishedCondition
from specflow.model.conditions import Dimension, MatchingRule, Span
from specflow.units import convert, format_unit, parse_unit

#: Conditions of published tables that select where a limit holds, beside the dimensions that are known anyway.
_SELECTING = frozenset(
    {
        "band_range",
        "bs_band",
        "bs_class",
        "bs_type",
        "case",
        "category",
        "code_rate",
        "cross_range",
        "duplex",
        "eirp",
        "frc",
        "harq",
        "ns",
        "power_class",
        "rank",
        "same_aoa",
        "sub_band",
        "tones",
        "tpc",
        "transition",
    }
)
#: Those whose own name would say too little beside other conditions.
_RENAMED = {
    "interferer": "blocker_level",
    "wanted": "wanted_level",
    "range": "frequency_class",
    "type": "signal_type",
}


@dataclass(frozen=True, slots=True)
class PublishedDimensions:
    """The dimensions of one limit, and what could not be put into them.

    ``verbatim`` are conditions kept as written, also where a dimension says most but not all of one (an open end);
    ``stepless`` names the ranges of which the table states no step.
    """

    dimensions: tuple[Dimension, ...]
    verbatim: tuple[str, ...]
    stepless: tuple[str, ...]


def published_dimensions(conditions: Mapping[str, PublishedCondition]) -> PublishedDimensions:
    """Turn parsed conditions into dimensions; every condition ends in a dimension, in ``verbatim`` or in both."""
    made: dict[str, Dimension] = {}
    verbatim: list[str] = []
    stepless: list[str] = []
    for condition in conditions.values():
        dimension = _dimension(condition)
        one_range_already = bool(stepless) and dimension is not None and dimension.span is not None
        if dimension is None or dimension.name in made or one_range_already:
            verbatim.append(condition.verbatim)
            continue
        made[dimension.name] = dimension
        if condition.low_open or condition.high_open:
            verbatim.append(condition.verbatim)
        if dimension.span is not None:
            stepless.append(dimension.name)
    return PublishedDimensions(tuple(made.values()), tuple(verbatim), tuple(stepless))


def _dimension(condition: PublishedCondition) -> Dimension | None:
    known = find_dimension(condition.name)
    if known is not None and known.comparison is Comparison.TEXT:
        return _of_words(known.name, _as_words(condition), condition)
    name = known.name if known is not None else _selecting(condition.name)
    if not name:
        return None
    if condition.words:
        # A word where the dimension is a number (f=Fstep1-Fstep2) names a value that the table defines elsewhere.
        return None if known is not None else _of_words(name, condition.words, condition)
    if known is not None and not _is_unit_of(known, condition.unit):
        return None
    return _of_numbers(name, condition)


def _selecting(name: str) -> str:
    key = name.casefold()
    return key if key in _SELECTING else _RENAMED.get(key, "")


def _of_words(name: str, words: tuple[str, ...], condition: PublishedCondition) -> Dimension:
    return Dimension(name=name, words=tuple(dict.fromkeys(words)), text=condition.verbatim)


def _as_words(condition: PublishedCondition) -> tuple[str, ...]:
    """The values of a text dimension, as written: n257, or 2400-2483.5 MHz."""
    if condition.words:
        return condition.words
    value = condition.verbatim.partition("=")[2]
    return condition.numbers if condition.numbers and not condition.unit else (value,)


def _is_unit_of(known: KnownDimension, unit: str) -> bool:
    if not unit or not known.unit:
        return not unit and not known.unit
    try:
        convert(1.0, parse_unit(unit), parse_unit(known.unit))
    except UnitError:
        return False
    return True


def _of_numbers(name: str, condition: PublishedCondition) -> Dimension | None:
    unit = format_unit(parse_unit(condition.unit)) if condition.unit else ""
    text = condition.verbatim
    if condition.numbers:
        values = tuple(dict.fromkeys(float(number) for number in condition.numbers))
        return Dimension(name=name, unit=unit, values=values, text=text)
    low = None if condition.low is None else float(condition.low)
    high = None if condition.high is None else float(condition.high)
    if low is not None and high is not None:
        if not low < high:
            return None
        # No step is published. The whole width is the largest gap that still asks for evidence at both ends.
        span = Span(low=low, high=high, step=high - low)
        return Dimension(name=name, unit=unit, span=span, text=text)
    if low is not None:
        return Dimension(name=name, unit=unit, values=(low,), rule=MatchingRule.AT_OR_ABOVE, text=text)
    if high is not None:
        return Dimension(name=name, unit=unit, values=(high,), rule=MatchingRule.AT_OR_BELOW, text=text)
    return None
