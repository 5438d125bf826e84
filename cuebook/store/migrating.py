"""Bring a library's schema up to this program's; Alembic is loaded only when needed."""

from __future__ import annotations

from typing import TYPE_CHECKING

from cuebook.errors import StoreUnavailableError

if TYPE_CHECKING:
    from alembic.config import Config
    from sqlalchemy import Connection

HEAD_REVISION = "0001"
"""The newest revision this program knows; a test holds it to the scripts."""


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
    """Bring the schema to a revision, up or down, inside the caller's transaction.

    The caller has switched foreign keys off outside the transaction: rebuilding a parent table
    would otherwise delete its children without a word.
    """
    from alembic import command  # noqa: PLC0415

    config = make_config(connection)
    stored = read_revision(connection)
    if stored is not None and stored > revision:
        command.downgrade(config, revision)
    else:
        command.upgrade(config, revision)


def refuse_newer(stored: str | None) -> None:
    """Refuse a library that a newer program has written.

    Raises
    ------
    StoreUnavailableError : the stored revision is not one this program knows.
    """
    if stored is not None and stored > HEAD_REVISION:
        raise StoreUnavailableError(
            f"This library was written by a newer Cuebook (schema {stored}; "
            f"this program knows {HEAD_REVISION}).",
            "Update the program; nothing was changed.",
        )
