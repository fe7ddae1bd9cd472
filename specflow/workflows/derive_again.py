"""Derive again what was made of inputs that no longer stand: the same law, settings and quantity on what stands now."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date

from specflow.derive import LAW_BY_NAME
from specflow.errors import DocumentError, SpecflowError
from specflow.model.base import code_key
from specflow.model.derivation import Derivation
from specflow.model.evidence import EvidenceTable, Supersession, Withdrawal
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.store import ProjectStore
from specflow.verification.standing import StandingRegister
from specflow.workflows.derive import (
    DerivedStored,
    DeriveOptions,
    DerivePreview,
    accept_derive,
    preview_in,
    repeated,
)
from specflow.workflows.evaluate_project import project_dictionary


@dataclass(frozen=True)
class Again:
    """A derived table that does not stand any more, why, and what deriving again gives, or why it cannot be done."""

    table: EvidenceTable
    derivation: Derivation
    why: str
    preview: DerivePreview | None = None
    failure: SpecflowError | None = None

    @property
    def can_be_stored(self) -> bool:
        """Whether every group of rows gave a result again."""
        return self.preview is not None and not self.preview.derived.refused


def preview_again(store: ProjectStore, as_of: date) -> list[Again]:
    """Return what is to be derived again and can be now; what depends on another of them comes in a later turn."""
    snapshot = store.load()
    return _outdated(snapshot, project_dictionary(snapshot), as_of)


def derive_again(
    store: ProjectStore, as_of: date, *, by: str, take_rest: bool = False
) -> tuple[list[DerivedStored], list[Again]]:
    """Store everything that can be derived again, each in its own transaction, inputs before what was made of them.

    Return what was stored, and what could not be.
    """
    stored: list[DerivedStored] = []
    while True:
        found = preview_again(store, as_of)
        ready = [one for one in found if one.can_be_stored or (take_rest and one.preview is not None)]
        if not ready:
            return stored, found
        preview = ready[0].preview
        assert preview is not None
        reason = f"derived again: {ready[0].why}"
        stored.append(accept_derive(store, preview, by=by, reason=reason, take_rest=take_rest))


def _outdated(snapshot: Snapshot, dictionary: Dictionary, as_of: date) -> list[Again]:
    reasons = StandingRegister.of(snapshot, as_of).outdated
    gone = _replaced(snapshot)
    found = []
    for table in snapshot.tables:
        derivation = snapshot.find(Derivation, table.derivation)
        if derivation is None or code_key(table.id) in gone:
            continue
        why = reasons.get(code_key(table.id), "") or _newer_law(derivation)
        waits = any(
            code_key(one) in reasons and _is_derived(snapshot, one) and code_key(one) not in gone
            for one in derivation.inputs
        )
        if why and not waits:
            found.append(_again(snapshot, dictionary, table, derivation, why))
    return found


def _is_derived(snapshot: Snapshot, code: str) -> bool:
    table = snapshot.find(EvidenceTable, code)
    return table is not None and table.derivation is not None


def _replaced(snapshot: Snapshot) -> frozenset[str]:
    superseded = {code_key(one.earlier) for one in snapshot.all(Supersession) if one.rows is None}
    withdrawn = {code_key(one.table) for one in snapshot.all(Withdrawal) if one.rows is None}
    return frozenset(superseded | withdrawn)


def _newer_law(derivation: Derivation) -> str:
    law = LAW_BY_NAME.get(derivation.law)
    if law is None or law.version == derivation.law_version:
        return ""
    return (
        f"the law {law.name} is at version {law.version}, it was derived by version {derivation.law_version}"
    )


def _again(
    snapshot: Snapshot, dictionary: Dictionary, table: EvidenceTable, derivation: Derivation, why: str
) -> Again:
    try:
        successors = {code: _successor(snapshot, code) for code in derivation.inputs}
        options = _options(derivation, {code: later for code, (later, _) in successors.items()})
        preview = preview_in(snapshot, dictionary, options)
    except SpecflowError as error:
        return Again(table, derivation, why, failure=error)
    names_fail = "; ".join(dict.fromkeys(words for _, words in successors.values() if words))
    return Again(table, derivation, why, repeated(preview, derivation, table.id, names_fail))


def _successor(snapshot: Snapshot, code: str) -> tuple[str, str]:
    """Return the table that stands in the place of an input, and the fail that its supersessions name."""
    named: list[str] = []
    current, seen = code, {code_key(code)}
    while True:
        steps = [one for one in snapshot.all(Supersession) if code_key(one.earlier) == code_key(current)]
        if not steps:
            break
        if any(one.rows is not None for one in steps):
            raise DocumentError(
                f"only some rows of {current} were superseded, by {steps[-1].later}",
                where=current,
                hint="attach the whole trace again, or derive by hand from the table that is complete",
            )
        named += [one.names_fail for one in steps if one.names_fail]
        current = steps[-1].later
        if code_key(current) in seen:
            raise DocumentError(f"{code} is superseded in a circle", where=code)
        seen.add(code_key(current))
    if any(code_key(one.table) == code_key(current) for one in snapshot.all(Withdrawal)):
        raise DocumentError(
            f"the input {current} was withdrawn and nothing replaces it",
            where=current,
            hint="withdraw what was derived from it, too, or attach the data again with --supersedes",
        )
    return current, "; ".join(named)


def _options(derivation: Derivation, successors: dict[str, str]) -> DeriveOptions:
    by_key = {code_key(code): later for code, later in successors.items()}
    values = [
        f"{one.role}={by_key[code_key(one.table)]}:{one.column}"
        + (f" where {' and '.join(one.where)}" if one.where else "")
        for one in derivation.columns
    ]
    return DeriveOptions(
        derivation.law,
        tuple(dict.fromkeys(successors.values())),
        values,
        derivation.over,
        derivation.where,
        {one.name: one.text for one in derivation.settings},
        quantity=derivation.gives,
    )
