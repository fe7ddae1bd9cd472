"""The command line: one file a command, listed in ``commands.py``; ``console.py`` owns stdout, stderr and exit codes.

A command reads its options, calls one workflow and prints what comes back. It computes nothing and loops over no
domain objects. Heavy imports happen inside the commands, because ``specflow --help`` has to be instant.
"""

from __future__ import annotations

import gc
import os
import sys

import typer

from specflow.cli.commands import HELP_NAMES, CommandGroup
from specflow.cli.console import run

TAGLINE = "Which limit is proved, at which condition, by which number? From radio specification to evidence."


def build() -> typer.Typer:
    """Return the application with all commands."""
    app = typer.Typer(
        name="specflow",
        cls=CommandGroup,
        no_args_is_help=True,
        add_completion=False,
        pretty_exceptions_enable=False,
        rich_markup_mode=None,
        context_settings=HELP_NAMES,
    )
    app.callback(help=TAGLINE)(_version_option)
    return app


def _show_version(wanted: bool) -> None:
    if wanted:
        from specflow import __version__

        typer.echo(__version__)
        raise typer.Exit


def _version_option(
    version: bool = typer.Option(
        False, "--version", help="Print the version and end.", is_eager=True, callback=_show_version
    ),
) -> None:
    """Options before a command."""


def main() -> None:
    """Run the command line and end the process with its exit code."""
    # A command lives for a moment and drops little: looking for garbage while modules load, and through everything at
    # the end, is a tenth of its time. Nor does it want the plug-ins that other packages offer to pydantic.
    gc.set_threshold(50_000, 20, 100)
    os.environ.setdefault("PYDANTIC_DISABLE_PLUGINS", "__all__")
    code = run(build())
    gc.freeze()
    sys.exit(code)
