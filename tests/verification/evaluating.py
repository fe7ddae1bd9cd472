"""Evaluate a small invented project in one call: what every test of verification starts from."""

from __future__ import annotations

from datetime import date

from specflow.model.base import Document
from specflow.model.evidence import EvidenceColumns
from specflow.model.parameter import Parameter
from specflow.model.snapshot import Results
from specflow.model.verdict import RequirementStatus
from specflow.parameters import load_dictionary
from specflow.verification import evaluate
from tests.builders import (
    a_block,
    a_conditions_set,
    a_parameter,
    a_requirement,
    a_snapshot,
    an_activity,
    an_evidence_table,
    an_item,
    some_evidence,
)

AS_OF = date(2026, 6, 1)


def project(*documents: Document) -> tuple[Document, ...]:
    """Return the documents with the default of every noun that none of them replaces by its id."""
    defaults = (a_block(), an_item(), a_requirement(), an_activity(), a_conditions_set())
    given = {(type(one), getattr(one, "id", "")) for one in documents}
    return (*(one for one in defaults if (type(one), getattr(one, "id", "")) not in given), *documents)


def results_of(*documents: Document, **columns: EvidenceColumns) -> Results:
    """Return the results of the default project with these documents; arrays by table id (``T_1`` is T-1)."""
    named = {name.replace("_", "-"): arrays for name, arrays in columns.items()}
    known = {one.id for one in documents if hasattr(one, "file") and hasattr(one, "values")}
    tables = [
        an_evidence_table(name, rows=len(arrays.source_rows))
        for name, arrays in named.items()
        if name not in known
    ]
    snapshot = a_snapshot(*project(*documents), *tables, columns=named)
    return evaluate(snapshot, load_dictionary([a_parameter(), *snapshot.all(Parameter)]), as_of=AS_OF)


def status_of(
    *documents: Document, requirement: str = "R-1", **columns: EvidenceColumns
) -> RequirementStatus:
    """Return the status of R-1 in such a project; without arrays, three readings of 21 dB against 20 dB."""
    if not columns:
        columns = {"T_1": some_evidence()}
    return results_of(*documents, **columns).of(requirement)
