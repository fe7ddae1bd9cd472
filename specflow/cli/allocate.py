"""``specflow allocate``: block requirements from a budget, shown as changes with the closure test, then accepted."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

import typer

from specflow.cli.console import ask, person, put_json, say
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
    from specflow.workflows.allocate import AllocateOptions, AllocatePreview, Way

BudgetArgument = Annotated[
    str, typer.Argument(help="The budget, by its id.", metavar="BUDGET", show_default=False)
]
EqualOption = Annotated[
    bool, typer.Option("--equal", help="Equal shares, in the terms in which the law adds.")
]
ProportionalOption = Annotated[
    bool, typer.Option("--proportional", help="In proportion to the present estimates; the default.")
]
EffortOption = Annotated[
    bool, typer.Option("--least-effort", help="Least total effort over all limits of the budget together.")
]
NominalOption = Annotated[
    bool,
    typer.Option(
        "--nominal", help="Share at nominal gains and losses, not at the worst end of their tolerances."
    ),
]
ByConditionsOption = Annotated[
    bool,
    typer.Option("--by-conditions", help="Limits by condition instead of one number that holds under all."),
]
ReserveOption = Annotated[
    list[str] | None,
    typer.Option(
        "--reserve",
        metavar="RESERVE",
        help="Keep so much of a parameter back, with its holder: 'noise_figure 0.3 dB Systems' (may be repeated).",
        show_default=False,
    ),
]
FixOption = Annotated[
    list[str] | None,
    typer.Option(
        "--fix",
        metavar="BLOCK",
        help="A block that keeps its figures, besides the passive ones (may be repeated).",
        show_default=False,
    ),
]
FreeOption = Annotated[
    list[str] | None,
    typer.Option(
        "--free-gain",
        metavar="BLOCK",
        help="With --least-effort: a block whose gain may move too.",
        show_default=False,
    ),
]
WeightOption = Annotated[
    list[str] | None,
    typer.Option(
        "--weight",
        metavar="BLOCK=N",
        help="With --least-effort: 'LNA=3' counts its effort three times.",
        show_default=False,
    ),
]
HandOption = Annotated[
    list[str] | None,
    typer.Option(
        "--by-hand",
        metavar="LIMIT",
        help="A limit by hand instead of the budget's: 'LNA noise_figure <= 1.4 dB' (may be repeated).",
        show_default=False,
    ),
]
BecauseOption = Annotated[
    str,
    typer.Option(
        "--because", metavar="WHY", help="The reason for what is given by hand.", show_default=False
    ),
]
SolveOption = Annotated[
    str,
    typer.Option(
        "--solve",
        metavar="LINE",
        help="Only solve one line, such as 'LNA gain' or 'position 2 gain', for all limits; nothing is stored.",
        show_default=False,
    ),
]


def allocate(
    budget: BudgetArgument,
    project: ProjectOption = "",
    equal: EqualOption = False,
    proportional: ProportionalOption = False,
    least_effort: EffortOption = False,
    nominal: NominalOption = False,
    by_conditions: ByConditionsOption = False,
    reserve: ReserveOption = None,
    fix: FixOption = None,
    free_gain: FreeOption = None,
    weight: WeightOption = None,
    by_hand: HandOption = None,
    because: BecauseOption = "",
    solve: SolveOption = "",
    yes: YesOption = False,
    dry_run: DryRunOption = False,
    by: ByOption = "",
    as_json: JsonOption = False,
) -> None:
    """Allocate a budget over its blocks.

    Passive blocks and those with --fix take what they need first; the rest of every limit, less the reserve, is shared.
    Each share becomes a requirement on its block, linked to the parent and to the budget with its revision. The closure
    test says whether the system holds with every block at its worst allowed bound. Shown first, stored when accepted.
    """
    from specflow.workflows.allocate import accept_allocation, preview_allocation

    if solve:
        refuse_idle(
            "with --solve, which allocates nothing", "leave it out",
            equal=equal, proportional=proportional, least_effort=least_effort, nominal=nominal,
            by_conditions=by_conditions, reserve=reserve, fix=fix, free_gain=free_gain, weight=weight,
            by_hand=by_hand, because=because,
        )  # fmt: skip
        _solve(budget, solve, project, as_json=as_json)
        return
    way = _way(equal=equal, proportional=proportional, least_effort=least_effort)
    options = _options(
        way, reserve, fix, free_gain, weight, by_hand, because, nominal=nominal, by_conditions=by_conditions
    )
    with open_store(project, read_only=dry_run) as store:
        preview = preview_allocation(store, budget, options)
        if not as_json:
            _show(preview)
        stored = not dry_run and bool(preview.changes) and (yes or ask(_question(preview)))
        if stored:
            accept_allocation(store, preview, by=person(by))
        revision = store.revision
    if as_json:
        from specflow.workflows.allocate_tables import preview_as_json

        put_json({**preview_as_json(preview), "stored": stored, "project_revision": revision})
    elif preview.changes:
        say(f"stored; the project is at revision {revision}" if stored else "nothing was stored")


def _way(*, equal: bool, proportional: bool, least_effort: bool) -> Way:
    if equal + proportional + least_effort > 1:
        raise SpecflowError(
            "several ways to share are asked for", hint="say one of --equal, --proportional, --least-effort"
        )
    if least_effort:
        return "least effort"
    return "equal" if equal else "proportional"


def _options(
    way: Way,
    reserve: list[str] | None,
    fix: list[str] | None,
    free_gain: list[str] | None,
    weight: list[str] | None,
    by_hand: list[str] | None,
    because: str,
    *,
    nominal: bool,
    by_conditions: bool,
) -> AllocateOptions:
    from specflow.workflows.allocate import AllocateOptions
    from specflow.workflows.allocate_text import read_by_hand, read_reserve, read_weight

    return AllocateOptions(
        way,
        [read_reserve(one) for one in reserve or ()],
        fix or (),
        free_gain or (),
        dict(read_weight(one) for one in weight or ()),
        [read_by_hand(one, because) for one in by_hand or ()],
        nominal,
        by_conditions,
    )


def _question(preview: AllocatePreview) -> str:
    return f"Store these {len(preview.changes)} changes?"


def _show(preview: AllocatePreview) -> None:
    from specflow.cli.tables import put_table
    from specflow.reports.changes import changes_in_words, changes_table
    from specflow.workflows.allocate_tables import preview_tables

    for table in preview_tables(preview):
        put_table(table)
    edits = changes_table(preview.changes, {})
    if edits.rows:
        put_table(edits)
    for note in preview.notes:
        say(f"note: {note}")
    say(changes_in_words(preview.changes) or "nothing changes")


def _solve(budget: str, line: str, project: str, *, as_json: bool) -> None:
    from specflow.cli.tables import put_table
    from specflow.workflows.solve_budget import solve_budget

    with open_store(project, read_only=True) as store:
        solved = solve_budget(store, budget, line)
    if as_json:
        put_json(solved.data)
    else:
        put_table(solved.table)
