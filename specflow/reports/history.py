"""Who changed what, when and why."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Protocol

from specflow.model.change import Change
from specflow.model.nouns import NOUN_BY_NAME
from specflow.model.report import Align, ReportCell, ReportColumn, ReportRow, ReportTable
from specflow.reports.figures import text

HISTORY_COLUMNS = (
    ReportColumn(key="revision", title="Revision", align=Align.RIGHT, width=9),
    ReportColumn(key="at", title="When (UTC)", width=21),
    ReportColumn(key="by", title="Who", width=18),
    ReportColumn(key="noun", title="What", width=20),
    ReportColumn(key="id", title="Id", width=18),
    ReportColumn(key="change", title="Change", width=70),
    ReportColumn(key="reason", title="Why", width=40),
)
WORDS = {"add": "added", "edit": "changed", "remove": "removed"}


class AcceptedChange(Protocol):
    """A change with who accepted it and when, as the store remembers it."""

    @property
    def revision(self) -> int:
        """The project revision it made."""

    @property
    def at(self) -> str:
        """When, in UTC."""

    @property
    def by(self) -> str:
        """Who."""

    @property
    def reason(self) -> str:
        """Why."""

    @property
    def change(self) -> Change:
        """What."""


def history_table(title: str, entries: Iterable[AcceptedChange]) -> ReportTable:
    """Return one row an accepted change, in the order given."""
    return ReportTable(
        key="history",
        title=title,
        columns=HISTORY_COLUMNS,
        rows=tuple(_row(entry) for entry in entries),
    )


def _row(entry: AcceptedChange) -> ReportRow:
    change = entry.change
    noun = NOUN_BY_NAME.get(change.noun)
    return ReportRow(
        id=change.id,
        cells=(
            ReportCell(text=str(entry.revision), number=float(entry.revision)),
            text(entry.at),
            text(entry.by),
            text(noun.title if noun else change.noun),
            text(change.id),
            text(change_words(change)),
            text(change.reason or entry.reason),
        ),
    )


def change_words(change: Change) -> str:
    """Say what changed: the meaning of each field that has one, else before and after."""
    details = "; ".join(
        f"{field.field}: {field.meaning}"
        if field.meaning
        else f"{field.field}: {field.before} → {field.after}"
        for field in change.fields
    )
    return f"{WORDS[change.action]}: {details}" if details else WORDS[change.action]
