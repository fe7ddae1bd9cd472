"""Walk from a requirement up to the system and down to the cell; or back, from a block, a table or a file."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import date

from specflow.model.base import code_key
from specflow.model.block import Block
from specflow.model.card import TrailStep
from specflow.model.evidence import EvidenceFile, EvidenceTable
from specflow.model.report import ReportTable
from specflow.model.requirement import Requirement
from specflow.reports.serving import requirements_served
from specflow.reports.trace import block_trail, requirement_trail, table_trail, trail_table
from specflow.store import ProjectStore
from specflow.workflows.evaluate_project import Evaluation, evaluate_project
from specflow.workflows.subjects import Subject, subject_named


def trace(store: ProjectStore, as_of: date, name: str) -> ReportTable:
    """Return the trail of what ``name`` means. DocumentError when it means nothing."""
    evaluation = evaluate_project(store, as_of)
    subject = subject_named(evaluation.snapshot, name)
    return trail_table(_title(subject), _steps(subject, evaluation))


def _title(subject: Subject) -> str:
    return f"Trace of {subject.name if isinstance(subject, EvidenceFile) else subject.id}"


def _steps(subject: Subject, evaluation: Evaluation) -> Sequence[TrailStep]:
    snapshot, results = evaluation.snapshot, evaluation.results
    if isinstance(subject, Requirement):
        return requirement_trail(subject, snapshot, results, how_read=True)
    served = requirements_served(snapshot, results)
    if isinstance(subject, Block):
        return block_trail(subject, snapshot, results, served)
    if isinstance(subject, EvidenceTable):
        return table_trail(subject, snapshot, results, served)
    tables = [table for table in snapshot.tables if code_key(table.file) == code_key(subject.id)]
    trails = [table_trail(table, snapshot, results, served) for table in tables]
    return [step for place, trail in enumerate(trails) for step in (trail if place == 0 else trail[1:])]
