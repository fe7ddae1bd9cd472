"""``specflow check``: what the rules find; the exit code tells a script whether it is grave."""

from __future__ import annotations

from typing import Annotated

import typer

from specflow.cli.console import put_json, say
from specflow.cli.options import AsOfOption, JsonOption, ProjectOption, judged_on, open_store
from specflow.errors import ExitCode

ThresholdOption = Annotated[
    str,
    typer.Option(
        "--at-or-above",
        metavar="SEVERITY",
        help="End with exit code 1 when a finding is as grave as this: info, warning or error.",
    ),
]
RuleOption = Annotated[
    list[str] | None,
    typer.Option(
        "--rule", metavar="CODE", help="Only findings of this rule; may be given again.", show_default=False
    ),
]

GateOption = Annotated[
    str,
    typer.Option(
        "--gate",
        metavar="NAME",
        help="Weigh the findings as the policy has it for this review gate (CDR).",
        show_default=False,
    ),
]
ExplainOption = Annotated[bool, typer.Option("--explain", help="Also say why each matters and what to do.")]


def check(
    project: ProjectOption = "",
    at_or_above: ThresholdOption = "warning",
    rule: RuleOption = None,
    gate: GateOption = "",
    explain: ExplainOption = False,
    as_of: AsOfOption = "",
    as_json: JsonOption = False,
) -> int:
    """List the findings of the rules.

    Worst first; each says what it is about, what was found and where. The exit code is 1 when a finding is at or above
    the threshold, else 0. "specflow rules CODE" explains a rule. How a rule weighs, in general or at a review gate, is
    project data: rows "Severity of CODE" and "Severity of CODE at GATE" on the sheet Project.
    """
    from specflow.cli.tables import put_table
    from specflow.workflows.check import check_project

    with open_store(project, read_only=True) as store:
        checked = check_project(store, judged_on(as_of), at_or_above=at_or_above, rules=rule or (), gate=gate)
    if as_json:
        put_json(checked.data)
    elif checked.findings:
        put_table(checked.table if explain else checked.table.without("why", "remedy"))
    say(checked.summary)
    return int(ExitCode.FINDINGS if checked.grave else ExitCode.CLEAN)
