"""Matching against floors measured in the same run: sorting the same records by their conditions, plain numpy.

Run with ``pytest tests/benchmarks``. The floor for many records is one ``np.lexsort`` of their three columns; for a
small table it is one ``searchsorted`` a dimension.
"""

from __future__ import annotations

import time
from collections.abc import Callable

import numpy as np
import pytest

from specflow.conditions import compile_points, match, proves
from specflow.model.columns import Columns
from specflow.model.conditions import Combination, ConditionsSet, Dimension

NAMES = {"frequency": "GHz", "temperature_ambient": "°C", "supply_voltage": "V"}
MANY = 100_000


def seconds(work: Callable[[], object], repeats: int) -> float:
    """The best of several runs: what the work costs when nothing else disturbs."""
    best = np.inf
    for _ in range(repeats):
        start = time.perf_counter()
        work()
        best = min(best, time.perf_counter() - start)
    return best


def a_set(values: list[np.ndarray], tolerances: list[float], combination: Combination) -> ConditionsSet:
    dimensions = tuple(
        Dimension(name=name, unit=unit, values=tuple(column.tolist()), tolerance=tolerance)
        for (name, unit), column, tolerance in zip(NAMES.items(), values, tolerances, strict=True)
    )
    return ConditionsSet(id="B", dimensions=dimensions, combination=combination)


def grid() -> tuple[ConditionsSet, float]:
    steps = [27.5 + 0.025 * np.arange(100), -40 + 1.25 * np.arange(100), 4.5 + 0.1 * np.arange(10)]
    return a_set(steps, [0.01, 0.5, 0.01], Combination.ALL), 4.0


def listed() -> tuple[ConditionsSet, float]:
    rng = np.random.default_rng(2)
    columns = [
        27.5 + 0.01 * rng.integers(0, 300, MANY),
        -40.0 + rng.integers(0, 125, MANY),
        0.1 * rng.integers(0, 30, MANY),
    ]
    return a_set(columns, [0.001, 0.4, 0.01], Combination.LISTED), 5.0


def unrelated() -> tuple[ConditionsSet, float]:
    rng = np.random.default_rng(3)
    columns = [27.5 + 2.5 * rng.random(MANY), -40 + 125 * rng.random(MANY), 4.5 + rng.random(MANY)]
    return a_set(columns, [0.01, 1.0, 0.01], Combination.LISTED), 40.0


@pytest.mark.parametrize("kind", [grid, listed, unrelated])
def test_a_hundred_thousand_points_and_records(kind: Callable[[], tuple[ConditionsSet, float]]) -> None:
    conditions, most = kind()
    points = compile_points(conditions)
    rng = np.random.default_rng(4)
    records = points.columns_lo.take(rng.integers(0, points.size, MANY))
    floor = seconds(lambda: np.lexsort(tuple(records.numeric.values())), 5)
    matching = match(points, records)
    assert len(matching.record) == MANY
    taken = seconds(lambda: match(points, records), 5)
    good = np.ones(MANY, np.bool_)
    proving = seconds(lambda: proves(points, matching, good), 5)
    print(f"{kind.__name__}: {taken * 1e3:.1f} ms, proof {proving * 1e3:.2f} ms, floor {floor * 1e3:.1f} ms")
    assert taken <= most * floor
    assert proving <= floor


def test_two_thousand_small_tables() -> None:
    steps = [27.5 + 0.25 * np.arange(10), np.array([-40.0, 85.0]), np.array([4.75, 5.0, 5.25])]
    points = compile_points(a_set(steps, [0.01, 2.0, 0.05], Combination.ALL))
    rng = np.random.default_rng(6)
    tables: list[Columns] = [points.columns_lo.take(rng.integers(0, points.size, 500)) for _ in range(50)]
    edges = np.linspace(0, 30, 20)
    good = np.ones(500, np.bool_)

    def judge() -> None:
        for records in tables:
            proves(points, match(points, records), good)

    def search() -> None:
        for records in tables:
            for column in records.numeric.values():
                edges.searchsorted(column)

    floor, taken = seconds(search, 10), seconds(judge, 10)
    print(f"small: {taken / 50 * 1e6:.0f} µs a table, floor {floor / 50 * 1e6:.0f} µs")
    assert taken <= 8 * floor
    assert taken / 50 < 500e-6, "2,000 such requirements must be matched and proved within a second"
