"""``specflow load``: a workbook of requirements, blocks, conditions ... is shown, then accepted."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from specflow.cli.console import ask, person, put_json, say
from specflow.cli.options import (
    ByOption,
    DryRunOption,
    JsonOption,
    ProjectOption,
    TakeRestOption,
    YesOption,
    open_store,
)
from specflow.errors import SpecflowError

if TYPE_CHECKING:
    from specflow.store import ProjectStore
    from specflow.workflows.load_workbook import LoadPreview

WorkbookArgument = Annotated[
    Path,
    typer.Argument(
        help="The workbook (xlsx), one of its sheets as csv, or a table of published limits.",
        show_default=False,
    ),
]
PublishedOption = Annotated[
    bool, typer.Option("--published", help="The file is a table of published limits (csv), one row a limit.")
]
BlockOption = Annotated[
    str,
    typer.Option(
        "--block",
        metavar="BLOCK",
        help="With --published: the block the limits are on; else the one without a parent.",
        show_default=False,
    ),
]
PrefixOption = Annotated[
    str,
    typer.Option(
        "--prefix", metavar="TEXT", help="With --published: what goes before every id.", show_default=False
    ),
]
RemoveGoneOption = Annotated[
    bool,
    typer.Option(
        "--remove-gone",
        help="Propose to remove requirements that an earlier state of this workbook had and this one has not.",
    ),
]


def load(
    workbook: WorkbookArgument,
    project: ProjectOption = "",
    yes: YesOption = False,
    dry_run: DryRunOption = False,
    take_rest: TakeRestOption = False,
    published: PublishedOption = False,
    block: BlockOption = "",
    prefix: PrefixOption = "",
    remove_gone: RemoveGoneOption = False,
    by: ByOption = "",
    as_json: JsonOption = False,
) -> None:
    """Load requirements, blocks and conditions from a workbook.

    Says back in words how each limit and each conditions set was read, shows what changes in meaning, lists what was
    rejected with its cell, and asks before anything is stored. Loading an edited workbook again changes only what
    differs. A requirement whose row is gone is named and stays; with --remove-gone its removal is proposed, with what
    hangs on it, and its id is never used again.

    With --published the file is a csv table of a standard's limits (id, standard, version, clause, parameter, bound,
    value, unit, conditions); each becomes a requirement, and of each row that does not it is said why.
    """
    from specflow.workflows.load_workbook import accept_load, refuse_rejected

    if (block or prefix) and not published:
        raise SpecflowError(
            "--block and --prefix belong to --published", hint="in a workbook each row says both"
        )
    if remove_gone and published:
        raise SpecflowError(
            "--remove-gone does not go with --published",
            hint="a table of a standard is no workbook of the project",
        )
    with open_store(project, read_only=dry_run) as store:
        preview = _preview(store, workbook, published, block, prefix, remove_gone)
        if not as_json:
            _show(preview)
        stored = not dry_run and _is_accepted(preview, yes=yes, take_rest=take_rest)
        if stored:
            accept_load(store, preview, by=person(by), take_rest=take_rest)
        revision = store.revision
    if as_json:
        put_json(_as_json(preview, stored, revision))
    refuse_rejected(preview, take_rest=take_rest)
    if preview.changes and not as_json:
        say(f"stored; the project is at revision {revision}" if stored else "nothing was stored")


def _preview(
    store: ProjectStore, path: Path, published: bool, block: str, prefix: str, remove_gone: bool
) -> LoadPreview:
    from specflow.workflows.load_published import preview_published
    from specflow.workflows.load_workbook import preview_load

    if published:
        return preview_published(store, path, block=block, prefix=prefix)
    return preview_load(store, path, remove_gone=remove_gone)


def _is_accepted(preview: LoadPreview, *, yes: bool, take_rest: bool) -> bool:
    """Whether the person accepts; asked only where there is something to store and nothing stands in the way."""
    if not preview.changes or (preview.rejected and not take_rest):
        return False
    return yes or ask(f"Store these {len(preview.changes)} changes?")


def _show(preview: LoadPreview) -> None:
    from specflow.cli.tables import put_table
    from specflow.reports.changes import changes_in_words, changes_table
    from specflow.reports.findings import findings_table

    table = changes_table(preview.changes, preview.echoes)
    if table.rows:
        put_table(table)
    if preview.findings:
        put_table(findings_table(preview.findings, "Findings"))
    words = changes_in_words(preview.changes) or "nothing changes"
    say(f"{preview.path.name}: {words}; {preview.unchanged} unchanged; {len(preview.rejected)} rejected")


def _as_json(preview: LoadPreview, stored: bool, revision: int) -> dict[str, Any]:
    return {
        "workbook": str(preview.path),
        "stored": stored,
        "project_revision": revision,
        "unchanged": preview.unchanged,
        "changes": [
            change.model_dump(mode="json", include={"noun", "id", "action", "fields"})
            | {"read_as": preview.echoes.get(change.id, "")}
            for change in preview.changes
        ],
        "findings": [finding.model_dump(mode="json") for finding in preview.findings],
    }
