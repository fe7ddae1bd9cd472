"""``specflow attach FOLDER``: many files, one question, one summary."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import TYPE_CHECKING

from specflow.cli.console import ask, progress, put, put_json, say, show_error
from specflow.cli.options import open_store
from specflow.errors import ExitCode, SpecflowError

if TYPE_CHECKING:
    from specflow.store import ProjectStore
    from specflow.workflows.attach import AttachOptions, Decision
    from specflow.workflows.attach_folder import FolderJob, FolderRun


def attach_folders(
    paths: list[Path],
    project: str,
    options: AttachOptions,
    decision: Decision,
    *,
    yes: bool,
    dry_run: bool,
    as_json: bool,
) -> int:
    """Attach the files of folders; without ``yes`` they are tried first, and what is clean is asked for once."""
    from specflow.workflows.attach_folder import folder_job

    job = folder_job(paths, options, decision)
    if not job.found.files:
        for one in job.passed_over:
            say(f"passed over {one.path}: {one.reason}")
        raise SpecflowError(
            "a folder without measurement files",
            where=", ".join(map(str, paths)),
            hint="name one workbook or text file, or a folder that has some",
        )
    with open_store(project) as store:
        if yes and not dry_run:
            return _end(_run(store, job), as_json=as_json)
        tried = _try(store, job)
        if dry_run or tried.interrupted or not _clean(tried):
            return _end(tried, as_json=as_json, dry_run=True)
        if not as_json:
            _show(tried, dry_run=True)
        say(tried.counts())
        if not ask(f"store the {len(_clean(tried))} files that are clean?"):
            say("nothing was stored")
            return int(ExitCode.CLEAN)
        run = _run(store, job, only=_clean(tried))
        refused = [one for one in tried.files if one.path not in _clean(tried)]
        run.files = sorted([*run.files, *refused], key=lambda one: job.found.files.index(one.path))
        run.total, run.notes = tried.total, [*tried.notes, *run.notes]
        return _end(run, as_json=as_json)


def _clean(tried: FolderRun) -> Mapping[Path, str]:
    """The files that would be accepted, with the digests that were seen."""
    from specflow.workflows.attach_folder import Outcome

    return {one.path: one.sha256 for one in tried.of(Outcome.ACCEPTED)}


def _try(store: ProjectStore, job: FolderJob) -> FolderRun:
    from specflow.workflows.attach_folder import copy_to_try_on

    with copy_to_try_on(store) as copy:
        return _run(copy, job)


def _run(store: ProjectStore, job: FolderJob, only: Mapping[Path, str] | None = None) -> FolderRun:
    from specflow.workflows.attach_folder import attach_folder

    with progress("reading") as step:
        return attach_folder(store, job, step, only=only)


def _show(run: FolderRun, *, dry_run: bool) -> None:
    from specflow.cli.tables import put_table
    from specflow.workflows.attach_folder_tables import run_tables

    for table in run_tables(run, dry_run=dry_run):
        put_table(table)
        put("")


def _end(run: FolderRun, *, as_json: bool, dry_run: bool = False) -> int:
    """Show the summary and say how the run ended."""
    from specflow.workflows.attach_folder import Outcome, run_as_json

    if as_json:
        put_json({"dry_run": dry_run, **run_as_json(run)})
    else:
        _show(run, dry_run=dry_run)
    for note in run.notes:
        say(note)
    for one in run.of(Outcome.REJECTED):
        if one.remedy:
            say(f"{one.path.name}: {one.remedy.removeprefix(f'{one.path.name}: ')}")
    say(f"{run.counts()}{'; nothing was stored' if dry_run else ''}")
    if run.interrupted:
        whole = "nothing was stored" if dry_run else "the files above are whole, run it again to go on"
        say(f"interrupted at {run.interrupted}; {whole}")
        return int(ExitCode.INTERRUPTED)
    if run.stopped is not None:
        show_error(run.stopped)
        return int(run.stopped.exit_code)
    return int(ExitCode.BAD_INPUT if run.of(Outcome.REJECTED) else ExitCode.CLEAN)
