"""Commands that are cut off, run out of space, or meet another one: the project is as it was, and usable."""

from __future__ import annotations

import os
import resource
import shutil
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from random import Random

import pytest

from specflow.errors import ExitCode
from specflow.store import open_project
from tests.cli.conftest import Command, Outcome
from tests.cli.refusing import content, refused

HERE = Path(__file__).parents[2]
LARGE = 60_000

#: The real command line, which says when it begins to read a file.
READING = """
from specflow.cli import main
from specflow.importers import readers

read = readers.read_source

def begin(*arguments):
    print("reading", flush=True)
    return read(*arguments)

readers.read_source = begin
main()
"""

#: The real command line, but it stops when everything is written and not yet accepted, until a line comes on stdin.
STOPPING = """
import sys
from specflow.cli import main
from specflow.store import writing

write = writing._write_attachments

def stop(*arguments):
    write(*arguments)
    print("written", flush=True)
    sys.stdin.readline()

writing._write_attachments = stop
main()
"""


@pytest.fixture
def project(made_once: Path, tmp_path: Path) -> Path:
    """Return a project of blocks, items and one requirement."""
    return Path(shutil.copy(made_once / "terminal.specflow", tmp_path))


def measured(path: Path, rows: int, seed: int = 1) -> Path:
    """Write a csv file of so many gains, none like the other."""
    random = Random(seed)
    lines = [f"LNA-1,{20 + n / 1000:.3f},{random.uniform(18, 22):.9f}" for n in range(rows)]
    path.write_text("\n".join(["Item,f (GHz),Gain (dB)", *lines, ""]), encoding="utf-8")
    return path


def start(project: Path, *words: object, program: str = "") -> subprocess.Popen[str]:
    """Start ``specflow``, or a program that is the same in all that counts, in a process of its own."""
    run = ["-c", program] if program else ["-m", "specflow"]
    return subprocess.Popen(
        [sys.executable, *run, *map(str, words), "--project", str(project)],
        cwd=HERE, stdin=subprocess.PIPE, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True,
    )  # fmt: skip


def ended(process: subprocess.Popen[str], *, tell: str = "") -> Outcome:
    """Wait for a process, after telling it something."""
    out, err = process.communicate(tell or None, timeout=60)
    return Outcome(process.returncode, out, err)


def wait_for(process: subprocess.Popen[str], word: str) -> None:
    """Wait until a process has written this line."""
    assert process.stdout is not None
    for line in process.stdout:
        if line == f"{word}\n":
            return
    raise AssertionError(process.stderr and process.stderr.read())


def test_an_interrupt_while_a_large_file_is_read(project: Path, tmp_path: Path) -> None:
    before = content(project)
    process = start(project, "attach", measured(tmp_path / "large.csv", LARGE), "--yes", program=READING)
    wait_for(process, "reading")
    time.sleep(0.1)
    process.send_signal(signal.SIGINT)
    outcome = ended(process)
    assert outcome.code == ExitCode.INTERRUPTED, outcome
    assert outcome.err.splitlines()[-1] == "interrupted; nothing half-written was left behind"
    assert "Traceback" not in outcome.err and "stored as" not in outcome.err
    assert content(project) == before


@pytest.mark.parametrize("stop", [signal.SIGINT, signal.SIGTERM, signal.SIGKILL], ids=lambda stop: stop.name)
def test_a_write_that_is_cut_off(
    command: Command, project: Path, tmp_path: Path, stop: signal.Signals
) -> None:
    path, before = measured(tmp_path / "large.csv", LARGE), content(project)
    process = start(project, "attach", path, "--yes", program=STOPPING)
    wait_for(process, "written")
    process.send_signal(stop)
    outcome = ended(process)
    if stop is signal.SIGINT:
        assert outcome.code == ExitCode.INTERRUPTED
        assert outcome.err.splitlines()[-1] == "interrupted; nothing half-written was left behind"
    else:
        assert outcome.code == -stop
    assert "Traceback" not in outcome.err and "stored as" not in outcome.err
    assert command("history").code == ExitCode.CLEAN
    assert content(project) == before
    assert [file.name for file in tmp_path.iterdir() if "specflow" in file.name] == [project.name]


def test_two_processes_that_attach_at_once(command: Command, project: Path, tmp_path: Path) -> None:
    files = [measured(tmp_path / f"{seed}.csv", 50, seed) for seed in (1, 2)]
    first = start(project, "attach", files[0], "--yes", program=STOPPING)
    wait_for(first, "written")
    second = start(project, "attach", files[1], "--yes")
    assert second.stdout is not None
    assert second.stdout.readline()  # it has looked at the project, and shows what it would store
    time.sleep(0.3)
    assert ended(first, tell="go on\n").code == ExitCode.CLEAN
    loser = ended(second)
    refused(loser, "went on from revision 2 to 3", "repeat", code=ExitCode.ENVIRONMENT, place=project.name)
    with open_project(project) as store:
        assert (store.revision, [table.id for table in store.load().tables]) == (3, ["EV-1"])
    assert command("attach", files[1], "--yes", "--beside").code == ExitCode.CLEAN
    with open_project(project) as store:
        assert (store.revision, [table.id for table in store.load().tables]) == (4, ["EV-1", "EV-2"])


def test_two_processes_without_a_rendezvous(project: Path, tmp_path: Path) -> None:
    files = [measured(tmp_path / f"{seed}.csv", 2000, seed) for seed in (1, 2)]
    outcomes = [ended(one) for one in [start(project, "attach", file, "--yes", "--beside") for file in files]]
    done = [outcome.code for outcome in outcomes].count(ExitCode.CLEAN)
    assert done >= 1
    for outcome in outcomes:
        if outcome.code != ExitCode.CLEAN:
            refused(outcome, "went on from revision", code=ExitCode.ENVIRONMENT, place=project.name)
    with open_project(project) as store:
        assert store.revision == 2 + done and len(store.load().tables) == done


@pytest.mark.parametrize("stop", [signal.SIGINT, signal.SIGKILL], ids=lambda stop: stop.name)
def test_a_folder_that_is_cut_off(
    command: Command, project: Path, tmp_path: Path, stop: signal.Signals
) -> None:
    folder = tmp_path / "results"
    folder.mkdir()
    for seed in range(3):
        measured(folder / f"{seed}.csv", 2000, seed)
    process = start(project, "attach", folder, "--yes", "--beside", program=STOPPING)
    wait_for(process, "written")
    assert process.stdin is not None
    process.stdin.write("go on\n")
    process.stdin.flush()
    wait_for(process, "written")  # the second file is in its transaction, the first is stored
    process.send_signal(stop)
    outcome = ended(process)
    assert "Traceback" not in outcome.err
    if stop is signal.SIGINT:
        assert outcome.code == ExitCode.INTERRUPTED
        assert "1 of 3 files: 1 accepted" in outcome.err and "run it again to go on" in outcome.err
    with open_project(project) as store:
        assert [table.id for table in store.load().tables] == ["EV-1"]
    done = command("attach", folder, "--yes", "--beside")
    assert done.code == ExitCode.CLEAN and "3 of 3 files: 2 accepted, 1 unchanged" in done.err


def test_two_processes_that_attach_folders_at_once(project: Path, tmp_path: Path) -> None:
    folders = []
    for half in range(2):
        folders.append(tmp_path / f"results{half}")
        folders[-1].mkdir()
        for seed in range(3):
            measured(folders[-1] / f"{half}{seed}.csv", 500, 10 * half + seed)
    running = [start(project, "attach", folder, "--yes", "--beside") for folder in folders]
    outcomes = [ended(one) for one in running]
    assert [outcome.code for outcome in outcomes] == [ExitCode.CLEAN, ExitCode.CLEAN], outcomes
    with open_project(project) as store:
        assert [table.id for table in store.load().tables] == [f"EV-{number}" for number in range(1, 7)]


@contextmanager
def small_disk(folder: Path, size: str) -> Iterator[Path]:
    """Mount a disk of this size; the test is skipped where one may not."""
    mount = shutil.which("mount")
    if mount is None or os.geteuid() != 0:
        pytest.skip("only root may mount a small disk")
    folder.mkdir()
    options = ["-t", "tmpfs", "-o", f"size={size}", "specflow-test", str(folder)]
    if subprocess.run([mount, *options], capture_output=True).returncode:
        pytest.skip("a small disk cannot be mounted here")
    try:
        yield folder
    finally:
        subprocess.run(["umount", "-l", str(folder)], check=True)


def test_a_full_disk(
    command: Command, project: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path, before = measured(tmp_path / "large.csv", LARGE), content(project)
    with small_disk(tmp_path / "disk", "1m") as disk:
        there = Path(shutil.copy(project, disk))
        outcome = command("attach", path, "--yes", "--project", there)
        refused(outcome, "disk is full", "free some space", code=ExitCode.ENVIRONMENT, place=str(there))
        assert content(there) == before
        (disk / "filler").write_bytes(b"\0" * (disk_left(disk) - 4096))
        for name in ("x.xlsx", "x.html"):
            outcome = command("export", "--project", there, "-o", disk / name)
            refused(outcome, "No space left", "space left", place=name)
        outcome = command("init", "new", "--folder", disk)
        refused(outcome, code=ExitCode(outcome.code), place="new")
        assert outcome.code != ExitCode.CLEAN
        log = {f"{project.name}-wal", f"{project.name}-shm"}  # which SQLite had no room to take away
        assert {file.name for file in disk.iterdir()} - log == {"filler", project.name}
        (disk / "filler").unlink()
        assert command("attach", measured(tmp_path / "a.csv", 10), "--yes", "--project", there).code == 0


def disk_left(folder: Path) -> int:
    """Return how many bytes can still be written."""
    found = os.statvfs(folder)
    return found.f_bavail * found.f_frsize


def test_a_file_that_may_not_grow(project: Path, tmp_path: Path) -> None:
    path, before = measured(tmp_path / "large.csv", LARGE), content(project)
    most = project.stat().st_size + 100_000

    def limited() -> None:
        resource.setrlimit(resource.RLIMIT_FSIZE, (most, most))

    done = subprocess.run(
        [sys.executable, "-m", "specflow", "attach", str(path), "--yes", "--project", str(project)],
        cwd=HERE, preexec_fn=limited, capture_output=True, text=True, timeout=60,
    )  # fmt: skip
    refused(
        Outcome(done.returncode, done.stdout, done.stderr), "the disk", "space",
        code=ExitCode.ENVIRONMENT, place=project.name,
    )  # fmt: skip
    assert content(project) == before
