from __future__ import annotations

import sqlite3
import subprocess
import sys
from collections.abc import Iterator
from contextlib import closing
from pathlib import Path

import pytest
from alembic.autogenerate import compare_metadata
from alembic.config import Config
from alembic.migration import MigrationContext
from alembic.script import ScriptDirectory
from sqlalchemy import Connection, Engine, create_engine, inspect
from sqlmodel import select
from support.libraries import fill_library, make_library

from cuebook.errors import StoreUnavailableError
from cuebook.store import migrating
from cuebook.store.migrating import NOTHING, migrate_safely
from cuebook.store.opening import Library
from cuebook.store.schema import HEAD_REVISION
from cuebook.store.tables import metadata
from cuebook.store.tables.people import Learner


@pytest.fixture
def library(tmp_path: Path) -> Iterator[Library]:
    with make_library(tmp_path / "library") as made:
        yield made


def read_scripts() -> ScriptDirectory:
    """Return the revisions that travel in the package."""
    config = Config()
    config.set_main_option("script_location", "cuebook.store:migrations")
    return ScriptDirectory.from_config(config)


def test_there_is_one_head_and_the_program_knows_it() -> None:
    """Two heads, or a constant that lags behind, would leave libraries half upgraded."""
    assert read_scripts().get_heads() == [HEAD_REVISION]


def test_revisions_sort_by_name() -> None:
    """Newer and older are told apart by comparing names, so names must sort in their order."""
    names = [script.revision for script in read_scripts().walk_revisions()]
    assert names == sorted(names, reverse=True)


def test_a_second_head_is_noticed(tmp_path: Path) -> None:
    """The check above cannot pass by accident: two revisions with one parent are two heads."""
    text = 'revision = "{0}"\ndown_revision = {1}\n'
    versions = tmp_path / "versions"
    versions.mkdir()
    for name, parent in (("0001", None), ("0002", "0001"), ("0002b", "0001")):
        (versions / f"{name}.py").write_text(text.format(name, repr(parent)), "utf-8")
    scripts = ScriptDirectory(str(tmp_path))
    assert sorted(scripts.get_heads()) == ["0002", "0002b"]


def test_the_migrated_schema_is_the_one_the_tables_describe(library: Library) -> None:
    """Nothing is left to migrate after an upgrade to the head."""
    with library.engine.connect() as connection:
        context = MigrationContext.configure(connection, opts={"compare_type": True})
        assert compare_metadata(context, metadata) == []


def describe(engine: Engine) -> dict[str, object]:
    """Return what a comparison of tables and columns does not see: checks, keys, strictness."""
    with engine.connect() as connection:
        look = inspect(connection)
        strict = {
            name: flags
            for _, name, kind, *flags in connection.exec_driver_sql("PRAGMA table_list")
            if kind == "table" and not name.startswith(("sqlite_", "alembic_"))
        }
        return {
            name: (
                sorted((c["name"] or "", c["sqltext"]) for c in look.get_check_constraints(name)),
                sorted(map(repr, look.get_foreign_keys(name))),
                sorted(map(repr, look.get_unique_constraints(name))),
                repr(look.get_pk_constraint(name)),
                strict[name],
            )
            for name in sorted(metadata.tables)
        }


def test_checks_and_keys_are_migrated_as_well(library: Library, tmp_path: Path) -> None:
    """A word added to a list needs a revision: checks of the migrated schema equal the tables'."""
    direct = create_engine(f"sqlite:///{tmp_path}/direct.sqlite3")
    metadata.create_all(direct)
    assert describe(library.engine) == describe(direct)
    direct.dispose()


def test_a_library_can_be_taken_down_and_up_again(library: Library) -> None:
    """The first revision can be undone wholly and made again."""
    migrate_safely(library.engine, NOTHING)
    with closing(sqlite3.connect(library.database)) as plain:
        left = {name for (name,) in plain.execute("SELECT name FROM sqlite_schema")}
    assert {name for name in left if not name.startswith("sqlite_")} <= {
        "alembic_version",
        "sqlite_autoindex_alembic_version_1",
    }
    migrate_safely(library.engine)
    with library.transaction() as tx:
        assert tx.exec(select(Learner)).all() == []


def test_a_migration_that_fails_leaves_the_library_as_it_was(
    library: Library, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Half an upgrade is none: not one table, column or row of it stays."""
    with closing(sqlite3.connect(library.database)) as plain:
        before = plain.execute("SELECT name, sql FROM sqlite_schema ORDER BY name").fetchall()

    def fail_half_way(connection: Connection, _revision: str) -> None:
        connection.exec_driver_sql("CREATE TABLE half (id TEXT)")
        connection.exec_driver_sql("DELETE FROM learner")
        raise RuntimeError

    monkeypatch.setattr(migrating, "migrate", fail_half_way)
    with pytest.raises(RuntimeError):
        migrate_safely(library.engine)
    with closing(sqlite3.connect(library.database)) as plain:
        after = plain.execute("SELECT name, sql FROM sqlite_schema ORDER BY name").fetchall()
        assert plain.execute("SELECT code FROM learner").fetchall() == [("heron-lamp",)]
    assert after == before


REBUILD = (
    "CREATE TABLE rebuilt (id TEXT PRIMARY KEY, code TEXT) STRICT",
    "INSERT INTO rebuilt SELECT id, code FROM learner",
    "DROP TABLE learner",
    "ALTER TABLE rebuilt RENAME TO learner",
)


def test_rebuilding_a_parent_table_keeps_its_children(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Foreign keys are off while tables are rebuilt; with them on, SQLite deletes the children."""

    def rebuild(connection: Connection, _revision: str) -> None:
        for statement in REBUILD:
            connection.exec_driver_sql(statement)

    with fill_library(tmp_path) as library:
        monkeypatch.setattr(migrating, "migrate", rebuild)
        with closing(sqlite3.connect(library.database)) as plain:
            before = plain.execute("SELECT COUNT(*) FROM participation").fetchone()
        migrate_safely(library.engine)
        with closing(sqlite3.connect(library.database)) as plain:
            assert plain.execute("SELECT COUNT(*) FROM participation").fetchone() == before
        with library.engine.connect() as connection:
            assert connection.exec_driver_sql("PRAGMA foreign_keys").scalar() == 1


def test_an_upgrade_that_orphans_rows_is_refused(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Every foreign key is checked before the upgrade is committed."""
    with fill_library(tmp_path) as library:
        monkeypatch.setattr(
            migrating,
            "migrate",
            lambda connection, _revision: connection.exec_driver_sql("DELETE FROM learner"),
        )
        with pytest.raises(StoreUnavailableError, match="rows without their owner"):
            migrate_safely(library.engine)
        with library.transaction() as tx:
            assert len(tx.exec(select(Learner)).all()) == 2


def test_alembic_is_loaded_only_to_migrate(library: Library) -> None:
    """Opening a library that is up to date does not pay for the migration tool."""
    script = (
        "import sys\n"
        "from cuebook.store.opening import open_library\n"
        f"open_library({str(library.folder)!r}).close()\n"
        "print('alembic' in sys.modules, 'sqlmodel' in sys.modules)\n"
    )
    shown = subprocess.run(
        [sys.executable, "-P", "-c", script], check=True, capture_output=True, text=True
    )
    assert shown.stdout.split()[0] == "False"
