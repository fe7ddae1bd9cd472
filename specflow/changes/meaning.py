"""What a difference means, in plain words, and whether it changes what the document means.

``MEANINGS`` names the fields that need words of their own; every other field says "x set to", "x removed", or shows
both values. ``QUIET`` names the fields that may change while the document goes on meaning the same: its revision,
which waivers, approvals and activities refer to, then stays.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from datetime import date
from typing import Any

from specflow.conditions import conditions_difference
from specflow.errors import ExpressionError, UnitError
from specflow.limits import limit_difference, parse_limit
from specflow.model.base import Document
from specflow.model.conditions import ConditionsSet
from specflow.model.limit import Limit
from specflow.model.nouns import Noun
from specflow.model.parameter import QuantityIdentity
from specflow.units import converter, format_quantity, format_value, parse_unit, tolerance_unit

_ALWAYS_QUIET = frozenset({"note", "origin", "revision"})

#: Noun → fields beside note and origin that do not change what its documents mean.
QUIET: Mapping[str, frozenset[str]] = {
    "project": frozenset({"name", "description"}),
    "parameter": frozenset({"title", "group", "description", "aliases"}),
    "block": frozenset({"name", "owner", "order", "part_number", "supplier"}),
    "requirement": frozenset({"title", "owner", "open_value", "rationale", "priority"}),
    "activity": frozenset({"responsible", "gate", "facility", "requirement_revision", "shorthand"}),
    "conditions_set": frozenset({"title", "source"}),
    "condition_map": frozenset({"source"}),
    "declared_value": frozenset({"text", "declared_on", "declared_by"}),
    "uncertainty": frozenset({"stated", "source"}),
    "correction": frozenset({"title", "source"}),
    "budget": frozenset({"title"}),
    "allocation": frozenset({"given_by", "taken_by", "agreed_on"}),
    "mapping": frozenset({"title"}),
}

#: Noun → groups of fields that are told as one, under the name of the first.
TOGETHER: Mapping[str, tuple[tuple[str, ...], ...]] = {
    "conditions_set": (("dimensions", "combination", "listed", "exclusions"),),
    "declared_value": (("value", "unit"),),
    "uncertainty": (("standard_uncertainty", "unit"), ("residual", "residual_unit")),
}

#: Longer texts are not quoted in a sentence.
_LONG = 60


@dataclass(frozen=True, slots=True)
class Difference:
    """One field that differs: the values, the same as text, and the documents they stand in."""

    field: str
    before: Any
    after: Any
    texts: tuple[str, str]
    document_before: Document
    document_after: Document

    @property
    def label(self) -> str:
        """The field as people say it."""
        return self.field.replace("_", " ").replace(".", " ")


Words = Callable[[Difference], str]


def meaning_of(noun: Noun, difference: Difference) -> str:
    """Say what a difference means; "" where showing both values says it best."""
    field = difference.field
    words = MEANINGS.get((noun.name, field)) or ANYWHERE.get(field.rpartition(".")[2]) or _plainly
    return words(difference)


def is_meaning_changing(noun: Noun, before: Document, after: Document, differing: Sequence[str]) -> bool:
    """Say whether a document means something else now: a note, an owner or another spelling of a limit do not count."""
    quiet = _ALWAYS_QUIET | QUIET.get(noun.name, frozenset())
    return any(name not in quiet and not _says_the_same(name, before, after) for name in differing)


def _says_the_same(name: str, before: Document, after: Document) -> bool:
    """Say whether a field that is written otherwise still means what it did."""
    first, second = getattr(before, name), getattr(after, name)
    if isinstance(first, Limit) and isinstance(second, Limit):
        return not limit_difference(first, second)
    if isinstance(before, ConditionsSet) and isinstance(after, ConditionsSet):
        return not conditions_difference(before, after)
    return bool(_without_text(first) == _without_text(second))


def _without_text(value: Any) -> Any:
    if isinstance(value, tuple):
        return tuple(_without_text(part) for part in value)
    if isinstance(value, Document) and "text" in type(value).model_fields:
        return value.model_copy(update={"text": ""})
    return value


def moved_by(old: float, old_unit: str, new: float, new_unit: str) -> str:
    """Say by how much a value moved: "raised by 0.5 dB (54 → 54.5 dBm)"; "" where the units cannot be compared."""
    try:
        source, target = parse_unit(old_unit or "1"), parse_unit(new_unit or "1")
        old_there = old if source == target else converter(source, target)(old)
        moved = abs(new - old_there)
        # a conversion leaves digits that nobody stated
        shown_step = moved if source == target else float(f"{moved:.6g}")
        step = format_quantity(shown_step, tolerance_unit(target))
    except UnitError:
        return ""
    if not math.isfinite(old_there):  # no power in dBm is 0 W
        return ""
    if new == old_there:
        return f"the same value in {new_unit}"
    shown = format_value(old) if source == target else format_quantity(old, source)
    return (
        f"{'raised' if new > old_there else 'lowered'} by {step} ({shown} → {format_quantity(new, target)})"
    )


def _plainly(difference: Difference) -> str:
    before, after = difference.texts
    if not before:
        return f"{difference.label} set to {after}" if len(after) <= _LONG else f"{difference.label} written"
    if not after:
        return (
            f"{difference.label} {before} removed" if len(before) <= _LONG else f"{difference.label} removed"
        )
    return f"{difference.label} reworded" if max(len(before), len(after)) > _LONG else ""


def _reworded(difference: Difference) -> str:
    before, after = difference.texts
    return f"{difference.label} reworded" if before and after else _plainly(difference)


def _person(difference: Difference) -> str:
    before, after = difference.texts
    if before and after:
        return f"{difference.label} changed from {before} to {after}"
    return f"{difference.label} is now {after}" if after else f"{difference.label} {before} taken off"


def _day(difference: Difference) -> str:
    before, after = difference.before, difference.after
    if not (isinstance(before, date) and isinstance(after, date)):
        return _plainly(difference)
    days = (after - before).days
    count = f"{abs(days)} day{'s' if abs(days) != 1 else ''}"
    return f"{difference.label} {count} {'later' if days > 0 else 'earlier'} ({before} → {after})"


def _limit(difference: Difference) -> str:
    return (
        limit_difference(difference.before, difference.after)
        or "limit written otherwise, the same in meaning"
    )


def _conditions(difference: Difference) -> str:
    before, after = difference.document_before, difference.document_after
    assert isinstance(before, ConditionsSet) and isinstance(after, ConditionsSet)
    return (
        "; ".join(conditions_difference(before, after)) or "conditions written otherwise, the same in meaning"
    )


def _block_moved(difference: Difference) -> str:
    before, after = difference.texts
    if before and after:
        return f"moved from {before} to {after}"
    return f"moved under {after}" if after else f"taken out of {before}, now at the top"


def _built_into(difference: Difference) -> str:
    before, after = difference.texts
    if before and after:
        return f"moved from {before} into {after}"
    return f"built into {after}" if after else f"taken out of {before}"


def _now(words: str) -> Words:
    def say(difference: Difference) -> str:
        before, after = difference.texts
        return f"{words} {after or 'none'} (was {before or 'none'})"

    return say


def _joined_and_left(joined: str, left: str) -> Words:
    def say(difference: Difference) -> str:
        before, after = difference.before, difference.after
        gained = [code for code in after if code not in before]
        lost = [code for code in before if code not in after]
        said = [f"{joined} {', '.join(gained)}"] if gained else []
        return "; ".join(said + ([f"{left} {', '.join(lost)}"] if lost else []))

    return say


def _quantity(difference: Difference) -> str:
    before, after = difference.before, difference.after
    assert isinstance(before, QuantityIdentity) and isinstance(after, QuantityIdentity)
    said = []
    for part in before.differences(after):
        old, new = getattr(before, part), getattr(after, part)
        if part == "bandwidth_hz":
            old, new = _bandwidth(old), _bandwidth(new)
        label = "reference bandwidth" if part == "bandwidth_hz" else part
        said.append(f"{label} is now {new or 'not stated'} (was {old or 'not stated'})")
    return "; ".join(said)


def _bandwidth(hertz: float | None) -> str:
    if hertz is None:
        return ""
    size, name = next(
        (pair for pair in ((1e9, "GHz"), (1e6, "MHz"), (1e3, "kHz")) if hertz >= pair[0]), (1.0, "Hz")
    )
    return f"{format_value(hertz / size)} {name}"


def _frequency(words: str) -> Words:
    def say(difference: Difference) -> str:
        old, new = _bandwidth(difference.before), _bandwidth(difference.after)
        return f"{words} is now {new or 'not stated'} (was {old or 'not stated'})"

    return say


def _permitted(difference: Difference) -> str:
    """A permitted limit is kept as text; one that needs its requirement's parameter to be read is shown as written."""
    try:
        before, after = (parse_limit(text) for text in difference.texts)
    except ExpressionError:
        return _plainly(difference)
    return limit_difference(before, after) or "written otherwise, the same in meaning"


def _value(unit_field: str) -> Words:
    def say(difference: Difference) -> str:
        units = (
            getattr(difference.document_before, unit_field),
            getattr(difference.document_after, unit_field),
        )
        if difference.before is None or difference.after is None:
            return _plainly(difference)
        return moved_by(difference.before, units[0], difference.after, units[1]) or _plainly(difference)

    return say


#: Fields that mean the same wherever they stand.
ANYWHERE: Mapping[str, Words] = {
    "owner": _person,
    "responsible": _person,
    "requester": _person,
    "approver": _person,
    "reserve_holder": _person,
    "statement": _reworded,
    "toml": _reworded,
    "note": _reworded,
    "due": _day,
    "expires_on": _day,
    "effective": _day,
}


def _budget_lines(difference: Difference) -> str:
    """Name the lines that were added, taken out or changed."""
    before, after = ({line.place: line for line in lines} for lines in (difference.before, difference.after))
    words = {
        "added": [place for place in after if place not in before],
        "taken out": [place for place in before if place not in after],
        "changed": [place for place in after if place in before and after[place] != before[place]],
    }
    parts = [f"{', '.join(places)} {what}" for what, places in words.items() if places]
    return "; ".join(parts) or "lines in another order"


#: (noun, field) → the words of its difference.
MEANINGS: Mapping[tuple[str, str], Words] = {
    ("requirement", "limit"): _limit,
    ("requirement", "quantity"): _quantity,
    ("requirement", "block"): _now("now on block"),
    ("activity", "requirement_revision"): _now("now planned for requirement revision"),
    ("requirement", "parents"): _joined_and_left("now under", "no longer under"),
    ("requirement", "conditions"): _now("now over conditions set"),
    ("conditions_set", "dimensions"): _conditions,
    ("block", "parent"): _block_moved,
    ("item", "block"): _now("now a specimen of"),
    ("item", "built_into"): _built_into,
    ("declared_value", "value"): _value("unit"),
    ("uncertainty", "standard_uncertainty"): _value("unit"),
    ("uncertainty", "residual"): _value("residual_unit"),
    ("uncertainty", "frequency_from_hz"): _frequency("frequency from"),
    ("uncertainty", "frequency_to_hz"): _frequency("frequency to"),
    ("waiver", "permitted"): _permitted,
    ("budget", "requirements"): _joined_and_left("now serves", "no longer serves"),
    ("budget", "quantity"): _quantity,
    ("budget", "lines"): _budget_lines,
    ("evidence_table", "digest"): lambda difference: "other values than before",
}
