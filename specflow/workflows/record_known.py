"""Record what a budget comes to as known: evidence of method analysis, with a file whose rows name every source."""

from __future__ import annotations

import csv
import hashlib
import io
import math
from collections.abc import Sequence

import numpy as np

from specflow.budgets.as_known import KnownServed
from specflow.changes import diff
from specflow.conditions import conditions_words
from specflow.errors import DocumentError
from specflow.model.base import Document
from specflow.model.columns import Columns, TextColumn
from specflow.model.evidence import (
    ConditionColumn,
    EvidenceColumns,
    EvidenceFile,
    EvidenceTable,
    FileKind,
    ValueArrays,
    ValueColumn,
)
from specflow.model.requirement import Method
from specflow.model.snapshot import Snapshot
from specflow.store import ProjectStore
from specflow.workflows.as_known import KnownBudget
from specflow.workflows.known_lines import COMPOSITE_MODEL
from specflow.workflows.numbering import next_number

_HEAD = ("conditions", "result", "standard uncertainty", "unit")


def record_known(store: ProjectStore, found: KnownBudget, *, by: str) -> tuple[str, ...]:
    """Store the result of every requirement served as an evidence table; return the ids of the tables.

    The file that is kept has one row a place of evaluation and names, line by line, the value and the source that was
    used, so that a reader can walk on to these. Raises DocumentError where nothing was known of any line, ConflictError
    when the project went on since.
    """
    if not found.tables:
        raise DocumentError(
            "nothing better than the lines of the budget is known, so there is no result to record",
            where=f"budget {found.known.budget.id}",
            hint="attach measurements or simulations of its blocks first",
        )
    snapshot = store.load()
    documents: list[Document] = []
    columns: dict[str, EvidenceColumns] = {}
    files: dict[str, bytes] = {}
    for number, served in enumerate(found.known.served):
        content = _content(found, served)
        file = _file(snapshot, store, found, served, content, number)
        table = _table(snapshot, found, served, file, number, by, store.now())
        documents += [file, table]
        files[file.id] = content
        columns[table.id] = _columns(found, served)
    store.apply(
        diff(snapshot, documents),
        columns=columns,
        files=files,
        by=by,
        reason=f"recorded the budget {found.known.budget.id} as known",
        expected_revision=found.project_revision,
    )
    return tuple(columns)


def _content(found: KnownBudget, served: KnownServed) -> bytes:
    """Return the file as CSV: what the result was computed from, at every place."""
    known = found.known
    lines = [f"{one.read.line.place} [{one.read.line.unit}]" for one in known.lines]
    head = [*_HEAD, *[text for line in lines for text in (line, f"{line} source")]]
    text = io.StringIO(newline="")
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(head)
    required = known.result.required
    for place in range(required.size):
        cells = [
            conditions_words(required.columns, place) or "any conditions",
            repr(float(served.served.result[place])),
            repr(float(served.spread[place])),
            served.served.unit,
        ]
        for one in known.lines:
            cells += [repr(float(one.value[place])), one.source_words(place)]
        writer.writerow(cells)
    return text.getvalue().encode()


def _file(
    snapshot: Snapshot,
    store: ProjectStore,
    found: KnownBudget,
    served: KnownServed,
    content: bytes,
    number: int,
) -> EvidenceFile:
    known = found.known
    of = known.serial or "type"
    return EvidenceFile(
        id=f"F-{next_number(snapshot, EvidenceFile, 'F-') + number}",
        name=f"{known.budget.id} as known {of} {served.served.requirement.id} r{found.project_revision}.csv",
        sha256=hashlib.sha256(content).hexdigest(),
        size=len(content),
        received_at=store.now(),
        received_from=f"budget {known.budget.id} revision {known.budget.revision}",
        kind=FileKind.REPORT,
        note=f"made from {', '.join(found.tables)}",
        kept=True,
    )


def _table(
    snapshot: Snapshot,
    found: KnownBudget,
    served: KnownServed,
    file: EvidenceFile,
    number: int,
    by: str,
    now: str,
) -> EvidenceTable:
    known, requirement = found.known, served.served.requirement
    value = ValueColumn(
        name="result",
        quantity=requirement.quantity,
        unit=served.served.unit,
        unit_from="budget",
        column=2,
        header="result",
        uncertainty_from="spreads of the lines and the uncertainty they share, through their slopes",
        coverage_factor=1.0,
    )
    return EvidenceTable(
        id=f"EV-{next_number(snapshot, EvidenceTable, 'EV-') + number}",
        file=file.id,
        title=f"{requirement.id} by the budget {known.budget.id}, as known",
        block=requirement.block,
        requirement=requirement.id,
        method=Method.ANALYSIS,
        rows=known.result.required.size,
        values=(value,),
        conditions=_condition_columns(known.result.required.columns),
        digest=file.sha256,
        table_key=f"{known.budget.id} {requirement.id} {known.serial}",
        performer=by,
        performed_on=found.as_of,
        simulation_model=f"{COMPOSITE_MODEL}{known.budget.id}",
        simulation_version=f"revision {known.budget.revision}",
        hardware_note=_inputs(found.tables),
        accepted_by=by,
        accepted_at=now,
        provisional=snapshot.project.policy.second_review,
    )


def _condition_columns(places: Columns) -> tuple[ConditionColumn, ...]:
    """Every condition of the places of evaluation: in the file they stand in words, all in its first column."""
    return tuple(
        ConditionColumn(
            dimension=name,
            kind="numeric" if name in places.numeric else "text",
            unit=places.units.get(name, ""),
            column=1,
            header="conditions",
        )
        for name in places.names
    )


def _inputs(tables: Sequence[str]) -> str:
    return f"inputs: {', '.join(tables)}; the sources are named row by row in the file"


def _columns(found: KnownBudget, served: KnownServed) -> EvidenceColumns:
    required = found.known.result.required
    size = required.size
    values = np.array(served.served.result, np.float64)
    spread = np.array([one if math.isfinite(one) and one > 0 else math.nan for one in served.spread.tolist()])
    columns = required.columns
    plain = Columns(size, dict(columns.numeric), dict(columns.text), dict(columns.units))
    return EvidenceColumns(
        plain,
        {"result": ValueArrays(values, values, spread)},
        np.arange(2, size + 2, dtype=np.int32),
        TextColumn.of([found.known.serial or None] * size),
    )
