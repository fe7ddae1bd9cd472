"""Derived values whose inputs do not stand any more: superseded, withdrawn, or other bytes than were derived from.

The values themselves are kept. A pass among them does not count until it is derived again; a fail stays open.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from specflow.model.base import code_key
from specflow.model.derivation import Derivation
from specflow.model.evidence import EvidenceTable, Supersession, Withdrawal
from specflow.model.snapshot import Snapshot


def outdated_tables(
    snapshot: Snapshot,
    withdrawals: Mapping[str, Sequence[Withdrawal]],
    supersessions: Mapping[str, Sequence[Supersession]],
) -> Mapping[str, str]:
    """Return the derived tables that no longer stand on what they were made from, by key, with the reason."""
    tables = [table for table in snapshot.tables if table.derivation is not None]
    if not tables:
        return {}
    found: dict[str, str] = {}
    for table in tables:
        reason = _reason(table, snapshot, withdrawals, supersessions, frozenset())
        if reason:
            found[code_key(table.id)] = reason
    return found


def _reason(
    table: EvidenceTable,
    snapshot: Snapshot,
    withdrawals: Mapping[str, Sequence[Withdrawal]],
    supersessions: Mapping[str, Sequence[Supersession]],
    seen: frozenset[str],
) -> str:
    derivation = snapshot.find(Derivation, table.derivation)
    if derivation is None:
        return "" if table.derivation is None else f"its derivation {table.derivation} is not in the project"
    for code, digest in zip(derivation.inputs, derivation.digests, strict=True):
        key = code_key(code)
        source = snapshot.find(EvidenceTable, code)
        if source is None or key in seen:
            return f"its input {code} is not in the project"
        if key in withdrawals:
            return f"its input {code} was withdrawn"
        if key in supersessions:
            return f"its input {code} was superseded by {supersessions[key][-1].later}"
        if source.digest != digest:
            return f"the content of its input {code} is another than was derived from"
        before = _reason(source, snapshot, withdrawals, supersessions, seen | {code_key(table.id)})
        if before:
            return f"its input {code} is out of date: {before}"
    return ""
