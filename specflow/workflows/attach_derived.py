"""What is derived from raw tables as they come in: planned with the preview, stored in the same transaction."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

from specflow.derive import Derived, Request, Role, complete_settings, derive_table
from specflow.errors import SpecflowError
from specflow.importers.measured.derivation_plan import DerivationPlan
from specflow.importers.measured.mapping_parts import DeriveMapping
from specflow.importers.measurements import MeasuredTable, Measurements
from specflow.model.base import Document, code_key
from specflow.model.derivation import Derivation
from specflow.model.evidence import EvidenceColumns, EvidenceTable, Supersession, Withdrawal
from specflow.model.parameter import QuantityIdentity
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary
from specflow.workflows.derive import DerivePreview, law_named, made_documents, preview_of, repeated
from specflow.workflows.derive_request import DeriveOptions, request_of
from specflow.workflows.derived_uncertainty import with_register


@dataclass(frozen=True)
class PlannedTable:
    """A plan with what its law gave; ``failure`` says why it gave nothing. ``stored_as``: where exactly this stands."""

    plan: DerivationPlan
    request: Request | None = None
    derived: Derived | None = None
    failure: str = ""
    stored_as: str = ""

    @property
    def is_new(self) -> bool:
        """Whether it gives a table that is not stored yet."""
        return self.derived is not None and not self.stored_as

    def rooted_in(self, snapshot: Snapshot, table: EvidenceTable) -> DerivePreview:
        """Return the preview with the raw table under its final id."""
        assert self.request is not None and self.derived is not None
        roles = tuple(Role(one.name, table, one.columns, one.column, one.where) for one in self.request.roles)
        request = replace(self.request, roles=roles)
        return preview_of(snapshot, request, self.plan.quantity, self.derived)


Planned = Mapping[int, Sequence[PlannedTable]]


def planned_tables(
    snapshot: Snapshot, dictionary: Dictionary, measurements: Measurements, known: Mapping[int, str]
) -> Planned:
    """Apply the plans of all tables of a file, by position of the table; ``known`` tables are stored under an id."""
    return {
        place: [
            *(_planned(snapshot, dictionary, table, plan, known.get(place, "")) for plan in table.plans),
            *(_asked(snapshot, dictionary, table, entry, known.get(place, "")) for entry in table.asked),
        ]
        for place, table in enumerate(measurements.tables)
        if (table.plans or (table.asked and table.document)) and not _is_gone(snapshot, known.get(place, ""))
    }


def _planned(
    snapshot: Snapshot, dictionary: Dictionary, table: MeasuredTable, plan: DerivationPlan, stored: str
) -> PlannedTable:
    parameter = dictionary.get(plan.quantity.parameter)
    document = snapshot.find(EvidenceTable, stored) if stored else table.document
    if parameter is None or document is None or table.columns is None:
        return PlannedTable(plan, failure=f"{plan.quantity.parameter} is no known parameter")
    try:
        law = law_named(plan.law)
        roles = tuple(Role(role, document, table.columns, column) for role, column in plan.values)
        over = (plan.over,) if plan.over else ()
        request = Request(law, roles, complete_settings(law, plan.settings), parameter, over)
        derived = with_register(snapshot, request, derive_table(request), plan.quantity)
    except SpecflowError as error:
        return PlannedTable(plan, failure=f"{error.message} ({error.hint})" if error.hint else error.message)
    return _compared(snapshot, PlannedTable(plan, request, derived), document if stored else None)


def _compared(snapshot: Snapshot, found: PlannedTable, stored: EvidenceTable | None) -> PlannedTable:
    """Say where exactly this is stored already, for a raw table that is."""
    if stored is None:
        return found
    return replace(found, stored_as=found.rooted_in(snapshot, stored).stored_as)


def _asked(
    snapshot: Snapshot, dictionary: Dictionary, table: MeasuredTable, entry: DeriveMapping, stored: str
) -> PlannedTable:
    """Apply a law that the mapping of a table asks for."""
    document = snapshot.find(EvidenceTable, stored) if stored else table.document
    quantity = QuantityIdentity(parameter=entry.gives or entry.law)
    plan = DerivationPlan(entry.law, (), quantity, entry.over, "the mapping", ", ".join(entry.values))
    if document is None or table.columns is None:
        return PlannedTable(plan, failure="the table gives no evidence")
    options = DeriveOptions(
        entry.law,
        (),
        entry.values,
        (entry.over,) if entry.over else (),
        entry.where,
        entry.settings,
        entry.gives,
        entry.plane,
        entry.statistic,
        entry.polarisation,
        entry.requirement,
    )
    try:
        request, quantity = request_of(
            snapshot, dictionary, options, [document], {document.id: table.columns}
        )
        derived = derive_table(request)
    except SpecflowError as error:
        return PlannedTable(plan, failure=f"{error.message} ({error.hint})" if error.hint else error.message)
    values = tuple((role.name, role.column) for role in request.roles)
    plan = replace(plan, values=values, quantity=quantity, shown=", ".join(column for _, column in values))
    return _compared(snapshot, PlannedTable(plan, request, derived), document if stored else None)


def _is_gone(snapshot: Snapshot, code: str) -> bool:
    """Whether a stored table was replaced or withdrawn as a whole: nothing new is derived from it."""
    if not code:
        return False
    key = code_key(code)
    replaced = any(code_key(one.earlier) == key for one in snapshot.all(Supersession) if one.rows is None)
    return replaced or any(code_key(one.table) == key for one in snapshot.all(Withdrawal) if one.rows is None)


@dataclass(frozen=True, slots=True)
class Acceptance:
    """Who accepts, when, why, and which fail is resolved by what replaces it."""

    by: str
    at: str
    reason: str = ""
    resolves: str = ""


def derived_documents(
    snapshot: Snapshot,
    planned: Planned,
    roots: Mapping[int, EvidenceTable],
    replaced: Mapping[int, Sequence[str]],
    taken: Mapping[str, int],
    acceptance: Acceptance,
) -> tuple[list[Document], dict[str, EvidenceColumns]]:
    """Return the derivations and derived tables to store, and their arrays by id.

    ``roots`` are the raw tables under their final ids, by position; ``replaced`` the earlier raw tables that they take
    the place of as a whole: what the same law made of those is replaced, too. ``taken`` counts, by prefix, the ids
    given out already.
    """
    documents: list[Document] = []
    columns: dict[str, EvidenceColumns] = {}
    counts = dict(taken)
    for place, tables in planned.items():
        for one in tables:
            if not one.is_new or place not in roots or one.derived is None:
                continue
            preview = one.rooted_in(snapshot, roots[place])
            earlier = _same_of_earlier(snapshot, preview.derivation, replaced.get(place, ()))
            if earlier is not None:
                preview = repeated(preview, earlier[0], earlier[1].id, acceptance.resolves)
            made = made_documents(
                preview, by=acceptance.by, at=acceptance.at, reason=acceptance.reason, taken=counts
            )
            for document in made:
                prefix = str(getattr(document, "id", "")).split("-")[0] + "-"
                counts[prefix] = counts.get(prefix, 0) + 1
                if isinstance(document, EvidenceTable):
                    columns[document.id] = one.derived.columns
            documents += made
    return documents, columns


def _same_of_earlier(
    snapshot: Snapshot, derivation: Derivation, earlier: Sequence[str]
) -> tuple[Derivation, EvidenceTable] | None:
    """The derivation by the same law of the same quantity from a table that is replaced, with its table."""
    keys = set(map(code_key, earlier))
    for one in snapshot.all(Derivation):
        same = one.law == derivation.law and one.gives == derivation.gives
        if same and set(map(code_key, one.inputs)) <= keys:
            for table in snapshot.tables:
                is_its = table.derivation and code_key(table.derivation) == code_key(one.id)
                if is_its and not _is_gone(snapshot, table.id):
                    return one, table
    return None


def planned_result(one: PlannedTable) -> str:
    """Say what a plan gives: how many values, where they are stored already, or why there are none."""
    if one.derived is None:
        return f"not derived: {one.failure}"
    if one.stored_as:
        return f"stored as {one.stored_as}"
    refused = [f"not for {lost.group or 'some rows'}: {lost.why}" for lost in one.derived.refused]
    size = one.derived.columns.conditions.size
    return "; ".join([f"{size} value{'s' * (size != 1)}", *refused, *one.derived.notes])
