"""``specflow testsheet``: a workbook for the bench with the points that are still missing."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from specflow.cli.console import progress, put, put_json, say
from specflow.cli.options import AsOfOption, JsonOption, ProjectOption, judged_on, open_store
from specflow.errors import ExitCode, SpecflowError

Output = Annotated[Path, typer.Argument(help="The workbook to write: .xlsx.", metavar="OUT.xlsx")]
Requirements = Annotated[
    list[str], typer.Option("--requirement", "-r", metavar="R", help="Only this requirement. Repeatable.")
]
Blocks = Annotated[list[str], typer.Option("--block", "-b", metavar="B", help="Only this block. Repeatable.")]
Items = Annotated[
    list[str],
    typer.Option(
        "--item", "-i", metavar="I", help="What is missing on this item (id or serial). Repeatable."
    ),
]
Gate = Annotated[
    str, typer.Option("--gate", metavar="NAME", help="Only activities that are planned for this review.")
]
Stage = Annotated[
    str,
    typer.Option(
        "--stage",
        metavar="STAGE",
        help="Only activities of this stage: development, qualification, acceptance.",
    ),
]
Retest = Annotated[bool, typer.Option("--retest", help="Points that fail, too, to be measured again.")]


def testsheet(
    output: Output,
    requirement: Requirements = [],  # noqa: B006
    block: Blocks = [],  # noqa: B006
    item: Items = [],  # noqa: B006
    gate: Gate = "",
    stage: Stage = "",
    retest: Retest = False,
    project: ProjectOption = "",
    as_of: AsOfOption = "",
    as_json: JsonOption = False,
) -> int:
    """Write a test sheet: the points still missing, for the bench, to be filled in and attached.

    One sheet a block, rows grouped by set-up so that temperature and supply change as rarely as possible; values that
    serve several requirements stand once. Filled in, wholly or half, it is attached as it is: specflow attach OUT.xlsx.
    """
    from specflow.cli.tables import put_table
    from specflow.reports.bench_summary import bench_summary
    from specflow.workflows.missing_points import Scope
    from specflow.workflows.testsheet import testsheet as sheet_of
    from specflow.workflows.testsheet import testsheet_as_json, write_testsheet

    if output.suffix.lower() != ".xlsx":
        raise SpecflowError("a test sheet is a workbook", where=str(output), hint="name it .xlsx")
    scope = Scope(requirement, block, item, gate, stage, retest)
    with open_store(project, read_only=True) as store, progress("test sheet"):
        sheet = sheet_of(store, judged_on(as_of), scope)
    for note in sheet.workbook.notes:
        say(f"left out: {note}")
    if not sheet.workbook.points:
        say("no point is missing; nothing was written")
        if as_json:
            put_json({"file": "", **testsheet_as_json(sheet)})
        return int(ExitCode.CLEAN)
    write_testsheet(sheet, output)
    if as_json:
        put_json({"file": str(output), **testsheet_as_json(sheet)})
    else:
        put_table(bench_summary(sheet.workbook))
        put("")
        put(str(output))
    count = sheet.workbook.points
    say(f"{count} value{'s' * (count != 1)}; filled in, wholly or half: specflow attach {output}")
    return int(ExitCode.CLEAN)
