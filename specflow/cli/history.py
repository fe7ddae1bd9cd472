"""``specflow history``: who changed what, when and why."""

from __future__ import annotations

from typing import Annotated

import typer

from specflow.cli.console import put_json
from specflow.cli.options import JsonOption, ProjectOption, open_store

IdArgument = Annotated[
    str,
    typer.Argument(help="Only what has this id; default: everything.", metavar="ID", show_default=False),
]
LastOption = Annotated[
    int | None,
    typer.Option("--last", metavar="N", min=1, help="Only the newest so many changes.", show_default=False),
]


def history(
    code: IdArgument = "",
    project: ProjectOption = "",
    last: LastOption = None,
    as_json: JsonOption = False,
) -> None:
    """Show who changed what, when and why."""
    from specflow.cli.tables import put_table, table_as_json
    from specflow.workflows.history import project_history

    with open_store(project, read_only=True) as store:
        table = project_history(store, code, last=last)
    if as_json:
        put_json(table_as_json(table))
    else:
        put_table(table)
