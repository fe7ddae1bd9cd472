"""What a person waits for at the command line, against imports timed in the same run.

Each figure is the best of several turns, the two sides by turns, because the machine is never alone. Where Python may
not keep compiled modules (PYTHONDONTWRITEBYTECODE) a checkout of specflow is compiled anew every time and the floor, an
installed library, is not: the ratio is then about 0.3 higher than with an installed specflow.
"""

from __future__ import annotations

import subprocess
import sys
import sysconfig
import time
from collections.abc import Sequence
from pathlib import Path

import numpy as np
import pytest

from specflow.model.columns import TextColumn
from specflow.model.evidence import EvidenceColumns, ValueArrays
from specflow.store import create_project
from tests.builders import (
    a_block,
    a_conditions_set,
    a_dimension,
    a_parameter,
    a_project,
    a_quantity,
    a_requirement,
    a_value_column,
    adding,
    an_activity,
    an_evidence_file,
    an_evidence_table,
    an_item,
    at_least,
    some_columns,
)

REQUIREMENTS, POINTS, READINGS = 1_000, 10, 10
PER_TABLE = 100  # quantities that are measured in the rows of one table, as on a bench
SPECFLOW = str(Path(sysconfig.get_path("scripts")) / "specflow")


def python(*words: str) -> list[str]:
    """Return the command that runs Python on these words."""
    return [sys.executable, *words]


def best(commands: Sequence[Sequence[str]], turns: int) -> list[float]:
    """Return the shortest time in seconds of each command, run by turns."""
    times: list[list[float]] = [[] for _ in commands]
    for _ in range(turns):
        for place, command in enumerate(commands):
            start = time.perf_counter()
            subprocess.run(command, check=True, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
            times[place].append(time.perf_counter() - start)
    return [min(taken) for taken in times]


def evidence(seed: int) -> EvidenceColumns:
    """Return ten readings of each of ten points for as many quantities as a table holds, with an uncertainty each."""
    drawn = np.random.default_rng(seed)
    rows = POINTS * READINGS
    order = drawn.permutation(np.tile(np.arange(POINTS), READINGS))
    frequency = np.repeat(np.linspace(27.5, 30.0, 5), 2)[order]
    ambient = np.tile([-40.0, 85.0], 5)[order]
    conditions = some_columns(frequency=frequency.tolist(), temperature_ambient=ambient.tolist())
    values = {}
    for place in range(PER_TABLE):
        u = drawn.uniform(0.05, 0.2, rows)
        low = 22 + 0.3 * u * drawn.standard_normal(rows)  # repeats scatter less than U
        values[f"Gain {place}"] = ValueArrays(low, low, u)
    items = TextColumn(np.zeros(rows, np.int32), ("LNA-1",))
    return EvidenceColumns(conditions, values, np.arange(2, rows + 2, dtype=np.int32), items)


@pytest.fixture(scope="module")
def project(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Make a project of 1,000 requirements, 10,000 required points and 100,000 values."""
    path = tmp_path_factory.mktemp("status") / "large.specflow"
    frequency = a_dimension("frequency", values=(27.5, 28.125, 28.75, 29.375, 30.0), tolerance=0.01)
    ambient = a_dimension("temperature_ambient", "°C", values=(-40.0, 85.0), tolerance=3.0)
    documents = [a_block(), an_item(), a_conditions_set("CS", frequency, ambient), an_evidence_file()]
    columns = {}
    for number in range(REQUIREMENTS):
        key = f"gain_{number}"
        limit = at_least(21 + number % 10 / 10)
        documents += [
            a_parameter(key),
            a_requirement(f"R-{number}", quantity=a_quantity(key), limit=limit),
            an_activity(f"R-{number}"),
        ]
    for table in range(REQUIREMENTS // PER_TABLE):
        code = f"T-{table}"
        values = tuple(
            a_value_column(f"Gain {place}", quantity=a_quantity(f"gain_{table * PER_TABLE + place}"))
            for place in range(PER_TABLE)
        )
        documents.append(an_evidence_table(code, rows=POINTS * READINGS, values=values))
        columns[code] = evidence(table)
    with create_project(path, a_project()) as store:
        store.apply(adding(*documents), columns=columns, by="me")
    return path


def test_help_is_instant() -> None:
    measured, floor = best([[SPECFLOW, "--help"], python("-c", "import typer")], turns=15)
    print(f"\nhelp {measured:.3f} s, import of typer {floor:.3f} s: {measured / floor:.2f} ×")
    assert measured <= 2.0 * floor


def test_status_of_a_large_project_comes_at_once(project: Path) -> None:
    status = [SPECFLOW, "status", "--project", str(project), "--as-of", "2026-06-01"]
    shown = subprocess.run(status, check=True, capture_output=True, text=True).stdout
    assert "of 10000 required points proved" in shown and "(1000 applicable requirements of 1000)" in shown
    measured, floor = best([status, python("-c", "import sqlalchemy.orm")], turns=9)
    print(f"\nstatus {measured:.3f} s, import of sqlalchemy.orm {floor:.3f} s: {measured / floor:.2f} ×")
    assert measured <= 3.0 * floor
