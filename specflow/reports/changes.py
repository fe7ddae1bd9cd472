"""What a load would change, as a table: what is added or changed, in meaning, and how it was understood."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence

from specflow.model.change import Change
from specflow.model.nouns import NOUN_BY_NAME
from specflow.model.report import CellTone, ReportCell, ReportColumn, ReportRow, ReportTable

CHANGE_COLUMNS = (
    ReportColumn(key="action", title="Change", width=10),
    ReportColumn(key="noun", title="Kind", width=18),
    ReportColumn(key="id", title="ID", width=18),
    ReportColumn(key="meaning", title="What changes", width=60),
    ReportColumn(key="read_as", title="Read as", width=60),
)
_ACTIONS = {"add": "added", "edit": "changed", "remove": "removed"}
_TONES = {"add": CellTone.PLAIN, "edit": CellTone.DOUBTFUL, "remove": CellTone.BAD}


def changes_table(changes: Sequence[Change], echoes: Mapping[str, str]) -> ReportTable:
    """Return edits and removals, and of what is new that which was said back (``echoes`` by id), in the order given.

    New documents of which there is nothing to say (items, activities) are only counted: see ``changes_in_words``.
    """
    told = [change for change in changes if change.action != "add" or change.id in echoes]
    return ReportTable(
        key="changes",
        title="Changes",
        columns=CHANGE_COLUMNS,
        rows=tuple(_row(change, echoes.get(change.id, "")) for change in told),
    )


def changes_in_words(changes: Sequence[Change]) -> str:
    """Return the changes counted: "added: 2 blocks, 1 requirement; changed: 1 item"; "" when there are none."""
    counts: dict[str, Counter[str]] = {}
    for change in changes:
        counts.setdefault(change.action, Counter())[change.noun] += 1
    return "; ".join(
        f"{word}: " + ", ".join(_counted(number, noun) for noun, number in counts[action].items())
        for action, word in _ACTIONS.items()
        if action in counts
    )


def _row(change: Change, read_as: str) -> ReportRow:
    meaning = "; ".join(
        one.meaning or f"{one.field}: {one.before or 'nothing'} → {one.after or 'nothing'}"
        for one in change.fields
    )
    return ReportRow(
        id=change.id,
        cells=(
            ReportCell(text=_ACTIONS[change.action], tone=_TONES[change.action]),
            ReportCell(text=NOUN_BY_NAME[change.noun].title),
            ReportCell(text=change.id),
            ReportCell(text=meaning),
            ReportCell(text=read_as),
        ),
    )


def _counted(number: int, noun: str) -> str:
    title = NOUN_BY_NAME[noun].title
    if number == 1:
        return f"1 {title}"
    return f"{number} {title[:-1]}ies" if title.endswith("y") else f"{number} {title}s"
