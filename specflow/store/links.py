"""Codes that point to codes: they must lead somewhere, never in a circle, and nothing they lead to may vanish."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Collection, Iterable, Iterator, Mapping, Sequence
from graphlib import CycleError, TopologicalSorter
from typing import Any

from sqlalchemy import Connection, Select, Table, select

from specflow.errors import DocumentError
from specflow.model.base import code_key
from specflow.model.nouns import NOUN_BY_NAME, NOUNS, Noun
from specflow.store.convert import Edit, Key
from specflow.store.rows import LINK_TABLES, TABLES, holds_many

_CODES_AT_ONCE = 1000
_SHOWN = 10


def portions(values: Iterable[str]) -> Iterator[Sequence[str]]:
    """Cut values into portions that a statement can name."""
    listed = sorted(values)
    for start in range(0, len(listed), _CODES_AT_ONCE):
        yield listed[start : start + _CODES_AT_ONCE]


def resolve(connection: Connection, edits: Sequence[Edit], known: Mapping[Key, int]) -> dict[Key, int]:
    """Return the row key of everything that the edited documents point to.

    ``known`` are the documents of the edits themselves. Raises DocumentError that names every link that leads
    nowhere or to a removed document.
    """
    missing: dict[str, set[str]] = defaultdict(set)
    removed = {edit.key for edit in edits if edit.document is None}
    for _, key, _ in _links(edits):
        if key not in known:
            missing[key[0]].add(key[1])
    targets = {key: pk for key, pk in known.items() if key not in removed}
    for noun, codes in missing.items():
        table = TABLES[noun]
        for portion in portions(codes):
            found = select(table.c.code_key, table.c.pk).where(
                table.c.code_key.in_(portion), table.c.removed_at.is_(None)
            )
            targets.update({(noun, key): pk for key, pk in connection.execute(found)})
    lost = [
        f"{edit.title}: {field} names {NOUN_BY_NAME[key[0]].title} {code}"
        for edit, key, (field, code) in _links(edits)
        if key not in targets
    ]
    if lost:
        raise DocumentError(
            f"{'a link leads' if len(lost) == 1 else f'{len(lost)} links lead'} to what is not in the project",
            where=_listed(lost),
            hint="add what is named first, or correct the id",
        )
    return targets


def _links(edits: Iterable[Edit]) -> Iterator[tuple[Edit, Key, tuple[str, str]]]:
    for edit in edits:
        if edit.document is not None:
            for field, target, codes in edit.links():
                for code in codes:
                    yield edit, (target, code_key(code)), (field, code)


def check_no_cycles(connection: Connection, edits: Sequence[Edit]) -> None:
    """Raise DocumentError naming the circle when edited documents became their own ancestors."""
    for noun in {edit.noun.name: edit.noun for edit in edits if edit.document is not None}.values():
        for field, target in noun.links:
            if target == noun.name:
                _check_no_cycle(connection, noun, field)


def _check_no_cycle(connection: Connection, noun: Noun, field: str) -> None:
    table = TABLES[noun.name]
    above: dict[int, set[int]] = defaultdict(set)
    for row in connection.execute(_pairs(noun, field).where(table.c.removed_at.is_(None))):
        above[row.pk].add(row.target_pk)
    try:
        TopologicalSorter(above).prepare()
    except CycleError as error:
        circle: list[int] = error.args[1]
        named = connection.execute(select(table.c.pk, table.c.code).where(table.c.pk.in_(circle)))
        codes = {row.pk: row.code for row in named}
        raise DocumentError(
            f"a {noun.title} may not stand above itself: " + " → ".join(codes[pk] for pk in reversed(circle)),
            where=f"{noun.title} {codes[circle[0]]}",
            hint=f"change {field} of one of them",
        ) from None


def check_nothing_left_pointing(connection: Connection, removed: Collection[str]) -> None:
    """Raise DocumentError naming the documents that still point to removed ones of these nouns."""
    pointing = [
        sentence
        for noun in NOUNS
        for field, target in noun.links
        if target in removed
        for sentence in _pointing(connection, noun, field, TABLES[target])
    ]
    if pointing:
        raise DocumentError(
            "what is removed is still in use", where=_listed(pointing), hint="remove or change these as well"
        )


def _pointing(connection: Connection, noun: Noun, field: str, target: Table) -> Iterator[str]:
    pairs = _pairs(noun, field).where(TABLES[noun.name].c.removed_at.is_(None)).subquery()
    named = target.alias()
    found = (
        select(pairs.c.code, named.c.code.label("used"))
        .join(named, named.c.pk == pairs.c.target_pk)
        .where(named.c.removed_at.is_not(None))
    )
    for row in connection.execute(found):
        yield f"{noun.title} {row.code}: {field} names {row.used}"


def _listed(sentences: Sequence[str]) -> str:
    return "; ".join(sentences[:_SHOWN]) + ("; ..." if len(sentences) > _SHOWN else "")


def _pairs(noun: Noun, field: str) -> Select[Any]:
    """Select pk, code and target_pk of every link of one field."""
    table = TABLES[noun.name]
    if not holds_many(noun, field):
        target = table.c[f"{field}_pk"]
        return select(table.c.pk, table.c.code, target.label("target_pk")).where(target.is_not(None))
    link = LINK_TABLES[noun.name, field]
    return select(table.c.pk, table.c.code, link.c.target_pk).join(link, link.c.pk == table.c.pk)
