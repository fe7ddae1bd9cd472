"""Bytes kept beside documents: what baselines froze, and copies of evidence files."""

from __future__ import annotations

from sqlalchemy import Connection, Table, select

from specflow.errors import DocumentError
from specflow.model.base import code_key
from specflow.store.rows import TABLES, baseline_content, file_copy


def read_baseline(connection: Connection, code: str) -> bytes:
    """Return the bytes that a baseline froze. Raises DocumentError when there is no such baseline."""
    data = _bytes(connection, TABLES["baseline"], baseline_content, code)
    if data is None:
        raise DocumentError("there is no such baseline", where=f"baseline {code}")
    return data


def read_file(connection: Connection, code: str) -> bytes | None:
    """Return the kept bytes of an evidence file, None when none were kept."""
    return _bytes(connection, TABLES["evidence_file"], file_copy, code)


def _bytes(connection: Connection, documents: Table, kept: Table, code: str) -> bytes | None:
    wanted = select(kept.c.data).join(documents).where(documents.c.code_key == code_key(code))
    return connection.execute(wanted).scalar_one_or_none()
