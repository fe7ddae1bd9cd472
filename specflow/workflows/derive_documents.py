"""The documents of a derivation: what was done, and the evidence table of its result."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import date
from typing import Literal

from specflow.derive import Derived, Request
from specflow.exchange import digest
from specflow.model.base import code_key
from specflow.model.derivation import Derivation, InputColumn, SettingSaid
from specflow.model.evidence import ConditionColumn, EvidenceTable, HowRead, LeftOut, ValueColumn
from specflow.model.parameter import QuantityIdentity
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.store.columns import pack


def derivation_document(request: Request, quantity: QuantityIdentity, derived: Derived) -> Derivation:
    """Return the derivation, with a provisional id."""
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


def table_document(
    snapshot: Snapshot, request: Request, quantity: QuantityIdentity, derived: Derived, derivation: Derivation
) -> EvidenceTable:
    """Return the table of the result, with a provisional id and nobody who accepted it."""
    base = request.roles[0].table
    tables = list({role.table.id: role.table for role in request.roles}.values())
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
            "left_out": tuple(
                LeftOut(sheet=base.sheet, cell="", text=one.group or "all rows", reason=one.why)
                for one in derived.refused
            ),
            "provisional": any(role.table.provisional for role in request.roles),
            "performed_on": _day(tables),
            "equipment": tuple(dict.fromkeys(one for table in tables for one in table.equipment)),
            "corrections": tuple(dict.fromkeys(one for table in tables for one in table.corrections)),
            "how_read": HowRead(),
            "stated": (),
            "peaks": None,
            "derivation": None,
            "covers": derived.covers,
            "revision": 1,
        }
    )
    arrays = [[one.role, one.name, one.unit, one.labels, one.sha256] for one in pack(table, derived.columns)]
    content = [arrays, told, list(derivation.digests), derivation.law_version]
    return table.model_copy(update={"digest": digest(content)})


def _day(tables: Sequence[EvidenceTable]) -> date | None:
    """Return the earliest day on which the inputs were taken; None where one of them does not say it."""
    days = [table.performed_on for table in tables if table.performed_on is not None]
    return min(days) if days and len(days) == len(tables) else None


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
    spread = "; ".join(filter(None, [derived.u_rule, column.uncertainty_from])) if derived.u_rule else ""
    return column.model_copy(
        update={
            "name": derived.name,
            "quantity": quantity,
            "unit": derived.unit or "1",
            "unit_from": f"the law, from {column.unit}",
            "uncertainty_from": spread,
            "coverage_factor": column.coverage_factor if derived.u_rule else None,
            "conversions": (*column.conversions, how),
        }
    )
