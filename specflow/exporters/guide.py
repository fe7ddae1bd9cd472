"""What the guide of the workbook template says beside the sheets: spellings of limits, and the parameters known."""

from __future__ import annotations

from collections.abc import Sequence

from specflow.exporters.limit_spellings import LIMIT_SPELLINGS
from specflow.limits import limit_words, parse_limit
from specflow.parameters import Dictionary

LIMITS_HEAD = ("How a limit is written", "The cell, and how it is said back")
PARAMETERS_HEAD = ("Parameter", "Title (unit), and other names under which it is found")


def limit_pairs(dictionary: Dictionary) -> Sequence[tuple[str, str]]:
    """Return what one may want to say, with the text of the cell and how it is read; a title stands once."""
    pairs = []
    for spelling in LIMIT_SPELLINGS:
        parameter = dictionary.get(spelling.parameter)
        words = limit_words(parse_limit(spelling.text, parameter=parameter), parameter)
        pairs.append((spelling.title, f"{spelling.text}\n{words}"))
    return pairs


def parameter_pairs(dictionary: Dictionary) -> Sequence[tuple[str, str]]:
    """Return the key of each parameter with its title, unit and other names, by group and title."""
    known = sorted(dictionary.by_key.values(), key=lambda one: (one.group, one.title))
    return [
        (
            one.key,
            f"{one.title} ({'plain number' if one.unit == '1' else one.unit})"
            + (f" \N{MIDDLE DOT} {', '.join(one.aliases)}" if one.aliases else ""),
        )
        for one in known
    ]
