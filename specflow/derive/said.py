"""What a person says to a law: the range, the rows, the settings, read from text."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.conditions import compile_points, match, parse_dimension
from specflow.derive.law import Law, Setting
from specflow.derive.samples import Range
from specflow.errors import ConditionsError, DocumentError, UnitError
from specflow.model.columns import Columns
from specflow.model.conditions import ConditionsSet, Dimension
from specflow.units import compatible, convert, parse_number, parse_quantity, parse_unit, tolerance_unit

Rows = NDArray[np.intp]

_NAME_BEFORE_FIGURES = re.compile(r"([^\W\d]+(?: [^\W\d]+)*) +([-+−±(]?[ .,]?\d.*)", re.DOTALL)


@dataclass(frozen=True, slots=True)
class SaidRange:
    """A range of one dimension, with its unit and how it was said."""

    dimension: str
    unit: str
    range: Range
    text: str


def read_over(text: str) -> SaidRange:
    """Read "frequency 17.7..20.2 GHz step 0.1 GHz" (± a setting tolerance); DocumentError for anything else."""
    dimension = _dimension(text, "--over")
    if dimension.span is None:
        raise DocumentError(
            f"{text!r} is no range",
            where="--over",
            hint="write it as 'frequency 17.7..20.2 GHz step 0.1 GHz'",
        )
    span = dimension.span
    wanted = Range(span.low, span.high, span.step, dimension.tolerance)
    return SaidRange(dimension.name, dimension.unit, wanted, f"{dimension.name}: {dimension.text}")


def _dimension(text: str, where: str) -> Dimension:
    name, rest = _name_apart(text)
    try:
        return parse_dimension(f"{name}: {rest}", corners=not _says_step(rest))
    except ConditionsError as error:
        raise DocumentError(error.message, where=f"{where} {text!r}", hint=error.hint) from None


def _name_apart(text: str) -> tuple[str, str]:
    """Take "input level -15..12 dBm" apart, with or without a colon: a name may have several words, no figures."""
    name, colon, rest = text.partition(":")
    if colon:
        return name, rest
    found = _NAME_BEFORE_FIGURES.match(" ".join(text.split()))
    if found:
        return found[1], found[2]
    name, _, rest = text.strip().partition(" ")
    return name, rest


def _says_step(text: str) -> bool:
    """Whether a range says its step; a law may go without, and then says the largest gap it found."""
    return any(word in f" {text.casefold()} " for word in (" step ", " steps of ", " every "))


def chosen(conditions: Columns, where: Sequence[str]) -> tuple[Rows, tuple[str, ...]]:
    """Return the rows of a table that serve all that is said ("polarisation: H"), and the dimensions spoken of."""
    dimensions = [_dimension(text, "--where") for text in where]
    if not dimensions:
        return np.arange(conditions.size), ()
    found = match(compile_points(ConditionsSet(id="(rows)", dimensions=tuple(dimensions))), conditions)
    return np.unique(found.record).astype(np.intp), tuple(one.name for one in dimensions)


def complete_settings(law: Law, said: Mapping[str, str]) -> dict[str, str]:
    """Return every setting of a law in words, defaults filled in; DocumentError for one that is unknown or unsaid."""
    for name in said:
        if law.setting(name) is None:
            known = ", ".join(one.name for one in law.settings) or "none"
            raise DocumentError(f"the law {law.name} has no setting {name!r}", hint=f"it has: {known}")
    found: dict[str, str] = {}
    for setting in law.settings:
        text = said.get(setting.name, setting.default)
        if text is None:
            options = f"; one of: {', '.join(setting.choices)}" if setting.choices else ""
            raise DocumentError(
                f"the law {law.name} needs to be told {setting.name}: {setting.what}",
                hint=f"say --set '{setting.name}=...'{options}",
            )
        found[setting.name] = _allowed(setting, text)
    return found


def _allowed(setting: Setting, text: str) -> str:
    if not setting.choices:
        return text.strip()
    for choice in setting.choices:
        if choice.casefold() == " ".join(text.casefold().split()):
            return choice
    raise DocumentError(
        f"{setting.name} cannot be {text!r}", hint=f"it is one of: {', '.join(setting.choices)}"
    )


def typed_settings(
    law: Law, texts: Mapping[str, str], *, axis_unit: str, value_unit: str
) -> dict[str, float | str]:
    """Return the settings as numbers in the unit that the law names, and words."""
    typed: dict[str, float | str] = {}
    for setting in law.settings:
        text = texts[setting.name]
        if setting.choices or setting.is_text or text == "":
            typed[setting.name] = text
        else:
            typed[setting.name] = number_in(setting.name, text, _unit_of(setting, axis_unit, value_unit))
    return typed


def _unit_of(setting: Setting, axis_unit: str, value_unit: str) -> str:
    if setting.unit == "axis":
        return axis_unit
    if setting.unit == "value":
        return value_unit
    if setting.unit == "difference":
        return str(tolerance_unit(parse_unit(value_unit or "1")))
    return setting.unit


def number_in(name: str, text: str, unit: str) -> float:
    """Return a setting that is a number with its unit, in ``unit``; DocumentError where it has none or another."""
    hint = f"write it as {name}=... {unit}".rstrip()
    try:
        if unit in ("", "1"):
            return float(parse_number(text.removesuffix("%").strip()))
        quantity = parse_quantity(text)
        target = parse_unit(unit)
        if not compatible(quantity.unit, target):
            raise DocumentError(f"{name}={text}: {quantity.unit} is not {unit}", hint=hint)
        return float(convert(float(quantity.value), quantity.unit, target))
    except (UnitError, ValueError) as error:
        message = error.message if isinstance(error, UnitError) else str(error)
        raise DocumentError(f"{name}={text}: {message}", hint=hint) from None
