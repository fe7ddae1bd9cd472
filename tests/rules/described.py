"""A project from a short description: what the cases of the rules are written in. See ``cases/README.md``."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import date
from typing import Any

import numpy as np

from specflow.conditions import find_dimension, make_conditions_set, parse_dimension
from specflow.limits import parse_limit
from specflow.model.base import Document
from specflow.model.block import Block, Item
from specflow.model.budget import Allocation, Budget
from specflow.model.columns import Columns, TextColumn
from specflow.model.conditions import ConditionsSet
from specflow.model.correction import Correction
from specflow.model.decision import Approval, DeclaredSplit, Disposition, Nonconformance, Waiver
from specflow.model.declared import DeclaredValue
from specflow.model.derivation import Derivation
from specflow.model.evidence import (
    ConditionColumn,
    EvidenceColumns,
    EvidenceFile,
    EvidenceTable,
    ItemChange,
    Supersession,
    ValueArrays,
    ValueColumn,
    Withdrawal,
)
from specflow.model.finding import Finding
from specflow.model.parameter import QuantityIdentity
from specflow.model.project import Project
from specflow.model.requirement import Activity, Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import Dictionary, load_dictionary
from specflow.rules import run_rules
from specflow.units import Reading, converter, parse_quantity, parse_reading, parse_unit
from specflow.verification import evaluate
from specflow.workflows.budget_standing import budget_standings
from tests.builders import a_snapshot

Fields = Mapping[str, Any]
_IDENTITY = ("parameter", "plane", "statistic", "bandwidth", "polarisation")

#: Sections whose rows are documents field by field, with the fields that are filled in where a row leaves them out.
_PLAIN: Mapping[str, tuple[type[Document], Callable[[Fields], Fields]]] = {
    "blocks": (Block, lambda row: {"name": row["id"], "tier": "block"}),
    "items": (Item, lambda row: {"serial": row["id"], "hardware_type": "qualification"}),
    "allocations": (Allocation, lambda row: {"id": f"{row['parent']}/{row['child']}"}),
    "budgets": (Budget, lambda row: {"law": "cascade"}),
    "corrections": (
        Correction,
        lambda row: {"points": [{"frequency_hz": 1e9, "added": 3.0}, {"frequency_hz": 40e9, "added": 3.0}]},
    ),
    "changes": (ItemChange, lambda row: {"description": "changed"}),
    "supersessions": (Supersession, lambda row: {"id": f"{row['earlier']}/{row['later']}"}),
    "derivations": (
        Derivation,
        lambda row: {"digests": [""] * len(row["inputs"]), "law": "worst", "unit": "dB"},
    ),
    "withdrawals": (Withdrawal, lambda row: {"id": f"{row['table']}/out"}),
    "nonconformances": (Nonconformance, lambda row: {"description": "misses its limit"}),
    "waivers": (Waiver, lambda row: {"reason": "invented"}),
    "dispositions": (
        Disposition,
        lambda row: {"reason": "invented", "by": "A. Invented", "on": "2026-05-20"},
    ),
    "approvals": (Approval, lambda row: {"id": f"{row['requirement']}/board", "by": "A. Invented"}),
    "splits": (DeclaredSplit, lambda row: {"id": f"{row['requirement']}/split", "reason": "invented"}),
}
SECTIONS = (*_PLAIN, "as_of", "project", "conditions", "declared", "requirements", "activities", "evidence")


def findings_of(description: Fields, *, gate: str = "") -> list[Finding]:
    """Return what the rules report about a described project."""
    snapshot, as_of = described(description)
    dictionary = load_dictionary()
    results = evaluate(snapshot, dictionary, as_of=as_of)
    results = replace(results, budgets=budget_standings(snapshot, dictionary))
    return run_rules(snapshot, results, dictionary, gate=gate)


def described(description: Fields) -> tuple[Snapshot, date]:
    """Return the project that a description means, and the date of judgement."""
    unknown = sorted(set(description) - set(SECTIONS))
    if unknown:
        raise ValueError(f"unknown sections {unknown}; there are {sorted(SECTIONS)}")
    dictionary = load_dictionary()
    documents: list[Document] = [
        Project.model_validate({"name": "Invented"} | description.get("project", {}))
    ]
    for section, (kind, defaults) in _PLAIN.items():
        documents.extend(
            kind.model_validate({**defaults(row), **row}) for row in description.get(section, ())
        )
    documents.extend(_conditions(name, what) for name, what in description.get("conditions", {}).items())
    documents.extend(_declared(name, text) for name, text in description.get("declared", {}).items())
    requirements = [_requirement(row, dictionary) for row in description.get("requirements", ())]
    tables = [_table(row, dictionary) for row in description.get("evidence", ())]
    documents.extend(requirements)
    documents.extend(_activities(description.get("activities"), requirements))
    documents.extend(one for table in tables for one in (table.file, table.document))
    columns = {table.document.id: table.columns for table in tables}
    return a_snapshot(*documents, columns=columns), description.get("as_of", date(2026, 6, 1))


def _conditions(name: str, what: Sequence[str] | Fields) -> ConditionsSet:
    """Read a set: a list of dimensions as people type them, or those with a combination and exclusions."""
    fields: Fields = what if isinstance(what, Mapping) else {"dimensions": what}
    how = fields.get("combination", "")
    dimensions = [parse_dimension(text, corners=how == "corners") for text in fields["dimensions"]]
    if "unexpanded" in fields:  # a set that a loader would refuse: as an older project may still hold it
        made = make_conditions_set(name, dimensions)
        return ConditionsSet.model_validate({**made.model_dump(), **fields["unexpanded"]})
    return make_conditions_set(name, dimensions, combination=how, exclusions=fields.get("exclusions", ""))


def _declared(name: str, text: str) -> DeclaredValue:
    quantity = parse_quantity(str(text))
    return DeclaredValue(id=name, name=name, value=float(quantity.value), unit=str(quantity.unit))


def _identity(row: Fields, parameter: str) -> dict[str, Any]:
    fields = {name: row[name] for name in _IDENTITY if name in row and name != "bandwidth"}
    if "bandwidth" in row:
        fields["bandwidth_hz"] = _hertz(row["bandwidth"])
    return fields | {"parameter": parameter}


def _hertz(text: str) -> float:
    quantity = parse_quantity(text)
    return float(converter(quantity.unit, parse_unit("Hz"))(float(quantity.value)))


def _requirement(row: Fields, dictionary: Dictionary) -> Requirement:
    parameter = dictionary.get(row["parameter"])
    limit = parse_limit(
        str(row["limit"]), parameter=parameter, unit_hint=parameter.unit if parameter is not None else ""
    )
    rest = {name: value for name, value in row.items() if name not in (*_IDENTITY, "limit")}
    fields = {"title": row["id"], "quantity": _identity(row, row["parameter"]), "limit": limit}
    return Requirement.model_validate(fields | rest)


def _activities(given: Iterable[Fields] | None, requirements: Sequence[Requirement]) -> list[Activity]:
    """Return the activities given; where the section is left out, every requirement has one planned test."""
    if given is None:
        return [
            Activity(id=f"{one.id}/A1", requirement=one.id, requirement_revision=one.revision, tier=one.tier)
            for one in requirements
        ]
    return [
        Activity.model_validate({"id": f"{row['requirement']}/A{n}", **row}) for n, row in enumerate(given, 1)
    ]


@dataclass(frozen=True)
class DescribedTable:
    """An evidence table with its file and arrays."""

    file: EvidenceFile
    document: EvidenceTable
    columns: EvidenceColumns


def _table(row: Fields, dictionary: Dictionary) -> DescribedTable:
    """Read a table: rows as text, columns between bars, units in square brackets; U is meant at k = 2."""
    headers, cells = _grid(row["rows"])
    named = dict(zip(headers, cells, strict=True))
    size = len(cells[0])
    conditions = {one: find_dimension(_split(one)[0]) for one in headers}
    values = [one for one in headers if dictionary.get(_split(one)[0]) is not None and one != "U"]
    beside = [one["name"] for one in row.get("stated", ())]
    known = ("item", "date", "U", *values, *beside)
    stray = [one for one in headers if one not in known and conditions[one] is None]
    if stray:
        raise ValueError(f"{row['table']}: {stray} are no parameters and no conditions")
    arrays = {one: _arrays(named[one], named.get("U")) for one in values}
    items = named.get("item", [row.get("item", "")] * size)
    dates = TextColumn.of(named["date"]) if "date" in named else None
    spoken = {
        one: dimension.name
        for one, dimension in conditions.items()
        if dimension is not None and one not in (*values, *beside)
    }
    columns = EvidenceColumns(
        _condition_columns(spoken, named, size),
        {_split(one)[0]: arrays[one] for one in values},
        np.arange(2, size + 2, dtype=np.int32),
        TextColumn.of(items),
        dates,
        {name: TextColumn.of(named[name]) for name in beside},
    )
    file = EvidenceFile(
        id=f"F-{row['table']}",
        name=f"{row['table']}.xlsx",
        sha256="0" * 64,
        size=1,
        received_at="2026-05-02T00:00:00Z",
        kind=row.get("kind", "measurement"),
    )
    return DescribedTable(file, _table_document(row, file, size, values, spoken, headers), columns)


def _table_document(
    row: Fields,
    file: EvidenceFile,
    size: int,
    values: Sequence[str],
    spoken: Mapping[str, str],
    headers: Sequence[str],
) -> EvidenceTable:
    taken = (*_IDENTITY, "table", "rows", "item", "spectrum", "kind")
    rest = {name: value for name, value in row.items() if name not in taken}
    if "date" not in headers:
        rest = {"performed_on": "2026-05-01"} | rest
    columns = [
        ValueColumn(
            name=_split(one)[0],
            quantity=QuantityIdentity.model_validate(_identity(row, _split(one)[0])),
            unit=_split(one)[1],
            unit_from="header",
            column=headers.index(one) + 1,
            spectrum=row.get("spectrum", "unknown"),
        )
        for one in values
    ]
    stated = [
        ConditionColumn(dimension=name, kind="numeric" if _split(one)[1] else "text", unit=_split(one)[1])
        for one, name in spoken.items()
    ]
    fields = {
        "id": row["table"],
        "file": file.id,
        "sheet": "Results",
        "rows": size,
        "accepted_by": "A. Invented",
    }
    return EvidenceTable.model_validate(fields | {"values": columns, "conditions": stated} | rest)


def _grid(text: str) -> tuple[list[str], list[list[str]]]:
    """Return headers and columns of a text table; lines between them that are only dashes are left out."""
    lines = [[cell.strip() for cell in line.split("|")] for line in text.strip().splitlines()]
    lines = [line for line in lines if any(cell.strip("-") for cell in line)]
    return lines[0], [list(column) for column in zip(*lines[1:], strict=True)]


def _split(header: str) -> tuple[str, str]:
    name, _, unit = header.partition("[")
    return name.strip(), unit.strip(" ]")


def _arrays(cells: Sequence[str], expanded: Sequence[str] | None) -> ValueArrays:
    readings = [parse_reading(cell) for cell in cells]
    low = np.array([one.lo if isinstance(one, Reading) else np.nan for one in readings])
    high = np.array([one.hi if isinstance(one, Reading) else np.nan for one in readings])
    u = None if expanded is None else np.array([float(cell) / 2 if cell else np.nan for cell in expanded])
    return ValueArrays(low, low if np.array_equal(low, high, equal_nan=True) else high, u)


def _condition_columns(spoken: Mapping[str, str], named: Mapping[str, Sequence[str]], size: int) -> Columns:
    numeric: dict[str, Any] = {}
    text: dict[str, TextColumn] = {}
    units: dict[str, str] = {}
    for header, name in spoken.items():
        unit = _split(header)[1]
        if not unit:
            text[name] = TextColumn.of(named[header])
            continue
        numeric[name] = np.array([float(cell) if cell else np.nan for cell in named[header]])
        units[name] = unit
    return Columns(size, numeric, text, units)
