"""Open a library for reading only."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from cuebook.errors import StoreUnavailableError
from cuebook.store.places import DATABASE_NAME, resolve_location

NEWEST_KNOWN = "0001"
"""The newest schema this reading path understands; a test holds it to the migrations."""

_BUSY_TIMEOUT_S = 10.0


@contextmanager
def open_for_reading(location: str | Path | None) -> Iterator[sqlite3.Connection]:
    """Give a read-only connection to a library.

    Raises
    ------
    StoreUnavailableError : no library there, not a library, older or newer than this program.
    """
    folder = resolve_location(location)
    database = folder / DATABASE_NAME
    if not database.is_file():
        raise StoreUnavailableError(
            f"There is no library in {folder}.",
            "Add a learner to start one, see the demonstration with cuebook demo, "
            "or name another folder with --library.",
        )
    connection = sqlite3.connect(
        f"{database.resolve().as_uri()}?mode=ro", uri=True, timeout=_BUSY_TIMEOUT_S
    )
    connection.row_factory = sqlite3.Row
    try:
        _check_revision(connection, database)
        yield connection
    except sqlite3.DatabaseError as error:
        raise _explain(error, database) from error
    finally:
        connection.close()


def _check_revision(connection: sqlite3.Connection, database: Path) -> None:
    row = connection.execute("SELECT version_num FROM alembic_version").fetchone()
    if row is None:
        raise StoreUnavailableError(
            f"The file {database} is not a library, or is damaged.",
            "Restore a backup, or name another folder with --library.",
        )
    if row[0] > NEWEST_KNOWN:
        raise StoreUnavailableError(
            f"This library was written by a newer Cuebook (schema {row[0]}; "
            f"this program knows {NEWEST_KNOWN}).",
            "Update the program; nothing was changed.",
        )


def _explain(error: sqlite3.DatabaseError, database: Path) -> StoreUnavailableError:
    if "locked" in str(error) or "busy" in str(error):
        return StoreUnavailableError(
            f"Another program is writing to the library in {database.parent}.", "Try again."
        )
    if "unable to open" in str(error) or "readonly" in str(error):
        return StoreUnavailableError(
            f"The library in {database.parent} cannot be read.", "Check who owns the folder."
        )
    return StoreUnavailableError(
        f"The file {database} is not a library, or is damaged.",
        "Restore a backup, or name another folder with --library.",
    )
