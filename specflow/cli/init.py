"""``specflow init``: an empty project and a workbook to fill in."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from specflow.cli.console import person, put, say
from specflow.cli.options import ByOption

NameArgument = Annotated[
    str, typer.Argument(help="What the project is called, and its files.", show_default=False)
]
FolderOption = Annotated[
    Path,
    typer.Option(
        "--folder", metavar="FOLDER", help="Where to make them; default: this folder.", show_default=False
    ),
]
NoTemplateOption = Annotated[bool, typer.Option("--no-template", help="Make no workbook template.")]


def init(
    name: NameArgument,
    folder: FolderOption = Path(),
    no_template: NoTemplateOption = False,
    by: ByOption = "",
) -> None:
    """Start a project: an empty project file and a workbook to fill in.

    Makes NAME.specflow and NAME-requirements.xlsx, a template with guidance, drop-downs and example rows. Files that
    are there already are never overwritten.
    """
    from specflow.workflows.create_project import create_project

    created = create_project(name, folder, template=not no_template, by=person(by))
    put(str(created.project))
    if created.workbook is not None:
        put(str(created.workbook))
        say(f"Fill in {created.workbook.name}, then: specflow load {created.workbook}")
