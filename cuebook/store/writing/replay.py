"""Replay and import: a row is inserted only if its key is new."""

from __future__ import annotations

from typing import TYPE_CHECKING, TypeGuard

if TYPE_CHECKING:
    from sqlmodel import Session, SQLModel


def is_known(key: str | None, tx: Session, table: type[SQLModel]) -> TypeGuard[str]:
    """Return whether a row has this key already; no key is never known."""
    return key is not None and tx.get(table, key) is not None
