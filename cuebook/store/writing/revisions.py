"""Count changes of cues and of evidence, inside the transaction that makes them."""

from __future__ import annotations

from typing import TYPE_CHECKING

from cuebook.store.tables.upkeep import LibraryRevision

if TYPE_CHECKING:
    from sqlmodel import Session


def _count(tx: Session, what: str) -> None:
    """Raise a counter once in a transaction, however much of it concerns the counter."""
    counted: set[str] = tx.info.setdefault("counted", set())
    if what in counted:
        return
    counted.add(what)
    row = tx.get(LibraryRevision, what)
    if row is None:
        tx.add(LibraryRevision(what=what, revision=1))
    else:
        row.revision += 1
    tx.flush()


def count_cues(tx: Session) -> None:
    """Say that cues have changed."""
    _count(tx, "cues")


def count_evidence(tx: Session) -> None:
    """Say that something evidence rests on has changed."""
    _count(tx, "evidence")
