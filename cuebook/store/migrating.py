"""Bring a library's schema up to this program's; Alembic is loaded only when needed."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

from cuebook.errors import StoreUnavailableError
from cuebook.store.schema import HEAD_REVISION

if TYPE_CHECKING:
    from alembic.config import Config
    from sqlalchemy import Connection, Engine

NOTHING = "base"
"""The revision of a database without any table of ours."""


def make_config(connection: Connection) -> Config:
    """Return Alembic's configuration for one open connection."""
    from alembic.config import Config  # noqa: PLC0415

    config = Config()
    config.set_main_option("script_location", "cuebook.store:migrations")
    config.attributes["connection"] = connection
    return config


def read_revision(connection: Connection) -> str | None:
    """Return the stored revision; None for a database without tables of ours."""
    from sqlalchemy import inspect, text  # noqa: PLC0415

    if not inspect(connection).has_table("alembic_version"):
        return None
    return connection.execute(text("SELECT version_num FROM alembic_version")).scalar()


def migrate(connection: Connection, revision: str = HEAD_REVISION) -> None:
    """Bring the schema to a revision, up or down, inside the caller's transaction."""
    from alembic import command  # noqa: PLC0415

    config = make_config(connection)
    stored = read_revision(connection) or ""
    is_down = revision == NOTHING or stored > revision
    (command.downgrade if is_down else command.upgrade)(config, revision)


def migrate_safely(engine: Engine, revision: str = HEAD_REVISION) -> None:
    """Bring the schema to a revision in one transaction: wholly, or not at all.

    Raises
    ------
    StoreUnavailableError : rows would have been left without their owner.
    """
    with engine.connect() as connection, _foreign_keys_off(connection), connection.begin():
        migrate(connection, revision)
        broken = connection.exec_driver_sql("PRAGMA foreign_key_check").fetchall()
        if broken:
            raise StoreUnavailableError(
                f"The upgrade would have left {len(broken)} rows without their owner.",
                "Nothing was changed. Please report this.",
            )


@contextmanager
def _foreign_keys_off(connection: Connection) -> Iterator[None]:
    """Switch foreign keys off outside any transaction, where alone SQLite heeds it.

    Rebuilding a parent table with them on would delete its children without a word.
    """
    raw = connection.connection.driver_connection
    if raw is None:  # pragma: no cover - a closed connection
        raise StoreUnavailableError("The library was closed while being upgraded.")
    raw.execute("PRAGMA foreign_keys = OFF")
    try:
        yield
    finally:
        raw.execute("PRAGMA foreign_keys = ON")
