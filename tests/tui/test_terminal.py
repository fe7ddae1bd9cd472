"""The command in a real terminal of 80 × 24: it draws, takes keys, and leaves the terminal as it was."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from tests import harbour

pytestmark = pytest.mark.desktop
SECONDS = 120  # for what takes one; a machine that builds something else at the same time needs more


class Terminal:
    """A tmux session of its own server, so that nobody else's is touched."""

    def __init__(self, folder: Path) -> None:
        self._socket = str(folder / "tmux.socket")
        self._folder = folder

    def run(self, *words: str) -> str:
        """Give tmux a command; return what it prints."""
        done = subprocess.run(
            ["tmux", "-S", self._socket, "-f", os.devnull, *words],
            check=True,
            capture_output=True,
            text=True,
            timeout=SECONDS,
        )
        return done.stdout

    def start(self, command: str) -> None:
        """Run a command in a session of 80 × 24; a shell stays after it."""
        size = ("-x", "80", "-y", "24")
        self.run("new-session", "-d", *size, "-s", "test", "-c", str(self._folder), "env PS1='after> ' sh")
        self.run("send-keys", "-t", "test", "-l", command)
        self.press("Enter")

    def press(self, *keys: str) -> None:
        """Press keys."""
        self.run("send-keys", "-t", "test", *keys)

    def screen(self) -> str:
        """Return what is on the screen."""
        return self.run("capture-pane", "-p", "-t", "test")

    def wait(self, shown: Callable[[str], bool]) -> str:
        """Return the screen as soon as it shows what is waited for; fail with what it shows instead."""
        end = time.monotonic() + SECONDS
        while not shown(screen := self.screen()):
            assert time.monotonic() < end, screen
            time.sleep(0.1)
        return screen


def shows(*words: str) -> Callable[[str], bool]:
    """Return whether all of these are on the screen, as something to wait for."""
    return lambda text: all(one in text for one in words)


@pytest.fixture
def terminal(tmp_path: Path) -> Iterator[Terminal]:
    if shutil.which("tmux") is None:
        pytest.skip("tmux is not installed")
    made = Terminal(tmp_path)
    yield made
    subprocess.run(
        ["tmux", "-S", str(tmp_path / "tmux.socket"), "kill-server"], check=False, capture_output=True
    )


def test_browse_in_a_terminal(terminal: Terminal, tmp_path: Path) -> None:
    harbour.make_store(tmp_path / "harbour.specflow").close()
    terminal.start(f"{sys.executable} -m specflow browse --as-of 2026-06-01")
    screen = terminal.wait(shows("SYS-1 · planned", "28 of 52 points proved, 4 failing"))
    assert all(len(line) <= 80 for line in screen.splitlines())
    terminal.press("n")
    terminal.wait(shows("PA-1 · failing", "at least 30 dBm", "8 of 9 proved, 4 failing, 1 without"))
    terminal.press("g")
    terminal.wait(shows("x open point"))
    terminal.press("g")
    terminal.wait(
        shows("[×]", "pa_bench.xlsx · Bench 1 · D3", "item PA-A: 4 of 9 proved", "fail · 30.61 dBm")
    )
    terminal.press("?")
    terminal.wait(shows("to the next requirement that fails"))
    terminal.press("Escape")
    # Until the help is gone: a key right after escape would be taken for one pressed together with Alt.
    terminal.wait(lambda text: "PA-1 · failing" in text and "to the next requirement" not in text)
    terminal.press("q")
    screen = terminal.wait(lambda text: text.rstrip().endswith("after>"))
    assert "Traceback" not in screen


def test_a_project_that_is_not_there_is_told_in_the_terminal(terminal: Terminal) -> None:
    terminal.start(f"{sys.executable} -m specflow browse")
    screen = terminal.wait(shows("there is no project in this folder", "specflow init"))
    assert "Traceback" not in screen
