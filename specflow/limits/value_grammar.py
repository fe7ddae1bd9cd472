"""The grammar of a value and its unit inside a limit: 45 dBm, P_rated - 35 dBm, 2:1, 45 dBm EIRP."""

from __future__ import annotations

import re

from specflow.limits.draft import Draft
from specflow.limits.expression_grammar import last_unit, read_sum
from specflow.limits.settling import trailing_level_unit
from specflow.model.expression import Expression, Negative, Number
from specflow.model.parameter import Better

_RATIO_TO_ONE = re.compile(r": *1(?![\w.])")
_ONE_TO_RATIO = re.compile(r": *(\d+(?:\.\d+)?)(?![\w.])")
_OWN_NAME = re.compile(r"[^\W\d][\w.]*")


def read_valued(draft: Draft) -> tuple[Expression, str]:
    """Read a value and the unit written after the whole of it; a single number keeps its own."""
    value = read_sum(draft.reader)
    unit = draft.reader.take_unit() or ""
    if not unit:
        value, unit = trailing_level_unit(value)
    if not unit and not last_unit(value) and not draft.inner:
        unit = "1" if draft.reader.take_pattern(_RATIO_TO_ONE) else ""
        value, unit = _one_to_ratio(draft, value, unit)
    takes_own_name(draft)
    return value, unit


def _one_to_ratio(draft: Draft, value: Expression, unit: str) -> tuple[Expression, str]:
    """Read 1:2 as 2:1 where the quantity is a plain number of which less is better (VSWR)."""
    reader = draft.reader
    match = _ONE_TO_RATIO.match(reader.text, reader.place)
    if unit or match is None or value != Number(text="1"):
        return value, unit
    if draft.hint != "1" or draft.better is not Better.LOWER:
        reader.fail(f"1:{match[1]} may be {match[1]} or its inverse", hint=f"write '<= {match[1]}:1'")
    reader.take_pattern(_ONE_TO_RATIO)
    draft.say(f"1:{match[1]} is read as {match[1]}:1")
    return Number(text=match[1]), "1"


def takes_own_name(draft: Draft) -> bool:
    """Take the name of the requirement's own parameter, if it is next (e.i.r.p. for EIRP)."""
    reader = draft.reader
    start = reader.place
    name = reader.take_pattern(_OWN_NAME) or ""
    if name and name.casefold().replace(".", "") in draft.own_names and not reader.sees("["):
        return True
    reader.place = start
    return False


def plain(node: Expression, *units: str) -> Expression:
    """Drop the unit of a single number that is said by the limit itself."""
    if isinstance(node, Negative):
        return Negative(operand=plain(node.operand, *units))
    return Number(text=node.text) if isinstance(node, Number) and node.unit in units else node
