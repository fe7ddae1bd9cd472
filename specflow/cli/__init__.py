"""The command line: one file a command, listed here; ``console.py`` owns stdout, stderr and exit codes.

A command reads its options, calls one workflow and prints what comes back. It computes nothing and loops over no
domain objects. Heavy imports happen inside the commands, because ``specflow --help`` has to be instant.
"""

from __future__ import annotations

import sys

import typer

from specflow.cli import (
    attach,
    browse,
    check,
    demo,
    export,
    history,
    init,
    load,
    rules,
    status,
    trace,
)
from specflow.cli.console import run

COMMANDS = (
    ("init", init.init),
    ("load", load.load),
    ("attach", attach.attach),
    ("status", status.status),
    ("check", check.check),
    ("trace", trace.trace),
    ("export", export.export),
    ("browse", browse.browse),
    ("rules", rules.rules),
    ("history", history.history),
    ("demo", demo.demo),
)


def build() -> typer.Typer:
    """Return the application with all commands."""
    app = typer.Typer(
        name="specflow",
        help="Which limit is proved, at which condition, by which number? From radio specification to evidence.",
        no_args_is_help=True,
        add_completion=False,
        pretty_exceptions_enable=False,
        context_settings={"help_option_names": ["-h", "--help"]},
    )
    for name, command in COMMANDS:
        app.command(name)(command)
    app.callback()(_version_option)
    return app


def _version_option(
    version: bool = typer.Option(False, "--version", help="Print the version and end.", is_eager=True),
) -> None:
    if version:
        from specflow import __version__

        typer.echo(__version__)
        raise typer.Exit


def main() -> None:
    """Run the command line and end the process with its exit code."""
    sys.exit(run(build()))
