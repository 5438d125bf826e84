"""Open a library for reading only."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import closing, contextmanager
from pathlib import Path

from cuebook.errors import StoreUnavailableError
from cuebook.store.places import DATABASE_NAME, is_database, resolve_location
from cuebook.store.schema import HEAD_REVISION, describe_damage, explain_failure, refuse_newer

_BUSY_TIMEOUT_S = 10.0


@contextmanager
def open_for_reading(location: str | Path | None) -> Iterator[sqlite3.Connection]:
    """Give a read-only connection that shows one state of the library until it is closed.

    A library of an older program is brought up to date first.

    Raises
    ------
    StoreUnavailableError : no library there, not a library, or newer than this program.
    """
    database = resolve_location(location) / DATABASE_NAME
    if not is_database(database):
        raise StoreUnavailableError(
            f"There is no library in {database.parent}.",
            "Add a learner to start one, see the demonstration with cuebook demo, "
            "or name another folder with --library.",
        )
    try:
        if _read_revision(database) != HEAD_REVISION:
            _upgrade(database)
        with closing(_connect(database)) as connection:
            connection.execute("BEGIN")  # all that is read belongs to one moment
            yield connection
    except sqlite3.DatabaseError as error:
        raise explain_failure(error, database) from error


def _connect(database: Path) -> sqlite3.Connection:
    connection = sqlite3.connect(
        f"{database.resolve().as_uri()}?mode=ro",
        uri=True,
        timeout=_BUSY_TIMEOUT_S,
        isolation_level=None,
    )
    connection.row_factory = sqlite3.Row
    return connection


def _read_revision(database: Path) -> str:
    with closing(_connect(database)) as connection:
        row = connection.execute("SELECT version_num FROM alembic_version").fetchone()
    if row is None:
        raise describe_damage(database)
    refuse_newer(str(row[0]))
    return str(row[0])


def _upgrade(database: Path) -> None:
    from cuebook.store.opening import open_library  # noqa: PLC0415

    open_library(database.parent).close()
