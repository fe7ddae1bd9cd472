"""Reading one dimension as people type it: in the cells of a sheet, or in one line.

frequency: 27.5, 28.75, 30 GHz ± 10 MHz
temperature_ambient: -40 to 85 °C step 25 K
temperature_ambient: 15 to 30 °C anywhere
channel: B, M, T
environment: normal; extreme not required
humidity: not required
beam: any
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, replace

from pydantic import ValidationError

from specflow.conditions.cells import (
    Number,
    is_number,
    plain,
    read_number,
    read_numbers,
    split_list,
    split_range,
)
from specflow.conditions.dictionary import Comparison, KnownDimension
from specflow.conditions.dimensions import (
    find_dimension,
    is_unlocated_temperature,
    unlocated_temperature_hint,
)
from specflow.conditions.recorded import conversion
from specflow.conditions.setting import read_tolerance
from specflow.errors import ConditionsError, UnitError
from specflow.model.conditions import Dimension, MatchingRule, Need, Span
from specflow.units import Kind, compatible, format_unit, parse_unit

_NEEDS = {
    "any": Need.ANY,
    "don't care": Need.ANY,
    "dont care": Need.ANY,
    "don’t care": Need.ANY,
    "do not care": Need.ANY,
    "not required": Need.NOT_REQUIRED,
    "none required": Need.NOT_REQUIRED,
}
_RULES = {
    "": MatchingRule.WITHIN,
    "within": MatchingRule.WITHIN,
    "within tolerance": MatchingRule.WITHIN,
    "exact": MatchingRule.WITHIN,
    "exact within tolerance": MatchingRule.WITHIN,
    "anywhere": MatchingRule.ANYWHERE,
    "anywhere in range": MatchingRule.ANYWHERE,
    "at or above": MatchingRule.AT_OR_ABOVE,
    "at or beyond upward": MatchingRule.AT_OR_ABOVE,
    "at or beyond, upward": MatchingRule.AT_OR_ABOVE,
    "at least": MatchingRule.AT_OR_ABOVE,
    "at or below": MatchingRule.AT_OR_BELOW,
    "at or beyond downward": MatchingRule.AT_OR_BELOW,
    "at or beyond, downward": MatchingRule.AT_OR_BELOW,
    "at most": MatchingRule.AT_OR_BELOW,
    "at or beyond": MatchingRule.OUTWARD,
    "at or beyond, outward": MatchingRule.OUTWARD,
}
_EXCUSED = re.compile(r"^(?P<what>.+?)\s+(?:is |are )?not required$", re.IGNORECASE)
_STEP = re.compile(
    r"^(?P<rest>.+?)[,;]?\s+(?:in steps? of|steps? of|step|every)\s+(?P<step>.+)$", re.IGNORECASE
)
_ANYWHERE = re.compile(
    r"^(?:anywhere (?:in|from) )?(?P<rest>.+?)[,;]?\s*(?P<tail>\banywhere(?: in range)?)?$", re.IGNORECASE
)
_ABOVE = re.compile(
    r"^(?:>=|at or above|at least)\s*(?P<rest>.+)$|^(?P<before>.+?)\s+or (?:above|more|higher)$",
    re.IGNORECASE,
)
_BELOW = re.compile(
    r"^(?:<=|at or below|at most)\s*(?P<rest>.+)$|^(?P<before>.+?)\s+or (?:below|less|lower)$", re.IGNORECASE
)


@dataclass(frozen=True, slots=True)
class ReadDimension:
    """A dimension as read, and what was decided in reading it, in sentences for the person who typed it."""

    dimension: Dimension
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class _Typed:
    """A values cell taken apart, still as text."""

    values: str
    tolerance: str = ""
    step: str = ""
    rule: MatchingRule | None = None
    excused: tuple[str, ...] = ()


def parse_dimension(text: str, *, corners: bool = False) -> Dimension:
    """Read a dimension in one line, ``name: values``. Errors as ``read_dimension``."""
    name, colon, values = text.partition(":")
    if not colon:
        raise ConditionsError(
            f"'{text}' names no dimension", hint="write it as 'frequency: 27.5, 30 GHz ± 10 MHz'"
        )
    return read_dimension(name, values, corners=corners).dimension


def read_dimension(
    name: str, values: str, *, unit: str = "", tolerance: str = "", rule: str = "", corners: bool = False
) -> ReadDimension:
    """Read a dimension from its cells: ``values`` is needed, the others may stand inside it.

    ``corners`` says that only the ends of a range count, so that it needs no step. ConditionsError says what
    cannot be read or is missing (a unit, a step, whose temperature it is), and what to write.
    """
    known, own_name, name_unit = _named(name)
    typed = _taken_apart(plain(values), own_name)
    need = _NEEDS.get(typed.values.casefold())
    if need is not None:
        if tolerance.strip() or rule.strip():
            raise ConditionsError(
                f"{own_name} is '{need.value}' and takes no tolerance and no rule", where=own_name
            )
        return ReadDimension(_built({"name": own_name, "need": need, "text": values.strip()}))
    typed = _with_cells(typed, tolerance, rule, own_name)
    ends = split_range(typed.values)
    entries = ends or split_list(typed.values)
    if not entries:
        raise ConditionsError(
            f"{own_name} has no values", where=own_name, hint="list them, or say 'any' or 'not required'"
        )
    fields: dict[str, object] = {
        "name": own_name,
        "excused": typed.excused,
        "text": _as_typed(values, unit, tolerance, rule),
    }
    if _are_words(known, entries, own_name):
        return _read_words(typed, tuple(entries), fields)
    return _read_numbers(known, typed, entries, ends is not None, unit or name_unit, fields, corners)


def read_rule(text: str) -> MatchingRule:
    """Read a matching rule; ConditionsError lists those there are."""
    key = " ".join(text.casefold().split())
    if key not in _RULES:
        known = ", ".join(f"'{rule.value}'" for rule in MatchingRule)
        raise ConditionsError(f"'{text}' is no matching rule", hint=f"use one of {known}")
    return _RULES[key]


def _named(text: str) -> tuple[KnownDimension | None, str, str]:
    """Return what the dictionary knows of a name, the canonical name, and a unit written in brackets behind
    it.
    """
    if is_unlocated_temperature(text):
        raise ConditionsError(
            f"'{text.strip()}' does not say which temperature", hint=unlocated_temperature_hint()
        )
    bracket = re.search(r"[\[(](.+?)[\])]", text)
    bare = re.sub(r"[\[(].*?[\])]", " ", text).strip()
    if not bare:
        raise ConditionsError("a dimension has no name")
    known = find_dimension(bare)
    name = known.name if known else re.sub(r"\W+", "_", bare.casefold()).strip("_")
    return known, name, bracket[1].strip() if bracket else ""


def _taken_apart(text: str, name: str) -> _Typed:
    if text.casefold() in _NEEDS:
        return _Typed(text)
    kept, excused = _without_excused(_both_signs(text))
    body, _, tolerance = kept.partition("±")
    typed = _Typed(body.strip(), tolerance.strip(), excused=excused)
    for side in ("values", "tolerance"):  # the step may stand behind either
        match = _STEP.match(getattr(typed, side))
        if match:
            typed = replace(_with_side(typed, side, match["rest"]), step=match["step"].strip())
    typed = _without_rule(typed)
    if typed.step and "±" in typed.step:
        raise ConditionsError(
            f"'{text}' states a tolerance behind the step", where=name, hint="put ± before 'step'"
        )
    return typed


def _both_signs(text: str) -> str:
    """Spell out "±100 kHz, ±200 kHz" as the four values it means."""
    if not text.startswith("±"):
        return text
    entries = (entry.removeprefix("±").strip() for entry in split_list(text))
    return "; ".join(f"-{entry}; {entry}" for entry in entries)


def _without_excused(text: str) -> tuple[str, tuple[str, ...]]:
    separator = ";" if ";" in text else ","
    parts = [part.strip() for part in text.split(separator)]
    matches = [_EXCUSED.match(part) for part in parts]
    excused = tuple(match["what"] for match in matches if match)
    if not excused:
        return text, ()
    kept = [part for part, match in zip(parts, matches, strict=True) if not match]
    return f"{separator} ".join(kept), excused


def _without_rule(typed: _Typed) -> _Typed:
    for pattern, rule in ((_ABOVE, MatchingRule.AT_OR_ABOVE), (_BELOW, MatchingRule.AT_OR_BELOW)):
        match = pattern.match(typed.values)
        if match:
            return replace(typed, values=(match["rest"] or match["before"]).strip(), rule=rule)
    for side in ("values", "tolerance"):
        match = _ANYWHERE.match(getattr(typed, side))
        if match and (match["tail"] or match["rest"] != getattr(typed, side)):
            return replace(_with_side(typed, side, match["rest"]), rule=MatchingRule.ANYWHERE)
    return typed


def _with_side(typed: _Typed, side: str, text: str) -> _Typed:
    return replace(typed, values=text.strip()) if side == "values" else replace(typed, tolerance=text.strip())


def _with_cells(typed: _Typed, tolerance: str, rule: str, name: str) -> _Typed:
    if tolerance.strip():
        if typed.tolerance and plain(tolerance) != typed.tolerance:
            raise ConditionsError(
                f"two tolerances are stated: {typed.tolerance} beside the values and {tolerance.strip()}",
                where=name,
            )
        typed = replace(typed, tolerance=plain(tolerance).removeprefix("±").strip())
    if rule.strip():
        stated = read_rule(rule)
        if typed.rule is not None and typed.rule is not stated:
            raise ConditionsError(
                f"two rules are stated: '{typed.rule.value}' beside the values and '{stated.value}'",
                where=name,
            )
        typed = replace(typed, rule=stated)
    return typed


def _as_typed(values: str, unit: str, tolerance: str, rule: str) -> str:
    parts = (
        values,
        unit,
        f"± {tolerance.strip().removeprefix('±').strip()}" if tolerance.strip() else "",
        rule,
    )
    return " ".join(part.strip() for part in parts if part.strip())


def _are_words(known: KnownDimension | None, entries: Sequence[str], name: str) -> bool:
    if known is not None and known.comparison is Comparison.TEXT:
        return True
    if known is None:
        return not all(is_number(entry) for entry in entries)
    wrong = next((entry for entry in entries if not is_number(entry)), None)
    if wrong is not None:
        raise ConditionsError(
            f"'{wrong}' is no number, and {name} needs numbers",
            where=name,
            hint=f"for instance 1 {known.unit}".strip(),
        )
    return False


def _read_words(typed: _Typed, words: tuple[str, ...], fields: dict[str, object]) -> ReadDimension:
    name = str(fields["name"])
    if typed.tolerance or typed.step or typed.rule not in (None, MatchingRule.WITHIN):
        raise ConditionsError(f"{name} is compared in words, without tolerance, step or rule", where=name)
    return ReadDimension(_built({**fields, "words": words}))


def _read_numbers(
    known: KnownDimension | None,
    typed: _Typed,
    entries: Sequence[str],
    is_range: bool,
    unit_cell: str,
    fields: dict[str, object],
    corners: bool,
) -> ReadDimension:
    name = str(fields["name"])
    rule = typed.rule or MatchingRule.WITHIN
    numbers = read_numbers(entries)
    unit = _unit(known, name, numbers, typed.tolerance, unit_cell)
    values = tuple(_in_unit(number, unit, name) for number in numbers)
    setting = read_tolerance(typed.tolerance, unit, name)
    fields = {
        **fields,
        "unit": unit,
        "rule": rule,
        "tolerance": setting.value,
        "tolerance_is_percent": setting.is_percent,
    }
    notes = (*_unit_notes(name, numbers, unit), *setting.notes)
    if not is_range:
        if typed.step:
            raise ConditionsError(
                "a step belongs to a range", where=name, hint="as in '27.5 to 30 GHz step 0.25 GHz'"
            )
        return ReadDimension(_built({**fields, "values": values}), notes)
    step = _step(typed.step, unit, name)
    if step is None and not corners and rule is not MatchingRule.ANYWHERE:
        raise ConditionsError(
            f"the range of {name} states no step: the largest gap allowed between neighbouring evidence values",
            where=name,
            hint="as in '27.5 to 30 GHz step 0.25 GHz'; if any value inside will do, say 'anywhere'",
        )
    span = {"low": values[0], "high": values[1], "step": step}
    return ReadDimension(_built({**fields, "span": _built_span(span, name)}), notes)


def _unit(
    known: KnownDimension | None, name: str, numbers: Sequence[Number], tolerance: str, cell: str
) -> str:
    """Return the canonical unit of the values: from its cell, else from beside the values or their tolerance."""
    beside = next((number.unit for number in reversed(numbers) if number.unit), "")
    behind = read_number(tolerance).unit if tolerance and is_number(tolerance) else ""
    text = cell.strip() or beside or ("" if behind in ("%", "ppm") else behind)
    needed = known.unit if known else ""
    if not text or text == "1":
        if needed:
            raise ConditionsError(
                f"{name} has no unit", where=name, hint=f"a unit like {needed} is needed; none is assumed"
            )
        return ""
    try:
        unit = parse_unit(text)
    except UnitError as error:
        raise ConditionsError(error.message, where=name, hint=error.hint) from error
    if needed:
        usual = parse_unit(needed)
        if not compatible(unit, usual) and Kind.PHYSICAL in (unit.kind, usual.kind):
            raise ConditionsError(
                f"{name} cannot be in {unit}", where=name, hint=f"a unit like {needed} is needed"
            )
    return format_unit(unit)


def _in_unit(number: Number, unit: str, name: str) -> float:
    own = format_unit(parse_unit(number.unit)) if number.unit else unit
    if own == unit:
        return number.value
    step = conversion(own, unit)
    if isinstance(step, str):
        raise ConditionsError(
            f"{number.value:g} {own} cannot be told in {unit or 'plain numbers'}", where=name
        )
    return float(f"{float(step(number.value)):.12g}")  # as it would have been written in that unit


def _unit_notes(name: str, numbers: Sequence[Number], unit: str) -> tuple[str, ...]:
    own = {format_unit(parse_unit(number.unit)) for number in numbers if number.unit} - {unit}
    return tuple(f"{name}: values in {one} are held in {unit}" for one in sorted(own))


def _step(text: str, unit: str, name: str) -> float | None:
    if not text:
        return None
    step = read_tolerance(text, unit, name)
    if step.is_percent or step.value <= 0:
        raise ConditionsError(
            f"'{text}' is no step of {name}", where=name, hint="a step is a difference above 0, as 25 K"
        )
    return step.value


def _built(fields: dict[str, object]) -> Dimension:
    try:
        return Dimension.model_validate(fields)
    except ValidationError as error:
        name = str(fields["name"])
        raise ConditionsError(first_message(error).removeprefix(f"{name}: "), where=name) from error


def _built_span(fields: dict[str, float | None], name: str) -> Span:
    try:
        return Span.model_validate(fields)
    except ValidationError as error:
        raise ConditionsError(first_message(error), where=name, hint="write the lower end first") from error


def first_message(error: ValidationError) -> str:
    """Return what a document has to say about itself, without the wrapping of the validation library."""
    return str(error.errors()[0]["msg"]).removeprefix("Value error, ")
