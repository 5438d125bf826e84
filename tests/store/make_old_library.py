"""Make the kept database of the present schema: ``python tests/store/make_old_library.py``.

Run once, when a revision is new; the file is then never made again, because its worth is that it
was written by the program of its time.
"""

from __future__ import annotations

import sqlite3
import sys
import tempfile
from contextlib import closing
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parent.parent))

from support.libraries import fill_library

from cuebook.store.places import DATABASE_NAME
from cuebook.store.schema import HEAD_REVISION

KEPT = Path(__file__).parent / "data"


def make(path: Path) -> None:
    """Write a small library with a row in every table into one file."""
    with tempfile.TemporaryDirectory() as folder:
        fill_library(Path(folder)).close()
        with closing(sqlite3.connect(Path(folder) / DATABASE_NAME)) as source:
            source.execute("VACUUM INTO ?", (str(path),))
    with closing(sqlite3.connect(path, isolation_level=None)) as kept:
        kept.execute("PRAGMA journal_mode = DELETE")
        kept.execute("PRAGMA page_size = 512")  # a hundred nearly empty tables and indexes
        kept.execute("VACUUM")


if __name__ == "__main__":
    target = KEPT / f"library-{HEAD_REVISION}.sqlite3"
    if target.exists():
        sys.exit(f"{target} is kept already; it must stay as it was written.")
    KEPT.mkdir(exist_ok=True)
    make(target)
