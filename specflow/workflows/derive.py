"""Derive evidence from stored tables by a law: preview what it gives, then accept it in one transaction."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Literal

from specflow.changes import diff
from specflow.derive import LAW_BY_NAME, LAWS, Derived, Law, Request, Role, complete_settings, derive_table
from specflow.errors import DocumentError
from specflow.exchange import digest
from specflow.limits.tree import side_of
from specflow.model.base import Document, code_key
from specflow.model.derivation import Derivation, InputColumn, SettingSaid
from specflow.model.evidence import ConditionColumn, EvidenceTable, Supersession, ValueColumn, Withdrawal
from specflow.model.limit import Side
from specflow.model.parameter import Better, QuantityIdentity
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.store import ProjectStore
from specflow.store.columns import pack
from specflow.workflows.evaluate_project import project_dictionary
from specflow.workflows.numbering import next_number
from specflow.workflows.subjects import not_found


@dataclass(frozen=True, slots=True)
class DeriveOptions:
    """What the person says: a law, the tables, what is read of them as what, the range, the settings, what it gives.

    ``values``: "NAME" or "ROLE=NAME", a name may be a header, a value column or a parameter, with "where ..." behind
    it; in "EV-3:NAME" it names its table. ``requirement`` takes the quantity from a requirement instead of ``gives``.
    """

    law: str
    tables: Sequence[str]
    values: Sequence[str] = ()
    over: Sequence[str] = ()
    where: Sequence[str] = ()
    settings: Mapping[str, str] = field(default_factory=dict)
    gives: str = ""
    plane: str = ""
    statistic: str = ""
    polarisation: str = ""
    requirement: str = ""


@dataclass(frozen=True)
class DerivePreview:
    """What accepting would add. ``stored_as``: the id under which exactly this is stored already, or ""."""

    snapshot: Snapshot
    request: Request
    derivation: Derivation
    table: EvidenceTable
    derived: Derived
    stored_as: str = ""
    replaces: str = ""
    names_fail: str = ""

    @property
    def is_unchanged(self) -> bool:
        """Whether this very derivation is stored already."""
        return bool(self.stored_as)


@dataclass(frozen=True)
class DerivedStored:
    """What was stored: the project revision, the derivation and its table."""

    revision: int
    derivation: str = ""
    table: str = ""
    superseded: str = ""


def law_named(name: str) -> Law:
    """Return a law by its name; DocumentError with what is near."""
    law = LAW_BY_NAME.get(name.strip().casefold().replace("-", " ").replace("_", " "))
    if law is None:
        raise not_found("law", name, [one.name for one in LAWS], listing="specflow derive lists the laws")
    return law


def preview_derive(store: ProjectStore, options: DeriveOptions) -> DerivePreview:
    """Apply a law to stored tables and compare the result with what is stored; nothing is stored."""
    snapshot = store.load()
    return preview_in(snapshot, project_dictionary(snapshot), options)


def preview_in(snapshot: Snapshot, dictionary: Dictionary, options: DeriveOptions) -> DerivePreview:
    """Return the preview for a snapshot that is loaded."""
    law = law_named(options.law)
    roles = _roles(snapshot, law, options)
    settings = complete_settings(law, options.settings)
    quantity = _quantity(snapshot, dictionary, law, options, settings, roles[0])
    parameter = dictionary.get(quantity.parameter)
    if parameter is None:
        raise DocumentError(f"{quantity.parameter} is no known parameter", where=options.requirement)
    request = Request(law, roles, settings, parameter, tuple(options.over), tuple(options.where))
    return preview_of(snapshot, request, quantity)


def preview_of(
    snapshot: Snapshot, request: Request, quantity: QuantityIdentity, derived: Derived | None = None
) -> DerivePreview:
    """Return the preview of a request; ``derived`` where its law was applied already."""
    derived = derived or derive_table(request)
    derivation = _derivation(request, quantity, derived)
    table = _table(snapshot, request, quantity, derived, derivation)
    known = {one.digest: one.id for one in snapshot.tables if one.digest and one.derivation}
    return DerivePreview(snapshot, request, derivation, table, derived, known.get(table.digest, ""))


def accept_derive(
    store: ProjectStore, preview: DerivePreview, *, by: str, reason: str = "", take_rest: bool = False
) -> DerivedStored:
    """Store a derivation with its table (and the supersession of what it repeats) in one transaction.

    Raises DocumentError, and stores nothing, while groups are refused (unless ``take_rest``).
    """
    check_acceptable(preview, take_rest=take_rest)
    if preview.is_unchanged:
        return DerivedStored(preview.snapshot.revision, table=preview.stored_as)
    documents = made_documents(preview, by=by, at=store.now(), reason=reason)
    table = next(one for one in documents if isinstance(one, EvidenceTable))
    revision = store.apply(
        diff(preview.snapshot, documents),
        columns={table.id: preview.derived.columns},
        by=by,
        reason=reason or f"derived {preview.request.law.name} of {', '.join(preview.derivation.inputs)}",
        expected_revision=preview.snapshot.revision,
    )
    return DerivedStored(revision, str(table.derivation), table.id, preview.replaces)


def check_acceptable(preview: DerivePreview, *, take_rest: bool) -> None:
    """Raise DocumentError while groups are refused and nobody said to take the rest."""
    refused = preview.derived.refused
    if refused and not take_rest:
        first = refused[0]
        count = f"{len(refused)} group{'s' * (len(refused) != 1)} of rows"
        raise DocumentError(
            f"{count} gave no result; nothing was stored. {'It' if len(refused) == 1 else 'The first'}: {first.why}",
            where=", ".join(filter(None, [preview.request.roles[0].table.id, first.group])),
            hint=f"{first.remedy}; or say --take-rest to store the others",
        )


def made_documents(
    preview: DerivePreview, *, by: str, at: str, reason: str = "", taken: Mapping[str, int] | None = None
) -> list[Document]:
    """Return the documents to store, with their ids. ``taken``: numbers given out already, by prefix."""
    snapshot, taken = preview.snapshot, taken or {}
    number = {
        prefix: next_number(snapshot, kind, prefix) + taken.get(prefix, 0)
        for prefix, kind in (("DV-", Derivation), ("EV-", EvidenceTable), ("SUP-", Supersession))
    }
    derivation = preview.derivation.model_copy(
        update={"id": f"DV-{number['DV-']}", "by": by, "at": at, "reason": reason}
    )
    table = preview.table.model_copy(
        update={
            "id": f"EV-{number['EV-']}",
            "derivation": derivation.id,
            "accepted_by": by,
            "accepted_at": at,
            "provisional": snapshot.project.policy.second_review or preview.table.provisional,
        }
    )
    documents: list[Document] = [derivation, table]
    if preview.replaces:
        documents.append(
            Supersession(
                id=f"SUP-{number['SUP-']}",
                earlier=preview.replaces,
                later=table.id,
                names_fail=preview.names_fail,
                reason=reason or f"derived again as {derivation.id}",
                by=by,
                at=at,
            )
        )
    return documents


def _roles(snapshot: Snapshot, law: Law, options: DeriveOptions) -> tuple[Role, ...]:
    tables = [_table_named(snapshot, name) for name in options.tables]
    if not tables:
        raise DocumentError(
            "no table is named", hint="say --from EV-3; specflow export --table evidence lists them"
        )
    said = dict(_said_role(law, place, text) for place, text in enumerate(options.values))
    arrays = snapshot.load_columns([table.id for table in tables])
    by_key = {code_key(table.id): table for table in tables}
    roles = []
    for name in law.roles:
        text = said.pop(name, "")
        name_part, _, where = text.partition(" where ")
        code, colon, column = name_part.partition(":")
        table = by_key.get(code_key(code)) if colon else None
        wanted = column.strip() if table is not None else name_part.strip()
        candidates = [table] if table is not None else tables
        table, value = _column_named(candidates, wanted, law, name)
        clauses = tuple(filter(None, (part.strip() for part in where.split(" and "))))
        roles.append(Role(name, table, arrays[table.id], value.name, clauses))
    return tuple(roles)


def _said_role(law: Law, place: int, text: str) -> tuple[str, str]:
    role, sign, name = text.partition("=")
    if sign and role.strip() in law.roles:
        return role.strip(), name.strip()
    if place < len(law.roles):
        return law.roles[place], text.strip()
    raise DocumentError(
        f"the law {law.name} reads {len(law.roles)} value column{'s' * (len(law.roles) != 1)}: {', '.join(law.roles)}",
        where=f"--value {text!r}",
    )


def _table_named(snapshot: Snapshot, name: str) -> EvidenceTable:
    table = snapshot.find(EvidenceTable, name)
    if table is None:
        known = [one.id for one in snapshot.tables]
        raise not_found("evidence table", name, known, listing="specflow export --table evidence lists them")
    gone = [one.later for one in snapshot.all(Supersession)
            if code_key(one.earlier) == code_key(table.id) and one.rows is None]  # fmt: skip
    if gone:
        raise DocumentError(f"{table.id} was superseded by {gone[-1]}", hint=f"say --from {gone[-1]}")
    if any(
        code_key(one.table) == code_key(table.id) and one.rows is None for one in snapshot.all(Withdrawal)
    ):
        raise DocumentError(f"{table.id} was withdrawn", hint="derive from a table that stands")
    return table


def _column_named(
    tables: Sequence[EvidenceTable], wanted: str, law: Law, role: str
) -> tuple[EvidenceTable, ValueColumn]:
    """Return the one value column that a name means; the only one where nothing was said."""
    key = wanted.casefold()
    everything = [(table, column) for table in tables for column in table.values]
    found = [
        (table, column)
        for table, column in everything
        if not key
        or key in (column.name.casefold(), column.header.casefold(), column.quantity.parameter.casefold())
    ]
    exact = [(table, column) for table, column in found if key and column.name.casefold() == key]
    if len(exact) == 1:
        return exact[0]
    if len(found) == 1:
        return found[0]
    there = ", ".join(f"{table.id}:{column.name}" for table, column in found or everything)
    what = f"no value column is called {wanted!r}" if not found else (
        f"{len(found)} value columns are called {wanted!r}" if wanted else f"it is not said which is the {role}"
    )  # fmt: skip
    raise DocumentError(
        what, where=f"law {law.name}, {role}", hint=f"say --value {role}=NAME; there are: {there}"
    )


def _quantity(
    snapshot: Snapshot,
    dictionary: Dictionary,
    law: Law,
    options: DeriveOptions,
    settings: Mapping[str, str],
    first: Role,
) -> QuantityIdentity:
    """Return the quantity that the result is of: as said, as the requirement has it, or that of the column read."""
    own = next(one.quantity for one in first.table.values if one.name == first.column)
    if options.requirement:
        requirement = snapshot.find(Requirement, options.requirement)
        if requirement is None:
            raise not_found("requirement", options.requirement, [one.id for one in snapshot.requirements])
        quantity = requirement.quantity
        if (
            code_key(quantity.parameter) == code_key(own.parameter)
            and law.statistic
            and not quantity.statistic
        ):
            _refuse_hidden(requirement, dictionary, law, settings)
        return quantity
    key = dictionary.resolve(options.gives).key if options.gives else _usual(law, own.parameter)
    parameter = dictionary.get(key)
    if parameter is None:
        raise DocumentError(f"{key} is no known parameter", hint="say --gives PARAMETER")
    same = code_key(key) == code_key(own.parameter)
    named = law.statistic.format(**settings) if law.statistic else (own.statistic if same else "")
    if not same and named not in parameter.statistics:
        named = ""
    return QuantityIdentity(
        parameter=key,
        plane=options.plane or own.plane,
        statistic=options.statistic or named,
        bandwidth_hz=own.bandwidth_hz if same else None,
        polarisation=options.polarisation or own.polarisation,
    )


def _usual(law: Law, own: str) -> str:
    """Return the parameter of a result about which nothing was said."""
    if law.keeps_parameter:
        return own
    if len(law.gives) == 1:
        return law.gives[0]
    usual = f"; usual: {', '.join(law.gives)}" if law.gives else ""
    raise DocumentError(
        f"it is not said of what parameter the result of the law {law.name} is",
        hint=f"say --gives PARAMETER, or --for REQUIREMENT{usual}",
    )


def _refuse_hidden(
    requirement: Requirement, dictionary: Dictionary, law: Law, settings: Mapping[str, str]
) -> None:
    """Refuse to call a mean, or the wrong end, a reading of a requirement that names no statistic."""
    one_side = side_of(requirement.limit.tree)
    sides = {Side.LOWER, Side.UPPER} if one_side is None else {one_side}
    parameter = dictionary.get(requirement.quantity.parameter)
    better = parameter.better if parameter is not None else Better.NEITHER
    said = settings.get("side", "")
    if said == "as the parameter":
        said = {Better.HIGHER: "lowest", Better.LOWER: "highest"}.get(better, "both")
    enough = {"lowest": {Side.LOWER}, "highest": {Side.UPPER}, "both": {Side.LOWER, Side.UPPER}}.get(
        said, set()
    )
    if law.name == "worst" and sides <= enough:
        return
    if law.name == "worst":
        raise DocumentError(
            f"{requirement.id} ({requirement.limit.text}) is not shown by the {said} reading alone",
            hint="say --set side=both; or leave it to the raw readings, which are judged point by point",
        )
    raise DocumentError(
        f"{requirement.id} names no statistic, so it holds for every reading; the {law.name} does not show that",
        hint="name the statistic in the requirement, or derive the worst",
    )


def _derivation(request: Request, quantity: QuantityIdentity, derived: Derived) -> Derivation:
    tables = {role.table.id: role.table for role in request.roles}
    return Derivation(
        id="DV-0",
        law=request.law.name,
        law_version=request.law.version,
        inputs=tuple(tables),
        digests=tuple(table.digest for table in tables.values()),
        columns=tuple(
            InputColumn(role=role.name, table=role.table.id, column=role.column, where=role.where)
            for role in request.roles
        ),
        over=request.over,
        where=request.where,
        settings=tuple(SettingSaid(name=name, text=text) for name, text in request.settings.items()),
        gives=quantity,
        unit=derived.unit,
    )


def _table(
    snapshot: Snapshot, request: Request, quantity: QuantityIdentity, derived: Derived, derivation: Derivation
) -> EvidenceTable:
    base = request.roles[0].table
    column = next(one for one in base.values if one.name == request.roles[0].column)
    how = derivation.words
    value = _value_column(column, derived, quantity, how)
    requirement = snapshot.find(Requirement, base.requirement)
    keeps = requirement is not None and code_key(requirement.quantity.parameter) == code_key(
        quantity.parameter
    )
    told = derivation.model_dump(
        mode="json", include={"law", "columns", "over", "where", "settings", "gives"}
    )
    table = base.model_copy(
        update={
            "id": "EV-0",
            "title": how[:200],
            "rows": derived.columns.conditions.size,
            "values": (value,),
            "conditions": _conditions(base, derived),
            "requirement": base.requirement if keeps else None,
            "table_key": "D-" + digest([told, base.table_key])[:16],
            "mapping": None,
            "mapping_revision": None,
            "left_out": (),
            "provisional": any(role.table.provisional for role in request.roles),
            "derivation": None,
            "covers": derived.covers,
            "revision": 1,
        }
    )
    arrays = [[one.role, one.name, one.unit, one.labels, one.sha256] for one in pack(table, derived.columns)]
    content = [arrays, told, list(derivation.digests), derivation.law_version]
    return table.model_copy(update={"digest": digest(content)})


def _conditions(base: EvidenceTable, derived: Derived) -> tuple[ConditionColumn, ...]:
    """Return the condition columns of the result: those of the input that it keeps, and what the law added."""
    known = {one.dimension: one for one in base.conditions}
    columns = derived.columns.conditions
    found = []
    for name in columns.names:
        kind: Literal["numeric", "text"] = "numeric" if name in columns.numeric else "text"
        unit = columns.units.get(name, "")
        added = ConditionColumn(dimension=name, kind=kind, unit=unit, stated_by="the law")
        found.append(known[name].model_copy(update={"unit": unit}) if name in known else added)
    return tuple(found)


def _value_column(column: ValueColumn, derived: Derived, quantity: QuantityIdentity, how: str) -> ValueColumn:
    """Return the value column of the result: at the place of the column that was read, with what was done to it."""
    return column.model_copy(
        update={
            "name": derived.name,
            "quantity": quantity,
            "unit": derived.unit or "1",
            "unit_from": f"the law, from {column.unit}",
            "uncertainty_from": f"{derived.u_rule}; {column.uncertainty_from}" if derived.u_rule else "",
            "coverage_factor": column.coverage_factor if derived.u_rule else None,
            "conversions": (*column.conversions, how),
        }
    )


def repeated(preview: DerivePreview, earlier: Derivation, replaces: str, names_fail: str) -> DerivePreview:
    """Return a preview that takes the place of an earlier derivation and its table."""
    derivation = preview.derivation.model_copy(update={"again_of": earlier.id})
    return replace(preview, derivation=derivation, replaces=replaces, names_fail=names_fail)
