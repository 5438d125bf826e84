"""Open a library for writing: its folder, its engine, its schema."""

from __future__ import annotations

import os
import sqlite3
from collections.abc import Iterator
from contextlib import closing, contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any, Self

from cuebook.errors import CuebookError, InputError, StoreUnavailableError
from cuebook.store.places import DATABASE_NAME, resolve_location
from cuebook.store.schema import HEAD_REVISION, describe_damage, explain_failure, refuse_newer

if TYPE_CHECKING:
    from sqlalchemy import Connection, Engine
    from sqlmodel import Session

BUSY_TIMEOUT_MS = 10_000
_COPY_PREFIX = "before-upgrade-from-"


class Library:
    """An open library: one engine, one folder of originals."""

    def __init__(self, folder: Path, engine: Engine) -> None:
        self.folder = folder
        self.engine = engine

    @property
    def database(self) -> Path:
        """Return the database file."""
        return self.folder / DATABASE_NAME

    @property
    def originals(self) -> Path:
        """Return the folder of unchanged recordings."""
        return self.folder / "originals"

    @contextmanager
    def transaction(self) -> Iterator[Session]:
        """Give a session whose work is on disk when the block ends, or not at all.

        Raises
        ------
        InputError : an entry that the tables do not allow.
        StoreUnavailableError : the library is busy, full, read-only or damaged.
        """
        from sqlalchemy.exc import DatabaseError, IntegrityError, StatementError  # noqa: PLC0415
        from sqlmodel import Session  # noqa: PLC0415

        try:
            with Session(self.engine, expire_on_commit=False) as session, session.begin():
                yield session
        except IntegrityError as error:
            raise InputError(
                f"The library does not allow this entry: {error.orig}.", "Nothing was stored."
            ) from error
        except DatabaseError as error:
            raise explain_failure(error.orig, self.database) from error
        except StatementError as error:
            # What a column type refused comes wrapped.
            if isinstance(error.orig, CuebookError):
                raise error.orig from error
            raise

    def scrub(self) -> None:
        """Leave no erased row behind: not in the write-ahead log, not in copies kept by upgrades.

        The database file itself holds none, because pages are overwritten when rows go.
        """
        with closing(self.engine.raw_connection()) as connection:
            connection.cursor().execute("PRAGMA wal_checkpoint(TRUNCATE)")
        for copy in self.folder.glob(f"{_COPY_PREFIX}*.sqlite3"):
            copy.unlink()

    def close(self) -> None:
        """Let go of the database."""
        self.engine.dispose()

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_given: object) -> None:
        self.close()


def open_library(location: str | Path | None = None, *, create: bool = True) -> Library:
    """Open a library for writing; make or upgrade it where needed.

    Raises
    ------
    StoreUnavailableError : no library there, not a library, newer, busy or not writable.
    """
    folder = resolve_location(location)
    database = folder / DATABASE_NAME
    if not create and not database.exists():
        raise StoreUnavailableError(
            f"There is no library in {folder}.", "Name another folder with --library."
        )
    _prepare_files(folder)
    library = Library(folder, _make_engine(database))
    try:
        _bring_up_to_date(library)
    except BaseException as error:
        library.close()
        reason = getattr(error, "orig", error)
        if isinstance(reason, sqlite3.DatabaseError):
            raise explain_failure(reason, database) from error
        raise
    return library


def _prepare_files(folder: Path) -> None:
    """Make what is missing, readable by the owner only; leave alone what is there."""
    try:
        for needed in (folder, folder / "originals"):
            if not needed.is_dir():
                needed.mkdir(parents=True, exist_ok=True)
                needed.chmod(0o700)
        # Made before SQLite sees it, because its companions take over the file's permissions.
        os.close(os.open(folder / DATABASE_NAME, os.O_RDWR | os.O_CREAT, 0o600))
    except (FileExistsError, NotADirectoryError, IsADirectoryError) as error:
        raise StoreUnavailableError(
            f"There can be no library in {folder}: something else has that name.",
            "Name another folder with --library.",
        ) from error
    except OSError as error:
        raise StoreUnavailableError(
            f"The folder {folder} cannot be written: {error.strerror}.",
            "Choose another folder with --library.",
        ) from error


def _make_engine(database: Path) -> Engine:
    from sqlalchemy import URL, create_engine, event  # noqa: PLC0415

    engine = create_engine(URL.create("sqlite", database=str(database)))

    def set_up(connection: Any, _record: Any) -> None:
        # The driver must not open transactions by itself: BEGIN IMMEDIATE below does.
        connection.isolation_level = None
        connection.execute(f"PRAGMA busy_timeout = {BUSY_TIMEOUT_MS}")
        connection.execute("PRAGMA journal_mode = WAL")
        connection.execute("PRAGMA synchronous = FULL")
        connection.execute("PRAGMA foreign_keys = ON")
        # A learner who is erased must not be left in pages that are merely marked free.
        connection.execute("PRAGMA secure_delete = ON")

    def begin(connection: Connection) -> None:
        # Immediate: a deferred transaction that later writes fails at once under contention.
        connection.exec_driver_sql("BEGIN IMMEDIATE")

    event.listen(engine, "connect", set_up)
    event.listen(engine, "begin", begin)
    return engine


def _bring_up_to_date(library: Library) -> None:
    stored = _read_revision(library.engine, library.database)
    refuse_newer(stored)
    if stored == HEAD_REVISION:
        return
    from cuebook.store.migrating import migrate_safely  # noqa: PLC0415

    if stored is not None:
        _keep_copy(library.folder, stored)
    migrate_safely(library.engine)


def _read_revision(engine: Engine, database: Path) -> str | None:
    """Return the stored revision, by plain SQL; None for an empty database."""
    with closing(engine.raw_connection()) as connection:
        cursor = connection.cursor()
        cursor.execute("SELECT name FROM sqlite_schema WHERE type = 'table'")
        names = {name for (name,) in cursor.fetchall()}
        if not names:
            return None
        if "alembic_version" not in names:
            raise describe_damage(database)
        cursor.execute("SELECT version_num FROM alembic_version")
        row = cursor.fetchone()
    if row is None:
        raise describe_damage(database)
    return str(row[0])


def _keep_copy(folder: Path, stored: str) -> None:
    """Copy the database as it is before it is upgraded."""
    path = folder / f"{_COPY_PREFIX}{stored}.sqlite3"
    os.close(os.open(path, os.O_RDWR | os.O_CREAT, 0o600))
    with (
        closing(sqlite3.connect(folder / DATABASE_NAME)) as source,
        closing(sqlite3.connect(path)) as target,
    ):
        source.backup(target)
