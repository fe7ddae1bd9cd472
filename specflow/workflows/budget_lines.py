"""Lines of budgets as people name them: ``LNA gain``, or ``position 2 gain`` where a block stands more than once."""

from __future__ import annotations

import contextlib
import re

from specflow.budgets.chain import LineKey, line_key
from specflow.errors import DocumentError, ParameterError
from specflow.model.base import code_key
from specflow.model.budget import Budget, BudgetLine
from specflow.parameters import Dictionary
from specflow.reports.budget_trail import value_words

_POSITION = re.compile(r"(?:position\s+)?(\d+)\s+(.+)", re.IGNORECASE)


def line_named(budget: Budget, text: str, dictionary: Dictionary) -> BudgetLine:
    """Return the line that a person names. DocumentError where none or several are meant, with those there are."""
    place, parameter = named_parts(budget, text)
    keys = parameter_keys(parameter, dictionary)
    found = [
        line for line in budget.lines if code_key(line.parameter) in keys and _stands(line, budget, place)
    ]
    if len(found) == 1:
        return found[0]
    listed = ", ".join(f"position {line.position} {line.block} {line.parameter}" for line in budget.lines)
    if found:
        raise DocumentError(
            f"{text!r} means {len(found)} lines",
            where=f"budget {budget.id}",
            hint=f"name the position: {', '.join(f'position {one.position} {parameter}' for one in found)}",
        )
    raise DocumentError(
        f"there is no line {text!r}", where=f"budget {budget.id}", hint=f"its lines are {listed}"
    )


def lines_in_words(before: Budget, after: Budget) -> str:
    """Say which lines differ between two budgets, from what to what."""
    first, second = ({line_key(one): one for one in budget.lines} for budget in (before, after))
    said = []
    for key in dict.fromkeys((*first, *second)):
        old, new = first.get(key), second.get(key)
        if old == new:
            continue
        if old is None or new is None:
            word, line = ("added", new) if old is None else ("removed", old)
            assert line is not None  # one of the two budgets has it
            said.append(f"{line.place} {word}: {value_words(line)}")
        else:
            said.append(f"{new.place}: {value_words(old)} → {value_words(new)}")
    return "; ".join(said)


def key_named(budget: Budget, text: str, dictionary: Dictionary) -> LineKey:
    """Return what the line that a person names is looked up by."""
    line = line_named(budget, text, dictionary)
    return line.position, line.parameter


def parameter_keys(text: str, dictionary: Dictionary) -> set[str]:
    """Return the keys of the parameters that a word may mean: itself, and what the dictionary calls so."""
    keys = {code_key(text.strip().replace(" ", "_"))}
    with contextlib.suppress(ParameterError):  # the word itself may still be a key of the project
        keys.add(code_key(dictionary.resolve(text).key))
    return keys


def named_parts(budget: Budget, text: str) -> tuple[str, str]:
    """Part a name into a place (order of the position, block or name) and a parameter."""
    plain = " ".join(text.split())
    numbered = _POSITION.fullmatch(plain)
    blocks = {one for position in budget.chain for one in (position.block, position.name) if one}
    for name in sorted(blocks, key=len, reverse=True):
        if code_key(plain).startswith(f"{code_key(name)} "):
            return name, plain[len(name) + 1 :]
    if numbered:
        return numbered[1], numbered[2]
    first, _, rest = plain.partition(" ")
    return first, rest


def _stands(line: BudgetLine, budget: Budget, place: str) -> bool:
    position = next(one for one in budget.chain if one.order == line.position)
    return place == str(line.position) or code_key(place) in (code_key(line.block), code_key(position.name))
