"""Backwards and as known, over 10,000 places of evaluation of 40 positions.

Each floor is the plainest numpy that computes the same from the same tables, measured in the same run. No goal is set
from outside for these; the bounds asserted keep what was reached when they were written (our choice).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from specflow.budgets.apportion import apportion
from specflow.budgets.as_known import as_known
from specflow.budgets.knowledge import Knowledge, Rank
from specflow.budgets.solve import solve_line
from specflow.model.budget import Budget
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from tests.benchmarks.test_budgets import DICTIONARY, POINTS, POSITIONS, best, plain_laws, wide
from tests.builders import at_most

PLACES = POINTS**2
ITEMS, KNOWN = 5, 8
MOST_SOLVE, MOST_SHARE, MOST_KNOWN = 8.0, 250.0, 30.0
UNKNOWN = 3  # the position whose noise figure is solved for


def noise_project(limit: float) -> tuple[Budget, Snapshot]:
    """Return the wide chain with its limit on noise alone."""
    budget, snapshot = wide()
    documents = {noun: dict(group) for noun, group in snapshot.documents.items()}
    requirement = snapshot.find(Requirement, "R-1")
    assert requirement is not None
    documents["requirement"]["r-1"] = requirement.model_copy(update={"limit": at_most(limit)})
    lines = tuple(line for line in budget.lines if line.parameter in ("gain", "noise_figure"))
    budget = budget.model_copy(update={"requirements": ("R-1",), "lines": lines})
    return budget, replace(snapshot, documents=documents)


def reader(budget: Budget) -> Callable[[], tuple[Any, Any]]:
    """Return what reads gains and noise figures of all positions at all places, in plain numpy."""
    frequency = np.repeat(np.linspace(17.2, 20.2, POINTS), POINTS)
    ambient = np.tile(np.linspace(-25, 55, POINTS), POINTS)

    def read() -> tuple[Any, Any]:
        arrays = {name: np.empty((POSITIONS, PLACES)) for name in ("gain", "noise_figure")}
        for line in budget.lines:
            if line.parameter in arrays:
                row = arrays[line.parameter][line.position - 1]
                row[:] = np.interp(frequency, line.value.at, line.value.values)  # type: ignore[union-attr]
                for drift in line.drifts:
                    row += drift.slope * (ambient + 18 - drift.reference)
        return arrays["gain"], arrays["noise_figure"]

    return read


def before_of(gain: Any) -> Any:
    before = np.ones_like(gain)
    before[1:] = np.cumprod(10 ** (gain[:-1] / 10), axis=0)
    return before


def test_one_unknown_at_ten_thousand_points(record_property: Callable[[str, Any], None]) -> None:
    """F_k = 1 + G_before·(F_limit - F_without_k), at every place."""
    budget, snapshot = noise_project(23.0)
    read = reader(budget)

    def floor() -> float:
        gain, noise = read()
        before = before_of(gain)
        terms = (10 ** (noise / 10) - 1) / before
        others = 1 + terms.sum(axis=0) - terms[UNKNOWN - 1]
        return float((10 * np.log10(1 + before[UNKNOWN - 1] * (10**2.3 - others))).min())

    solve_line(
        budget, snapshot, DICTIONARY, (UNKNOWN, "noise_figure")
    )  # the points are expanded once a set, here
    plain, expected = best(floor)
    ours, found = best(lambda: solve_line(budget, snapshot, DICTIONARY, (UNKNOWN, "noise_figure")))
    assert found.at_most.value == pytest.approx(expected)
    record_property("solve", round(ours / plain, 2))
    print(f"\none unknown {1e3 * ours:.0f} ms, plain {1e3 * plain:.0f} ms: ratio {ours / plain:.2f}")
    assert ours / plain <= MOST_SOLVE


def test_equal_shares_at_ten_thousand_points(record_property: Callable[[str, Any], None]) -> None:
    """F_i = 1 + G_before·(F_limit - 1)/n; ours searches the share, rounds it, and tests closure besides."""
    budget, snapshot = noise_project(23.0)
    read = reader(budget)

    def floor() -> Any:
        gain, _ = read()
        return 10 * np.log10(1 + before_of(gain) * (10**2.3 - 1) / POSITIONS)

    plain, expected = best(floor)
    ours, found = best(
        lambda: apportion(budget, snapshot, DICTIONARY, way="equal", at_nominal=True, by_conditions=True), 2
    )
    shares = {one.block: one for one in found.allotments if one.parameter == "noise_figure"}
    for row in range(POSITIONS):
        assert np.abs(shares[f"S{row}"].ends(PLACES)[1] - expected[row]).max() <= 0.01
    record_property("equal shares", round(ours / plain, 2))
    print(f"\nequal shares {1e3 * ours:.0f} ms, plain {1e3 * plain:.0f} ms: ratio {ours / plain:.2f}")
    assert ours / plain <= MOST_SHARE


def test_as_known_by_five_specimens_at_ten_thousand_points(
    record_property: Callable[[str, Any], None],
) -> None:
    """Mean and predictive spread of five specimens of eight lines, taken to the result by finite differences."""
    budget, snapshot = noise_project(23.0)
    read = reader(budget)
    drawn = np.random.default_rng(3)
    readings = {position: drawn.normal(4.0, 0.2, (PLACES, ITEMS)) for position in range(1, KNOWN + 1)}
    places, items = np.repeat(np.arange(PLACES), ITEMS), np.tile(np.arange(ITEMS), PLACES)
    nothing = np.zeros(PLACES * ITEMS, np.intp)
    knowledge = [
        Knowledge(
            position, "noise_figure", places, values.ravel(), np.full(values.size, np.nan), nothing + int(Rank.TEST),
            items, tuple("ABCDE"), nothing, (f"EV-{position}",),
        )
        for position, values in readings.items()
    ]  # fmt: skip

    def floor() -> tuple[Any, Any]:
        gain, noise = read()
        spread = np.zeros((POSITIONS, PLACES))
        for position, values in readings.items():
            noise[position - 1] = values.mean(axis=1)
            spread[position - 1] = values.std(axis=1, ddof=1) * np.sqrt(1 + 1 / ITEMS)
        before, factors = before_of(gain), 10 ** (noise / 10)
        whole = 1 + ((factors - 1) / before).sum(axis=0)
        slopes = factors / (before * whole)
        return 10 * np.log10(whole), np.sqrt(((slopes * spread) ** 2).sum(axis=0))

    plain, (result, spread) = best(floor)
    ours, found = best(lambda: as_known(budget, snapshot, DICTIONARY, knowledge), 3)
    assert np.allclose(found.result.of("noise_figure").result, result)
    assert np.allclose(found.served[0].spread, spread)
    assert np.allclose(plain_laws(*read(), *read())[1], found.planned.of("noise_figure").result)
    record_property("as known", round(ours / plain, 2))
    print(f"\nas known {1e3 * ours:.0f} ms, plain {1e3 * plain:.0f} ms: ratio {ours / plain:.2f}")
    assert ours / plain <= MOST_KNOWN
