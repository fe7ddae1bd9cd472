"""``specflow attach --verify``: the original files again, beside what is stored of them."""

from __future__ import annotations

from pathlib import Path

from specflow.cli.console import progress, put, put_json, say
from specflow.cli.options import open_store
from specflow.errors import ExitCode


def verify_attached(paths: list[Path], project: str, *, as_json: bool) -> int:
    """Say of each stored file what became of it, and which cells read differently; nothing is stored."""
    from specflow.cli.tables import put_table
    from specflow.workflows.found_files import shown_path
    from specflow.workflows.verify_files import verification_as_json, verify_files
    from specflow.workflows.verify_tables import verification_tables

    with open_store(project, read_only=True) as store, progress("reading") as step:
        found = verify_files(store, paths, step)
    if as_json:
        put_json(verification_as_json(found))
    else:
        for table in verification_tables(found):
            put_table(table)
            put("")
    for path in found.strangers:
        say(f"{shown_path(path)}: not attached")
    say(found.counts())
    if any(check.state == "vanished" for check in found.checks) and not any(path.is_dir() for path in paths):
        say("where the files lie elsewhere: specflow attach --verify FOLDER")
    return int(ExitCode.CLEAN if found.is_clean else ExitCode.FINDINGS)
