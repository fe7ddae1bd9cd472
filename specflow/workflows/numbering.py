"""The next free number of ids that a workflow gives out: EV-7, DV-2, SUP-3."""

from __future__ import annotations

from specflow.model.base import Document
from specflow.model.snapshot import Snapshot


def next_number(snapshot: Snapshot, kind: type[Document], prefix: str) -> int:
    """Return the next free number; removed documents keep theirs, so the store's own guard has the last word."""
    numbers = [
        int(rest)
        for document in snapshot.all(kind)
        if (rest := str(getattr(document, "id", "")).removeprefix(prefix)).isdecimal()
    ]
    return max(numbers, default=0) + 1
