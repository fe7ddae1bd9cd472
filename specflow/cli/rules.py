"""``specflow rules``: the catalogue of the rules, or one of them explained."""

from __future__ import annotations

from typing import Annotated

import typer

from specflow.cli.console import put_json
from specflow.cli.options import JsonOption

CodeArgument = Annotated[
    str,
    typer.Argument(help="The rule to explain; default: list them all.", metavar="CODE", show_default=False),
]


def rules(code: CodeArgument = "", as_json: JsonOption = False) -> None:
    """Explain the rules.

    Without a code every rule is listed, with the severity that it has unless the project's policy sets another. With
    one: why it matters, an example that it reports, one that it does not, and what to do. What loading and attaching
    report has codes, too, which are explained in a line.
    """
    from specflow.cli.tables import put_table, table_as_json
    from specflow.workflows.explained_code import explained_as_json, explained_code
    from specflow.workflows.rule_catalogue import rule_catalogue

    if code and as_json:
        put_json(explained_as_json(code))
    elif code:
        put_table(explained_code(code))
    elif as_json:
        put_json(table_as_json(rule_catalogue()))
    else:
        put_table(rule_catalogue())
