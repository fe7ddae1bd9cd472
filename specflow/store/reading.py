"""Loading: stored rows to documents and arrays, by plain SQL that both databases understand.

Documents of all nouns come by one statement, so they are of one moment without any transaction.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from specflow.errors import DocumentError, StoreError
from specflow.exchange import read_text
from specflow.model.base import Document, code_key
from specflow.model.evidence import EvidenceColumns
from specflow.model.garbage import uncollected
from specflow.model.nouns import NOUNS
from specflow.model.snapshot import Snapshot
from specflow.store.columns import PackedColumn, unpack
from specflow.store.faults import translated
from specflow.store.place import Place, Run

_DOCUMENTS = " UNION ALL ".join(
    [
        "SELECT '' AS noun, revision AS pk, '' AS code_key, '' AS body FROM project_state",
        *(
            f"SELECT '{noun.name}', pk, code_key, CASE WHEN removed_at IS NULL THEN body END FROM \"{noun.name}\""
            for noun in NOUNS
        ),
    ]
)

_COLUMNS = """
SELECT evidence_table_pk, role, name, unit, dtype, labels, rows, sha256, data
FROM evidence_column WHERE evidence_table_pk IN ({keys}) ORDER BY evidence_table_pk, position
"""

_TABLES_AT_ONCE = 500


def read_revision(run: Run) -> int:
    """Return the project revision."""
    return int(next(iter(run("SELECT revision FROM project_state")))[0])


def load_snapshot(place: Place) -> Snapshot:
    """Return all documents at one revision; the arrays of evidence are read when the snapshot is asked for them."""
    with translated(place.name), place.reading() as run:
        rows = list(run(_DOCUMENTS))
    with uncollected():
        return _snapshot(place, rows)


def _snapshot(place: Place, rows: Iterable[Sequence[Any]]) -> Snapshot:
    documents: dict[str, dict[str, Document]] = {noun.name: {} for noun in NOUNS}
    removed: dict[str, set[str]] = defaultdict(set)
    tables: dict[str, int] = {}
    revision = 0
    for noun, pk, key, body in rows:
        if not noun:
            revision = pk
            continue
        if body is None:
            removed[noun].add(key)
            continue
        documents[noun][key] = _document(noun, key, body, place.name)
        if noun == "evidence_table":
            tables[key] = pk
    gone = {noun: frozenset(keys) for noun, keys in removed.items()}
    return Snapshot(revision, documents, _ColumnsLoader(place, tables), gone)


def _document(noun: str, key: str, body: str, where: str) -> Document:
    try:
        return read_text(noun, body)
    except DocumentError as error:
        raise StoreError(
            f"the stored {noun} {key} cannot be read: {error}", where=where, hint=error.hint
        ) from error


@dataclass(frozen=True, slots=True)
class _ColumnsLoader:
    """Fetches arrays by table id. Stored arrays never change, so this stays right while others write."""

    place: Place
    keys: Mapping[str, int]

    def __call__(self, tables: Sequence[str]) -> Mapping[str, EvidenceColumns]:
        wanted = {table: self.keys[code_key(table)] for table in tables}
        packed: dict[int, list[PackedColumn]] = defaultdict(list)
        with translated(self.place.name), self.place.reading() as run:
            for keys in _portions(list(wanted.values())):
                for row in run(_COLUMNS.format(keys=",".join(map(str, keys)))):
                    packed[row[0]].append(PackedColumn._make(row[1:]))
        return {table: unpack(table, packed[pk]) for table, pk in wanted.items()}


def _portions(keys: Sequence[int]) -> Iterable[Sequence[int]]:
    return (keys[start : start + _TABLES_AT_ONCE] for start in range(0, len(keys), _TABLES_AT_ONCE))
