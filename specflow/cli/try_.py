"""``specflow try``: what changes would do to margins, allocations and status; nothing is stored unless it is kept."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

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
    refuse_idle,
)
from specflow.errors import SpecflowError

if TYPE_CHECKING:
    from specflow.workflows.try_change import Trial

ChangesArgument = Annotated[
    list[str] | None,
    typer.Argument(
        help="A change in quotes, such as 'LNA-NF-1 limit <= 1.5 dB' or 'RX LNA gain = 23 dB'.",
        metavar="CHANGE",
        show_default=False,
    ),
]
AlternativesOption = Annotated[
    str,
    typer.Option(
        "--alternatives",
        metavar="REQUIREMENT",
        help="Instead of a change: compare the budgets of this requirement side by side.",
        show_default=False,
    ),
]
KeepOption = Annotated[bool, typer.Option("--keep", help="Store the changes after they were looked at.")]
ReasonOption = Annotated[
    str, typer.Option("--reason", metavar="WHY", help="With --keep: why.", show_default=False)
]


def try_(
    changes: ChangesArgument = None,
    project: ProjectOption = "",
    alternatives: AlternativesOption = "",
    as_of: AsOfOption = "",
    keep: KeepOption = False,
    reason: ReasonOption = "",
    yes: YesOption = False,
    by: ByOption = "",
    as_json: JsonOption = False,
) -> None:
    """Try changes: what they would do to margins, allocations and status.

    A change is one of:
    REQUIREMENT limit LIMIT;
    BUDGET LINE = VALUE, with the line as 'LNA gain' or 'position 2 gain';
    BUDGET LINE tolerance = 0.5 dB limits uniform (or 0.3 dB 2 sigma, or none);
    BUDGET add LINE = VALUE; BUDGET position 2 block = ATT, count = 4, passive = yes, or removed;
    BUDGET input level = -60 dBm, noise source = 50 K, bandwidth = 20 MHz.

    Several changes are tried together. Nothing is stored, unless --keep asks for it.
    """
    if bool(changes) == bool(alternatives):
        raise SpecflowError(
            "there is nothing to try" if not changes else "changes and --alternatives are two questions",
            hint="give a change in quotes, or --alternatives REQUIREMENT",
        )
    if alternatives:
        refuse_idle("with --alternatives", "leave it out", keep=keep, as_of=as_of, reason=reason)
        _compare(project, alternatives, as_json=as_json)
        return
    if keep and not reason:
        raise SpecflowError("a change that is kept needs a reason", hint="say --reason '...'")
    from specflow.workflows.try_change import keep_trial, try_changes
    from specflow.workflows.try_tables import trial_as_json

    with open_store(project, read_only=not keep) as store:
        trial = try_changes(store, changes or (), judged_on(as_of))
        if not as_json:
            _show(trial)
        stored = keep and bool(trial.changes) and (yes or ask(f"Store these {len(trial.changes)} changes?"))
        if stored:
            keep_trial(store, trial, by=person(by), reason=reason)
    if as_json:
        put_json({**trial_as_json(trial), "stored": stored})
    else:
        say("stored" if stored else "nothing was stored")


def _show(trial: Trial) -> None:
    from specflow.cli.tables import put_table
    from specflow.reports.changes import changes_table
    from specflow.workflows.try_tables import trial_tables

    for table in (changes_table(trial.changes, {}), *trial_tables(trial)):
        put_table(table)
    for note in trial.notes:
        say(f"note: {note}")


def _compare(project: str, requirement: str, *, as_json: bool) -> None:
    from specflow.cli.tables import put_table
    from specflow.workflows.try_change import compare_alternatives
    from specflow.workflows.try_tables import alternatives_as_json, alternatives_table

    with open_store(project, read_only=True) as store:
        states = compare_alternatives(store, requirement)
    if as_json:
        put_json(alternatives_as_json(states))
    else:
        put_table(alternatives_table(states, requirement))
