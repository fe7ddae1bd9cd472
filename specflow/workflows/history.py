"""Look back: who changed what, when and why."""

from __future__ import annotations

from specflow.model.base import code_key
from specflow.model.report import ReportTable
from specflow.reports.history import history_table
from specflow.store import ProjectStore
from specflow.workflows.subjects import not_found


def project_history(store: ProjectStore, code: str = "", *, last: int | None = None) -> ReportTable:
    """Return the accepted changes of the project, or of the documents of one id, oldest first.

    ``last`` keeps the newest that many. DocumentError when nothing of that id was ever stored.
    """
    entries = store.history(id=code or None)
    if code and not entries:
        known = list(dict.fromkeys(entry.change.id for entry in store.history()))
        others = [one for one in known if code_key(one) != code_key(code)]
        raise not_found("id", code, others, listing="specflow history lists everything that was stored")
    kept = entries if last is None else entries[-last:] if last > 0 else []
    return history_table(f"History of {code or 'the project'}", kept)
