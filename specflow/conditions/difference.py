"""What changed between two states of a conditions set, in meaning."""

from __future__ import annotations

from collections.abc import Iterable

from specflow.conditions.expand import expand
from specflow.conditions.words import dimension_words, exclusion_words, range_words, value_words, word_words
from specflow.errors import ConditionsError
from specflow.model.conditions import ConditionsSet, Dimension, Need
from specflow.units import format_unit, format_value, parse_unit, tolerance_unit


def conditions_difference(before: ConditionsSet, after: ConditionsSet) -> list[str]:
    """Return sentences on what the change means for proof; none where the same points are required in the
    same way.

    "temperature_ambient: +85 °C ambient added: 12 more points". The count stands with the only change, or
    last.
    """
    sentences: list[str] = []
    names = dict.fromkeys([one.name for one in (*before.dimensions, *after.dimensions)])
    for name in names:
        sentences += _dimension_difference(name, before.dimension(name), after.dimension(name))
    if (before.combination, before.listed) != (after.combination, after.listed):
        sentences.append(f"combined as {after.combination.value}, was {before.combination.value}")
    old, new = (dict.fromkeys(map(exclusion_words, one.exclusions)) for one in (before, after))
    sentences += [f"no longer excluded: {words}" for words in old if words not in new]
    sentences += [f"excluded: {words}" for words in new if words not in old]
    return _with_count(sentences, _count_words(before, after))


def _with_count(sentences: list[str], count: str) -> list[str]:
    if not count:
        return sentences
    if len(sentences) == 1:
        return [f"{sentences[0]}: {count}"]
    return [*sentences, count]


def _count_words(before: ConditionsSet, after: ConditionsSet) -> str:
    try:
        old, new = expand(before).size, expand(after).size
    except ConditionsError as error:
        return f"points cannot be counted: {error.message}"
    if old == new:
        return ""
    number = abs(new - old)
    return f"{number:,} {'more' if new > old else 'fewer'} point{'s' if number > 1 else ''}"


def _dimension_difference(name: str, before: Dimension | None, after: Dimension | None) -> list[str]:
    if before is None or after is None:
        added = after or before
        assert added is not None, "the name comes from one of the two"
        return [f"{name} {'added' if before is None else 'removed'}: {dimension_words(added)}"]
    if before.need is not after.need:
        return [f"{name}: {dimension_words(after)}, was {dimension_words(before)}"]
    if before.need is not Need.REQUIRED:
        return []
    if before.unit != after.unit:
        return [f"{name}: now {dimension_words(after)}, was {dimension_words(before)}"]
    sentences = [
        *_value_difference(before, after),
        *_span_difference(before, after),
        *_setting_difference(before, after),
    ]
    return [f"{name}: {sentence}" for sentence in sentences]


def _value_difference(before: Dimension, after: Dimension) -> Iterable[str]:
    old = [*_said(before)]
    new = [*_said(after)]
    added = [words for words in new if words not in old]
    removed = [words for words in old if words not in new]
    if added:
        yield f"{', '.join(added)} added"
    if removed:
        yield f"{', '.join(removed)} removed"
    if not added and not removed and (before.values, before.words) != (after.values, after.words):
        yield "the same values in another order"
    if before.excused != after.excused:
        now, was = (", ".join(one.excused) or "nothing named" for one in (after, before))
        yield f"not required: {now}, was {was}"


def _said(dimension: Dimension) -> list[str]:
    values = dict.fromkeys(value_words(dimension.name, value, dimension.unit) for value in dimension.values)
    return [*values, *dict.fromkeys(word_words(dimension.name, word) for word in dimension.words)]


def _span_difference(before: Dimension, after: Dimension) -> Iterable[str]:
    old, new = before.span, after.span
    if old == new:
        return
    if old is None or new is None:
        yield f"{'a range' if new else 'listed values'} now: {dimension_words(after)}"
        return
    if (old.low, old.high) != (new.low, new.high):
        now, was = (range_words(after.name, one.low, one.high, after.unit) for one in (new, old))
        yield f"range {now}, was {was}"
    if old.step != new.step:
        yield f"largest gap {_size(new.step, after.unit)}, was {_size(old.step, before.unit)}"


def _setting_difference(before: Dimension, after: Dimension) -> Iterable[str]:
    old, new = ((one.tolerance, one.tolerance_is_percent) for one in (before, after))
    if old != new:
        now, was = (
            f"{format_value(value)} %" if percent else _size(value, after.unit)
            for value, percent in (new, old)
        )
        tendency = "" if old[1] != new[1] else " (wider)" if new[0] > old[0] else " (narrower)"
        yield f"setting tolerance {now}, was {was}{tendency}"
    if before.rule is not after.rule:
        yield f"matched {after.rule.value}, was {before.rule.value}"


def _size(value: float | None, unit: str) -> str:
    if value is None:
        return "not stated"
    if value == 0:
        return "0 (exact)"
    return (
        f"{format_value(value)} {format_unit(tolerance_unit(parse_unit(unit)))}"
        if unit
        else format_value(value)
    )
