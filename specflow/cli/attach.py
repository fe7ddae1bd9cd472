"""specflow attach: take measurement files into the project."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from specflow.cli.console import ask, person, progress, put, put_json, say, show_error
from specflow.cli.options import (
    ByOption,
    DryRunOption,
    JsonOption,
    ProjectOption,
    TakeRestOption,
    YesOption,
    named_values,
    open_store,
    refuse_idle,
)
from specflow.errors import ExitCode, SpecflowError

if TYPE_CHECKING:
    from specflow.store import ProjectStore
    from specflow.workflows.attach import AttachOptions, AttachPreview, Decision

Files = Annotated[
    list[Path],
    typer.Argument(
        help="Measurement files, filled-in test sheets, or folders of them.",
        metavar="FILE_OR_FOLDER",
        show_default=False,
    ),
]
State = Annotated[
    list[str],
    typer.Option(
        "--state",
        metavar="NAME=VALUE",
        help="Say something that holds for all rows: block, item, requirement, method, stage, set_up, performer, date, "
        "procedure, model, temperature (ambient, baseplate ...), a condition (temperature_ambient='23 °C'), or what a "
        "column is ('column C=gain in dB'). Repeatable.",
    ),
]
Sheets = Annotated[
    list[str], typer.Option("--sheet", metavar="NAME", help="Read this sheet only. Repeatable.")
]
MappingFile = Annotated[
    Path | None,
    typer.Option("--mapping", metavar="FILE", help="A mapping (TOML) that settles the columns; it is kept."),
]
Propose = Annotated[
    Path | None,
    typer.Option(
        "--propose-mapping",
        metavar="FILE",
        help="Write a mapping as it was understood, to be edited; store nothing.",
    ),
]
Supersedes = Annotated[
    list[str],
    typer.Option(
        "--supersedes", metavar="EV-N", help="The new rows replace those of this table. Repeatable."
    ),
]
Beside = Annotated[
    bool, typer.Option("--beside", help="Keep earlier rows with other values beside the new ones.")
]
Resolves = Annotated[
    str,
    typer.Option(
        "--resolves",
        metavar="REPORT",
        help="With --supersedes: the discrepancy report of a fail and its disposition.",
    ),
]
Keep = Annotated[
    bool,
    typer.Option(
        "--keep",
        help="Keep a copy of the file in the project (up to 64 MiB); specflow export --file writes it out again.",
    ),
]
Verify = Annotated[
    bool,
    typer.Option(
        "--verify",
        help="Attach nothing: read the original files again (in the files or folders named, else where they lay) and "
        "say which are unchanged, changed, moved or gone. Ends with 1 when one changed or is gone.",
    ),
]
Hidden = Annotated[bool, typer.Option("--include-hidden", help="Read hidden rows, too.")]


def attach(
    files: Files = [],  # noqa: B006
    project: ProjectOption = "",
    state: State = [],  # noqa: B006
    sheet: Sheets = [],  # noqa: B006
    mapping: MappingFile = None,
    propose_mapping: Propose = None,
    supersedes: Supersedes = [],  # noqa: B006
    beside: Beside = False,
    resolves: Resolves = "",
    include_hidden: Hidden = False,
    keep: Keep = False,
    verify: Verify = False,
    take_rest: TakeRestOption = False,
    yes: YesOption = False,
    dry_run: DryRunOption = False,
    as_json: JsonOption = False,
    by: ByOption = "",
) -> int:
    """Attach measurement files: show how every column is understood, what is rejected, then store it.

    A folder is looked through with all folders below; each file is stored in a transaction of its own, and a summary
    says which were accepted, unchanged or rejected. Mapping files (.toml) of the folder settle the layouts they name.
    """
    from specflow.workflows.attach import AttachOptions, Decision

    if verify:
        from specflow.cli.attach_verify import verify_attached

        refuse_idle(
            "with --verify, which attaches nothing", "leave it out",
            state=state, sheet=sheet, mapping=mapping, propose_mapping=propose_mapping, supersedes=supersedes,
            beside=beside, resolves=resolves, include_hidden=include_hidden, keep=keep, take_rest=take_rest,
            yes=yes, dry_run=dry_run,
        )  # fmt: skip
        return verify_attached(files, project, as_json=as_json)
    if not files:
        raise SpecflowError(
            "no file is named", hint="specflow attach FILE, or a folder: specflow attach results/"
        )
    options = AttachOptions(
        stated=named_values("--state", state, example="block=LNA"),
        mapping=mapping,
        sheets=sheet,
        include_hidden_rows=include_hidden,
        supersedes=supersedes,
    )
    decision = Decision(person(by), take_rest, supersedes, beside, resolves, keep=keep)
    if propose_mapping is not None and (len(files) > 1 or files[0].is_dir()):
        raise SpecflowError("a mapping is proposed for one file at a time", hint="name one file")
    if any(path.is_dir() for path in files):
        from specflow.cli.attach_folder import attach_folders

        return attach_folders(files, project, options, decision, yes=yes, dry_run=dry_run, as_json=as_json)
    with open_store(project, read_only=dry_run or propose_mapping is not None) as store:
        if propose_mapping is not None:
            return _propose(store, files[0], options, propose_mapping)
        run = _Run(store, options, decision, yes, dry_run, as_json)
        return run.attach_all(files)


def _propose(store: ProjectStore, file: Path, options: AttachOptions, target: Path) -> int:
    from specflow.workflows.attach import preview_attach
    from specflow.workflows.mapping_file import write_new_mapping

    preview = preview_attach(store, file, options)
    write_new_mapping(target, preview.measurements.proposal)
    put(str(target))
    say(f"edit it, then: specflow attach {file} --mapping {target}")
    return int(ExitCode.CLEAN)


class _Run:
    """One call of the command: each file is a transaction of its own."""

    def __init__(
        self,
        store: ProjectStore,
        options: AttachOptions,
        decision: Decision,
        yes: bool,
        dry_run: bool,
        as_json: bool,
    ) -> None:
        self._store = store
        self._options = options
        self._decision = decision
        self._yes = yes
        self._dry_run = dry_run
        self._as_json = as_json
        self._data: list[dict[str, Any]] = []

    def attach_all(self, files: list[Path]) -> int:
        """Attach the files one after the other; a file that is refused does not keep the others out."""
        outcomes = [self._attach(file) for file in files]
        if self._as_json:
            put_json(self._data[0] if len(files) == 1 else self._data)
        if len(files) > 1:
            say(f"{outcomes.count(ExitCode.CLEAN)} of {len(files)} files attached or unchanged")
        return int(max(outcomes))

    def _attach(self, file: Path) -> ExitCode:
        from specflow.workflows.attach import preview_attach

        try:
            with progress("reading") as step:
                step(file.name)
                preview = preview_attach(self._store, file, self._options)
            self._show(preview)
            return self._accept(preview)
        except SpecflowError as error:
            show_error(error)
            if self._as_json:
                self._data.append(
                    {"file": file.name, "error": error.message, "where": error.where, "hint": error.hint}
                )
            return error.exit_code

    def _show(self, preview: AttachPreview) -> None:
        from specflow.cli.tables import put_table
        from specflow.workflows.attach_tables import (
            preview_as_json,
            preview_lines,
            preview_sentence,
            preview_tables,
        )

        if self._as_json:
            self._data.append(preview_as_json(preview))
        else:
            for table in preview_tables(preview):
                put_table(table)
                put("")
        for line in preview_lines(preview):
            say(line)
        say(preview_sentence(preview))

    def _accept(self, preview: AttachPreview) -> ExitCode:
        from specflow.workflows.attach import accept_attach, check_acceptable

        check_acceptable(preview, self._decision)
        if self._dry_run or (preview.is_unchanged and not self._keeps(preview)):
            return ExitCode.CLEAN
        if not self._yes and not ask("store this?"):
            say("nothing was stored")
            return ExitCode.CLEAN
        stored = accept_attach(self._store, preview, self._decision)
        if stored.kept:
            say(f"a copy of {preview.path.name} is kept in the project as {stored.file}")
        if not stored.tables and stored.kept:
            return ExitCode.CLEAN
        if self._as_json:
            self._data[-1] |= {"stored": list(stored.tables), "revision": stored.revision}
        say(f"stored as {_named(stored.tables)}; the project is at revision {stored.revision}")
        return ExitCode.CLEAN

    def _keeps(self, preview: AttachPreview) -> bool:
        """Whether accepting a file that has nothing new may still keep a copy of it."""
        return self._decision.keep or preview.snapshot.project.policy.keep_copies


def _named(tables: Sequence[str]) -> str:
    """Name what was stored; of many tables the first and the last."""
    if len(tables) > 8:
        return f"{tables[0]} to {tables[-1]} ({len(tables)} tables)"
    return ", ".join(tables) or "a mapping"
