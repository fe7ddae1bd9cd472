"""What is written together, checked as far as it can be before the database is locked."""

from __future__ import annotations

import hashlib
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field

from specflow.errors import DocumentError
from specflow.exchange import payload_text
from specflow.model.base import code_key
from specflow.model.baseline import Baseline
from specflow.model.change import Change
from specflow.model.evidence import EvidenceColumns, EvidenceFile, EvidenceTable
from specflow.store.columns import PackedColumn, pack
from specflow.store.convert import Edit, read_edits


@dataclass(frozen=True, slots=True)
class Batch:
    """Edits, and by code key the arrays and bytes that belong to added documents."""

    edits: Sequence[Edit]
    columns: Mapping[str, Sequence[PackedColumn]] = field(default_factory=dict)
    files: Mapping[str, bytes] = field(default_factory=dict)
    contents: Mapping[str, bytes] = field(default_factory=dict)


def make_batch(
    changes: Sequence[Change], columns: Mapping[str, EvidenceColumns], files: Mapping[str, bytes]
) -> Batch:
    """Return changes with the arrays of added tables and the bytes of added files, all checked against each other.

    Raises DocumentError when an added table comes without its arrays, arrays come for a table that is not added
    (stored arrays never change), bytes are not those of a file that becomes one with a kept copy, or a baseline comes
    without its bytes.
    """
    edits = read_edits(changes)
    added = {edit.key: edit for edit in edits if edit.change.action == "add"}
    for edit in edits:
        if edit.noun.name == "project" and edit.change.action != "edit":
            raise DocumentError(
                "a project has one project document, from its creation to its end", where=edit.title
            )
        if edit.noun.name == "baseline" and edit.change.action == "add":
            raise DocumentError("a baseline is stored together with its bytes", where=edit.title)
    return Batch(edits, _pack_all(added.values(), columns), _check_files(edits, files))


def make_baseline_batch(baseline: Baseline, content: bytes) -> Batch:
    """Return an added baseline with its bytes. Raises DocumentError when they are not the ones it tells of."""
    found = hashlib.sha256(content).hexdigest()
    if (baseline.content_sha256, baseline.size) != (found, len(content)):
        raise DocumentError("its bytes are not those it was frozen with", where=f"baseline {baseline.id}")
    change = Change(noun="baseline", id=baseline.id, action="add", after=payload_text(baseline))
    return Batch(read_edits([change]), contents={code_key(baseline.id): content})


def _pack_all(added: Iterable[Edit], columns: Mapping[str, EvidenceColumns]) -> dict[str, list[PackedColumn]]:
    arrays = {code_key(code): value for code, value in columns.items()}
    packed: dict[str, list[PackedColumn]] = {}
    for edit in added:
        if isinstance(edit.document, EvidenceTable):
            key = edit.key[1]
            if key not in arrays:
                raise DocumentError("the table comes without its values", where=edit.title)
            packed[key] = pack(edit.document, arrays.pop(key))
    if arrays:
        raise DocumentError(
            f"values come for tables that are not added: {', '.join(sorted(arrays))}",
            hint="stored values never change; attach a new table that supersedes the old one",
        )
    return packed


def _check_files(edits: Sequence[Edit], files: Mapping[str, bytes]) -> dict[str, bytes]:
    known = {
        edit.key[1]: edit
        for edit in edits
        if isinstance(edit.document, EvidenceFile) and edit.document.kept and edit.change.action != "remove"
    }
    kept: dict[str, bytes] = {}
    for code, data in files.items():
        edit = known.get(code_key(code))
        if edit is None or not isinstance(edit.document, EvidenceFile):
            raise DocumentError(
                "bytes come for a file that does not become one with a copy", where=f"evidence file {code}"
            )
        if hashlib.sha256(data).hexdigest() != edit.document.sha256:
            raise DocumentError("the bytes do not have the digest that the document states", where=edit.title)
        kept[code_key(code)] = data
    return kept
