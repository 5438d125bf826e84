"""Where a library lies."""

from __future__ import annotations

import os
from pathlib import Path

from cuebook.errors import StoreUnavailableError

DATABASE_NAME = "cuebook.sqlite3"
LOCATION_VARIABLE = "CUEBOOK_LIBRARY"


def get_default_folder() -> Path:
    """Return the library folder in the user's own data folder."""
    from platformdirs import user_data_path  # noqa: PLC0415

    return user_data_path("cuebook", appauthor=False) / "library"


def resolve_location(location: str | Path | None) -> Path:
    """Return the folder of a library: as given, from the variable, or the default.

    Raises
    ------
    StoreUnavailableError : the address of a server, which this version cannot open.
    """
    given = location if location is not None else os.environ.get(LOCATION_VARIABLE)
    if not given:
        return get_default_folder()
    if "://" in str(given):
        raise StoreUnavailableError(
            "A library on a server is not available in this version.",
            "Give the path of a folder.",
        )
    return Path(given).expanduser()


def has_library(location: str | Path | None) -> bool:
    """Return whether there is a library at a location."""
    return is_database(resolve_location(location) / DATABASE_NAME)


def is_database(path: Path) -> bool:
    """Return whether a file is there and not empty, as one cut off at its very start would be."""
    return path.is_file() and path.stat().st_size > 0
