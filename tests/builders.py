"""Builders: one a noun, all defaults valid, so that a test says only what matters to it. All data here is invented."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np

from specflow.exchange import payload_text
from specflow.model.base import Document, code_key
from specflow.model.block import Block, Item, Tier
from specflow.model.budget import Budget, BudgetLine
from specflow.model.change import Change
from specflow.model.columns import Columns, TextColumn
from specflow.model.conditions import ConditionsSet, Dimension
from specflow.model.decision import Waiver
from specflow.model.declared import DeclaredValue
from specflow.model.draft import Draft
from specflow.model.evidence import (
    ConditionColumn,
    EvidenceColumns,
    EvidenceFile,
    EvidenceTable,
    ValueArrays,
    ValueColumn,
)
from specflow.model.expression import Number
from specflow.model.limit import Between, Bound, Limit, Side
from specflow.model.nouns import NOUN_BY_DOCUMENT
from specflow.model.parameter import Better, Parameter, QuantityIdentity
from specflow.model.project import Project
from specflow.model.requirement import Activity, Requirement
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import CloseOut, Compliance, Label, RequirementStatus, Standing, Verdict


def a_project(**fields: Any) -> Project:
    """Return a project."""
    return Project(**{"name": "Invented terminal", "invented": True} | fields)


def a_parameter(key: str = "gain", **fields: Any) -> Parameter:
    """Return a parameter of the dictionary."""
    return Parameter(
        **{
            "key": key,
            "title": key.title(),
            "group": "gain",
            "unit": "dB",
            "better": Better.HIGHER,
            "log_factor": 10,
        }
        | fields
    )


def a_block(id: str = "LNA", **fields: Any) -> Block:
    """Return a block."""
    return Block(**{"id": id, "name": id, "tier": Tier.BLOCK} | fields)


def an_item(id: str = "LNA-1", **fields: Any) -> Item:
    """Return a specimen of the block LNA."""
    return Item(**{"id": id, "block": "LNA", "serial": f"SN-{id}"} | fields)


def a_quantity(parameter: str = "gain", **fields: Any) -> QuantityIdentity:
    """Return a quantity identity."""
    return QuantityIdentity(parameter=parameter, **fields)


def at_least(value: float | str, unit: str = "dB", **fields: Any) -> Limit:
    """Return a lower limit; ``strict`` goes to the bound."""
    bound = Bound(
        side=Side.LOWER, value=Number(text=str(value)), unit=unit, strict=fields.pop("strict", False)
    )
    return Limit(**{"text": f">= {value} {unit}", "tree": bound, "unit": unit} | fields)


def at_most(value: float | str, unit: str = "dB", **fields: Any) -> Limit:
    """Return an upper limit; ``strict`` goes to the bound."""
    bound = Bound(
        side=Side.UPPER, value=Number(text=str(value)), unit=unit, strict=fields.pop("strict", False)
    )
    return Limit(**{"text": f"<= {value} {unit}", "tree": bound, "unit": unit} | fields)


def between(low: float | str, high: float | str, unit: str = "dB", **fields: Any) -> Limit:
    """Return a two-sided limit."""
    tree = Between(lower=Number(text=str(low)), upper=Number(text=str(high)), unit=unit)
    return Limit(**{"text": f"{low}..{high} {unit}", "tree": tree, "unit": unit} | fields)


def a_requirement(id: str = "R-1", **fields: Any) -> Requirement:
    """Return a requirement: gain of the LNA of at least 20 dB, over the conditions set CS (``a_conditions_set``)."""
    return Requirement(
        **{
            "id": id,
            "title": f"Requirement {id}",
            "tier": Tier.BLOCK,
            "block": "LNA",
            "quantity": a_quantity(),
            "limit": at_least(20),
            "conditions": "CS",
        }
        | fields
    )


def an_activity(requirement: str = "R-1", **fields: Any) -> Activity:
    """Return a planned qualification test of a requirement."""
    return Activity(**{"id": f"{requirement}/test", "requirement": requirement, "tier": Tier.BLOCK} | fields)


def a_dimension(name: str = "frequency", unit: str = "GHz", **fields: Any) -> Dimension:
    """Return a dimension of three frequencies, to be set within 10 MHz."""
    if not {"values", "words", "span", "need"} & fields.keys():
        fields = {"values": (27.5, 28.75, 30.0), "tolerance": 0.01} | fields
    return Dimension(name=name, unit=unit, **fields)


def a_conditions_set(id: str = "CS", *dimensions: Dimension, **fields: Any) -> ConditionsSet:
    """Return a conditions set; by default three frequencies."""
    return ConditionsSet(**{"id": id, "dimensions": dimensions or (a_dimension(),)} | fields)


def some_columns(units: Mapping[str, str] | None = None, **values: Sequence[Any]) -> Columns:
    """Return condition columns from lists: numbers (None is unstated) or words."""
    numeric: dict[str, Any] = {}
    text: dict[str, TextColumn] = {}
    for name, column in values.items():
        if all(isinstance(one, str) or one is None for one in column) and any(column):
            text[name] = TextColumn.of(list(column))
        else:
            numeric[name] = np.array([np.nan if one is None else float(one) for one in column])
    size = max((len(column) for column in values.values()), default=0)
    known = {"frequency": "GHz", "temperature_ambient": "°C", "supply_voltage": "V"} | dict(units or {})
    return Columns(size, numeric, text, {name: known[name] for name in numeric if name in known})


def an_evidence_file(id: str = "F-1", **fields: Any) -> EvidenceFile:
    """Return a received file."""
    return EvidenceFile(
        **{
            "id": id,
            "name": f"{id}.xlsx",
            "sha256": "0" * 64,
            "size": 1,
            "received_at": "2026-05-01T00:00:00Z",
        }
        | fields
    )


def a_value_column(name: str = "Gain", **fields: Any) -> ValueColumn:
    """Return a column of gain values in dB."""
    return ValueColumn(
        **{
            "name": name,
            "quantity": a_quantity(),
            "unit": "dB",
            "unit_from": "header",
            "column": 3,
            "header": name,
        }
        | fields
    )


def an_evidence_table(id: str = "T-1", **fields: Any) -> EvidenceTable:
    """Return an accepted table of gain readings of the LNA (see ``some_evidence`` for its arrays)."""
    return EvidenceTable(
        **{
            "id": id,
            "file": "F-1",
            "sheet": "Gain",
            "block": "LNA",
            "rows": 3,
            "values": (a_value_column(),),
            "conditions": (ConditionColumn(dimension="frequency", kind="numeric", unit="GHz", column=1),),
            "accepted_by": "A. Invented",
            "accepted_at": "2026-05-02T00:00:00Z",
            "performed_on": "2026-05-01",
        }
        | fields
    )


def some_evidence(
    values: Sequence[float] | Mapping[str, Sequence[float]] = (21.0, 21.0, 21.0),
    *,
    high: Sequence[float] | None = None,
    u: Sequence[float] | float | None = None,
    items: Sequence[str | None] | str = "LNA-1",
    conditions: Columns | None = None,
    dates: Sequence[str] | None = None,
) -> EvidenceColumns:
    """Return the arrays of a table: gain at 27.5, 28.75 and 30 GHz on one item unless said otherwise.

    ``high`` makes readings intervals; ``u`` is one standard uncertainty or one a row.
    """
    named = values if isinstance(values, Mapping) else {"Gain": values}
    size = len(next(iter(named.values())))
    if conditions is None:
        conditions = some_columns(frequency=[27.5, 28.75, 30.0][:size])
    names = [items] * size if isinstance(items, str) else list(items)
    spread = None if u is None else np.broadcast_to(np.asarray(u, np.float64), (size,)).copy()
    arrays = {}
    for name, column in named.items():
        low = np.array(column, np.float64)
        arrays[name] = ValueArrays(low, low if high is None else np.array(high, np.float64), spread)
    return EvidenceColumns(
        conditions,
        arrays,
        np.arange(2, size + 2, dtype=np.int32),
        TextColumn.of(names),
        None if dates is None else TextColumn.of(dates),
    )


def a_snapshot(*documents: Document, columns: Mapping[str, EvidenceColumns] | None = None) -> Snapshot:
    """Return a snapshot of the documents, with a project when none is given. ``columns`` are the arrays by table."""
    if not any(isinstance(document, Project) for document in documents):
        documents = (a_project(), *documents)
    by_noun: dict[str, dict[str, Document]] = {}
    for document in documents:
        noun = NOUN_BY_DOCUMENT[type(document)]
        by_noun.setdefault(noun.name, {})[code_key(str(getattr(document, noun.id_field)))] = document
    held = {code_key(name): arrays for name, arrays in (columns or {}).items()}
    return Snapshot(1, by_noun, lambda tables: {table: held[code_key(table)] for table in tables})


def adding(*documents: Document) -> list[Change]:
    """Return the changes that add documents."""
    return [_change("add", document, after=payload_text(document)) for document in documents]


def editing(before: Document, **fields: Any) -> Change:
    """Return the change that gives fields of a document other values."""
    after = type(before).model_validate(before.model_dump() | fields)
    return _change("edit", before, before=payload_text(before), after=payload_text(after))


def removing(before: Document) -> Change:
    """Return the change that removes a document."""
    return _change("remove", before, before=payload_text(before))


def _change(action: str, document: Document, **texts: str) -> Change:
    noun = NOUN_BY_DOCUMENT[type(document)]
    code = getattr(document, noun.id_field)
    revision = None if action == "add" else getattr(document, "revision", 1)
    return Change.model_validate(
        {"noun": noun.name, "id": code, "action": action, "base_revision": revision} | texts
    )


def a_declared_value(id: str = "P_rated", **fields: Any) -> DeclaredValue:
    """Return a declared rated power of 54 dBm."""
    return DeclaredValue(**{"id": id, "name": id, "value": 54.0, "unit": "dBm"} | fields)


def a_waiver(id: str = "W-1", requirement: str = "R-1", **fields: Any) -> Waiver:
    """Return a requested waiver that runs out at the end of 2026."""
    return Waiver(
        **{
            "id": id,
            "requirement": requirement,
            "permitted": ">= 19 dB",
            "reason": "invented",
            "expires_on": "2026-12-31",
        }
        | fields
    )


def a_budget(id: str = "B-1", **fields: Any) -> Budget:
    """Return a gain budget of two blocks for the requirement R-1."""
    lines = (
        a_budget_line(1, "LNA", "gain", 20.0),
        a_budget_line(2, "MIX", "gain", -7.0),
    )
    return Budget(
        **{"id": id, "requirements": ("R-1",), "quantity": a_quantity(), "law": "cascade", "lines": lines}
        | fields
    )


def a_budget_line(
    position: int = 1, block: str = "LNA", parameter: str = "gain", value: Any = 20.0, **fields: Any
) -> BudgetLine:
    """Return a line of a budget, in dB."""
    named = {"position": position, "block": block, "parameter": parameter, "value": value, "unit": "dB"}
    return BudgetLine(**named | fields)


def a_status(requirement: str = "R-1", **fields: Any) -> RequirementStatus:
    """Return the status of a requirement of which 3 of 3 points are proved."""
    return RequirementStatus(
        **{
            "requirement": requirement,
            "activities": (),
            "standing": {Standing.ACCEPTED: 3},
            "k": 3,
            "n": 3,
            "n_failing": 0,
            "n_missing": 0,
            "verdict": Verdict.PASS,
            "compliance": Compliance.COMPLIANT,
            "close_out": CloseOut.OPEN,
            "close_out_reason": "no approval",
            "label": Label.READY,
            "governing": None,
            "smallest_margin": None,
            "unit": "dB",
            "marginal": False,
        }
        | fields
    )


def project_workbook(path: Path, **sheets: Sequence[Mapping[str, Any]]) -> Path:
    """Write a project workbook: ``requirements=[{"ID": "R-1", ...}]`` is the sheet Requirements with these headers.

    Underscores in sheet names become blanks. Headers are the keys of all rows in the order met.
    """
    from openpyxl import Workbook

    book = Workbook()
    book.remove(book.worksheets[0])
    for name, rows in sheets.items():
        sheet = book.create_sheet(name.replace("_", " ").capitalize())
        headers = list(dict.fromkeys(header for row in rows for header in row))
        sheet.append(headers)
        for row in rows:
            sheet.append([row.get(header) for header in headers])
    book.save(path)
    return path


def read_sheets(
    folder: Path, snapshot: Snapshot | None = None, **sheets: Sequence[Mapping[str, Any]]
) -> Draft:
    """Write the sheets as a workbook in ``folder`` and read it into a draft. See ``project_workbook``."""
    from specflow.importers.workbook import read_workbook
    from specflow.parameters import load_dictionary

    path = project_workbook(folder / "project.xlsx", **sheets)
    return read_workbook(path, snapshot or a_snapshot(), load_dictionary())
