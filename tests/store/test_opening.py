from __future__ import annotations

import os
import sqlite3
import stat
import subprocess
import sys
import tempfile
from collections.abc import Iterator
from contextlib import closing
from pathlib import Path

import pytest
from platformdirs import user_data_path
from support.libraries import add_learner, make_library

from cuebook.errors import InputError, StoreUnavailableError
from cuebook.store import opening
from cuebook.store.opening import Library, open_library
from cuebook.store.places import (
    DATABASE_NAME,
    get_default_folder,
    has_library,
    resolve_location,
)
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.people import read_learner_lines

NOBODY = 65534


def read_codes(folder: Path) -> list[str]:
    """Return the codes of all learners by the reading path."""
    with open_for_reading(folder) as connection:
        return [line.code for line in read_learner_lines(connection)]


def test_a_new_library_is_readable_by_its_owner_only(tmp_path: Path) -> None:
    """Folder, originals, database and its companions keep everybody else out."""
    folder = tmp_path / "new" / "library"
    with make_library(folder) as library:
        modes = {
            path.name: stat.S_IMODE(path.stat().st_mode)
            for path in (folder, library.originals, *folder.glob("cuebook*"))
        }
    assert modes.pop("library") == 0o700
    assert modes.pop("originals") == 0o700
    assert set(modes) == {DATABASE_NAME, f"{DATABASE_NAME}-wal", f"{DATABASE_NAME}-shm"}
    assert set(modes.values()) == {0o600}


def test_a_folder_that_was_there_keeps_its_permissions(tmp_path: Path) -> None:
    """Cuebook tightens only what it makes itself."""
    tmp_path.chmod(0o750)
    make_library(tmp_path).close()
    assert stat.S_IMODE(tmp_path.stat().st_mode) == 0o750
    assert stat.S_IMODE((tmp_path / DATABASE_NAME).stat().st_mode) == 0o600


def test_what_was_stored_is_there_when_opened_again(tmp_path: Path) -> None:
    """A library survives being closed; opening it again changes nothing."""
    make_library(tmp_path).close()
    with open_library(tmp_path, create=False) as library, library.transaction() as tx:
        add_learner(tx, "copper-gate")
    assert read_codes(tmp_path) == ["copper-gate", "heron-lamp"]


def test_the_location_is_given_or_named_by_the_variable_or_the_default(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A given path wins over CUEBOOK_LIBRARY, which wins over the user's data folder."""
    monkeypatch.setenv("CUEBOOK_LIBRARY", str(tmp_path / "named"))
    assert resolve_location(tmp_path / "given") == tmp_path / "given"
    assert resolve_location(None) == tmp_path / "named"
    monkeypatch.setenv("CUEBOOK_LIBRARY", "")
    monkeypatch.setenv("XDG_DATA_HOME", str(tmp_path / "data"))
    assert resolve_location(None) == get_default_folder()
    assert get_default_folder().parent == user_data_path("cuebook", appauthor=False)
    monkeypatch.setenv("HOME", str(tmp_path))
    assert resolve_location("~/mine") == tmp_path / "mine"


@pytest.mark.parametrize("opener", [open_library, open_for_reading])
def test_a_server_is_not_available_yet(opener: object) -> None:
    """The address of a server says so in plain words instead of making an odd folder."""
    with (
        pytest.raises(StoreUnavailableError, match="server is not available"),
        opener("postgresql://clinic/cuebook"),  # type: ignore[operator]  # both are callable
    ):
        pass


def test_opening_without_making_needs_a_library(tmp_path: Path) -> None:
    """A mistyped path makes no empty library."""
    missing = tmp_path / "missing"
    with pytest.raises(StoreUnavailableError, match="no library in"):
        open_library(missing, create=False)
    with pytest.raises(StoreUnavailableError, match="no library in"):
        read_codes(missing)
    assert not missing.exists()
    assert not has_library(missing)


def test_a_file_cut_off_at_its_start_counts_as_no_library(tmp_path: Path) -> None:
    """A database file without a byte is no library to read, and becomes one on writing."""
    (tmp_path / DATABASE_NAME).touch()
    assert not has_library(tmp_path)
    with pytest.raises(StoreUnavailableError, match="no library in"):
        read_codes(tmp_path)
    make_library(tmp_path).close()
    assert read_codes(tmp_path) == ["heron-lamp"]


@pytest.mark.parametrize("content", [b"dear diary, " * 500, b"SQLite format 3\x00" + b"x" * 5000])
def test_a_file_that_is_no_database_is_left_alone(tmp_path: Path, content: bytes) -> None:
    """Something else under the name of the database is refused and not touched."""
    path = tmp_path / DATABASE_NAME
    path.write_bytes(content)
    with pytest.raises(StoreUnavailableError, match="is not a library, or is damaged"):
        open_library(tmp_path)
    with pytest.raises(StoreUnavailableError, match="is not a library, or is damaged"):
        read_codes(tmp_path)
    assert path.read_bytes() == content


def test_a_database_of_another_program_is_left_alone(tmp_path: Path) -> None:
    """A database without our revision gets none of our tables."""
    with closing(sqlite3.connect(tmp_path / DATABASE_NAME)) as plain:
        plain.execute("CREATE TABLE invoice (id INTEGER)")
    with pytest.raises(StoreUnavailableError, match="is not a library, or is damaged"):
        open_library(tmp_path)
    with closing(sqlite3.connect(tmp_path / DATABASE_NAME)) as plain:
        assert plain.execute("SELECT name FROM sqlite_schema").fetchall() == [("invoice",)]


def test_a_newer_library_asks_for_a_newer_program(tmp_path: Path) -> None:
    """A library of a later schema is refused by both paths, with the remedy, unchanged."""
    make_library(tmp_path).close()
    with closing(sqlite3.connect(tmp_path / DATABASE_NAME)) as plain, plain:
        plain.execute("UPDATE alembic_version SET version_num = '0999'")
    for attempt in (open_library, read_codes):
        with pytest.raises(StoreUnavailableError, match="newer Cuebook") as caught:
            attempt(tmp_path)
        assert "Update the program" in caught.value.hint
    with closing(sqlite3.connect(tmp_path / DATABASE_NAME)) as plain:
        assert plain.execute("SELECT version_num FROM alembic_version").fetchone() == ("0999",)


@pytest.fixture
def held(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[Library]:
    """Give a library on which another connection holds the write lock."""
    monkeypatch.setattr(opening, "BUSY_TIMEOUT_MS", 50)
    with (
        make_library(tmp_path) as library,
        closing(sqlite3.connect(library.database, isolation_level=None)) as other,
    ):
        other.execute("BEGIN IMMEDIATE")
        yield library
        other.execute("ROLLBACK")


def add_one(library: Library) -> None:
    """Add a learner in a transaction of its own."""
    with library.transaction() as tx:
        add_learner(tx, "copper-gate")


def test_a_library_that_stays_locked_says_so(held: Library) -> None:
    """A lock that is not let go is named in plain words; meanwhile reading goes on."""
    with pytest.raises(StoreUnavailableError, match="Another program is writing"):
        add_one(held)
    assert read_codes(held.folder) == ["heron-lamp"]


def test_a_taken_code_is_refused(tmp_path: Path) -> None:
    """A learner's code is theirs alone."""
    with make_library(tmp_path) as library:
        add_one(library)
        with pytest.raises(InputError, match="is taken"):
            add_one(library)


def test_a_folder_that_cannot_be_made_is_named(tmp_path: Path) -> None:
    """A path through a file says that no library can be there."""
    (tmp_path / "file").write_text("x", "utf-8")
    with pytest.raises(StoreUnavailableError, match="can be no library"):
        open_library(tmp_path / "file")
    with pytest.raises(StoreUnavailableError):
        open_library(tmp_path / "file" / "library")


READ_ONLY_SCRIPT = """
import os, sys
from cuebook.errors import StoreUnavailableError
from cuebook.store.opening import open_library
from cuebook.store.reading.connection import open_for_reading
def read(folder):
    with open_for_reading(folder) as connection:
        return connection.execute("SELECT code FROM learner").fetchall()
if os.getuid() == 0:
    os.setgid({nobody})
    os.setuid({nobody})
for opener in (open_library, read):
    try:
        opener(sys.argv[1])
    except StoreUnavailableError as error:
        print(str(error))
"""


def test_a_read_only_folder_is_named_in_plain_words() -> None:
    """A user who may not write there is told so by both paths; no traceback."""
    with tempfile.TemporaryDirectory() as made:
        folder = Path(made)
        make_library(folder).close()
        for path, mode in ((folder / DATABASE_NAME, 0o444), (folder, 0o555)):
            path.chmod(mode)
        shown = subprocess.run(
            [sys.executable, "-P", "-c", READ_ONLY_SCRIPT.format(nobody=NOBODY), made],
            check=True,
            capture_output=True,
            text=True,
            env={**os.environ, "HOME": made},
        )
        folder.chmod(0o755)
    lines = shown.stdout.splitlines()
    assert len(lines) == 2
    assert "cannot be written" in lines[0]
    assert "read-only" in lines[1]
