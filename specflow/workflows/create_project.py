"""Start a project: an empty project file, and the workbook template to fill in beside it."""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path

from specflow.errors import DocumentError, FileError
from specflow.exporters.template import write_template
from specflow.importers.sheets import SHEETS
from specflow.model.project import Project
from specflow.store import create_project as create_store
from specflow.store.project import Clock, utc_now

SUFFIX = ".specflow"
_NAME = re.compile(r"[^\W_](?:[\w .+-]{0,78}[\w+-])?")


@dataclass(frozen=True, slots=True)
class CreatedProject:
    """What was made: the project file, and the template where one was asked for."""

    project: Path
    workbook: Path | None


def create_project(
    name: str, folder: Path, *, template: bool = True, by: str = "specflow", clock: Clock = utc_now
) -> CreatedProject:
    """Make NAME.specflow and, unless told not to, NAME-requirements.xlsx in ``folder``, which is made where missing.

    Nothing is overwritten: raises FileError when one of the files is there already (neither is made then),
    DocumentError when the name cannot be the name of a file.
    """
    name = _checked(name)
    project, workbook = folder / f"{name}{SUFFIX}", folder / f"{name}-requirements.xlsx"
    for path in (project, workbook) if template else (project,):
        if path.exists():
            raise FileError(
                "the file exists already; nothing was made",
                where=str(path),
                hint="choose another name, or another folder with --folder",
            )
    _make_folder(folder)
    if template:
        write_template([sheet.layout for sheet in SHEETS], workbook)
    try:
        create_store(project, Project(name=name), by=by, clock=clock).close()
    except BaseException:
        if template:
            workbook.unlink(missing_ok=True)
        raise
    return CreatedProject(project, workbook if template else None)


def _checked(name: str) -> str:
    name = name.strip().removesuffix(SUFFIX)
    if not _NAME.fullmatch(name):
        raise DocumentError(
            f"{name!r} cannot be the name of a project",
            hint="use letters, digits, blanks and - + . _, at most 80, beginning with a letter or digit; "
            "a folder is given with --folder",
        )
    return name


def _make_folder(folder: Path) -> None:
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise FileError(
            f"the folder cannot be made: {error.strerror or error}",
            where=str(folder),
            hint="name another one with --folder",
        ) from error
