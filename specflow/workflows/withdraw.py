"""Withdraw evidence that was found wrong: it stays stored with the reason, and counts for nothing any more."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date

import numpy as np

from specflow.changes import diff
from specflow.derive.said import chosen
from specflow.errors import DocumentError
from specflow.model.base import code_key
from specflow.model.derivation import Derivation
from specflow.model.evidence import EvidenceTable, Withdrawal
from specflow.model.snapshot import Snapshot
from specflow.store import ProjectStore
from specflow.verification import evaluate
from specflow.workflows.evaluate_project import project_dictionary
from specflow.workflows.numbering import next_number
from specflow.workflows.subjects import not_found
from specflow.workflows.try_change import StatusEffect, status_effects, with_documents


@dataclass(frozen=True)
class WithdrawPreview:
    """What a withdrawal takes away: rows of a table, what was derived from it, and whose status changes."""

    withdrawal: Withdrawal
    table: EvidenceTable
    rows: int
    derived: tuple[str, ...]
    statuses: tuple[StatusEffect, ...]
    project_revision: int


def preview_withdraw(
    store: ProjectStore, table: str, where: Sequence[str], as_of: date, *, reason: str, by: str
) -> WithdrawPreview:
    """Return what the withdrawal of a table, or of its rows at conditions ("temperature_ambient 23 °C"), would do.

    DocumentError without a reason, for a table that is not there, and where nothing is left to withdraw.
    """
    if not reason.strip():
        raise DocumentError(
            "a withdrawal needs its reason", where="--reason", hint="say what was found wrong: it is kept"
        )
    before = store.load()
    found = _table_named(before, table)
    rows = _rows_meant(before, found, where)
    withdrawal = Withdrawal(
        id=f"WD-{next_number(before, Withdrawal, 'WD-')}",
        table=found.id,
        rows=None if len(rows) == found.rows else rows,
        reason=reason.strip(),
        by=by,
        at=store.now(),
    )
    return WithdrawPreview(
        withdrawal,
        found,
        len(rows),
        tuple(_derived_from(before, found)),
        _effects(before, withdrawal, as_of),
        before.revision,
    )


def accept_withdraw(store: ProjectStore, preview: WithdrawPreview) -> int:
    """Store the withdrawal; return the revision of the project."""
    return store.apply(
        diff(store.load(), [preview.withdrawal]),
        by=preview.withdrawal.by,
        reason=preview.withdrawal.reason,
        expected_revision=preview.project_revision,
    )


def _table_named(snapshot: Snapshot, name: str) -> EvidenceTable:
    found = snapshot.find(EvidenceTable, name)
    if found is None:
        known = [one.id for one in snapshot.tables]
        raise not_found("evidence table", name, known, listing="specflow export --table evidence lists them")
    return found


def _rows_meant(snapshot: Snapshot, table: EvidenceTable, where: Sequence[str]) -> tuple[int, ...]:
    """Return the positions of the rows that are meant and were not withdrawn before."""
    conditions = snapshot.load_columns([table.id])[table.id].conditions
    meant = chosen(conditions, where)[0] if where else np.arange(table.rows)
    if not len(meant):
        raise DocumentError(f"no row of {table.id} is at {', '.join(where)}", where="--where")
    past = [one for one in snapshot.all(Withdrawal) if code_key(one.table) == code_key(table.id)]
    gone = {row for one in past for row in (range(table.rows) if one.rows is None else one.rows)}
    left = tuple(row for row in meant.tolist() if row not in gone)
    if not left:
        raise DocumentError(f"{', '.join(one.id for one in past)} withdrew this before", where=table.id)
    return left


def _derived_from(snapshot: Snapshot, table: EvidenceTable) -> list[str]:
    made = {
        code_key(one.id)
        for one in snapshot.all(Derivation)
        if code_key(table.id) in [code_key(code) for code in one.inputs]
    }
    return [one.id for one in snapshot.tables if one.derivation and code_key(one.derivation) in made]


def _effects(before: Snapshot, withdrawal: Withdrawal, as_of: date) -> tuple[StatusEffect, ...]:
    dictionary = project_dictionary(before)
    # It is judged as if it had been recorded on that day, whatever the clock of the store says.
    after = with_documents(before, [withdrawal.model_copy(update={"at": ""})])
    first, second = (evaluate(one, dictionary, as_of=as_of) for one in (before, after))
    return status_effects(before, first, second)
