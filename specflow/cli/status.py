"""``specflow status``: what is proved, what fails and what has no evidence."""

from __future__ import annotations

import os
from typing import Annotated

import typer

from specflow.cli.console import put_json
from specflow.cli.options import AsOfOption, JsonOption, ProjectOption, judged_on, open_store

IdsArgument = Annotated[
    list[str] | None,
    typer.Argument(help="Only these requirements, by id.", metavar="ID", show_default=False),
]
LabelOption = Annotated[
    str,
    typer.Option(
        "--label",
        metavar="STATE",
        help="Only requirements in this state, such as 'failing'.",
        show_default=False,
    ),
]


def status(
    ids: IdsArgument = None,
    project: ProjectOption = "",
    label: LabelOption = "",
    as_of: AsOfOption = "",
    as_json: JsonOption = False,
) -> None:
    """Show what is proved, what fails and what has no evidence.

    One row a requirement: k of n required points proved, the worst guarded margin and where it is, and its state.
    Totals of compliance and of close-out follow, with their denominators.
    """
    # Status multiplies no matrices: the threads that OpenBLAS starts for that when numpy is imported would only spin,
    # for a tenth of a second of a core that others may want.
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

    from specflow.cli.tables import put_report, report_as_json
    from specflow.workflows.status import project_status

    with open_store(project, read_only=True) as store:
        report = project_status(store, judged_on(as_of), codes=ids or (), label=label)
    if as_json:
        put_json(report_as_json(report))
    else:
        put_report(report)
