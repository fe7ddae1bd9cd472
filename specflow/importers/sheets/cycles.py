"""Cycles: a block that is part of itself, a requirement that is its own ancestor."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import TypeVar

from specflow.importers.sheets.intake import Intake
from specflow.model.base import Document, code_key
from specflow.model.block import Block, Item
from specflow.model.nouns import NOUN_BY_DOCUMENT
from specflow.model.requirement import Requirement

D = TypeVar("D", bound=Document)


def refuse_cycles(intake: Intake) -> None:
    """Report every cycle once, at the row that closes it, and leave its documents out."""
    _refuse(intake, Block, "parent", lambda block: (block.parent,) if block.parent else ())
    _refuse(intake, Item, "built_into", lambda item: (item.built_into,) if item.built_into else ())
    _refuse(intake, Requirement, "parents", lambda requirement: requirement.parents)


def _refuse(intake: Intake, kind: type[D], column: str, parents: Callable[[D], Sequence[str]]) -> None:
    noun = NOUN_BY_DOCUMENT[kind]
    above = {code_key(_code(one)): [code_key(code) for code in parents(one)] for one in intake.all(kind)}
    for cycle in find_cycles(above):
        names = [intake.spelling(kind, key) or key for key in (*cycle, cycle[0])]
        given = [key for key in cycle if key in intake.documents.get(noun.name, {})]
        for key in given:
            del intake.documents[noun.name][key]
        row = intake.codes[noun.name][given[0]][1]
        row.fault(
            column,
            f"these {noun.title}s go round in a circle: {' -> '.join(names)}",
            "empty or change one of the cells that name a parent",
            rule="workbook-cycle",
            related=tuple(names[:-1]),
        )


def find_cycles(above: Mapping[str, Sequence[str]]) -> list[list[str]]:
    """Return the cycles that a depth-first walk closes, each once, starting at its first member in the order given."""
    order = {key: place for place, key in enumerate(above)}
    done: set[str] = set()
    cycles: list[list[str]] = []
    for start in above:
        path: list[str] = []
        places: dict[str, int] = {}
        stack: list[tuple[str, int]] = [(start, 0)] if start not in done else []
        while stack:
            key, tried = stack.pop()
            if tried == 0:
                places[key] = len(path)
                path.append(key)
            followers = above.get(key, ())
            if tried == len(followers):
                done.add(path.pop())
                del places[key]
                continue
            stack.append((key, tried + 1))
            following = followers[tried]
            if following in places:
                cycles.append(_rotated(path[places[following] :], order))
            elif following not in done and following in above:
                stack.append((following, 0))
    return cycles


def _rotated(cycle: list[str], order: Mapping[str, int]) -> list[str]:
    first = min(range(len(cycle)), key=lambda place: order[cycle[place]])
    return cycle[first:] + cycle[:first]


def _code(document: Document) -> str:
    return str(getattr(document, NOUN_BY_DOCUMENT[type(document)].id_field))
