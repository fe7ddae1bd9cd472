"""Budgets: a million specimens of 12 positions, and 10,000 places of evaluation of 40 positions.

Each floor is the plainest numpy that computes the same, measured in the same run.
"""

from __future__ import annotations

import gc
import time
import tracemalloc
from collections.abc import Callable
from functools import partial
from typing import Any

import numpy as np
import pytest

from specflow.budgets import evaluate_budget, monte_carlo, slopes_of
from specflow.budgets.draws import CHUNK, Draws, draws_of
from specflow.budgets.evaluate import prepare
from specflow.budgets.trials import drawn_result
from specflow.conditions import parse_map_entry
from specflow.model.budget import Budget
from specflow.model.budget_line import ConditionTable, Drift
from specflow.model.conditions import ConditionMap
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot
from specflow.parameters import load_dictionary
from tests.budgets.chains import a_chain, project_of
from tests.builders import a_conditions_set, a_dimension, a_quantity, a_requirement, at_least, at_most

DICTIONARY = load_dictionary()
TRIALS, CHAIN = 1_000_000, 12
POINTS, POSITIONS = 100, 40
FIGURES = ("gain", "noise_figure", "iip3", "ip1db")
MOST_MONTE_CARLO, MOST_NOMINAL, MOST_SLOPES, BYTES_KEPT = 0.7, 2.0, 3.0, 16
Four = tuple[Any, Any, Any, Any]


def best(work: Callable[[], Any], runs: int = 5) -> tuple[float, Any]:
    """Return the shortest of some runs, and what the last one gave."""
    times, found = [], None
    for _ in range(runs):
        gc.collect()
        start = time.perf_counter()
        found = work()
        times.append(time.perf_counter() - start)
    return min(times), found


def four(conditions: str | None) -> list[Requirement]:
    """Return a requirement on each of the four quantities."""
    limits = {
        "gain": at_least(30),
        "noise_figure": at_most(6),
        "iip3": at_least(-40, "dBm"),
        "ip1db": at_least(-50, "dBm"),
    }
    return [
        a_requirement(f"R-{n}", block="SYS", quantity=a_quantity(name), limit=limit, conditions=conditions)
        for n, (name, limit) in enumerate(limits.items())
    ]


def plain_laws(gain: Any, noise: Any, iip3: Any, ip1db: Any) -> Four:
    """Gain, noise figure, IIP3 and IP1dB of a chain, positions first, written down as in a textbook."""
    before = np.ones_like(gain)
    before[1:] = np.cumprod(10 ** (gain[:-1] / 10), axis=0)
    factor = 1 + ((10 ** (noise / 10) - 1) / before).sum(axis=0)
    third = (before / 10 ** (iip3 / 10)).sum(axis=0)
    first = (before / 10 ** (ip1db / 10)).sum(axis=0)
    return gain.sum(axis=0), 10 * np.log10(factor), -10 * np.log10(third), -10 * np.log10(first)


def receiver() -> tuple[Budget, Snapshot]:
    """A chain whose every figure has a uniform tolerance."""
    drawn = np.random.default_rng(1)
    tolerance = {"tolerance": {"minus": 0.4, "plus": 0.4, "meaning": "limits", "distribution": "uniform"}}
    units = dict(zip(FIGURES, ("dB", "dB", "dBm", "dBm"), strict=True))
    stages = [
        {
            "block": f"S{n}",
            "gain": float(drawn.uniform(-3, 12)),
            "noise_figure": float(drawn.uniform(1, 8)),
            "iip3": float(drawn.uniform(0, 30)),
            "ip1db": float(drawn.uniform(-10, 20)),
            "more": {name: tolerance | {"unit": unit} for name, unit in units.items()},
        }
        for n in range(CHAIN)
    ]
    requirements = four(None)
    budget = a_chain(*stages, requirements=tuple(one.id for one in requirements))
    return budget, project_of(budget, requirements=requirements)


def test_a_million_specimens_of_twelve_positions(record_property: Callable[[str, Any], None]) -> None:
    """From the same draws, held in memory; drawing them is told apart, and the whole against drawing and plain laws."""
    budget, snapshot = receiver()
    prepared = prepare(budget, snapshot, DICTIONARY)
    chain, streams = prepared.chain, draws_of(prepared.chain, 1)
    chunks = -(-TRIALS // CHUNK)

    def drawn() -> list[Any]:
        rows = []
        for stream in streams.lines:
            assert stream is not None
            rows.append(np.concatenate([stream(chunk) for chunk in range(chunks)])[:TRIALS])
        return rows

    draw_time, deviations = best(drawn, 3)
    rows: dict[str, list[Any]] = {name: [] for name in FIGURES}
    for read, deviation in zip(chain.lines, deviations, strict=True):
        rows[read.role.figure].append(read.values + deviation)
    figures = [np.array(rows[name]) for name in FIGURES]
    del rows
    kept = Draws(tuple(partial(chunk_of, deviation) for deviation in deviations))
    plain_time, expected = best(partial(plain_laws, *figures), 3)
    ours, found = best(lambda: drawn_result(prepared, kept, TRIALS, 1), 3)
    whole, same = best(lambda: monte_carlo(budget, snapshot, DICTIONARY, trials=TRIALS, seed=1), 3)
    for name, values in zip(FIGURES, expected, strict=True):
        assert found.of(name).mean[0] == same.of(name).mean[0] == pytest.approx(values.mean(), abs=1e-9)
        assert found.of(name).deviation[0] == pytest.approx(values.std(), rel=1e-6)
    ratio, with_drawing = ours / plain_time, whole / (draw_time + plain_time)
    record_property("ratio", round(ratio, 3))
    record_property("ratio with drawing", round(with_drawing, 3))
    print(
        f"\nMonte Carlo {ours:.2f} s, plain {plain_time:.2f} s: ratio {ratio:.2f}; "
        f"with drawing {whole:.2f} s and {draw_time + plain_time:.2f} s: {with_drawing:.2f}"
    )
    assert ratio <= MOST_MONTE_CARLO


def chunk_of(deviation: Any, chunk: int) -> Any:
    """Return one chunk of the deviations of a line, as its stream would."""
    return deviation[chunk * CHUNK : (chunk + 1) * CHUNK]


def test_sixteen_bytes_are_kept_of_a_trial() -> None:
    budget, snapshot = receiver()
    monte_carlo(budget, snapshot, DICTIONARY, trials=CHUNK, seed=1)  # what is loaded once is not counted
    kept = []
    for trials in (20 * CHUNK, 60 * CHUNK):
        tracemalloc.start()
        monte_carlo(budget, snapshot, DICTIONARY, trials=trials, seed=1)
        kept.append(tracemalloc.get_traced_memory()[1])
        tracemalloc.stop()
    # The peak grows by what is kept of each trial, and for a moment by one of its four margins as it is ordered.
    grown = (kept[1] - kept[0]) / (40 * CHUNK)
    print(f"\n{grown:.1f} bytes a trial at the peak, of which {BYTES_KEPT} are kept")
    assert grown <= BYTES_KEPT * 2


def wide() -> tuple[Budget, Snapshot]:
    """Forty positions with tables by frequency and drifts with a baseplate, over 100 x 100 conditions."""
    drawn = np.random.default_rng(2)

    def table(middle: float) -> ConditionTable:
        values = tuple(float(middle + one) for one in drawn.uniform(-0.5, 0.5, 4))
        return ConditionTable(
            dimension="frequency", dimension_unit="GHz", at=(17.0, 18.0, 19.0, 21.0), values=values
        )

    drift = Drift(dimension="temperature_baseplate", dimension_unit="°C", slope=-0.01, reference=23.0)
    stages = [
        {
            "block": f"S{n}",
            "gain": table(float(drawn.uniform(-3, 5))),
            "noise_figure": table(float(drawn.uniform(2, 8))),
            "iip3": table(float(drawn.uniform(0, 30))),
            "ip1db": table(float(drawn.uniform(-10, 20))),
            "more": {"gain": {"drifts": (drift,)}},
        }
        for n in range(POSITIONS)
    ]
    requirements = four("CS")
    budget = a_chain(*stages, requirements=tuple(one.id for one in requirements), conditions="CS")
    conditions = a_conditions_set(
        "CS",
        a_dimension("frequency", "GHz", values=tuple(np.linspace(17.2, 20.2, POINTS))),
        a_dimension("temperature_ambient", "°C", values=tuple(np.linspace(-25, 55, POINTS))),
    )
    entry = parse_map_entry("temperature_baseplate = temperature_ambient + 18 K")
    maps = [ConditionMap(id=f"M{n}", block=f"S{n}", entries=(entry,)) for n in range(POSITIONS)]
    return budget, project_of(budget, conditions, *maps, requirements=requirements)


def test_ten_thousand_points_of_forty_positions(record_property: Callable[[str, Any], None]) -> None:
    """The floor reads the same tables and drifts, and gives the same four columns, cumulative and total."""
    budget, snapshot = wide()
    evaluate_budget(budget, snapshot, DICTIONARY)  # the points are expanded once a set, here
    frequency = np.repeat(np.linspace(17.2, 20.2, POINTS), POINTS)
    ambient = np.tile(np.linspace(-25, 55, POINTS), POINTS)
    lines = [(line.position - 1, line.parameter, line.value, line.drifts) for line in budget.lines]

    def figures() -> dict[str, Any]:
        arrays = {name: np.empty((POSITIONS, POINTS**2)) for name in FIGURES}
        for row, name, value, drifts in lines:
            arrays[name][row] = np.interp(frequency, value.at, value.values)  # type: ignore[union-attr]
            for drift in drifts:
                arrays[name][row] += drift.slope * (ambient + 18 - drift.reference)
        return arrays

    def floor() -> Four:
        arrays = figures()
        gain, noise, iip3, ip1db = (arrays[name] for name in FIGURES)
        before = np.ones_like(gain)
        before[1:] = np.cumprod(10 ** (gain[:-1] / 10), axis=0)
        return (
            np.cumsum(gain, axis=0),
            10 * np.log10(1 + np.cumsum((10 ** (noise / 10) - 1) / before, axis=0)),
            -10 * np.log10(np.cumsum(before / 10 ** (iip3 / 10), axis=0)),
            -10 * np.log10(np.cumsum(before / 10 ** (ip1db / 10), axis=0)),
        )

    plain_time, expected = best(floor)
    laws_time, _ = best(lambda: plain_laws(*(figures()[name] for name in FIGURES)))
    nominal_time, result = best(lambda: evaluate_budget(budget, snapshot, DICTIONARY))
    slopes_time, slopes = best(lambda: slopes_of(result))
    for name, values in zip(FIGURES, expected, strict=True):
        assert np.allclose(result.of(name).cumulative, values, atol=1e-9)
    assert slopes[1].slopes.shape == (len(budget.lines), POINTS**2)
    nominal, slope = nominal_time / plain_time, slopes_time / nominal_time
    record_property("nominal", round(nominal, 2))
    record_property("slopes", round(slope, 2))
    print(
        f"\nnominal {1e3 * nominal_time:.0f} ms, plain {1e3 * plain_time:.0f} ms "
        f"(totals alone {1e3 * laws_time:.0f} ms), ratio {nominal:.2f}; "
        f"slopes {1e3 * slopes_time:.0f} ms, ratio {slope:.2f}"
    )
    assert nominal <= MOST_NOMINAL
    assert slope <= MOST_SLOPES
