"""``specflow withdraw``: evidence that was found wrong counts no more; it stays stored, with the reason."""

from __future__ import annotations

from typing import Annotated

import typer

from specflow.cli.console import ask, person, put_json, say
from specflow.cli.options import (
    ByOption,
    DryRunOption,
    JsonOption,
    ProjectOption,
    YesOption,
    judged_on,
    open_store,
)

TableArgument = Annotated[str, typer.Argument(help="The evidence table.", metavar="EV-N")]
Where = Annotated[
    list[str],
    typer.Option(
        "--where",
        metavar="CONDITION",
        help="Only its rows at this condition: 'temperature_ambient 23 °C'. Repeatable.",
    ),
]
Reason = Annotated[str, typer.Option("--reason", metavar="TEXT", help="What was found wrong; it is kept.")]


def withdraw(
    table: TableArgument,
    where: Where = [],  # noqa: B006
    reason: Reason = "",
    project: ProjectOption = "",
    yes: YesOption = False,
    dry_run: DryRunOption = False,
    as_json: JsonOption = False,
    by: ByOption = "",
) -> None:
    """Withdraw evidence that was found wrong: it stays stored with the reason, and counts no more.

    Shows whose status changes, then asks. What was derived from it is stale from then on. For a retest
    there is attach --supersedes, which keeps a fail open until the retest names it.
    """
    from specflow.cli.tables import put_table
    from specflow.workflows.try_tables import statuses_as_json, statuses_table
    from specflow.workflows.withdraw import accept_withdraw, preview_withdraw

    with open_store(project, read_only=dry_run) as store:
        found = preview_withdraw(store, table, where, judged_on(""), reason=reason, by=person(by))
        if as_json:
            told = {"withdrawal": found.withdrawal.id, "table": found.table.id, "rows": found.rows}
            put_json(told | {"derived": found.derived, "statuses": statuses_as_json(found.statuses)})
        else:
            put_table(statuses_table(found.statuses))
        say(
            f"{found.rows} of {found.table.rows} rows of {found.table.id} would be withdrawn: {reason.strip()}"
        )
        if found.derived:
            say(f"derived from this table: {', '.join(found.derived)}")
        if dry_run or not (yes or ask("withdraw this?")):
            say("nothing was stored")
            return
        revision = accept_withdraw(store, found)
    say(f"withdrawn by {found.withdrawal.id}; the project is at revision {revision}")
