"""The store against floors measured in the same run: what is stored already must not slow what is added.

Each figure is the best of several turns, because the machine is never alone.
"""

from __future__ import annotations

import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from specflow.model.columns import Columns
from specflow.model.evidence import EvidenceColumns
from specflow.store import create_project, open_project
from tests.builders import (
    a_block,
    a_conditions_set,
    a_project,
    a_requirement,
    adding,
    an_activity,
    an_evidence_file,
    an_evidence_table,
    some_evidence,
)

LOAD = """
import sys
from specflow.store import open_project
with open_project(sys.argv[1]) as store:
    snapshot = store.load()
    arrays = snapshot.load_columns([table.id for table in snapshot.tables])
assert sum(columns.conditions.size for columns in arrays.values()) == 100_000
"""


def best(turn: Callable[[], object], turns: int) -> float:
    """Return the shortest of several turns, in seconds."""
    times = []
    for _ in range(turns):
        start = time.perf_counter()
        turn()
        times.append(time.perf_counter() - start)
    return min(times)


def sweep(rows: int) -> EvidenceColumns:
    """Return a table of so many gain readings with their uncertainty."""
    draw = np.random.default_rng(17)
    conditions = Columns(
        rows, {"frequency": draw.uniform(27.5, 30, rows), "temperature_ambient": draw.uniform(-40, 85, rows)}
    )
    return some_evidence(draw.normal(21, 0.3, rows).tolist(), u=0.2, conditions=conditions)


def project_with(path: Path, tables: int, rows: int, requirements: int = 100) -> Path:
    """Create a project that holds so many tables of so many rows."""
    documents = [a_block(), a_conditions_set(), an_evidence_file()]
    for number in range(requirements):
        documents += [a_requirement(f"R-{number}"), an_activity(f"R-{number}")]
    names = [f"T-{number}" for number in range(tables)]
    documents += [an_evidence_table(name, rows=rows) for name in names]
    arrays = sweep(rows)
    with create_project(path, a_project()) as store:
        store.apply(adding(*documents), columns=dict.fromkeys(names, arrays), by="me")
    return path


def attach(path: Path, turns: int) -> float:
    """Return the time that loading the project and adding one small file to it takes."""
    numbers = iter(range(turns))
    arrays = sweep(100)
    with open_project(path) as store:

        def once() -> None:
            store.load()
            number = next(numbers)
            changes = adding(an_evidence_file(f"new {number}"), an_evidence_table(f"new {number}", rows=100))
            store.apply(changes, columns={f"new {number}": arrays}, by="me")

        return best(once, turns)


def test_a_small_file_is_added_as_fast_to_a_large_project(tmp_path: Path) -> None:
    small = project_with(tmp_path / "small.specflow", tables=10, rows=1_000)
    large = project_with(tmp_path / "large.specflow", tables=100, rows=10_000)
    floor = attach(small, turns=15)
    measured = attach(large, turns=15)
    print(
        f"\nadd to 1,000,000 values {measured:.4f} s, to 10,000 values {floor:.4f} s: {measured / floor:.2f} ×"
    )
    assert measured <= 1.5 * floor


@pytest.mark.parametrize("tables", [10, 100])
def test_a_project_is_loaded_in_less_than_the_import_of_a_mapper(tmp_path: Path, tables: int) -> None:
    path = project_with(
        tmp_path / "project.specflow", tables=tables, rows=100_000 // tables, requirements=1_000
    )
    floor = best(lambda: subprocess.run([sys.executable, "-c", "import sqlalchemy.orm"], check=True), 7)
    measured = best(lambda: subprocess.run([sys.executable, "-c", LOAD, str(path)], check=True), 7)
    print(f"\nload {measured:.3f} s, import of sqlalchemy.orm {floor:.3f} s: {measured / floor:.2f} ×")
    assert measured <= 2.0 * floor  # status as a whole has 3
