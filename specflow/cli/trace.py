"""``specflow trace``: up to the system, down to the cell, and back."""

from __future__ import annotations

from typing import Annotated

import typer

from specflow.cli.console import put_json
from specflow.cli.options import AsOfOption, JsonOption, ProjectOption, judged_on, open_store

NameArgument = Annotated[
    str,
    typer.Argument(
        help="A requirement, block, evidence table or file, by its id; or the name of an evidence file.",
        metavar="ID",
        show_default=False,
    ),
]


def trace(
    name: NameArgument,
    project: ProjectOption = "",
    as_of: AsOfOption = "",
    as_json: JsonOption = False,
) -> None:
    """Walk from a requirement up to the system and down to the cell.

    A requirement leads up to its parents and down over allocations, activities and required points to file, sheet and
    cell. A block, an evidence table or a file leads back to the requirements that its records serve.
    """
    from specflow.cli.tables import put_table, table_as_json
    from specflow.workflows.trace import trace as trail_of

    with open_store(project, read_only=True) as store:
        table = trail_of(store, judged_on(as_of), name)
    if as_json:
        put_json(table_as_json(table))
    else:
        put_table(table)
