"""Reading and attaching Touchstone files against scikit-rf alone, measured in the same run."""

from __future__ import annotations

import time
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
import skrf

from specflow.importers.measurements import read_measurements
from specflow.importers.readers.source import read_source
from specflow.importers.readers.touchstone import read_network
from specflow.parameters import load_dictionary
from tests.builders import a_block, a_snapshot

PORTS, POINTS = 10, 1001
MOST_TIMES = 1.5


@pytest.fixture(scope="module", params=["RI", "MA", "DB"])
def ten_port(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """10 ports × 1001 points, three lines a row of the matrix, as simulators write it."""
    path = tmp_path_factory.mktemp("touchstone") / "array.s10p"
    draw = np.random.default_rng(17)
    lines = [f"# GHz S {request.param} R 50"]
    for frequency in np.linspace(27.5, 30, POINTS):
        for row in range(PORTS):
            numbers = [f"{one:.9e}" for one in np.abs(draw.normal(size=2 * PORTS))]
            start = f"{frequency:.6f} " if row == 0 else ""
            lines += [start + " ".join(numbers[:8]), " ".join(numbers[8:16]), " ".join(numbers[16:])]
    path.write_text("\n".join(lines) + "\n")
    return path


def best_in_turns(turns: int, *works: Callable[[], object]) -> list[float]:
    """The best time of each, taken in turns, because the machine is never alone."""
    times: list[list[float]] = [[] for _ in works]
    for _ in range(turns):
        for place, work in enumerate(works):
            start = time.process_time()
            work()
            times[place].append(time.process_time() - start)
    return [min(one) for one in times]


def test_a_ten_port_stays_near_scikit_rf(ten_port: Path) -> None:
    snapshot, dictionary = a_snapshot(a_block()), load_dictionary()
    said = {"block": "LNA", "item": "7"}
    floor, reading, evidence = best_in_turns(
        9,
        lambda: skrf.Network(str(ten_port)),
        lambda: read_network(read_source(ten_port)),
        lambda: read_measurements(ten_port, snapshot, dictionary, stated=said),
    )
    print(
        f"\n{PORTS} ports × {POINTS} points, {ten_port.stat().st_size >> 20} MiB: scikit-rf {floor * 1e3:.0f} ms, "
        f"reading {reading / floor:.2f} ×, as evidence {evidence / floor:.2f} × (goal {MOST_TIMES} ×)"
    )
    assert max(reading, evidence) <= MOST_TIMES * floor
