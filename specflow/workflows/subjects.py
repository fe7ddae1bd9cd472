"""What a person names on the command line: requirements, blocks, evidence tables and files."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from difflib import get_close_matches
from pathlib import PurePath

from specflow.errors import DocumentError
from specflow.model.base import code_key
from specflow.model.block import Block
from specflow.model.evidence import EvidenceFile, EvidenceTable
from specflow.model.requirement import Requirement
from specflow.model.snapshot import Snapshot

Subject = Requirement | Block | EvidenceTable | EvidenceFile


def requirements_named(snapshot: Snapshot, codes: Iterable[str]) -> Sequence[Requirement]:
    """Return the requirements of these ids, in that order. DocumentError for one that is not there."""
    found = []
    for code in codes:
        requirement = snapshot.find(Requirement, code)
        if requirement is None:
            raise not_found("requirement", code, [one.id for one in snapshot.requirements])
        found.append(requirement)
    return found


def subject_named(snapshot: Snapshot, name: str) -> Subject:
    """Return what a name means: the id of a requirement, block, evidence table or file, or the name of a file.

    DocumentError when it means nothing, or files of one name with several contents.
    """
    subject = (
        snapshot.find(Requirement, name)
        or snapshot.find(Block, name)
        or snapshot.find(EvidenceTable, name)
        or snapshot.find(EvidenceFile, name)
    )
    if subject is not None:
        return subject
    files = [file for file in snapshot.all(EvidenceFile) if _same_file(file.name, name)]
    if len(files) > 1:
        raise DocumentError(
            f"{len(files)} evidence files are called {name}",
            hint=f"name one by its id: {', '.join(file.id for file in files)}",
        )
    if files:
        return files[0]
    raise not_found(
        "requirement, block, evidence table or file",
        name,
        _names(snapshot),
        listing="specflow status lists the requirements",
    )


def _same_file(known: str, asked: str) -> bool:
    return code_key(PurePath(known).name) == code_key(PurePath(asked).name)


def _names(snapshot: Snapshot) -> list[str]:
    files = snapshot.all(EvidenceFile)
    subjects: tuple[Subject, ...] = (*snapshot.requirements, *snapshot.blocks, *snapshot.tables, *files)
    return [*(subject.id for subject in subjects), *(file.name for file in files)]


_FEW = 20


def not_found(kind: str, code: str, known: Sequence[str], *, listing: str = "") -> DocumentError:
    """Return the error for a name that means nothing, with what is near to it, else with what lists them all."""
    by_key = {code_key(one): one for one in known}
    near = [by_key[key] for key in get_close_matches(code_key(code), by_key, n=3)]
    if near:
        hint = f"near to it: {', '.join(near)}"
    elif listing:
        hint = listing
    elif known and len(known) <= _FEW:
        hint = f"there are: {', '.join(known)}"
    elif known:
        hint = "specflow status lists the requirements with their blocks"
    else:
        hint = "the project is empty; specflow load brings in requirements"
    return DocumentError(f"there is no {kind} {code!r}", hint=hint)
