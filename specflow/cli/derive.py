"""``specflow derive``: results made of stored raw tables by named laws."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

import typer

from specflow.cli.console import ask, person, put, put_json, say, show_error
from specflow.cli.options import (
    ByOption,
    DryRunOption,
    JsonOption,
    ProjectOption,
    TakeRestOption,
    YesOption,
    judged_on,
    named_values,
    open_store,
    refuse_idle,
)
from specflow.errors import ExitCode, SpecflowError

if TYPE_CHECKING:
    from specflow.workflows.derive import DeriveOptions

LawArgument = Annotated[
    str,
    typer.Argument(help="The law; without one, all laws are listed.", metavar="LAW", show_default=False),
]
From = Annotated[
    list[str], typer.Option("--from", metavar="EV-N", help="The table to derive from. Repeatable.")
]
Value = Annotated[
    list[str],
    typer.Option(
        "--value",
        metavar="NAME",
        help="The value column: its name, header or parameter. ROLE=NAME where a law reads several; "
        "'NAME where polarisation H' takes some rows only; EV-3:NAME names the table. Repeatable.",
    ),
]
OverOption = Annotated[
    list[str],
    typer.Option("--over", metavar="RANGE", help="The range: 'frequency 17.7..20.2 GHz step 0.1 GHz'."),
]
Where = Annotated[
    list[str],
    typer.Option("--where", metavar="CONDITION", help="Take rows of this condition only. Repeatable."),
]
SetOption = Annotated[
    list[str], typer.Option("--set", metavar="NAME=VALUE", help="A setting of the law. Repeatable.")
]
Gives = Annotated[
    str,
    typer.Option(
        "--gives", metavar="PARAMETER", help="The parameter of the result; default: that of the column."
    ),
]
Plane = Annotated[
    str,
    typer.Option("--plane", metavar="PLANE", help="The plane of the result; default: that of the column."),
]
Statistic = Annotated[
    str, typer.Option("--statistic", metavar="STATISTIC", help="The statistic of the result.")
]
Polarisation = Annotated[
    str, typer.Option("--polarisation", metavar="POLARISATION", help="The polarisation of the result.")
]
For = Annotated[
    str,
    typer.Option("--for", metavar="REQUIREMENT", help="Take the quantity of the result from a requirement."),
]
Again = Annotated[
    bool, typer.Option("--again", help="Derive again what was made of inputs that no longer stand.")
]
Proposed = Annotated[
    bool, typer.Option("--proposed", help="List what laws would make of the raw tables for requirements.")
]
Explain = Annotated[
    str, typer.Option("--explain", metavar="LAW", help="Explain a law: formula, validity, source.")
]
Reason = Annotated[str, typer.Option("--reason", metavar="WHY", help="Why; it is kept with the derivation.")]


def derive(
    law: LawArgument = "",
    project: ProjectOption = "",
    from_: From = [],  # noqa: B006
    value: Value = [],  # noqa: B006
    over: OverOption = [],  # noqa: B006
    where: Where = [],  # noqa: B006
    set_: SetOption = [],  # noqa: B006
    gives: Gives = "",
    plane: Plane = "",
    statistic: Statistic = "",
    polarisation: Polarisation = "",
    for_: For = "",
    explain: Explain = "",
    again: Again = False,
    proposed: Proposed = False,
    take_rest: TakeRestOption = False,
    yes: YesOption = False,
    dry_run: DryRunOption = False,
    as_json: JsonOption = False,
    reason: Reason = "",
    by: ByOption = "",
) -> int:
    """Derive results from raw tables by a law. Shows what it gives, then stores it; the raw data stays.

    Worst, mean, percentile, ripple, slope, bandwidth, patterns, total radiated power, compression and more.
    """
    from specflow.workflows.derive import DeriveOptions

    said = {
        "from_": from_, "value": value, "over": over, "where": where, "set_": set_, "gives": gives, "plane": plane,
        "statistic": statistic, "polarisation": polarisation, "for_": for_, "reason": reason,
    }  # fmt: skip
    alone = "--explain" if explain else "--again" if again else "--proposed" if proposed else ""
    if alone and law:
        raise SpecflowError(f"{alone} takes no law before it", hint=f"leave {law!r} or {alone} out")
    if not law:
        beside = f"with {alone}" if alone else "without a law"
        refuse_idle(beside, "name a law (specflow derive lists them), or leave it out", **said)
    if explain:
        return _explain(explain)
    if again:
        return _derive_again(project, take_rest, yes, dry_run, as_json, person(by))
    if proposed:
        return _propose(project, as_json)
    if not law:
        return _list(as_json)
    options = DeriveOptions(
        law,
        from_,
        value,
        over,
        where,
        named_values("--set", set_, example="percentile=50"),
        gives,
        plane,
        statistic,
        polarisation,
        for_,
    )
    return _derive(project, options, take_rest, yes, dry_run, as_json, reason, person(by))


def _explain(name: str) -> int:
    from specflow.workflows.derive import law_named
    from specflow.workflows.derive_tables import law_lines

    for line in law_lines(law_named(name)):
        put(line)
    return int(ExitCode.CLEAN)


def _list(as_json: bool) -> int:
    from specflow.cli.tables import put_table, table_as_json
    from specflow.workflows.derive_tables import laws_table

    if as_json:
        put_json(table_as_json(laws_table()))
    else:
        put_table(laws_table())
        say("specflow derive --explain LAW says all of one")
    return int(ExitCode.CLEAN)


def _derive(
    project: str,
    options: DeriveOptions,
    take_rest: bool,
    yes: bool,
    dry_run: bool,
    as_json: bool,
    reason: str,
    by: str,
) -> int:
    from specflow.cli.tables import put_table
    from specflow.workflows.derive import accept_derive, check_acceptable, preview_derive
    from specflow.workflows.derive_tables import preview_as_json, preview_table

    with open_store(project, read_only=dry_run) as store:
        preview = preview_derive(store, options)
        data = preview_as_json(preview)
        if not as_json:
            put_table(preview_table(preview))
        stored = None
        try:
            check_acceptable(preview, take_rest=take_rest)
            if preview.is_unchanged:
                say(f"unchanged: this is stored as {preview.stored_as}")
            elif dry_run:
                say("nothing was stored")
            elif yes or ask("store this?"):
                stored = accept_derive(store, preview, by=by, reason=reason, take_rest=take_rest)
                say(
                    f"stored as {stored.table} by derivation {stored.derivation}; "
                    f"the project is at revision {stored.revision}"
                )
            else:
                say("nothing was stored")
        finally:
            if as_json:
                told = {} if stored is None else {"stored": stored.table, "derivation": stored.derivation}
                put_json(data | told)
    return int(ExitCode.CLEAN)


def _derive_again(project: str, take_rest: bool, yes: bool, dry_run: bool, as_json: bool, by: str) -> int:
    from specflow.cli.tables import put_table, table_as_json
    from specflow.workflows.derive_again import derive_again, preview_again
    from specflow.workflows.derive_tables import again_table

    today = judged_on("")
    with open_store(project, read_only=dry_run) as store:
        found = preview_again(store, today)
        if as_json:
            put_json(table_as_json(again_table(found)))
        elif found:
            put_table(again_table(found))
        if not found:
            say("nothing to derive again: every derived table stands on its inputs")
            return int(ExitCode.CLEAN)
        if dry_run or not (yes or ask("store what can be derived again?")):
            say("nothing was stored")
            return int(ExitCode.CLEAN)
        stored, left = derive_again(store, today, by=by, take_rest=take_rest)
    for one in stored:
        say(f"{one.superseded} is superseded by {one.table}, derivation {one.derivation}")
    for lacking in left:
        if lacking.failure is not None:
            show_error(lacking.failure)
        else:
            say(
                f"{lacking.table.id} was not derived again: groups of rows were refused; --take-rest stores the others"
            )
    return int(ExitCode.FINDINGS if left else ExitCode.CLEAN)


def _propose(project: str, as_json: bool) -> int:
    from specflow.cli.tables import put_table, table_as_json
    from specflow.workflows.derive_proposals import proposals
    from specflow.workflows.derive_tables import proposals_table

    with open_store(project, read_only=True) as store:
        table = proposals_table(proposals(store))
    if as_json:
        put_json(table_as_json(table))
    elif table.rows:
        put_table(table)
    else:
        say("no raw table would give more evidence by a law for a requirement that lacks it")
    return int(ExitCode.CLEAN)
