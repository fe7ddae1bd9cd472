"""Two documents compared field by field, each difference as text before and after."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from datetime import date
from enum import Enum
from typing import Any

from specflow.changes.meaning import TOGETHER, Difference, meaning_of
from specflow.model.base import Document, code_key
from specflow.model.block import Plane, PlanePath
from specflow.model.budget import BudgetLine, BudgetPosition
from specflow.model.budget_line import Constant
from specflow.model.change import FieldChange
from specflow.model.conditions import Dimension, Exclusion, MapEntry
from specflow.model.evidence import ConditionColumn, Equipment, LeftOut, ValueColumn
from specflow.model.limit import Limit
from specflow.model.nouns import Noun
from specflow.model.parameter import QuantityIdentity
from specflow.units import format_value

#: No difference: when a document was last stored and where it was read.
UNSEEN = frozenset({"revision", "origin"})

#: The fields by which members of a list are recognised; members of other classes go by their place.
MEMBER_NAMES: Mapping[type[Document], tuple[str, ...]] = {
    Plane: ("name",),
    PlanePath: ("start", "end"),
    BudgetPosition: ("order", "block"),
    BudgetLine: ("position", "block", "parameter"),
    Dimension: ("name",),
    Exclusion: ("text",),
    MapEntry: ("target",),
    ValueColumn: ("name",),
    ConditionColumn: ("dimension",),
    Equipment: ("asset",),
    LeftOut: ("sheet", "cell"),
}


def differing_fields(noun: Noun, before: Document, after: Document) -> tuple[str, ...]:
    """Name the fields that differ; codes and quantities are compared without case."""
    links = {name for name, _ in noun.links} | {noun.id_field}
    return tuple(
        name
        for name in type(before).model_fields
        if name not in UNSEEN and not _same(getattr(before, name), getattr(after, name), name in links)
    )


def field_changes(
    noun: Noun, before: Document, after: Document, differing: Sequence[str]
) -> tuple[FieldChange, ...]:
    """Return the differing fields as text with their meaning; parts of a nested document one by one."""
    changes: list[FieldChange] = []
    for path, names, old, new in _pieces(noun, before, after, differing):
        texts = _joined_texts(before, after, names) if names else _differing_texts(old, new)
        meaning = meaning_of(noun, Difference(path, old, new, texts, before, after))
        changes.append(FieldChange(field=path, before=texts[0], after=texts[1], meaning=meaning))
    return tuple(changes)


def _pieces(
    noun: Noun, before: Document, after: Document, differing: Sequence[str]
) -> Iterator[tuple[str, tuple[str, ...], Any, Any]]:
    """Yield what is told apart: (field, the fields told together with it, value before, value after)."""
    told: set[str] = set()
    for name in differing:
        first, second = getattr(before, name), getattr(after, name)
        group = next((names for names in TOGETHER.get(noun.name, ()) if name in names), ())
        if group:
            if group[0] not in told:
                yield group[0], group, getattr(before, group[0]), getattr(after, group[0])
            told.add(group[0])
        elif _is_plain_document(first) and _is_plain_document(second):
            for part in type(first).model_fields:
                old, new = getattr(first, part), getattr(second, part)
                if old != new:
                    yield f"{name}.{part}", (), old, new
        else:
            yield name, (), first, second


def field_text(value: Any) -> str:
    """Return a value of a document as people read it; "" where there is none."""
    match value:
        case None:
            return ""
        case bool():
            return "yes" if value else "no"
        case float():
            return format_value(value)
        case Enum():
            return str(value.value)
        case Constant(value=number):
            return format_value(number)
        case date():
            return value.isoformat()
        case Limit() | Dimension() | Exclusion() | MapEntry() if value.text:
            return value.text
        case Document():
            return ", ".join(_part_text(name, getattr(value, name)) for name in _stated(value))
        case dict():
            return ", ".join(f"{key}: {field_text(part)}" for key, part in value.items())
        case tuple() | list():
            return ", ".join(field_text(part) for part in value)
    return str(value)


def _part_text(name: str, value: Any) -> str:
    text = field_text(value)
    return text if name in ("name", "text", "id") else f"{name.replace('_', ' ')} {text}"


def _stated(document: Document) -> list[str]:
    """Name the fields that are not at their default."""
    fields = type(document).model_fields
    return [name for name, field in fields.items() if getattr(document, name) != field.default]


def _is_plain_document(value: Any) -> bool:
    return isinstance(value, Document) and not isinstance(value, Limit | QuantityIdentity)


def _same(first: Any, second: Any, is_code: bool) -> bool:
    if first == second:
        return True
    if isinstance(first, QuantityIdentity) and isinstance(second, QuantityIdentity):
        return not first.differences(second)
    return is_code and _code_keys(first) == _code_keys(second)


def _code_keys(value: Any) -> list[str]:
    codes = [value] if isinstance(value, str) else value or ()
    return sorted(code_key(code) for code in codes)


def _differing_texts(first: Any, second: Any) -> tuple[str, str]:
    """Return both values as text; of two lists of documents only the members that differ."""
    members = [*_members(first), *_members(second)]
    if members and first == second:
        return "", ""
    if not members or not all(isinstance(member, Document) for member in members):
        return field_text(first), field_text(second)
    old, new = _named_members(first), _named_members(second)
    changed = [name for name in {**old, **new} if old.get(name) != new.get(name)]
    if not changed:
        return f"in the order {', '.join(old)}", f"in the order {', '.join(new)}"
    sides = [[field_text(side[name]) for name in changed if name in side] for side in (old, new)]
    return "; ".join(sides[0]), "; ".join(sides[1])


def _joined_texts(before: Document, after: Document, names: Sequence[str]) -> tuple[str, str]:
    pairs = [_differing_texts(getattr(before, name), getattr(after, name)) for name in names]
    return " ".join(old for old, _ in pairs if old), " ".join(new for _, new in pairs if new)


def _members(value: Any) -> tuple[Any, ...]:
    return value if isinstance(value, tuple) else ()


def _named_members(value: Any) -> dict[str, Document]:
    """Return the members of a list by name; a name that occurs again carries its place."""
    named: dict[str, Document] = {}
    for place, member in enumerate(_members(value), 1):
        fields = MEMBER_NAMES.get(type(member), ())
        name = " ".join(field_text(getattr(member, field)) for field in fields) or f"number {place}"
        named[f"{name} (number {place})" if name in named else name] = member
    return named
