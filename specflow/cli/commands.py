"""The list of all commands, and a group that imports a command only when it is asked for.

``specflow --help`` has to be instant, so the sentence that it shows of each command stands here; a test holds it to
the beginning of the command's own help.
"""

from __future__ import annotations

from dataclasses import dataclass
from importlib import import_module
from typing import Any

import typer
from typer.core import TyperGroup


@dataclass(frozen=True, slots=True)
class CommandEntry:
    """One command: the function of its name in the module of its name, and what it is for.

    ``module`` names both where Python has taken the word.
    """

    name: str
    summary: str
    module: str = ""

    def load(self) -> Any:
        """Import the command and return it, ready to be invoked."""
        name = self.module or self.name
        function = getattr(import_module(f"specflow.cli.{name}"), name)
        app = typer.Typer(add_completion=False, rich_markup_mode=None, context_settings=HELP_NAMES)
        app.command(self.name)(function)
        return typer.main.get_command(app)


HELP_NAMES = {"help_option_names": ["-h", "--help"]}

COMMANDS = (
    CommandEntry("init", "Start a project: an empty project file and a workbook to fill in."),
    CommandEntry("load", "Load requirements, blocks and conditions from a workbook."),
    CommandEntry("budget", "Show budgets: along the chain, shares, slopes, margins."),
    CommandEntry("allocate", "Allocate a budget over its blocks."),
    CommandEntry("testsheet", "Write a test sheet: the points still missing, for the bench."),
    CommandEntry("attach", "Attach measurement files."),
    CommandEntry("derive", "Derive results from raw tables by a law."),
    CommandEntry("withdraw", "Withdraw evidence that was found wrong."),
    CommandEntry("known", "Evaluate a budget with the best that is known of each block."),
    CommandEntry("try", "Try changes: what they would do to margins, allocations and status.", "try_"),
    CommandEntry("status", "Show what is proved, what fails and what has no evidence."),
    CommandEntry("check", "List the findings of the rules."),
    CommandEntry("trace", "Walk from a requirement up to the system and down to the cell."),
    CommandEntry("export", "Write the compliance workbook, or the same as a page, csv or JSON."),
    CommandEntry("browse", "Browse the requirements in the terminal."),
    CommandEntry("rules", "Explain the rules."),
    CommandEntry("history", "Show who changed what, when and why."),
    CommandEntry("demo", "Build the example in a folder and run the whole job on it."),
)
BY_NAME = {entry.name: entry for entry in COMMANDS}


class CommandGroup(TyperGroup):
    """The commands of the list, imported one by one."""

    def list_commands(self, ctx: Any) -> list[str]:
        """Return the names in the order of the list, which is the order of the work."""
        return [entry.name for entry in COMMANDS]

    def get_command(self, ctx: Any, cmd_name: str) -> Any:
        """Return a command, or None when there is none of that name."""
        entry = BY_NAME.get(cmd_name)
        return entry.load() if entry is not None else None

    def format_commands(self, ctx: Any, formatter: Any) -> None:
        """Write names and sentences without importing anything."""
        with formatter.section("Commands"):
            formatter.write_dl([(entry.name, entry.summary) for entry in COMMANDS])

    def resolve_command(self, ctx: Any, args: list[str]) -> Any:
        """Return the command that the first argument names; what is misspelt is told with what is near."""
        if args and args[0] not in BY_NAME:
            from difflib import get_close_matches

            near = get_close_matches(args[0], BY_NAME, n=1)
            hint = f"did you mean {near[0]}?" if near else f"there are: {', '.join(BY_NAME)}"
            ctx.fail(f"there is no command {args[0]!r}; {hint}")
        entry = BY_NAME[args[0]]
        return entry.name, entry.load(), args[1:]
