"""The grammar of ``-80 dBc/Hz @ 10 kHz``: a limit at one value of a condition.

A frequency behind a limit per hertz of a carrier (dBc/Hz) is an offset; any other value behind ``@`` may be of several
conditions, and the reader asks which instead of guessing.
"""

from __future__ import annotations

import re

from specflow.limits.conversion import PLAIN, unit_of
from specflow.limits.draft import Draft
from specflow.limits.reader import canonical_unit
from specflow.limits.text import node_text
from specflow.limits.tree import tree_units
from specflow.model.expression import Expression, Member, Name, Negative, Number
from specflow.model.limit import Case, Cases, LimitNode
from specflow.units import Kind

_AT = re.compile(r"(?:@|at(?!\w)) *((?:an? )?offsets?(?: of)? *)?(?=[-+–]? *[\d.])", re.IGNORECASE)
_PART = re.compile(
    r"(?P<limit>.+?) *(?:@|\bat\b) *(?P<value>[-+]?\d+(?:\.\d+)?) *(?P<unit>\S+)", re.IGNORECASE
)
_OFFSETS = (
    "offset from the carrier",
    "offset from carrier",
    "from the carrier",
    "from carrier",
    "carrier offset",
    "frequency offset",
    "offset",
)
#: Unit of what stands behind @ → the question, and the dimension that the proposed spelling names.
_ASKED = {
    "Hz": ("which frequency is {}: that of the carrier, or an offset from it?", "frequency"),
    "K": ("whose temperature is {}: ambient, baseplate, case, junction or board?", "temperature_ambient"),
    "V": ("which voltage is {}?", "supply_voltage"),
    "dBm": ("which level is {}?", "power_level"),
    "deg": ("which angle is {}?", "theta"),
}


def read_at(draft: Draft, node: LimitNode) -> Cases | None:
    """Read ``@ 10 kHz`` behind a limit; None where a percentile or nothing of the kind follows."""
    reader = draft.reader
    start = reader.place
    is_at = reader.sees("@")
    head = reader.take_pattern(_AT)
    if head is None:
        return None
    negative = reader.take("-", "–") is not None
    reader.take("+")
    number, unit = reader.take_number(), reader.take_unit() or ""
    if number is None or (not is_at and (unit in ("", "%") or reader.sees("/"))):
        reader.place = start
        return None
    value: Expression = Negative(operand=Number(text=number)) if negative else Number(text=number)
    said = "offset" in head.lower() or reader.take_words(*_OFFSETS) is not None
    name = _axis(draft, node, f"{'-' * negative}{number}", unit, said=said, place=start)
    if not said:
        draft.say(f"the value after '@' is read as the {name} from the carrier")
    return Cases(cases=(Case(when=Member(operand=Name(name=name, unit=unit), values=(value,)), limit=node),))


def _axis(draft: Draft, node: LimitNode, number: str, unit: str, *, said: bool, place: int) -> str:
    """The condition that the value is of; asks where it is not clear."""
    sort = _sort(unit)
    if sort == "Hz" and (said or _is_per_hertz_of_carrier(node)):
        return "offset"
    shown = f"{number} {unit}".strip()
    question, name = _ASKED.get(sort, ("what is {}?", "condition"))
    bracket = f"[{unit}]" if unit else ""
    cases = _cases_as_typed(draft.reader.text, unit) or f"{number}: {node_text(node)}"
    text = f"by {name}{bracket} ({cases})"
    raise draft.reader.error(
        question.format(shown),
        hint=f"give the requirement a conditions set, or name the condition: '{text}'",
        place=place,
    )


def _cases_as_typed(text: str, unit: str) -> str:
    """Return the whole of "<= 150 K at 23 °C, <= 190 K at 55 °C" as cases; "" when a part is anything else."""
    cases = []
    parts = re.split(r" *[,;] +", text.strip())
    if len(parts) < 2:
        return ""
    for part in parts:
        match = _PART.fullmatch(part)
        if match is None or canonical_unit(match["unit"]) != unit:
            return ""
        cases.append(f"{match['value'].removeprefix('+')}: {match['limit']}")
    return "; ".join(cases)


def _sort(unit: str) -> str:
    if unit in PLAIN:
        return ""
    if unit.endswith("Hz") and "/" not in unit:
        return "Hz"
    if unit in ("°C", "°F", "K"):
        return "K"
    if unit.endswith("V") and "/" not in unit and not unit_of(unit).is_log:
        return "V"
    return unit if unit in _ASKED else ""


def _is_per_hertz_of_carrier(node: LimitNode) -> bool:
    units = tree_units(node)
    return bool(units) and all(
        unit not in PLAIN and unit_of(unit).kind is Kind.RATIO_DENSITY for unit in units
    )


def joined_cases(clauses: tuple[LimitNode, ...]) -> Cases | None:
    """Make one table of limits that each hold at one value of the same condition; None when they are anything else."""
    cases: list[Case] = []
    seen: set[tuple[str, Expression]] = set()
    for clause in clauses:
        if not isinstance(clause, Cases) or len(clause.cases) != 1 or clause.otherwise is not None:
            return None
        when = clause.cases[0].when
        if not isinstance(when, Member) or not isinstance(when.operand, Name) or len(when.values) != 1:
            return None
        if cases and when.operand.name != next(iter(_names(cases))):
            return None
        key = (when.operand.unit, when.values[0])
        if key in seen or not isinstance(when.values[0], Number | Negative):
            return None
        seen.add(key)
        cases += clause.cases
    return Cases(cases=tuple(cases))


def _names(cases: list[Case]) -> set[str]:
    return {
        case.when.operand.name
        for case in cases
        if isinstance(case.when, Member) and isinstance(case.when.operand, Name)
    }
