"""``specflow budget``: what the chains come to, who eats the margin, and edits of single lines."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

import typer

from specflow.cli.console import progress, put, put_json
from specflow.cli.options import JsonOption, ProjectOption, open_store

if TYPE_CHECKING:
    from specflow.workflows.budget_outcome import HowToCompute
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
        help="The condition point to show: its number, or words of its conditions such as '30 GHz, +55 °C'; "
        "default: the worst.",
        show_default=False,
    ),
]
MethodOption = Annotated[
    list[str] | None,
    typer.Option(
        "--method",
        help="How to treat tolerances: nominal, worst-case, rss or monte-carlo (may be repeated); default: all.",
        show_default=False,
    ),
]
TrialsOption = Annotated[int, typer.Option("--trials", help="Specimens of the Monte Carlo run.", min=1)]
SeedOption = Annotated[int, typer.Option("--seed", help="Seed of the Monte Carlo run.", min=0)]


def budget(
    code: CodeArgument = "",
    at: AtOption = "",
    method: MethodOption = None,
    trials: TrialsOption = 20_000,
    seed: SeedOption = 1,
    project: ProjectOption = "",
    as_json: JsonOption = False,
) -> None:
    """Show budgets: along the chain, shares, slopes, margins.

    Without an id all budgets are listed with their smallest margin. With one: the cumulative table at the worst
    condition point, or at another with --at; margins to the limits served; nominal, worst case, root sum of squares and
    Monte Carlo side by side, each with what it assumes; who makes how much; and how much each line moves the result.
    """
    from specflow.cli.tables import put_report, put_table, report_as_json, table_as_json
    from specflow.workflows.show_budget import list_budgets, show_budget

    if not code:
        with open_store(project, read_only=True) as store:
            table = list_budgets(store)
        put_json(table_as_json(table)) if as_json else put_table(table)
        return
    how = _how(method, trials, seed)
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


def _put_pictures(shown: ShownBudget) -> None:
    """Draw the pictures in plain text, as wide as the terminal up to a width that the eye still follows."""
    from shutil import get_terminal_size

    from specflow.reports.picture_text import picture_lines

    width = min(get_terminal_size((PICTURE_WIDTH, 24)).columns, PICTURE_WIDTH)
    for picture in shown.pictures:
        put("\n".join(picture_lines(picture, width)) + "\n")


def _how(method: list[str] | None, trials: int, seed: int) -> HowToCompute:
    from specflow.workflows.budget_outcome import ALL_WAYS, HowToCompute
    from specflow.workflows.show_budget import ways_named

    return HowToCompute(ways=ways_named(method) if method else ALL_WAYS, trials=trials, seed=seed)
