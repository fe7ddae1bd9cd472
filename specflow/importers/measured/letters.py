"""What a person says of a column by its letter, in a file with several tables: it may be another column in each.

Nobody is believed to have meant all of them: where the headers differ it is asked, and a header or its cell settles it.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace

from specflow.importers.measured.formats import is_plain_head
from specflow.importers.measured.header_cells import HeaderCell
from specflow.importers.measured.header_text import header_key
from specflow.importers.measured.located import LocatedTable
from specflow.importers.measured.result import Question

_COLUMN = "column "


def with_letter_doubts(located: Sequence[LocatedTable], person: Mapping[str, str]) -> list[LocatedTable]:
    """The tables of a file, with a question where a letter that the person names stands for unlike columns."""
    found = list(located)
    for key, text in person.items():
        letter = key[len(_COLUMN) :].strip().upper()
        if not key.casefold().startswith(_COLUMN) or not letter.isalpha():
            continue
        places = [
            (place, header)
            for place, one in enumerate(found)
            for header in one.table.headers
            if header.letter == letter
        ]
        if len({_told(header) for _, header in places}) < 2:
            continue
        for place, header in places:
            table = found[place].table
            what = f"column {letter} is {_others(places)}; for which of them {text!r} is meant is not said"
            remedy = f'--state "column {header.cell}={text}" for this one, and no letter alone'
            doubt = Question(header.text, header.cell, what, remedy)
            found[place] = replace(found[place], table=replace(table, doubts=(*table.doubts, doubt)))
    return found


def _others(places: Sequence[tuple[int, HeaderCell]]) -> str:
    cells = {header_key(header.text): f"{header.text!r} ({header.cell})" for _, header in reversed(places)}
    return ", ".join(reversed(cells.values()))


def _told(header: HeaderCell) -> str:
    """The header as it is compared; "Trace 1" and "Trace 2" tell the same, nothing."""
    return "" if is_plain_head(header.text) else header_key(header.text)
