"""The names in a limit: which condition or declared value each means; one that means nothing is a finding.

A limit may spell a condition in its own way (f, bw, f_offset); evidence is then read under the name of the dictionary.
What nobody can supply would leave every reading undecided, so it is said when the limit is loaded.
"""

from __future__ import annotations

from collections import Counter

from specflow.conditions import KNOWN_DIMENSIONS, find_dimension
from specflow.importers.sheets.intake import Intake
from specflow.importers.sheets.row import SheetRow
from specflow.importers.sheets.spelling import near
from specflow.limits import expression_names, limit_inputs
from specflow.limits.tree import walk_limit
from specflow.model.conditions import ConditionsSet
from specflow.model.declared import DeclaredValue
from specflow.model.limit import Limit, Population

_RULE = "workbook-unknown-input"


def check_names(row: SheetRow, intake: Intake, column: str, limit: Limit, conditions: str | None) -> None:
    """Report the names of a limit that nobody supplies: no declared value, no condition, no axis."""
    meant = _meant(limit, intake, conditions)
    doubled = {name for name, count in Counter(meant.values()).items() if name and count > 1}
    for name in sorted(name for name, dimension in meant.items() if not dimension):
        _note_unknown(row, intake, column, name)
    for dimension in sorted(doubled):
        names = sorted(name for name, one in meant.items() if one == dimension)
        intake.note(
            row,
            column,
            f"{' and '.join(names)} in the limit are both spellings of {dimension}, so neither is read as it",
            f"write {dimension} for the one that is recorded under it, and declare or record the other by its own name",
            rule=_RULE,
        )


def names_words(limit: Limit, intake: Intake, conditions: str | None) -> str:
    """Say which conditions the limit spells in its own way: "f_offset is the condition offset"; "" for none."""
    meant = _meant(limit, intake, conditions)
    counts = Counter(meant.values())
    return "; ".join(
        f"{name} is the condition {dimension}"
        for name, dimension in sorted(meant.items())
        if dimension and dimension != name and counts[dimension] == 1
    )


def _meant(limit: Limit, intake: Intake, conditions: str | None) -> dict[str, str]:
    """The dimension that each name of a limit means, "" for none; declared values are left out.

    A dimension that the conditions set has under that very name is itself, known to the dictionary or not.
    """
    known = intake.find(ConditionsSet, conditions)
    own = {dimension.name for dimension in known.dimensions} if known else set()
    names = _names(limit) - {value.name for value in intake.all(DeclaredValue)}
    found = {name: find_dimension(name) for name in names - own}
    return {name: name for name in names & own} | {
        name: "" if dimension is None else dimension.name for name, dimension in found.items()
    }


def _names(limit: Limit) -> set[str]:
    """The names that the limit needs, and those by which a statistic chooses its values."""
    chosen = [
        node.where
        for node in walk_limit(limit.tree)
        if isinstance(node, Population) and node.where is not None
    ]
    return set(limit_inputs(limit)).union(*(expression_names(where) for where in chosen))


def _note_unknown(row: SheetRow, intake: Intake, column: str, name: str) -> None:
    declared = [value.name for value in intake.all(DeclaredValue)]
    what = "neither declared nor a known condition"
    if intake.dictionary.match(name):
        what += ", but a parameter, and readings of another quantity are not looked up"
    conditions = [spelling for known in KNOWN_DIMENSIONS for spelling in (known.name, *known.aliases)]
    intake.note(
        row,
        column,
        f"the limit refers to {name}, {what}" + near(name, [*declared, *conditions]),
        f"declare {name} on the sheet Declared values, or name a condition that is recorded",
        rule=_RULE,
        why="without it every reading stays undecided",
    )
