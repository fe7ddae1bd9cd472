"""``specflow budget``: what the chains come to, who eats the margin, and edits of single lines."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Annotated, Any

import typer

from specflow.cli.console import ask, person, progress, put, put_json, say
from specflow.cli.options import (
    ByOption,
    DryRunOption,
    JsonOption,
    ProjectOption,
    YesOption,
    open_store,
    refuse_idle,
)
from specflow.errors import SpecflowError

if TYPE_CHECKING:
    from specflow.workflows.budget_outcome import HowToCompute
    from specflow.workflows.edit_budget import EditPreview
    from specflow.workflows.show_budget import ShownBudget

PICTURE_WIDTH = 96

CodeArgument = Annotated[
    str,
    typer.Argument(
        help="The budget, by its id; without one all are listed.", metavar="ID", show_default=False
    ),
]
AtOption = Annotated[
    str,
    typer.Option(
        "--at",
        metavar="POINT",
        help="The condition point to show: its number, or words of its conditions such as '30 GHz, +55 °C'; "
        "default: the worst.",
        show_default=False,
    ),
]
MethodOption = Annotated[
    list[str] | None,
    typer.Option(
        "--method",
        metavar="METHOD",
        help="How to treat tolerances: nominal, worst-case, rss or monte-carlo (may be repeated); default: all.",
        show_default=False,
    ),
]
TrialsOption = Annotated[
    int | None,
    typer.Option(
        "--trials",
        metavar="N",
        help="Specimens of the Monte Carlo run; default: 20000, fewer over very many condition points.",
        min=1,
        show_default=False,
    ),
]
SeedOption = Annotated[int, typer.Option("--seed", metavar="N", help="Seed of the Monte Carlo run.", min=0)]

SetOption = Annotated[
    list[str] | None,
    typer.Option(
        "--set",
        metavar="EDIT",
        help="Edit a line: 'POSITION PARAMETER = VALUE', such as '4 noise_figure = 1.7 dB ± 0.2 dB' (may be repeated).",
        show_default=False,
    ),
]
SigmaOption = Annotated[
    float | None,
    typer.Option(
        "--sigma",
        metavar="K",
        help="Root sum of squares at so many standard deviations; without it as the tolerances are stated.",
        show_default=False,
    ),
]
ReasonOption = Annotated[
    str,
    typer.Option(
        "--reason",
        metavar="WHY",
        help="Why the budget is edited; it stays in the history.",
        show_default=False,
    ),
]


def budget(
    code: CodeArgument = "",
    at: AtOption = "",
    method: MethodOption = None,
    trials: TrialsOption = None,
    seed: SeedOption = 1,
    sigma: SigmaOption = None,
    settings: SetOption = None,
    reason: ReasonOption = "",
    yes: YesOption = False,
    dry_run: DryRunOption = False,
    by: ByOption = "",
    project: ProjectOption = "",
    as_json: JsonOption = False,
) -> None:
    """Show budgets: along the chain, shares, slopes, margins.

    Without an id all budgets are listed with their smallest margin. With one: the cumulative table at the worst
    condition point, or at another with --at; margins to the limits served; nominal, worst case, root sum of squares and
    Monte Carlo side by side, each with what it assumes; who makes how much; and how much each line moves the result.

    --set edits a line. What it changes and what that does to the margins is shown first; accepted, it is a new revision
    of the budget. Positions and everything else are edited in the workbook, and loaded.
    """
    from specflow.cli.tables import put_report, put_table, report_as_json, table_as_json
    from specflow.workflows.show_budget import list_budgets, show_budget

    if settings:
        refuse_idle("with --set", "leave it out", at=at, method=method, trials=trials, sigma=sigma)
        _edit(code, settings, reason, project, Answer(yes=yes, dry_run=dry_run, by=by), as_json=as_json)
        return
    if not code:
        refuse_idle("without a budget", "name the budget", at=at, method=method, trials=trials, sigma=sigma)
        with open_store(project, read_only=True) as store:
            table = list_budgets(store)
        put_json(table_as_json(table)) if as_json else put_table(table)
        return
    how = _how(method, trials, seed, sigma)
    with open_store(project, read_only=True) as store, progress(f"budget {code}") as step:
        shown = show_budget(store, code, at=at, how=how, step=step)
    if as_json:
        pictures = [picture.model_dump(mode="json") for picture in shown.pictures]
        told = report_as_json(shown.report)
        put_json({"at": shown.outcome.places[shown.place], **told, "pictures": pictures})
        return
    put(f"{shown.report.title}\n{shown.report.subtitle}\n")
    put_report(shown.report.model_copy(update={"facts": ()}))
    _put_pictures(shown)
    for name, value in shown.report.facts:
        put(f"{name}: {value}")


@dataclass(frozen=True, slots=True)
class Answer:
    """What the person said beforehand about storing."""

    yes: bool
    dry_run: bool
    by: str


def _edit(
    code: str, settings: list[str], reason: str, project: str, answer: Answer, *, as_json: bool
) -> None:
    from specflow.workflows.edit_budget import accept_edit, preview_edit

    if not code:
        raise SpecflowError(
            "--set does not say of which budget", hint="name the budget: specflow budget ID --set ..."
        )
    if not reason and not answer.dry_run:
        raise SpecflowError(
            "an edit of a budget needs a reason", hint="say why with --reason; --dry-run looks only"
        )
    with open_store(project, read_only=answer.dry_run) as store:
        preview = preview_edit(store, code, settings, reason)
        if not as_json:
            _show_edit(preview)
        wanted = bool(preview.changes) and not answer.dry_run
        stored = wanted and (answer.yes or ask("Store this as a new revision of the budget?"))
        if stored:
            accept_edit(store, preview, by=person(answer.by), reason=reason)
        revision = store.revision
    if as_json:
        put_json(_edit_as_json(preview, stored, revision))
    elif preview.changes:
        say(f"stored; the project is at revision {revision}" if stored else "nothing was stored")


def _show_edit(preview: EditPreview) -> None:
    from specflow.cli.tables import put_table
    from specflow.reports.changes import changes_table

    if not preview.changes:
        say("nothing changes")
        return
    put_table(changes_table(preview.changes, {}).without("read_as"))
    put("")
    put_table(preview.moved)


def _edit_as_json(preview: EditPreview, stored: bool, revision: int) -> dict[str, Any]:
    from specflow.cli.tables import table_as_json

    changes = [
        one.model_dump(mode="json", include={"noun", "id", "action", "fields"}) for one in preview.changes
    ]
    moved = table_as_json(preview.moved)
    return {"changes": changes, "moved": moved, "stored": stored, "project_revision": revision}


def _put_pictures(shown: ShownBudget) -> None:
    """Draw the pictures in plain text, as wide as the terminal up to a width that the eye still follows."""
    from shutil import get_terminal_size

    from specflow.reports.picture_text import picture_lines

    width = min(get_terminal_size((PICTURE_WIDTH, 24)).columns, PICTURE_WIDTH)
    for picture in shown.pictures:
        put("\n".join(picture_lines(picture, width)) + "\n")


def _how(method: list[str] | None, trials: int | None, seed: int, sigma: float | None) -> HowToCompute:
    from specflow.workflows.budget_outcome import ALL_WAYS, HowToCompute
    from specflow.workflows.show_budget import ways_named

    return HowToCompute(ways=ways_named(method) if method else ALL_WAYS, trials=trials, seed=seed, k=sigma)
