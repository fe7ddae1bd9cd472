"""Stdout is data, stderr is talk, and every way to end has its exit code (``errors.ExitCode``)."""

from __future__ import annotations

import contextlib
import sys
from collections.abc import Callable, Iterator
from typing import TYPE_CHECKING, Any

from specflow.cli.streams import drop_output, harmless, is_unicode, prepare_streams
from specflow.errors import ExitCode, SpecflowError, StoreError

if TYPE_CHECKING:
    import typer


def say(text: str = "") -> None:
    """Write a line of talk to stderr; one that nobody can be told is left unsaid."""
    with contextlib.suppress(OSError):
        print(harmless(text), file=sys.stderr)


def put(text: str = "", *, end: str = "\n") -> None:
    """Write data to stdout."""
    _deliver(lambda: print(text, end=end, flush=True))


def put_bytes(content: bytes) -> None:
    """Write the bytes of a file to stdout."""
    sink = sys.stdout.buffer
    _deliver(lambda: (sink.write(content), sink.flush()))


def _deliver(write: Callable[[], object]) -> None:
    """Write; when the reader has gone (a pager that was closed) the rest is dropped and the command goes on.

    Ending here would leave unstored what the person has accepted, and would take the findings out of the exit code.
    """
    try:
        write()
    except BrokenPipeError:
        drop_output()
    except OSError as error:
        drop_output()
        raise StoreError(
            f"the output cannot be written: {error.strerror or error}",
            where="stdout",
            hint="free some space, or send it elsewhere",
        ) from error


def put_json(value: Any) -> None:
    """Write JSON to stdout, keys in the order given, nothing escaped that need not be."""
    import json

    put(json.dumps(value, ensure_ascii=not is_unicode(), indent=1))


def ask(question: str) -> bool:
    """Ask on the terminal; without one the answer is no, and the person is told which option says yes."""
    if not (sys.stdin.isatty() and sys.stderr.isatty()):
        raise SpecflowError(
            "nothing was stored: there is no terminal to ask on",
            hint="say --yes to accept, --dry-run to look only",
        )
    print(f"{harmless(question)} [y/N] ", end="", file=sys.stderr, flush=True)
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
    prepare_streams()
    try:
        result = app(standalone_mode=False)
    except SpecflowError as error:
        show_error(error)
        return int(error.exit_code)
    except KeyboardInterrupt:
        result = int(ExitCode.INTERRUPTED)
    except SystemExit as error:
        if isinstance(
            error.__context__, BrokenPipeError
        ):  # how click ends when the reader of its help has gone
            return int(ExitCode.CLEAN)
        raise
    except OSError as error:
        show_error(_refused_by_the_system(error))
        return int(ExitCode.ENVIRONMENT)
    except MemoryError:
        show_error(StoreError("there is not enough memory", where="this machine", hint="split the file"))
        return int(ExitCode.ENVIRONMENT)
    except Exception as error:  # click's own errors carry their exit code and know how to show themselves
        return _end_of_click(error)
    if result == ExitCode.INTERRUPTED:  # click too turns the interrupt into this code, and says nothing
        say("interrupted; nothing half-written was left behind")
    return int(result) if isinstance(result, int) else int(ExitCode.CLEAN)


def _refused_by_the_system(error: OSError) -> StoreError:
    """Return what is said of a fault that no command foresaw: a disk that fails, a name too long, no more handles."""
    return StoreError(
        f"the system refuses: {error.strerror or error}",
        where=str(error.filename or "this machine"),
        hint="check the path, the rights on it and the space left",
    )


def _end_of_click(error: Exception) -> int:
    show = getattr(error, "show", None)
    code = getattr(error, "exit_code", None)
    if code is None:
        if type(error).__name__ == "Abort":
            say("aborted")
            return int(ExitCode.INTERRUPTED)
        raise error
    if show is not None:
        with contextlib.suppress(OSError):
            show()
    return int(code)


def show_error(error: SpecflowError) -> None:
    """Print one error: what, where, what to do."""
    say(f"specflow: {error.message}")
    if error.where:
        say(f"  where: {error.where}")
    if error.hint:
        say(f"  do:    {error.hint}")
