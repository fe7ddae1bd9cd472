"""Closed pagers and streams, a full output, terminals without our signs, narrow ones, and ones without colour."""

from __future__ import annotations

import contextlib
import json
import os
import re
import shutil
import subprocess
import sys
from collections.abc import Sequence
from pathlib import Path

import pytest

from specflow.cli.streams import HANDLER, SPELT_OUT, prepare_streams
from specflow.errors import ExitCode
from specflow.store import open_project
from specflow.units import parse_unit
from tests.cli.conftest import Command
from tests.importers.measured.make import book

SPECFLOW = (sys.executable, "-m", "specflow")
FULL = Path("/dev/full")
ESCAPE = re.compile(r"\x1b\[[0-9;]*m")


@pytest.fixture
def project(made_once: Path, tmp_path: Path) -> Path:
    """Return the example of the tests, in a file."""
    return Path(shutil.copy(made_once / "harbour.specflow", tmp_path))


def shell(line: str, folder: Path, **more: str) -> subprocess.CompletedProcess[str]:
    """Run a line in bash, in a folder; ``specflow`` is that of this Python."""
    function = f'specflow() {{ "{sys.executable}" -m specflow "$@"; }}; set -o pipefail; '
    return subprocess.run(
        ["bash", "-c", function + line], cwd=folder, env={**os.environ, **more},
        capture_output=True, text=True, timeout=60,
    )  # fmt: skip


def terminal(words: Sequence[str], folder: Path, **more: str) -> tuple[int, str]:
    """Run a command on a terminal; return its exit code and all that it wrote there."""
    pty = pytest.importorskip("pty", reason="there are no pseudo-terminals here")
    ours, theirs = pty.openpty()
    environment = {**os.environ, "TERM": "xterm-256color", **more}
    process = subprocess.Popen(
        [*SPECFLOW, *words], cwd=folder, env=environment, stdin=subprocess.DEVNULL, stdout=theirs, stderr=theirs
    )  # fmt: skip
    os.close(theirs)
    written = b""
    with contextlib.suppress(OSError):  # how the end of a pseudo-terminal reads on Linux
        while part := os.read(ours, 65536):
            written += part
    os.close(ours)
    return process.wait(timeout=60), written.decode().replace("\r\n", "\n")


@pytest.mark.parametrize(
    ("line", "code"),
    [
        ("specflow status | head -1", 0),
        ("specflow status --json | head -1", 0),
        ("specflow check | head -1", 1),  # its findings stay findings
        ("specflow export -o - -f html | head -c 1", 0),
        ("specflow --help | true", 0),
    ],
)
def test_a_reader_that_leaves_early_changes_no_exit_code(project: Path, line: str, code: int) -> None:
    done = shell(line, project.parent)
    assert done.returncode == code, done
    assert (
        "Traceback" not in done.stderr and "Broken pipe" not in done.stderr and "Exception" not in done.stderr
    )


def test_what_was_accepted_is_stored_though_the_reader_leaves(made_once: Path, tmp_path: Path) -> None:
    path = shutil.copy(made_once / "terminal.specflow", tmp_path)
    rows = [["Item", "f (GHz)", "Gain (dB)"], *(["LNA-1", 20 + n / 100, "x" * 300] for n in range(400))]
    book(tmp_path / "a.xlsx", [*rows, ["LNA-1", 27.5, 20.1]])
    done = shell("specflow attach a.xlsx --yes --take-rest | true", tmp_path)
    assert done.returncode == 0 and "stored as EV-1" in done.stderr, done
    with open_project(path) as store:
        assert [table.id for table in store.load().tables] == ["EV-1"]


@pytest.mark.parametrize(
    "line",
    ["specflow status >&-", "specflow export -o - -f json <&- >&-", "specflow status --json <&- >&- 2>&-"],
)
def test_closed_streams_are_no_fault(project: Path, line: str) -> None:
    done = shell(line, project.parent)
    assert done.returncode == 0 and not done.stderr, done


def test_an_error_that_nobody_can_be_told_still_has_its_exit_code(project: Path) -> None:
    assert shell("specflow trace NOPE >&- 2>&-", project.parent).returncode == ExitCode.BAD_INPUT
    assert not shell("specflow trace NOPE 2>&-", project.parent).stdout  # no talk where data belongs


@pytest.mark.skipif(not FULL.exists(), reason="there is no /dev/full")
@pytest.mark.parametrize("line", ["specflow status", "specflow status --json", "specflow export -o - -f csv"])
def test_a_full_output_is_one_message(project: Path, line: str) -> None:
    done = shell(f"{line} > {FULL}", project.parent)
    assert done.returncode == ExitCode.ENVIRONMENT
    assert done.stderr.splitlines() == [
        "specflow: the output cannot be written: No space left on device",
        "  where: stdout",
        "  do:    free some space, or send it elsewhere",
    ]


def test_signs_that_a_terminal_lacks_are_spelt_out(project: Path) -> None:
    done = shell("specflow trace PA-1 && specflow status", project.parent, PYTHONIOENCODING="ascii")
    assert done.returncode == 0 and "Traceback" not in done.stderr, done
    assert "+85 degC" in done.stdout and done.stdout.isascii() and "?" not in done.stdout
    header, first = done.stdout.partition("Status\n")[2].splitlines()[:2]
    assert (
        header.index("Title") == first.index("Radiated") and ">= 45 dBm" in first
    )  # the columns are in line
    done = shell("specflow trace '–≥ü'", project.parent, PYTHONIOENCODING="ascii")
    assert done.returncode == ExitCode.BAD_INPUT and r"'->=\xfc'" in done.stderr


def test_json_stays_json_in_every_encoding(project: Path) -> None:
    plain = shell("specflow status --json", project.parent, PYTHONIOENCODING="ascii")
    rich = shell("specflow status --json", project.parent, PYTHONIOENCODING="utf-8")
    assert plain.stdout.isascii() and not rich.stdout.isascii()
    assert json.loads(plain.stdout) == json.loads(rich.stdout)


def test_a_sign_is_spelt_so_that_it_means_the_same() -> None:
    prepare_streams()
    assert (
        "≥ 45 dBm ± 0.5 dB – 3 °C, ≤ 5°".encode("ascii", HANDLER) == b">= 45 dBm +/- 0.5 dB - 3 degC, <= 5deg"
    )
    for sign in ("µV", "Ω", "°C"):
        assert parse_unit(sign.encode("ascii", HANDLER).decode()) == parse_unit(sign)
    assert all(text.isascii() and "?" not in text for text in SPELT_OUT.values())
    assert "a\udcfcb".encode("utf-8", HANDLER) == b"a\xfcb"  # a byte of a file name that is no text


def test_a_locale_of_no_language(project: Path) -> None:
    folder = project.parent / "Prüf stand"
    folder.mkdir()
    project.rename(folder / project.name)
    plain = {"LC_ALL": "C", "PYTHONCOERCECLOCALE": "0", "PYTHONUTF8": "0"}
    done = shell(f"specflow status -p 'Prüf stand/{project.name}'", project.parent, **plain)
    assert done.returncode == 0 and ">= 45 dBm" in done.stdout, done
    done = shell("specflow status -p 'Prüf stand/none.specflow'", project.parent, **plain)
    assert done.returncode == ExitCode.ENVIRONMENT and "where: Prüf stand/none.specflow" in done.stderr


def test_a_narrow_terminal_shows_row_by_row_and_breaks_no_word(project: Path) -> None:
    code, narrow = terminal(["status"], project.parent, COLUMNS="40")
    assert code == 0
    tables = ESCAPE.sub("", narrow).partition("Points:")[0].splitlines()
    assert max(map(len, tables)) <= 40
    for whole in ("SYS-1", "  PA-1", "  State: partially verified", "  Guarded margin: -1.19 dB"):
        assert whole in tables
    assert terminal(["status"], project.parent, COLUMNS="1")[0] == 0


def test_colour_is_left_out_where_nobody_wants_it(project: Path) -> None:
    coloured = re.compile(r"\x1b\[(?:\d+;)*3\d")
    assert coloured.search(terminal(["status"], project.parent, COLUMNS="150")[1])
    assert not coloured.search(terminal(["status"], project.parent, COLUMNS="150", NO_COLOR="1")[1])
    assert "\x1b" not in shell("specflow status", project.parent).stdout


def test_browse_without_a_terminal_points_to_status(command: Command, project: Path) -> None:
    outcome = command("browse")
    assert outcome.code == ExitCode.BAD_INPUT and "specflow status" in outcome.err and not outcome.out
