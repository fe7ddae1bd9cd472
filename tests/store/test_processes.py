"""Several processes on one project, and processes that end in the middle of a write."""

from __future__ import annotations

import signal
import subprocess
import sys
from pathlib import Path

import pytest

from specflow.model.block import Block
from specflow.model.evidence import EvidenceTable
from specflow.store import create_project, open_project
from tests.builders import a_block, a_project, adding, an_evidence_file, an_evidence_table, some_evidence

HERE = Path(__file__).parents[2]

COUNT_UP = """
import sys
from specflow.errors import ConflictError
from specflow.model.block import Block
from specflow.store import open_project
from tests.builders import editing

with open_project(sys.argv[1]) as store:
    done = 0
    while done < 15:
        block = store.load().find(Block, "LNA")
        try:
            store.apply([editing(block, quantity=block.quantity + 1)], by=sys.argv[2])
            done += 1
        except ConflictError:
            print("again")
"""

WAIT_WITH_EVERYTHING_WRITTEN = """
import sys, time
from datetime import UTC, datetime
from specflow.store import open_project
from tests.builders import *

def clock():
    print("written", flush=True)
    time.sleep(60)
    return datetime.now(UTC)

with open_project(sys.argv[1], clock=clock) as store:
    store.apply(
        adding(a_block("PA"), an_evidence_file(), an_evidence_table()), columns={"T-1": some_evidence()}, by="x"
    )
"""


def start(program: str, *arguments: str) -> subprocess.Popen[str]:
    """Start a Python program in a process of its own."""
    return subprocess.Popen(
        [sys.executable, "-c", program, *arguments],
        cwd=HERE,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )


def test_two_processes_that_count_lose_nothing(where: str) -> None:
    with create_project(where, a_project()) as store:
        store.apply(adding(a_block(quantity=1)), by="me")
        counting = [start(COUNT_UP, where, name) for name in ("one", "two")]
        for process in counting:
            _, errors = process.communicate(timeout=60)
            assert process.returncode == 0, errors
        block = store.load().find(Block, "LNA")
        assert block is not None
        assert block.quantity == 1 + 2 * 15
        assert store.revision == 2 + 2 * 15
        assert [entry.revision for entry in store.history()] == list(range(1, 33))


@pytest.mark.parametrize("stop", [signal.SIGINT, signal.SIGKILL], ids=["interrupted", "killed"])
def test_a_write_that_is_cut_off_leaves_the_project_as_it_was(where: str, stop: signal.Signals) -> None:
    with create_project(where, a_project()) as store:
        store.apply(adding(a_block()), by="me")
    process = start(WAIT_WITH_EVERYTHING_WRITTEN, where)
    assert process.stdout is not None
    assert process.stdout.readline() == "written\n"
    process.send_signal(stop)
    _, errors = process.communicate(timeout=30)
    assert process.returncode != 0
    assert ("KeyboardInterrupt" in errors) == (stop is signal.SIGINT)

    with open_project(where) as store:
        snapshot = store.load()
        assert snapshot.revision == 2
        assert [block.id for block in snapshot.blocks] == ["LNA"]
        assert not snapshot.all(EvidenceTable)
        assert len(store.history()) == 2
        changes = adding(a_block("PA"), an_evidence_file(), an_evidence_table())
        assert store.apply(changes, columns={"T-1": some_evidence()}, by="me") == 3
    if "://" not in where:
        assert [file.name for file in Path(where).parent.iterdir()] == [Path(where).name]
