"""Say where the project stands, requirement by requirement and in totals."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import date

from specflow.errors import SpecflowError
from specflow.model.report import Report
from specflow.model.verdict import Label
from specflow.reports.status import (
    close_out_totals,
    compliance_totals,
    in_tree_order,
    points_sentence,
    status_table,
)
from specflow.store import ProjectStore
from specflow.workflows.evaluate_project import evaluate_project
from specflow.workflows.subjects import requirements_named


def project_status(store: ProjectStore, as_of: date, *, codes: Sequence[str] = (), label: str = "") -> Report:
    """Return status and totals of all requirements, of those named, or of those with a label.

    DocumentError for an unknown id, SpecflowError for an unknown label.
    """
    wanted = _label(label) if label else None
    evaluation = evaluate_project(store, as_of)
    snapshot, results = evaluation.snapshot, evaluation.results
    chosen, depths = in_tree_order(snapshot)
    if codes:
        chosen, depths = list(requirements_named(snapshot, codes)), {}
    if wanted is not None:
        chosen, depths = [one for one in chosen if results.of(one.id).label is wanted], {}
    return Report(
        title=snapshot.project.name,
        subtitle=f"judged as of {results.as_of}, project revision {snapshot.revision}",
        facts=(("Points", points_sentence(results, chosen)),),
        tables=(
            status_table(snapshot, results, chosen, depths),
            compliance_totals(results, chosen),
            close_out_totals(results, chosen),
        ),
    )


def _label(text: str) -> Label:
    for label in Label:
        if label.value.casefold() == text.strip().casefold():
            return label
    raise SpecflowError(
        f"there is no state {text!r}", hint=f"states: {', '.join(label.value for label in Label)}"
    )
