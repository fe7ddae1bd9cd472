"""Attach many files, each in a transaction of its own; what became of each is told, an interrupt leaves whole files.

A dry run does the whole job on a copy of the project, so that what it says is what would happen: that of two files
with the same table the second adds nothing, or that rows of one replace those of another.
"""

from __future__ import annotations

import tempfile
from collections import Counter
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import dataclass, field, replace
from enum import StrEnum
from pathlib import Path
from typing import Any

from specflow.errors import ConflictError, FileError, SpecflowError, StoreError
from specflow.model.base import code_key
from specflow.model.bench_sheet import NOTHING_FILLED_IN
from specflow.model.evidence import EvidenceFile, EvidenceTable
from specflow.store import ProjectStore, open_project
from specflow.workflows.attach import (
    AttachOptions,
    AttachPreview,
    Decision,
    accept_attach,
    preview_attach,
)
from specflow.workflows.folder_mappings import folder_mappings
from specflow.workflows.found_files import FoundFiles, PassedOver, find_files, shown_path

_TURNS = 5  # how often a file is read again because another process stored something in the meantime

Tell = Callable[[str], object]


class Outcome(StrEnum):
    """What became of one file."""

    ACCEPTED = "accepted"
    UNCHANGED = "unchanged"
    REJECTED = "rejected"


@dataclass(frozen=True, slots=True)
class FileOutcome:
    """One file: its tables and values, the earlier tables that it supersedes, and what is to be said (why, where)."""

    path: Path
    outcome: Outcome
    sha256: str = ""
    tables: Sequence[str] = ()
    values: int = 0
    superseded: Sequence[str] = ()
    words: str = ""
    where: str = ""
    remedy: str = ""


@dataclass
class FolderRun:
    """What became of all files; ``interrupted`` or ``stopped`` say how it ended before the last one."""

    files: list[FileOutcome] = field(default_factory=list)
    passed_over: list[PassedOver] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)
    total: int = 0
    interrupted: str = ""
    stopped: StoreError | None = None

    def of(self, outcome: Outcome) -> list[FileOutcome]:
        """The files of one outcome."""
        return [one for one in self.files if one.outcome is outcome]

    def counts(self) -> str:
        """Say how many files there are of each outcome."""
        found = Counter(one.outcome for one in self.files)
        parts = [f"{found[one]} {one}" for one in Outcome if found[one]]
        replaced = sorted({code for one in self.files for code in one.superseded})
        parts += [f"superseded {', '.join(replaced)}"] if replaced else []
        parts += [f"{len(self.passed_over)} passed over"] if self.passed_over else []
        return f"{len(self.files)} of {self.total} files: {', '.join(parts) or 'nothing done'}"


@dataclass(frozen=True, slots=True)
class FolderJob:
    """What is to be done: the files with their mappings, what the person says and decides.

    ``layouts`` are those that mapping files settle, with their file; ``met`` collects those that were found.
    """

    found: FoundFiles
    options: AttachOptions
    decision: Decision
    passed_over: Sequence[PassedOver] = ()
    layouts: Mapping[str, str] = field(default_factory=dict)
    met: set[str] = field(default_factory=set)


def folder_job(paths: Sequence[Path], options: AttachOptions, decision: Decision) -> FolderJob:
    """Look through folders; mapping files in them settle the layouts that they name. Nothing of the files is read yet.

    Raises FileError for a path that is not there, DocumentError for mappings that contradict each other.
    """
    found = find_files(paths)
    mappings = folder_mappings(options.mapping, found.mappings)
    options = replace(options, mapping=None, mapping_text=mappings.text, mapping_name=mappings.name)
    layouts = {key: path.name for key, (_, path) in mappings.layouts.items()}
    return FolderJob(found, options, decision, (*found.passed_over, *mappings.passed_over), layouts)


def attach_folder(
    store: ProjectStore,
    job: FolderJob,
    tell: Tell = lambda words: None,
    *,
    only: Mapping[Path, str] | None = None,
) -> FolderRun:
    """Attach the files of a job one after the other, each in its own transaction.

    What keeps one out is told in its outcome and does not keep the others out. ``only`` limits the job to these files
    with these digests: what a person has seen and accepted; one with another digest is rejected. ``tell`` is called
    with what is being done. An interrupt ends the run between two files; what is stored is whole.
    """
    paths = [path for path in job.found.files if only is None or path in only]
    run = FolderRun(passed_over=list(job.passed_over), total=len(paths))
    sources: dict[str, Path] = {}
    for number, path in enumerate(paths, 1):
        tell(f"{number} of {len(paths)}: {shown_path(path)}")
        revision = store.revision
        try:
            outcome = _attach(store, path, job, only[path] if only else "")
        except KeyboardInterrupt:
            run.interrupted = shown_path(path)
            run.notes += _stored_all_the_same(store, revision, path)
            break
        except StoreError as error:
            run.stopped = error
            run.files.append(_rejected(path, error))
            break
        run.files.append(_with_copy_told(outcome, sources))
        for key in (outcome.sha256, *(f"table {table}" for table in outcome.tables)):
            sources.setdefault(key, path)
    if not run.interrupted and run.stopped is None and only is None:
        run.notes += _idle(job, run)
    return run


@contextmanager
def copy_to_try_on(store: ProjectStore) -> Iterator[ProjectStore]:
    """Open a copy of the project that is thrown away: what is stored in it is stored nowhere."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "trial.specflow"
        store.backup(path)
        with open_project(path) as copy:
            yield copy


def _attach(store: ProjectStore, path: Path, job: FolderJob, expected: str) -> FileOutcome:
    for turn in range(1, _TURNS + 1):
        try:
            return _attach_once(store, path, job, expected)
        except ConflictError:
            if turn == _TURNS:
                raise
        except StoreError:
            raise
        except SpecflowError as error:
            return _rejected(path, error)
    raise AssertionError("the last turn returns or raises")


def _attach_once(store: ProjectStore, path: Path, job: FolderJob, expected: str) -> FileOutcome:
    preview = preview_attach(store, path, job.options)
    sha256 = preview.measurements.file.sha256
    if expected and sha256 != expected:
        raise FileError(
            "the file has changed since it was looked at", where=path.name, hint="look at the summary again"
        )
    job.met.update(table.layout_key for table in preview.measurements.tables)
    base = FileOutcome(path, Outcome.UNCHANGED, sha256, tuple(preview.known.values()))
    if not preview.measurements.tables and any(
        one.rule == NOTHING_FILLED_IN for one in preview.measurements.findings
    ):
        return replace(base, words="a test sheet that is not filled in")
    keeps = job.decision.keep or preview.snapshot.project.policy.keep_copies
    if _has_nothing_new(preview, job.decision) and not keeps:
        return replace(base, words=_known_words(preview))
    stored = accept_attach(store, preview, _decision_for(preview, job.decision))
    if not stored.tables:
        words = "a copy is kept from now on" if stored.kept else _known_words(preview)
        return replace(base, words=words)
    return replace(
        base,
        outcome=Outcome.ACCEPTED,
        tables=tuple(stored.tables),
        values=stored.values,
        superseded=tuple(stored.superseded),
        words=_accepted_words(preview),
    )


def _has_nothing_new(preview: AttachPreview, decision: Decision) -> bool:
    """Whether all is stored already; where the rest was taken once, what was left open then does not count again."""
    taken = decision.take_rest and bool(preview.known) and not preview.new_tables
    return preview.is_unchanged or (taken and not preview.mapping_documents)


def _decision_for(preview: AttachPreview, decision: Decision) -> Decision:
    """The decision for one file of many: of the tables to be superseded only those that it has rows of."""
    here = {code_key(one.earlier) for found in preview.replacements.values() for one in found}
    wanted = [name for name in decision.supersedes if code_key(name) in here]
    return replace(decision, supersedes=wanted, resolves=decision.resolves if wanted else "")


def _known_words(preview: AttachPreview) -> str:
    """Say under which names the tables came in before, where that was another name."""
    files = {code_key(file.id): file for file in preview.snapshot.all(EvidenceFile)}
    tables = [preview.snapshot.find(EvidenceTable, code) for code in preview.known.values()]
    before = [files[code_key(table.file)].name for table in tables if table and code_key(table.file) in files]
    others = sorted({name for name in before if name != preview.path.name})
    words = [f"its tables came in with {', '.join(others)}"] if others else []
    questions = sum(len(table.questions) for table in preview.unresolved)
    words += [f"{questions} open question{'s' * (questions != 1)} in what is left"] if questions else []
    return "; ".join(words)


def _accepted_words(preview: AttachPreview) -> str:
    words = [f"{preview.rejected_cells} cells or rows left out"] if preview.rejected_cells else []
    words += [f"{len(preview.unresolved)} tables left out"] if preview.unresolved else []
    words += [f"{', '.join(preview.known.values())} unchanged"] if preview.known else []
    words += (
        ["mapping kept as " + ", ".join(one.id for one in preview.mapping_documents)]
        if preview.mapping_documents
        else []
    )
    return "; ".join(words)


def _rejected(path: Path, error: SpecflowError) -> FileOutcome:
    where = ", ".join(part for part in error.where.split(", ") if part not in (path.name, str(path)))
    return FileOutcome(path, Outcome.REJECTED, words=error.message, where=where, remedy=error.hint)


def _with_copy_told(outcome: FileOutcome, sources: Mapping[str, Path]) -> FileOutcome:
    """Say of a file that adds nothing when it, or its tables, came in with another file of the same run."""
    if outcome.outcome is not Outcome.UNCHANGED:
        return outcome
    if outcome.sha256 in sources:
        return replace(outcome, words=f"a copy of {shown_path(sources[outcome.sha256])}")
    same = sorted(
        {shown_path(sources[key]) for code in outcome.tables if (key := f"table {code}") in sources}
    )
    return replace(outcome, words=f"the same tables as in {', '.join(same)}") if same else outcome


def _stored_all_the_same(store: ProjectStore, revision: int, path: Path) -> list[str]:
    """An interrupt may come after the file was stored and before that could be told."""
    return (
        [] if store.revision == revision else [f"{shown_path(path)} was stored before the interrupt was seen"]
    )


def _idle(job: FolderJob, run: FolderRun) -> list[str]:
    """Say which layouts of the mapping files no file has, and which tables nothing superseded."""
    notes = [
        f"{name} settles the layout {key}, which no table of these files has"
        for key, name in job.layouts.items()
        if key not in job.met
    ]
    replaced = {code_key(code) for one in run.files for code in one.superseded}
    notes += [
        f"--supersedes {name}: no file has rows of it"
        for name in job.decision.supersedes
        if code_key(name) not in replaced
    ]
    return notes


def run_as_json(run: FolderRun) -> dict[str, Any]:
    """Return a run as data for scripts."""
    return {
        "counts": {str(one): len(run.of(one)) for one in Outcome},
        "total": run.total,
        "interrupted": run.interrupted,
        "files": [
            {
                "file": shown_path(one.path),
                "outcome": str(one.outcome),
                "sha256": one.sha256,
                "tables": list(one.tables),
                "values": one.values,
                "superseded": list(one.superseded),
                "says": one.words,
                "where": one.where,
                "hint": one.remedy,
            }
            for one in run.files
        ],
        "passed_over": [{"file": shown_path(one.path), "reason": one.reason} for one in run.passed_over],
        "notes": list(run.notes),
    }
