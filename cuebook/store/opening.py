"""Open a library: its folder, its engine, its schema."""

from __future__ import annotations

import os
import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any, Self

from cuebook.errors import StoreUnavailableError
from cuebook.store.places import DATABASE_NAME, resolve_location

if TYPE_CHECKING:
    from sqlalchemy import Connection, Engine
    from sqlmodel import Session

BUSY_TIMEOUT_MS = 10_000


class Library:
    """An open library: one engine, one folder of originals."""

    def __init__(self, folder: Path, engine: Engine) -> None:
        self.folder = folder
        self.engine = engine

    @property
    def originals(self) -> Path:
        """Return the folder of unchanged recordings."""
        return self.folder / "originals"

    @contextmanager
    def transaction(self) -> Iterator[Session]:
        """Give a session whose work is on disk when the block ends, or not at all.

        Raises
        ------
        StoreUnavailableError : the library is busy, full, read-only or damaged.
        """
        from sqlalchemy.exc import DatabaseError  # noqa: PLC0415
        from sqlmodel import Session  # noqa: PLC0415

        try:
            with Session(self.engine, expire_on_commit=False) as session, session.begin():
                yield session
        except DatabaseError as error:
            raise explain_failure(error.orig, self.folder) from error

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
    is_new = not database.exists()
    if is_new and not create:
        raise StoreUnavailableError(
            f"There is no library in {folder}.", "Name another folder with --library."
        )
    _prepare_folder(folder)
    engine = _make_engine(database)
    try:
        _bring_up_to_date(engine, folder)
    except sqlite3.DatabaseError as error:
        raise explain_failure(error, folder) from error
    except Exception as error:
        original = getattr(error, "orig", None)
        if isinstance(original, sqlite3.DatabaseError):
            raise explain_failure(original, folder) from error
        raise
    if is_new:
        database.chmod(0o600)
    return Library(folder, engine)


def _prepare_folder(folder: Path) -> None:
    try:
        folder.mkdir(parents=True, exist_ok=True)
        (folder / "originals").mkdir(exist_ok=True)
        for made in (folder, folder / "originals"):
            if made.stat().st_uid == os.getuid():
                made.chmod(0o700)  # readable by the owner only
    except (FileExistsError, NotADirectoryError) as error:
        raise StoreUnavailableError(
            f"{folder} is a file, not a folder.", "Name a folder with --library."
        ) from error
    except OSError as error:
        raise StoreUnavailableError(
            f"The folder {folder} cannot be written: {error.strerror}.",
            "Choose another folder with --library.",
        ) from error


def _make_engine(database: Path) -> Engine:
    from sqlalchemy import create_engine, event  # noqa: PLC0415

    engine = create_engine(f"sqlite:///{database}")

    def set_up(connection: Any, _record: Any) -> None:
        # The driver must not open transactions by itself: BEGIN IMMEDIATE below does.
        connection.isolation_level = None
        connection.execute(f"PRAGMA busy_timeout = {BUSY_TIMEOUT_MS}")
        connection.execute("PRAGMA journal_mode = WAL")
        connection.execute("PRAGMA synchronous = FULL")
        connection.execute("PRAGMA foreign_keys = ON")

    def begin(connection: Connection) -> None:
        # Immediate: a deferred transaction that later writes fails at once under contention.
        connection.exec_driver_sql("BEGIN IMMEDIATE")

    event.listen(engine, "connect", set_up)
    event.listen(engine, "begin", begin)
    return engine


def _bring_up_to_date(engine: Engine, folder: Path) -> None:
    from cuebook.store.migrating import (  # noqa: PLC0415
        HEAD_REVISION,
        migrate,
        read_revision,
        refuse_newer,
    )

    with engine.connect() as connection:
        stored = read_revision(connection)
        connection.rollback()
        refuse_newer(stored)
        if stored == HEAD_REVISION:
            return
        if stored is not None:
            _keep_copy(folder, stored)
        upgrade_safely(connection, migrate)


def upgrade_safely(connection: Connection, migrate: Any, *arguments: Any) -> None:
    """Run a migration with foreign keys off, then check every one of them."""
    connection.exec_driver_sql("PRAGMA foreign_keys = OFF")
    connection.rollback()  # leave the transaction that the pragma opened
    raw = connection.connection.driver_connection
    if raw is None:  # pragma: no cover - a closed connection
        raise StoreUnavailableError("The library was closed while being upgraded.")
    raw.execute("PRAGMA foreign_keys = OFF")
    try:
        with connection.begin():
            migrate(connection, *arguments)
            broken = connection.exec_driver_sql("PRAGMA foreign_key_check").fetchall()
            if broken:
                raise StoreUnavailableError(
                    f"The upgrade would have left {len(broken)} rows without their owner.",
                    "Nothing was changed. Please report this.",
                )
    finally:
        raw.execute("PRAGMA foreign_keys = ON")


def _keep_copy(folder: Path, stored: str) -> None:
    """Copy the database as it is before it is upgraded."""
    source = sqlite3.connect(folder / DATABASE_NAME)
    target = sqlite3.connect(folder / f"before-upgrade-from-{stored}.sqlite3")
    try:
        source.backup(target)
    finally:
        source.close()
        target.close()


def explain_failure(error: BaseException | None, folder: Path) -> StoreUnavailableError:
    """Return plain words for what SQLite said."""
    said = str(error)
    place = f"the library in {folder}"
    if "locked" in said or "busy" in said:
        return StoreUnavailableError(
            f"Another program is writing to {place}.", "Nothing was stored; try again."
        )
    if "not a database" in said or "malformed" in said or "no such table" in said:
        return StoreUnavailableError(
            f"The file {folder / DATABASE_NAME} is not a library, or is damaged.",
            "Nothing was changed. Restore a backup, or name another folder with --library.",
        )
    if "readonly" in said or "unable to open" in said:
        return StoreUnavailableError(
            f"Nothing can be written to {place}.", "Check who owns the folder, and the disk."
        )
    if "full" in said:
        return StoreUnavailableError(
            f"The disk of {place} is full.", "Nothing was stored; make room and try again."
        )
    return StoreUnavailableError(f"The store refused this entry: {said}.", "Nothing was stored.")
