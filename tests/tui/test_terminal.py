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
SECONDS = 30


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
    screen = terminal.wait(lambda text: "SYS-1 · planned" in text)
    assert "28 of 52 points proved, 4 failing" in screen
    assert all(len(line) <= 80 for line in screen.splitlines())
    terminal.press("n")
    screen = terminal.wait(lambda text: "PA-1 · failing" in text)
    assert "at least 30 dBm" in screen and "8 of 9 proved, 4 failing, 1 missing" in screen
    terminal.press("g")
    terminal.wait(lambda text: "x open point" in text)
    terminal.press("g")
    screen = terminal.wait(lambda text: "[×]" in text and "pa_bench.xlsx · Bench 1 · D3" in text)
    assert "item PA-A: 4 of 9 proved" in screen and "fail · 30.61 dBm" in screen
    terminal.press("?")
    terminal.wait(lambda text: "to the next requirement that fails" in text)
    terminal.press("Escape")
    terminal.wait(lambda text: "PA-1 · failing" in text)
    terminal.press("q")
    screen = terminal.wait(lambda text: text.rstrip().endswith("after>"))
    assert "Traceback" not in screen


def test_a_project_that_is_not_there_is_told_in_the_terminal(terminal: Terminal) -> None:
    terminal.start(f"{sys.executable} -m specflow browse")
    screen = terminal.wait(lambda text: "there is no project in this folder" in text)
    assert "specflow init" in screen and "Traceback" not in screen
