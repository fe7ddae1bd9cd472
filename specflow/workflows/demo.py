"""Build the example project in a folder and run the whole job on it: create, load, attach, check, status, export.

The example is invented and so is its calendar: it is recorded at ``RECORDED`` and judged as of ``AS_OF``, so that the
demo says the same whenever it is run.
"""

from __future__ import annotations

import shutil
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from datetime import UTC, date, datetime
from pathlib import Path

import specflow
from specflow.errors import FileError, SpecflowError
from specflow.model.finding import Severity
from specflow.model.project import Project
from specflow.reports.changes import changes_in_words
from specflow.reports.status import points_sentence
from specflow.store import ProjectStore, create_project, open_project
from specflow.workflows.attach import AttachOptions, Decision, accept_attach, preview_attach
from specflow.workflows.evaluate_project import Evaluation, evaluate_project
from specflow.workflows.export import export_report, write_export
from specflow.workflows.load_workbook import accept_load, preview_load

AS_OF = date(2026, 6, 30)
RECORDED = datetime(2026, 5, 4, 9, 0, tzinfo=UTC)
BY = "demo"
PROJECT_FILE = "ferry.specflow"
WORKBOOK = "ferry-requirements.xlsx"
README = "README.md"
EXPORTS = ("ferry-compliance.xlsx", "ferry-compliance.html")

Tell = Callable[[str], None]


@dataclass(frozen=True, slots=True)
class ResultFile:
    """A file of results, the mapping for it ("" when none is needed), and whether the rest is taken."""

    name: str
    mapping: str = ""
    take_rest: bool = False


RESULTS = (
    ResultFile("tile_and_amplifier.xlsx", mapping="tile_and_amplifier.toml"),
    ResultFile("converter_bench.xlsx", take_rest=True),
    ResultFile("array_two_laboratories.xlsx", mapping="array_two_laboratories.toml"),
    ResultFile("array_simulation.xlsx"),
    ResultFile("receive_panel_sweep.xlsx", mapping="receive_panel_sweep.toml"),
)


@dataclass(frozen=True, slots=True)
class Demo:
    """What was made, below which folder, and the project as it was judged."""

    folder: Path
    files: Sequence[Path]
    evaluation: Evaluation

    @property
    def project(self) -> Path:
        """The project file."""
        return self.folder / PROJECT_FILE


def examples_folder() -> Path:
    """Return the folder of the examples that belong to this copy of the package: inside it (a wheel) or beside it."""
    package = Path(specflow.__file__).parent
    for folder in (package / "examples", package.parent / "examples"):
        if (folder / "ferry" / WORKBOOK).is_file():
            return folder
    raise FileError("the examples are missing", where=str(package), hint="install specflow again")


def build_demo(folder: Path, tell: Tell, *, again: bool = False) -> Demo:
    """Build the example in ``folder`` and run the whole job; ``tell`` is called with a sentence for each step.

    ``again`` rebuilds a demo that is there; other files of the folder are left alone. Raises FileError when the folder
    holds anything else. What was begun is taken away again when a step fails.
    """
    source = examples_folder() / "ferry"
    with _prepared(folder, source, again=again):
        tell(f"1 create   {folder / PROJECT_FILE}: an empty project")
        project = Project(
            name="Harbour ferry terminal", description="Invented, to show the tool.", invented=True
        )
        with create_project(folder / PROJECT_FILE, project, by=BY, clock=lambda: RECORDED) as store:
            tell(f"2 load     {WORKBOOK}: {_load(store, folder)}")
            for result in RESULTS:
                tell(f"3 attach   {result.name}: {_attach(store, folder, result)}")
            evaluation = evaluate_project(store, AS_OF)
            tell(f"4 check    {_findings(evaluation)}")
            tell(f"5 status   {points_sentence(evaluation.results, evaluation.snapshot.requirements)}")
            for name in EXPORTS:
                export = export_report(store, AS_OF, Path(name).suffix.removeprefix("."))
                write_export(export, folder / name)
                tables = ", ".join(f"{title} {rows}" for title, rows in export.tables)
                tell(f"6 export   {name}: rows of {tables}")
    return Demo(
        folder, [folder / name for name in _own_files(source) if (folder / name).exists()], evaluation
    )


def _load(store: ProjectStore, folder: Path) -> str:
    preview = preview_load(store, folder / WORKBOOK)
    accept_load(store, preview, by=BY)
    return changes_in_words(preview.changes)


def _attach(store: ProjectStore, folder: Path, result: ResultFile) -> str:
    path = folder / "results" / result.name
    said: list[str] = []
    mapping = folder / "mappings" / result.mapping if result.mapping else None
    if mapping is not None:
        asked = [question for table in preview_attach(store, path).unresolved for question in table.questions]
        said.append(f"refused as it is ({len(asked)} open, the first: {asked[0].what})" if asked else "")
        said.append(f"with {mapping.name}")
    preview = preview_attach(store, path, AttachOptions(mapping=mapping))
    rejected = preview.rejected_cells
    attached = accept_attach(store, preview, Decision(by=BY, take_rest=result.take_rest))
    said.append(f"{attached.values} values in {', '.join(attached.tables)}")
    if rejected:
        said.append(f"rejected and left out, which stays a finding: {rejected} of its rows and cells")
    return "; ".join(filter(None, said))


def _findings(evaluation: Evaluation) -> str:
    counts = {
        severity: sum(finding.severity is severity for finding in evaluation.findings)
        for severity in reversed(Severity)
    }
    words = ", ".join(
        f"{number} {severity.value}{'s' * (number != 1 and severity is not Severity.INFO)}"
        for severity, number in counts.items()
    )
    return f"{len(evaluation.findings)} findings: {words}"


def _own_files(source: Path) -> list[Path]:
    """The files of a demo, relative to its folder."""
    copied = sorted(path.relative_to(source) for path in source.rglob("*") if path.is_file())
    return [Path(PROJECT_FILE), *map(Path, EXPORTS), Path(README), *copied]


@contextmanager
def _prepared(folder: Path, source: Path, *, again: bool) -> Iterator[None]:
    """Copy the example's files into the folder; take all away again when something goes wrong."""
    is_new = not folder.exists()
    _refuse_foreign(folder, again=again)
    _clear(folder, source)
    try:
        shutil.copytree(source, folder, dirs_exist_ok=True)
        shutil.copyfile(source.parent / README, folder / README)
        yield
    except BaseException as error:
        _clear(folder, source)
        if is_new:
            shutil.rmtree(folder, ignore_errors=True)
        if isinstance(error, OSError):
            raise FileError(
                f"the folder cannot be written: {error.strerror or error}",
                where=str(folder),
                hint="name another one: specflow demo FOLDER",
            ) from error
        raise


def _refuse_foreign(folder: Path, *, again: bool) -> None:
    """Refuse a folder that holds anything, unless it is a demo that is to be built again."""
    if not folder.exists():
        return
    if not folder.is_dir():
        raise FileError("there is a file of that name", where=str(folder), hint="name another folder")
    if not any(folder.iterdir()):
        return
    if not again:
        raise FileError(
            "the folder is there already and is not empty",
            where=str(folder),
            hint="say --again to build the demo in it anew, or name another folder",
        )
    if not _is_demo(folder / PROJECT_FILE):
        raise FileError(
            "the folder holds no demo, so nothing in it is replaced",
            where=str(folder),
            hint="name another folder",
        )


def _is_demo(project: Path) -> bool:
    if not project.is_file():
        return False
    try:
        with open_project(project, read_only=True) as store:
            return store.load().project.invented
    except SpecflowError:
        return False


def _clear(folder: Path, source: Path) -> None:
    """Take the files of a demo away, and the folders below that are empty then."""
    names = _own_files(source)
    for name in names:
        (folder / name).unlink(missing_ok=True)
    for below in {folder / name.parent for name in names} - {folder}:
        if below.is_dir() and not any(below.iterdir()):
            below.rmdir()
    for suffix in ("-wal", "-shm"):
        (folder / f"{PROJECT_FILE}{suffix}").unlink(missing_ok=True)
