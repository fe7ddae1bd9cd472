"""``specflow export``: the compliance workbook, or the same as a page, csv or JSON."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from specflow.cli.console import progress, put, put_bytes, put_json, say
from specflow.cli.options import AsOfOption, JsonOption, ProjectOption, judged_on, open_store, refuse_idle

OutputOption = Annotated[
    str,
    typer.Option(
        "--output",
        "-o",
        metavar="FILE",
        help="The file to write, - for stdout; default: named after the project, in this folder.",
        show_default=False,
    ),
]
FormatOption = Annotated[
    str,
    typer.Option(
        "--format",
        "-f",
        metavar="FORMAT",
        help="xlsx, html, csv or json; default: as the file's name ends, else xlsx.",
        show_default=False,
    ),
]
TableOption = Annotated[
    list[str] | None,
    typer.Option(
        "--table",
        metavar="TABLE",
        help="Only this table: summary, matrix, points, evidence, findings, budgets or about (may be repeated; csv "
        "holds one).",
        show_default=False,
    ),
]
FileOption = Annotated[
    str,
    typer.Option(
        "--file",
        metavar="F-N",
        help="Instead of a report: write out the copy that is kept of this evidence file (see attach --keep).",
        show_default=False,
    ),
]
OverwriteOption = Annotated[bool, typer.Option("--overwrite", help="Replace the file if it exists.")]


def export(
    output: OutputOption = "",
    format: FormatOption = "",
    table: TableOption = None,
    file: FileOption = "",
    overwrite: OverwriteOption = False,
    project: ProjectOption = "",
    as_of: AsOfOption = "",
    as_json: JsonOption = False,
) -> None:
    """Write the compliance workbook, or the same as a page, csv or JSON.

    Summary, compliance matrix, required points, evidence, findings, budgets, and what it was made from. In the workbook
    each budget is a sheet that calculates, with the tool's own values beside its formulas; on the page it is drawn. The
    same project gives the same bytes.
    """
    from specflow.workflows.export import export_report, format_for, write_export

    if file:
        refuse_idle(
            "with --file, which writes a file as it was received",
            "leave it out",
            format=format,
            table=table,
            as_of=as_of,
        )
        _write_copy(file, output, project, overwrite=overwrite, as_json=as_json)
        return
    with open_store(project, read_only=True) as store, progress("export"):
        made = export_report(store, judged_on(as_of), format_for(output, format), tables=table or ())
    if output == "-":
        put_bytes(made.content)
        return
    path = Path(output or made.file_name)
    write_export(made, path, overwrite=overwrite)
    if as_json:
        put_json({"file": str(path), "bytes": len(made.content), "tables": dict(made.tables)})
        return
    put(str(path))
    say("; ".join(f"{title}: {rows} rows" for title, rows in made.tables))


def _write_copy(name: str, output: str, project: str, *, overwrite: bool, as_json: bool) -> None:
    from specflow.workflows.kept_copy import kept_copy, write_kept

    with open_store(project, read_only=True) as store:
        copy = kept_copy(store, name)
    if output == "-":
        put_bytes(copy.content)
        return
    path = write_kept(copy, Path(output) if output else None, overwrite=overwrite)
    if as_json:
        put_json(
            {"file": str(path), "id": copy.file.id, "bytes": len(copy.content), "sha256": copy.file.sha256}
        )
        return
    put(str(path))
    say(f"{copy.file.name} as it was received, {len(copy.content)} bytes, SHA-256 {copy.file.sha256}")
