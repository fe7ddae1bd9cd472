"""The project store: the only package that knows SQL. Rows never leave it; documents and arrays do.

One project is one SQLite file (``*.specflow``), or one PostgreSQL database by URL, with the same tables.

- ``project.py``: ``create_project``, ``open_project`` and ``ProjectStore`` (load, apply, history, baselines)
- ``place.py``: what is asked of the place of a project: ``file.py`` (SQLite) or ``database.py`` (PostgreSQL);
  ``faults.py``: what databases say, as StoreError
- ``rows.py``: the tables; ``convert.py``: documents as rows; ``columns.py``: arrays of evidence as rows
- ``reading.py``: loading; ``batch.py``: what is written together; ``writing.py``: the one transaction that writes it;
  ``links.py``: codes that point to codes
- ``history.py``: who changed what; ``kept.py``: bytes beside documents; ``schema.py``: versions and
  migrations

Reading speaks plain SQL to the driver and needs neither SQLAlchemy nor Alembic, whose import would take longer than
loading a project does (measured: 0.2 s against 0.05 s for 1,000 requirements); they are imported by the first write
or upgrade. Tables are SQLAlchemy Core: the documents are the objects already, so mapped classes would be a second
set of them.
"""

from specflow.store.history import HistoryEntry
from specflow.store.project import ProjectStore, create_project, open_project

__all__ = ["HistoryEntry", "ProjectStore", "create_project", "open_project"]
