"""Full evaluation of 2,000 requirements, 100,000 required points, 1,000,000 values with per-value uncertainty.

The floor is one raw ``GROUP BY ... NOT INDEXED`` of SQLite over the same values as rows, measured in the same run. The
values come out of a project of the store, an SQLite file like the floor's, every time. Loading the documents counts
too. Times are of the processor, with the files in memory.
"""

from __future__ import annotations

import gc
import sqlite3
import time
from collections.abc import Callable
from datetime import date
from pathlib import Path

import numpy as np
import pytest

from specflow.model.columns import TextColumn
from specflow.model.evidence import EvidenceColumns, ValueArrays
from specflow.model.requirement import DecisionRule, RuleName
from specflow.model.snapshot import Results, Snapshot
from specflow.parameters import load_dictionary
from specflow.store import create_project, open_project
from specflow.verification import evaluate
from tests.builders import (
    a_block,
    a_conditions_set,
    a_dimension,
    a_parameter,
    a_quantity,
    a_requirement,
    a_snapshot,
    a_value_column,
    adding,
    an_activity,
    an_evidence_file,
    an_evidence_table,
    an_item,
    at_least,
    some_columns,
)

REQUIREMENTS, POINTS, READINGS = 2000, 50, 10
FREQUENCIES, TEMPERATURES = 10, 5
MOST = 2.0


def evidence(per_table: int, seed: int) -> EvidenceColumns:
    """Return 500 rows (50 points, ten readings each, two items) of ``per_table`` quantities, each value with its u."""
    drawn = np.random.default_rng(seed)
    frequency = np.repeat(np.linspace(27.5, 30.0, FREQUENCIES), TEMPERATURES)
    ambient = np.tile(np.linspace(-40.0, 85.0, TEMPERATURES), FREQUENCIES)
    rows = POINTS * READINGS
    order = drawn.permutation(np.tile(np.arange(POINTS), READINGS))
    conditions = some_columns(
        frequency=(frequency[order] + drawn.uniform(-0.005, 0.005, rows)).tolist(),
        temperature_ambient=(ambient[order] + drawn.uniform(-1, 1, rows)).tolist(),
    )
    values = {}
    for place in range(per_table):
        u = drawn.uniform(0.05, 0.2, rows)
        truth = drawn.normal(22.0, 0.3, POINTS)[order]
        low = truth + 0.3 * u * drawn.standard_normal(
            rows
        )  # repeats scatter less than U, most of which is systematic
        values[f"Gain {place}"] = ValueArrays(low, low, u)
    items = TextColumn(drawn.integers(0, 2, rows).astype(np.int32), ("LNA-1", "LNA-2"))
    return EvidenceColumns(conditions, values, np.arange(2, rows + 2, dtype=np.int32), items)


def a_large_project(per_table: int) -> Snapshot:
    """Return 2,000 requirements; ``per_table`` of them are measured in the rows of one table, as on a bench."""
    documents: list[object] = []
    columns = {}
    sets = 20
    for number in range(sets):
        documents.append(
            a_conditions_set(
                f"CS-{number}",
                a_dimension(values=tuple(np.linspace(27.5, 30.0, FREQUENCIES)), tolerance=0.01),
                a_dimension(
                    "temperature_ambient",
                    "°C",
                    values=tuple(np.linspace(-40.0, 85.0, TEMPERATURES)),
                    tolerance=2.0,
                ),
            )
        )
    for table in range(REQUIREMENTS // per_table):
        block = f"B-{table}"
        documents += [a_block(block), an_item(f"LNA-1-{table}", block=block)]
        names = [f"p{place}" for place in range(per_table)]
        value_columns = tuple(
            a_value_column(f"Gain {place}", quantity=a_quantity(name)) for place, name in enumerate(names)
        )
        documents.append(
            an_evidence_table(f"T-{table}", block=block, rows=POINTS * READINGS, values=value_columns)
        )
        columns[f"T-{table}"] = evidence(per_table, table)
        for place, name in enumerate(names):
            requirement = f"R-{table}-{place}"
            rule = DecisionRule(name=RuleName.GUARDED if place % 2 else RuleName.SIMPLE)
            documents += [
                a_requirement(
                    requirement,
                    block=block,
                    quantity=a_quantity(name),
                    limit=at_least(f"{21 + place % 3 * 0.2:.1f}"),
                    conditions=f"CS-{table % sets}",
                    decision_rule=rule,
                ),
                an_activity(requirement),
            ]
    return a_snapshot(*documents, columns=columns)  # type: ignore[arg-type]


def stored(path: Path, snapshot: Snapshot) -> Path:
    """Write the project into a store."""
    documents = [
        one for noun, found in snapshot.documents.items() if noun != "project" for one in found.values()
    ]
    names = [table.id for table in snapshot.tables]
    with create_project(path, snapshot.project) as store:
        store.apply(adding(an_evidence_file(), *documents), columns=snapshot.load_columns(names), by="me")
    return path


def raw_rows(path: Path, snapshot: Snapshot) -> sqlite3.Connection:
    """Write the same values as rows: requirement, point, item, value, uncertainty."""
    connection = sqlite3.connect(path)
    connection.execute("CREATE TABLE value (requirement INT, point INT, item INT, value REAL, u REAL)")
    number = 0
    for table in snapshot.tables:
        held = snapshot.load_columns([table.id])[table.id]
        frequency = np.rint((held.conditions.numeric["frequency"] - 27.5) / 2.5 * (FREQUENCIES - 1))
        ambient = np.rint((held.conditions.numeric["temperature_ambient"] + 40) / 125 * (TEMPERATURES - 1))
        point = (frequency * TEMPERATURES + ambient).astype(int)
        for arrays in held.values.values():
            assert arrays.u is not None
            rows = zip(
                [number] * len(point),
                point.tolist(),
                held.items.codes.tolist(),
                arrays.low.tolist(),
                arrays.u.tolist(),
                strict=True,
            )
            connection.executemany("INSERT INTO value VALUES (?, ?, ?, ?, ?)", rows)
            number += 1
    connection.commit()
    return connection


def grouped(connection: sqlite3.Connection) -> int:
    """Run the floor: the worst guarded value of each required point of each item."""
    query = (
        "SELECT requirement, point, item, MIN(value - 2 * u), COUNT(*) FROM value NOT INDEXED "
        "GROUP BY requirement, point"
    )
    return len(connection.execute(query).fetchall())


def taken(task: Callable[[], object]) -> float:
    """Return the seconds of processor time a task took; what others do on the machine is not in it."""
    gc.collect()
    start = time.process_time()
    task()
    return time.process_time() - start


def best_of(times: int, *tasks: Callable[[], object]) -> list[float]:
    """Return the least seconds of each task. They take turns, so that a machine that slows down slows all of them."""
    rounds = [[taken(task) for task in tasks] for _ in range(times)]
    return [min(column) for column in zip(*rounds, strict=True)]


@pytest.mark.parametrize("per_table", [10, 1], ids=["ten quantities a table", "one quantity a table"])
def test_full_evaluation_takes_at_most_twice_one_raw_group_by(per_table: int, tmp_path: Path) -> None:
    snapshot = a_large_project(per_table)
    connection = raw_rows(tmp_path / "floor.db", snapshot)
    path = stored(tmp_path / "project.specflow", snapshot)
    dictionary = load_dictionary([a_parameter(f"p{place}") for place in range(10)])
    assert grouped(connection) == REQUIREMENTS * POINTS

    with open_project(path) as store:
        loaded = store.load()

        def judged() -> Results:
            fresh = Snapshot(loaded.revision, loaded.documents, loaded.load_columns)
            return evaluate(fresh, dictionary, as_of=date(2026, 6, 1))

        results = judged()
        assert len(results.statuses) == REQUIREMENTS
        assert sum(status.n for status in results.statuses.values()) == REQUIREMENTS * POINTS
        assert 0 < sum(status.k for status in results.statuses.values()) < REQUIREMENTS * POINTS
        floor, evaluation, loading = best_of(5, lambda: grouped(connection), judged, store.load)
    print(
        f"\n{per_table} a table: evaluation {evaluation:.2f} s, GROUP BY {floor:.2f} s, "
        f"ratio {evaluation / floor:.2f}; with the documents' loading ({loading:.2f} s) "
        f"{(evaluation + loading) / floor:.2f}"
    )
    assert evaluation + loading <= MOST * floor
