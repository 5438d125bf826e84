"""Run revisions on the connection that the opener hands over."""

from __future__ import annotations

from typing import Any, Literal

from alembic import context

from cuebook.store.column_types import Document, Flag, Key, Moment, Number, Whole, Words
from cuebook.store.tables import metadata

_OWN_TYPES = (Document, Flag, Key, Moment, Number, Whole, Words)


def render_own_type(kind: str, item: Any, autogen_context: Any) -> str | Literal[False]:
    """Write our column types by name when a revision is drafted."""
    if kind == "type" and isinstance(item, _OWN_TYPES):
        autogen_context.imports.add("from cuebook.store import column_types")
        return f"column_types.{type(item).__name__}()"
    return False


def run() -> None:
    """Run what is asked on the connection in the configuration's attributes."""
    connection = context.config.attributes["connection"]
    context.configure(
        connection=connection,
        target_metadata=metadata,
        render_item=render_own_type,
        render_as_batch=connection.dialect.name == "sqlite",
        transaction_per_migration=False,
    )
    with context.begin_transaction():
        context.run_migrations()


run()
