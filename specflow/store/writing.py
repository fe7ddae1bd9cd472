"""One transaction of changes: all of them are stored, or none.

Order: take the lock; compare what the changes were made from with what is stored; find what links lead to; write;
look for circles and for links left hanging; write the history. Nothing here reads evidence arrays, so a change costs
the same in a project of any size.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, fields
from typing import Any

from sqlalchemy import Connection, Table, bindparam, delete, func, insert, select, update

from specflow.errors import ConflictError, DocumentError
from specflow.model.nouns import NOUNS
from specflow.store.batch import Batch
from specflow.store.columns import PackedColumn
from specflow.store.convert import Edit, Key, fields_text, link_values, row_values, same_document
from specflow.store.history import last_change
from specflow.store.links import check_no_cycles, check_nothing_left_pointing, portions, resolve
from specflow.store.rows import (
    LINK_TABLES,
    TABLES,
    baseline_content,
    evidence_column,
    file_copy,
    history,
    project_state,
)


@dataclass(frozen=True, slots=True)
class Acceptance:
    """Who accepts a batch, why, and the project revision it was made from (None: any)."""

    by: str
    reason: str
    expected_revision: int | None = None


@dataclass(frozen=True, slots=True)
class Stored:
    """What is stored of a document before it is edited."""

    pk: int
    code: str
    revision: int
    removed_at: int | None
    body: str


def accept(connection: Connection, batch: Batch, acceptance: Acceptance, now: Callable[[], str]) -> int:
    """Write a batch and its history; return the project revision it makes. ``now`` gives the time as UTC ISO text.

    Raises ConflictError when somebody else changed the same documents, DocumentError when the documents do not fit
    the project. The transaction must then be rolled back.
    """
    if not _plain(acceptance.by):
        raise DocumentError("nobody is named who accepts the changes")
    revision = _lock(connection, acceptance.expected_revision) + 1
    stored = _stored(connection, batch.edits)
    for edit in batch.edits:
        _guard(connection, edit, stored.get(edit.key))
    keys = _keys(connection, batch.edits, stored)
    targets = resolve(connection, batch.edits, keys)
    _write_documents(connection, batch.edits, keys, targets, revision)
    check_no_cycles(connection, batch.edits)
    _remove_documents(connection, batch.edits, keys, revision)
    _write_attachments(connection, batch, keys)
    _write_history(connection, batch.edits, stored, revision, acceptance, now())
    return revision


def _lock(connection: Connection, expected: int | None) -> int:
    """Return the project revision, and keep all other writers out until the transaction ends."""
    revision = int(connection.execute(select(project_state.c.revision).with_for_update()).scalar_one())
    if expected not in (None, revision):
        raise ConflictError(
            f"the project went on from revision {expected} to {revision} since it was read, "
            f"last {last_change(connection)}",
            hint="read it again and repeat the change",
        )
    return revision


def _write_history(
    connection: Connection,
    edits: Sequence[Edit],
    stored: Mapping[Key, Stored],
    revision: int,
    acceptance: Acceptance,
    at: str,
) -> None:
    """Write one row a change and move the project to ``revision``."""
    first = _next_key(connection, history)
    rows = [
        {
            "pk": first + number,
            "project_revision": revision,
            "at": at,
            "by": _plain(acceptance.by),
            "reason": _plain(edit.change.reason or acceptance.reason),
            "noun": edit.noun.name,
            "code": edit.code,
            "code_key": edit.key[1],
            "action": edit.change.action,
            "base_revision": edit.change.base_revision,
            "fields": fields_text(edit.change),
            "before": stored[edit.key].body if edit.key in stored else None,
            "after": edit.body,
        }
        for number, edit in enumerate(edits)
    ]
    connection.execute(insert(history), rows)
    connection.execute(update(project_state).values(revision=revision))


def _plain(words: str) -> str:
    return words.replace("\0", "").strip()


def _stored(connection: Connection, edits: Sequence[Edit]) -> dict[Key, Stored]:
    codes: dict[str, list[str]] = defaultdict(list)
    for edit in edits:
        codes[edit.noun.name].append(edit.key[1])
    stored: dict[Key, Stored] = {}
    for noun, keys in codes.items():
        columns = TABLES[noun].c
        wanted = (columns[field.name] for field in fields(Stored))
        found = select(columns.code_key, *wanted)
        for portion in portions(keys):
            for key, *values in connection.execute(found.where(columns.code_key.in_(portion))):
                stored[noun, key] = Stored(*values)
    return stored


def _guard(connection: Connection, edit: Edit, row: Stored | None) -> None:
    """Refuse a change that was made from something else than what is stored."""
    change = edit.change
    if change.action == "add":
        if row is not None:
            _refuse_taken(connection, edit, row)
        return
    if row is None:
        raise DocumentError("there is no such document to change", where=edit.title)
    who = last_change(connection, *edit.key)
    hint = "read it again and repeat the change"
    if row.removed_at is not None:
        raise ConflictError(f"it was removed {who}", where=edit.title)
    if change.base_revision is not None and change.base_revision != row.revision:
        raise ConflictError(
            f"it went on from revision {change.base_revision} to {row.revision} since it was read, changed {who}",
            where=edit.title,
            hint=hint,
        )
    if change.before is not None and not same_document(edit.noun.name, change.before, row.body):
        raise ConflictError(f"it was changed {who} since it was read", where=edit.title, hint=hint)
    if change.base_revision is None and change.before is None:
        raise DocumentError("the change does not say what it was made from", where=edit.title)


def _refuse_taken(connection: Connection, edit: Edit, row: Stored) -> None:
    who = last_change(connection, *edit.key)
    spelling = f" as {row.code}" if row.code != edit.code else ""
    if row.removed_at is None:
        raise DocumentError(
            f"the id is taken{spelling} (last changed {who})", where=edit.title, hint="give it another id"
        )
    raise DocumentError(
        f"the id was used{spelling} and removed ({who}); ids are never used again",
        where=edit.title,
        hint="give it another id",
    )


def _keys(connection: Connection, edits: Sequence[Edit], stored: Mapping[Key, Stored]) -> dict[Key, int]:
    """Return the row keys of all edited documents; added ones get the next free numbers."""
    keys = {key: int(row.pk) for key, row in stored.items()}
    free: dict[str, int] = {}
    for edit in edits:
        if edit.key not in keys:
            noun = edit.noun.name
            if noun not in free:
                free[noun] = _next_key(connection, TABLES[noun])
            keys[edit.key] = free[noun]
            free[noun] += 1
    return keys


def _next_key(connection: Connection, table: Table) -> int:
    return int(connection.execute(select(func.coalesce(func.max(table.c.pk), 0))).scalar_one()) + 1


def _write_documents(
    connection: Connection,
    edits: Sequence[Edit],
    keys: Mapping[Key, int],
    targets: Mapping[Key, int],
    revision: int,
) -> None:
    for noun in NOUNS:  # the order in which links can be kept
        added, edited = [], []
        links: dict[str, list[dict[str, int]]] = defaultdict(list)
        link_tables = {name: table for (owner, name), table in LINK_TABLES.items() if owner == noun.name}
        for edit in edits:
            if edit.noun is not noun or edit.document is None:
                continue
            pk = keys[edit.key]
            values = row_values(edit, targets) | {"changed_at": revision}
            if edit.change.action == "add":
                added.append(values | {"pk": pk})
            else:
                edited.append(values | {"changed_pk": pk})
            for name in link_tables:
                links[name] += link_values(edit, name, targets, pk)
        _write_rows(connection, TABLES[noun.name], added, edited)
        for name, table in link_tables.items():
            _write_links(connection, table, [row["changed_pk"] for row in edited], links[name])


def _write_rows(
    connection: Connection, table: Table, added: Sequence[dict[str, Any]], edited: Sequence[dict[str, Any]]
) -> None:
    if added:
        connection.execute(insert(table), added)
    if edited:
        connection.execute(update(table).where(table.c.pk == bindparam("changed_pk")), edited)


def _write_links(
    connection: Connection, table: Table, changed: Sequence[int], rows: Sequence[dict[str, int]]
) -> None:
    if changed:
        connection.execute(
            delete(table).where(table.c.pk == bindparam("changed_pk")), [{"changed_pk": pk} for pk in changed]
        )
    if rows:
        connection.execute(insert(table), rows)


def _remove_documents(
    connection: Connection, edits: Sequence[Edit], keys: Mapping[Key, int], revision: int
) -> None:
    removed: dict[str, list[dict[str, int]]] = defaultdict(list)
    for edit in edits:
        if edit.document is None:
            removed[edit.noun.name].append({"changed_pk": keys[edit.key]})
    for noun, rows in removed.items():
        table = TABLES[noun]
        tombstone = update(table).where(table.c.pk == bindparam("changed_pk"))
        connection.execute(tombstone.values(removed_at=revision, changed_at=revision), rows)
    check_nothing_left_pointing(connection, removed)


def _write_attachments(connection: Connection, batch: Batch, keys: Mapping[Key, int]) -> None:
    for key, columns in batch.columns.items():
        pk = keys["evidence_table", key]
        connection.execute(
            insert(evidence_column),
            [
                {"evidence_table_pk": pk, "position": position, **_column_values(column)}
                for position, column in enumerate(columns)
            ],
        )
    for key, data in batch.files.items():
        connection.execute(insert(file_copy).values(evidence_file_pk=keys["evidence_file", key], data=data))
    for key, data in batch.contents.items():
        connection.execute(insert(baseline_content).values(baseline_pk=keys["baseline", key], data=data))


def _column_values(column: PackedColumn) -> dict[str, Any]:
    return column._asdict()
