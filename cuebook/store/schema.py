"""Which schema this program knows; light, so that the reading path can ask as well."""

from __future__ import annotations

from pathlib import Path

from cuebook.errors import StoreUnavailableError

HEAD_REVISION = "0001"
"""The newest revision this program knows; a test holds it to the scripts."""


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


def describe_damage(database: Path) -> StoreUnavailableError:
    """Return the error for a file that is no library of ours."""
    return StoreUnavailableError(
        f"The file {database} is not a library, or is damaged.",
        "Nothing was changed. Restore a backup, or name another folder with --library.",
    )


def explain_failure(error: BaseException | None, database: Path) -> StoreUnavailableError:
    """Return plain words for what SQLite said."""
    said = str(error)
    place = f"the library in {database.parent}"
    if "locked" in said or "busy" in said:
        return StoreUnavailableError(
            f"Another program is writing to {place}.", "Nothing was stored; try again."
        )
    if "not a database" in said or "malformed" in said or "no such table" in said:
        return describe_damage(database)
    if "readonly" in said or "unable to open" in said:
        return StoreUnavailableError(
            f"Nothing can be written to {place}: its folder is read-only for you.",
            "Check who owns the folder, or copy it to a place where you may write.",
        )
    if "full" in said:
        return StoreUnavailableError(
            f"The disk of {place} is full.", "Nothing was stored; make room and try again."
        )
    return StoreUnavailableError(
        f"The store of {place} failed: {said}.", "Nothing was stored; try again."
    )
