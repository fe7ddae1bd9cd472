"""The schema: built by migrations alone, equal to the tables of the code, upgraded with a copy kept before."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest
from alembic.autogenerate import compare_metadata
from alembic.runtime.migration import MigrationContext
from sqlalchemy import Connection, inspect

from specflow.errors import StoreError
from specflow.model.change import Change
from specflow.model.snapshot import Snapshot
from specflow.store import create_project, open_project, schema
from specflow.store.project import place_of
from specflow.store.rows import metadata
from tests.builders import a_block, a_project, adding, an_evidence_file, an_evidence_table, some_evidence
from tests.conftest import noon

NEWEST = schema.newest_version()

NEXT = '''
"""A later schema: blocks get a colour (a table that others point to is rebuilt on SQLite)."""

import sqlalchemy as sa
from alembic import op

revision = "{later}"
down_revision = "{newest}"


def upgrade() -> None:
    with op.batch_alter_table("block", recreate="auto") as table:
        table.add_column(sa.Column("colour", sa.Text, nullable=False, server_default="grey"))
        table.alter_column("owner", nullable=True, existing_type=sa.Text)
    {more}


def downgrade() -> None:
    with op.batch_alter_table("block") as table:
        table.drop_column("colour")
'''


@pytest.fixture
def next_schema(tmp_path_factory: pytest.TempPathFactory, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Let the program know one schema more than it does."""
    folder = tmp_path_factory.mktemp("program") / "migrations"
    shutil.copytree(schema.migrations_folder(), folder, ignore=shutil.ignore_patterns("__pycache__"))
    migration = folder / "versions" / f"{NEWEST + 1:04}_colour.py"
    migration.write_text(later())
    monkeypatch.setattr(schema, "migrations_folder", lambda: folder)
    return migration


def later(more: str = "") -> str:
    """Return the text of a migration that follows the newest one."""
    return NEXT.format(more=more, newest=f"{NEWEST:04}", later=f"{NEWEST + 1:04}")


def changes() -> list[Change]:
    """Return the changes that fill a project."""
    return adding(a_block(), an_evidence_file(), an_evidence_table())


def differences(connection: Connection) -> list[object]:
    """Return where a database is not what the tables of the code say."""
    context = MigrationContext.configure(
        connection, opts={"compare_type": True, "compare_server_default": True}
    )
    return list(compare_metadata(context, metadata))


def test_the_newest_schema_equals_the_tables_of_the_code(where: str) -> None:
    create_project(where, a_project()).close()
    with place_of(where).querying() as connection:
        assert differences(connection) == []


def test_down_to_nothing_and_up_again(where: str) -> None:
    create_project(where, a_project()).close()
    place = place_of(where)
    with place.migrating() as connection:
        schema.migrate(connection, "base")
        assert inspect(connection).get_table_names() == ["alembic_version"]
        schema.migrate(connection)
        assert differences(connection) == []
    place.close()


def test_every_table_and_column_is_commented_and_every_constraint_named() -> None:
    for table in metadata.tables.values():
        assert table.comment, table.name
        assert all(column.comment for column in table.columns), table.name
        assert all(constraint.name for constraint in table.constraints), table.name


def test_migrations_know_nothing_of_the_package() -> None:
    versions = list((schema.migrations_folder() / "versions").glob("*.py"))
    assert versions
    for file in versions:
        lines = file.read_text(encoding="utf-8").splitlines()
        assert not [line for line in lines if line.lstrip().startswith(("import specflow", "from specflow"))]
    assert len((schema.migrations_folder() / "env.py").read_text(encoding="utf-8").splitlines()) <= 40


def test_an_older_project_is_copied_and_upgraded_when_opened(
    where: str, next_schema: Path, tmp_path: Path
) -> None:
    kept_back = next_schema.rename(next_schema.with_suffix(".kept"))
    with create_project(where, a_project()) as store:
        store.apply(changes(), columns={"T-1": some_evidence()}, by="me")
    kept_back.rename(next_schema)

    with pytest.raises(StoreError, match="older schema") as refused:
        open_project(where, read_only=True)
    assert "specflow load" in (refused.value.hint or "")
    with open_project(where, clock=noon, backup_folder=tmp_path) as store:
        (note,) = store.notes
        copies = list(tmp_path.glob(f"*.specflow-schema{NEWEST}-20260504T120000"))
        assert [str(copy) in note for copy in copies] == [True]
        assert f"upgraded from schema {NEWEST} to {NEWEST + 1}" in note
        assert_is_filled(store.load())
        assert store.apply(adding(a_block("PA")), by="me") == 3
    with place_of(where).querying() as connection:
        assert connection.exec_driver_sql("SELECT colour FROM block").scalars().all() == ["grey", "grey"]
    with open_project(where) as store:
        assert store.notes == ()

    next_schema.unlink()
    with open_project(copies[0]) as store:
        assert_is_filled(store.load())
    with pytest.raises(StoreError, match=f"schema {NEWEST + 1}"):
        open_project(where)


def test_a_project_of_the_first_schema_gains_what_came_later(where: str, tmp_path: Path) -> None:
    with create_project(where, a_project()) as store:
        store.apply(changes(), columns={"T-1": some_evidence()}, by="me")
    with place_of(where).migrating() as connection:
        schema.migrate(connection, "0001")
        assert "correction" not in inspect(connection).get_table_names()
    with open_project(where, clock=noon, backup_folder=tmp_path) as store:
        assert "upgraded from schema 1" in store.notes[0]
        assert_is_filled(store.load())
    with place_of(where).querying() as connection:
        assert differences(connection) == []


def assert_is_filled(snapshot: Snapshot) -> None:
    """Check that what ``changes`` made is there, arrays too."""
    assert snapshot.revision == 2
    assert [block.id for block in snapshot.blocks] == ["LNA"]
    assert snapshot.load_columns(["T-1"])["T-1"].values["Gain"].low.tolist() == [21.0, 21.0, 21.0]


@pytest.mark.parametrize(
    "more",
    ["raise RuntimeError('half way')", 'op.execute("UPDATE evidence_table SET block_pk = 99")'],
    ids=["failing", "breaking links"],
)
def test_an_upgrade_that_fails_changes_nothing(project_file: Path, next_schema: Path, more: str) -> None:
    kept_back = next_schema.rename(next_schema.with_suffix(".kept"))
    with create_project(project_file, a_project()) as store:
        store.apply(changes(), columns={"T-1": some_evidence()}, by="me")
    kept_back.rename(next_schema)
    next_schema.write_text(later(more))
    with pytest.raises((RuntimeError, StoreError), match=r"half way|links lead nowhere"):
        open_project(project_file)
    next_schema.unlink()
    with open_project(project_file) as store:
        assert_is_filled(store.load())
        assert store.notes == ()
