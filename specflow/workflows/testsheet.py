"""Write a test sheet for the bench: exactly the points that are still missing, in the fewest set-ups."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date
from pathlib import Path
from typing import Any

from specflow.errors import DocumentError
from specflow.exporters.bench_sheet import bench_sheet_bytes
from specflow.exporters.files import write_file
from specflow.model.base import code_key
from specflow.model.bench_sheet import BenchWorkbook
from specflow.model.block import Block
from specflow.model.requirement import Stage
from specflow.model.snapshot import Snapshot
from specflow.reports.bench_sheet import REMARKS, bench_workbook
from specflow.store import ProjectStore
from specflow.verification.workspace import Workspace
from specflow.workflows.evaluate_project import evaluate_project
from specflow.workflows.missing_points import Scope, missing_points
from specflow.workflows.subjects import not_found, requirements_named


@dataclass(frozen=True, slots=True)
class TestSheet:
    """A test sheet and its bytes; without points there is nothing to write (``content`` is empty)."""

    __test__ = False  # no test, whatever its name says

    workbook: BenchWorkbook
    content: bytes


def testsheet(store: ProjectStore, as_of: date, scope: Scope) -> TestSheet:
    """Return the test sheet of the points that are not proved as of a date. Nothing is stored.

    DocumentError for a requirement, block, item, gate or stage that is not there.
    """
    evaluation = evaluate_project(store, as_of)
    _check(evaluation.snapshot, scope)
    declared = Workspace(evaluation.snapshot, evaluation.dictionary, as_of).declared
    missing = missing_points(evaluation, scope, declared)
    workbook = bench_workbook(
        missing.points, evaluation.snapshot, evaluation.dictionary, as_of.isoformat(), missing.notes
    )
    return TestSheet(workbook, bench_sheet_bytes(workbook, REMARKS) if workbook.points else b"")


def write_testsheet(sheet: TestSheet, path: Path) -> None:
    """Write a test sheet to a file that must not exist (it may be filled in). FileError, and nothing half-written."""
    write_file(path, sheet.content, remedy="it may be filled in; name another one")


def _check(snapshot: Snapshot, scope: Scope) -> None:
    requirements_named(snapshot, scope.requirements)
    for name in scope.blocks:
        if snapshot.find(Block, name) is None:
            raise not_found("block", name, [block.id for block in snapshot.blocks])
    for name in scope.items:
        if code_key(name) not in snapshot.items_by_name:
            raise not_found("item", name, [item.id for item in snapshot.items])
    stages = [stage.value for stage in Stage]
    if scope.stage and scope.stage.casefold() not in stages:
        raise DocumentError(f"there is no stage {scope.stage!r}", hint=f"one of: {', '.join(stages)}")
    gates = _gates(snapshot)
    if scope.gate and scope.gate.casefold() not in {gate.casefold() for gate in gates}:
        known = f"gates: {', '.join(gates)}" if gates else "no activity is planned for a gate yet"
        raise DocumentError(f"no activity is planned for the gate {scope.gate!r}", hint=known)


def _gates(snapshot: Snapshot) -> Sequence[str]:
    activities = (one for found in snapshot.activities_of.values() for one in found)
    return sorted({one.gate for one in activities if one.gate})


def testsheet_as_json(sheet: TestSheet) -> dict[str, Any]:
    """Return what is on a test sheet as data for scripts."""
    return {
        "points": sheet.workbook.points,
        "sheets": [
            {
                "sheet": one.name,
                "block": one.block,
                "set_ups": one.set_ups,
                "rows": [
                    {"row": row, **point.model_dump(mode="json", exclude_defaults=True)}
                    for row, point in one.rows
                ],
            }
            for one in sheet.workbook.sheets
        ],
        "left_out": list(sheet.workbook.notes),
    }
