"""Stdout is data, stderr is talk, and every way to end has its exit code (``errors.ExitCode``)."""

from __future__ import annotations

import contextlib
import os
import sys
from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

from specflow.errors import ExitCode, SpecflowError

if TYPE_CHECKING:
    import typer

PIPED_WIDTH = 10_000  # a pipe has no width; so wide that no row of ours is folded


def say(text: str = "") -> None:
    """Write a line of talk to stderr."""
    print(text, file=sys.stderr)


def put(text: str) -> None:
    """Write data to stdout."""
    print(text)


def put_json(value: Any) -> None:
    """Write JSON to stdout, keys in the order given, nothing escaped that need not be."""
    import json

    print(json.dumps(value, ensure_ascii=False, indent=1))


def ask(question: str) -> bool:
    """Ask on the terminal; without one the answer is no, and the person is told which option says yes."""
    if not (sys.stdin.isatty() and sys.stderr.isatty()):
        raise SpecflowError(
            "nothing was stored: there is no terminal to ask on",
            hint="say --yes to accept, --dry-run to look only",
        )
    print(f"{question} [y/N] ", end="", file=sys.stderr, flush=True)
    return sys.stdin.readline().strip().casefold() in ("y", "yes")


def person(name: str) -> str:
    """Return the name under which a decision is recorded: the one given, or that of the account."""
    if name:
        return name
    import getpass

    with contextlib.suppress(OSError, KeyError):
        return getpass.getuser()
    return "unknown"


@contextlib.contextmanager
def progress(title: str) -> Iterator[Any]:
    """Show how far a long task is, on stderr and on a terminal only; yields ``step(text)``."""
    if not sys.stderr.isatty():
        yield lambda text: None
        return
    from rich.console import Console

    console = Console(stderr=True)
    with console.status(title) as status:
        yield lambda text: status.update(f"{title}: {text}")


def run(app: typer.Typer) -> int:
    """Run the application; return its exit code. No traceback ever reaches the person for an error of ours."""
    try:
        result = app(standalone_mode=False)
    except SpecflowError as error:
        show_error(error)
        return int(error.exit_code)
    except KeyboardInterrupt:
        say("interrupted; nothing half-written was left behind")
        return int(ExitCode.INTERRUPTED)
    except BrokenPipeError:
        # The reader has gone (a pager that was closed): not our error, and Python must not complain at exit.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return int(ExitCode.CLEAN)
    except Exception as error:  # click's own errors carry their exit code and know how to show themselves
        return _end_of_click(error)
    return int(result) if isinstance(result, int) else int(ExitCode.CLEAN)


def _end_of_click(error: Exception) -> int:
    show = getattr(error, "show", None)
    code = getattr(error, "exit_code", None)
    if code is None:
        if type(error).__name__ == "Abort":
            say("aborted")
            return int(ExitCode.INTERRUPTED)
        raise error
    if show is not None:
        show()
    return int(code)


def show_error(error: SpecflowError) -> None:
    """Print one error: what, where, what to do."""
    say(f"specflow: {error.message}")
    if error.where:
        say(f"  where: {error.where}")
    if error.hint:
        say(f"  do:    {error.hint}")
