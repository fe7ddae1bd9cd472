"""Who changed what, when and why: every change that was accepted, in order."""

from __future__ import annotations

import json
from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from specflow.model.base import code_key
from specflow.model.change import Change, FieldChange

if TYPE_CHECKING:
    from sqlalchemy import Connection


@dataclass(frozen=True, slots=True)
class HistoryEntry:
    """One accepted change; ``revision`` is the project revision it made, ``at`` UTC as ISO text."""

    revision: int
    at: str
    by: str
    reason: str
    change: Change


def read_history(connection: Connection, noun: str | None, code: str | None) -> Iterator[HistoryEntry]:
    """Give the changes of the project, of one noun or of one document, oldest first."""
    from sqlalchemy import select

    from specflow.store.rows import history

    wanted = select(history).order_by(history.c.pk)
    if noun is not None:
        wanted = wanted.where(history.c.noun == noun)
    if code is not None:
        wanted = wanted.where(history.c.code_key == code_key(code))
    for row in connection.execute(wanted):
        yield HistoryEntry(row.project_revision, row.at, row.by, row.reason, _change(row))


def last_change(connection: Connection, noun: str | None = None, code: str | None = None) -> str:
    """Say who made the last change of the project or of one document, and when: "by A. Person at 2025-..."."""
    from sqlalchemy import select

    from specflow.store.rows import history

    wanted = select(history.c.by, history.c.at).order_by(history.c.pk.desc()).limit(1)
    if noun is not None and code is not None:
        wanted = wanted.where(history.c.noun == noun, history.c.code_key == code_key(code))
    row = connection.execute(wanted).first()
    return f"by {row.by} at {row.at}" if row else "by somebody"


def _change(row: Any) -> Change:
    return Change(
        noun=row.noun,
        id=row.code,
        action=row.action,
        base_revision=row.base_revision,
        fields=tuple(FieldChange.model_validate(field) for field in json.loads(row.fields)),
        before=row.before,
        after=row.after,
        reason=row.reason,
    )
