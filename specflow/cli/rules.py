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
    one: why it matters, an example that it reports, one that it does not, and what to do.
    """
    from specflow.cli.tables import put_table, table_as_json
    from specflow.workflows.rule_catalogue import explained_rule, rule_catalogue, rule_named

    if code and as_json:
        put_json(rule_named(code).model_dump(mode="json"))
    elif code:
        put_table(explained_rule(code))
    elif as_json:
        put_json(table_as_json(rule_catalogue()))
    else:
        put_table(rule_catalogue())
