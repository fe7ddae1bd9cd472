"""Options that several commands share, defined once."""

from __future__ import annotations

import os
from datetime import date
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from specflow.cli.console import say
from specflow.errors import SpecflowError

if TYPE_CHECKING:
    from specflow.store import ProjectStore

PROJECT_VARIABLE = "SPECFLOW_PROJECT"

ProjectOption = Annotated[
    str,
    typer.Option(
        "--project",
        "-p",
        metavar="PROJECT",
        help=f"The project: a .specflow file or a database URL. Default: ${PROJECT_VARIABLE}, else the only "
        ".specflow file in this folder.",
    ),
]
JsonOption = Annotated[bool, typer.Option("--json", help="Write JSON to stdout instead of a table.")]
ByOption = Annotated[
    str, typer.Option("--by", metavar="NAME", help="Who decides; default: the name of this account.")
]
YesOption = Annotated[bool, typer.Option("--yes", "-y", help="Accept without asking.")]
DryRunOption = Annotated[bool, typer.Option("--dry-run", help="Show what would happen; store nothing.")]
TakeRestOption = Annotated[
    bool,
    typer.Option("--take-rest", help="Store what could be read although something was rejected."),
]
AsOfOption = Annotated[
    str,
    typer.Option(
        "--as-of",
        metavar="DATE",
        help="Judge as of this date (YYYY-MM-DD); default: today.",
        show_default=False,
    ),
]


def named_values(option: str, texts: list[str], *, example: str) -> dict[str, str]:
    """Take the NAME=VALUE texts of an option apart; refuse what is none, and two values for one name."""
    said: dict[str, str] = {}
    for text in texts:
        name, sign, value = (part.strip() for part in text.partition("="))
        if not sign or not name or not value:
            raise SpecflowError(f"{option} {text!r} is not NAME=VALUE", hint=f"{option} {example}")
        if said.setdefault(name, value) != value:
            raise SpecflowError(
                f"{option} says two things of {name!r}: {said[name]!r} and {value!r}",
                hint="say the one that holds",
            )
    return said


def find_project(project: str) -> str:
    """Return where the project is: the option, the variable, or the only .specflow file of this folder."""
    chosen = project or os.environ.get(PROJECT_VARIABLE, "")
    if chosen:
        return chosen
    found = sorted(path.name for path in Path.cwd().glob("*.specflow"))
    if len(found) == 1:
        return found[0]
    if not found:
        raise SpecflowError(
            "there is no project in this folder",
            where=str(Path.cwd()),
            hint="specflow init NAME makes one; --project names one elsewhere; specflow demo shows an example",
        )
    raise SpecflowError(
        f"there are {len(found)} projects in this folder: {', '.join(found)}",
        hint="choose one with --project",
    )


def open_store(project: str, *, read_only: bool = False) -> ProjectStore:
    """Open the project that the option means; say what opening it did (an upgrade, and where the copy is)."""
    from specflow.store import open_project

    store = open_project(find_project(project), read_only=read_only)
    for note in store.notes:
        say(note)
    return store


def judged_on(as_of: str) -> date:
    """Return the date of judgement; today unless one is given."""
    if not as_of:
        return date.today()
    try:
        return date.fromisoformat(as_of)
    except ValueError:
        raise SpecflowError(
            f"{as_of!r} is not a date", where="--as-of", hint="write it as YYYY-MM-DD"
        ) from None


def refuse_idle(where: str, remedy: str, /, **given: object) -> None:
    """Refuse options that would do nothing; ``where`` is "with --verify", keywords are names of parameters."""
    said = [f"--{name.strip('_').replace('_', '-')}" for name, value in given.items() if value]
    if said:
        has = "has" if len(said) == 1 else "have"
        raise SpecflowError(f"{', '.join(said)} {has} no meaning {where}", hint=remedy)
