"""The trail of derived values: the law, where its result lies, the tables that it read, and what was made of them."""

from __future__ import annotations

from collections.abc import Iterator

from specflow.model.base import code_key
from specflow.model.card import TrailStep
from specflow.model.columns import TextColumn
from specflow.model.derivation import Derivation
from specflow.model.evidence import AT_COLUMN, EvidenceFile, EvidenceTable
from specflow.model.origin import Origin
from specflow.model.report import CellTone
from specflow.model.snapshot import Snapshot
from specflow.model.verdict import RecordRef
from specflow.reports.origins import OriginFinder


def derivation_steps(
    record: RecordRef, snapshot: Snapshot, finder: OriginFinder, depth: int
) -> Iterator[TrailStep]:
    """Give how a derived record was made and from which tables; nothing for one that was read from a file."""
    table = finder.table(record.table)
    if table.derivation is None:
        return
    at = finder.columns(record.table).extra.get(AT_COLUMN)
    yield from table_derivation_steps(table, snapshot, depth, _place(at, record.row), finder.origin(record))


def _place(at: TextColumn | None, row: int) -> str:
    word = "" if at is None else at.word(row)
    return f" · {word}" if word else ""


def table_derivation_steps(
    table: EvidenceTable, snapshot: Snapshot, depth: int, place: str = "", origin: Origin | None = None
) -> Iterator[TrailStep]:
    """Give the derivation of a table and its inputs, each below it with its file."""
    derivation = snapshot.find(Derivation, table.derivation)
    if derivation is None:
        return
    by = f", by {derivation.by} {derivation.at}".rstrip() if derivation.by else ""
    again = f", again after {derivation.again_of}" if derivation.again_of else ""
    yield TrailStep(
        depth=depth,
        kind="derivation",
        id=derivation.id,
        text=f"{derivation.words}{place}{again}{by}",
        origin=origin,
    )
    for code, digest in zip(derivation.inputs, derivation.digests, strict=True):
        source = snapshot.find(EvidenceTable, code)
        if source is None:
            continue
        file = snapshot.find(EvidenceFile, source.file)
        name = file.name if file is not None else source.file
        same = source.digest == digest
        yield TrailStep(
            depth=depth + 1,
            kind="input",
            id=source.id,
            text=f"{source.rows} rows of {name}"
            + (f", {source.title}" if source.title else "")
            + ("" if same else ", whose content has changed since"),
            tone=CellTone.PLAIN if same else CellTone.DOUBTFUL,
            origin=Origin(file=name, sha256=file.sha256 if file else "", sheet=source.sheet),
        )
        if source.derivation is not None and code_key(source.id) != code_key(table.id):
            yield from table_derivation_steps(source, snapshot, depth + 2)
