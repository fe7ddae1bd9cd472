"""``specflow known``: a budget with the best that is known of each block, and what misses its allocation."""

from __future__ import annotations

from typing import Annotated

import typer

from specflow.cli.console import ask, person, put_json, say
from specflow.cli.options import (
    AsOfOption,
    ByOption,
    JsonOption,
    ProjectOption,
    YesOption,
    judged_on,
    open_store,
)

BudgetArgument = Annotated[
    str, typer.Argument(help="The budget, by its id.", metavar="BUDGET", show_default=False)
]
SerialOption = Annotated[
    str,
    typer.Option(
        "--serial",
        metavar="ITEM",
        help="One system as built: its item, by id or serial number.",
        show_default=False,
    ),
]
ConfidenceOption = Annotated[
    float,
    typer.Option("--confidence", metavar="PART", help="With which the predicted margin is kept, one-sided."),
]
RecordOption = Annotated[
    bool, typer.Option("--record", help="Record the result as evidence of method analysis, with its sources.")
]


def known(
    budget: BudgetArgument,
    project: ProjectOption = "",
    serial: SerialOption = "",
    confidence: ConfidenceOption = 0.95,
    as_of: AsOfOption = "",
    record: RecordOption = False,
    yes: YesOption = False,
    by: ByOption = "",
    as_json: JsonOption = False,
) -> None:
    """Evaluate a budget with the best that is known of each block.

    Point by point the best evidence is taken: test on qualification or production hardware before test on earlier
    hardware, composite, analysis with a validated model, other analysis, similarity, datasheet, estimate. Blocks that
    miss their allocation are shown with what that costs the system, and what could make up for them.
    """
    from specflow.cli.tables import put_table
    from specflow.workflows.as_known import known_budget
    from specflow.workflows.known_tables import known_as_json, known_tables
    from specflow.workflows.record_known import record_known

    with open_store(project, read_only=not record) as store:
        found = known_budget(store, budget, judged_on(as_of), serial=serial, confidence=confidence)
        if not as_json:
            for table in known_tables(found):
                put_table(table)
            for note in found.notes:
                say(f"note: {note}")
        stored: tuple[str, ...] = ()
        if record and (yes or ask("Record this result as evidence?")):
            stored = record_known(store, found, by=person(by))
    if as_json:
        put_json({**known_as_json(found), "recorded": list(stored)})
    elif record:
        say(f"recorded as {', '.join(stored)}" if stored else "nothing was stored")
