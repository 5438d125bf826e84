from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from pathlib import Path

import pytest
from sqlalchemy import CheckConstraint
from sqlmodel import select
from support.libraries import fill_library, make_library, stamp_at, write_rows

from cuebook.errors import InputError
from cuebook.store.keys import make_key
from cuebook.store.opening import Library
from cuebook.store.tables import metadata
from cuebook.store.tables.base import Stamped
from cuebook.store.tables.cues import Cue
from cuebook.store.tables.practice import Session
from cuebook.store.tables.upkeep import LibraryRevision

WITHOUT_A_STAMP = {
    *("claim", "cue_tag"),  # parts of a cue, entered with it
    *("slot", "trial_recording", "measurement"),  # parts of a schedule, of a trial
    *("recipe", "draft", "library_revision", "ranking_cache"),  # the program's
}
NOBODYS = {
    *("staff", "learner", "learner_group", "protocol", "block", "original", "recipe"),
    *("cue", "wording", "claim", "cue_tag", "problem_phrase", "library_revision", "ranking_cache"),
}
"""Tables whose rows belong to no single learner (a block may be shared by a group)."""


@pytest.fixture
def library(tmp_path: Path) -> Iterator[Library]:
    with make_library(tmp_path / "library") as made:
        yield made


def test_every_table_is_strict(library: Library) -> None:
    """SQLite refuses a wrong type in every table, as the other engine does."""
    with sqlite3.connect(library.database) as plain:
        rows = plain.execute("PRAGMA table_list").fetchall()
    plain.close()
    strict = {name for _, name, _, _, _, is_strict in rows if is_strict}
    assert set(metadata.tables) <= strict


def test_every_row_a_user_enters_says_who_when_and_which_revision() -> None:
    """Who entered it, when, when it happened and where on earth stand on every entered row."""
    stamp = set(Stamped.model_fields)
    assert stamp == {"entered_by", "entered_at", "occurred_at", "occurred_zone", "revision"}
    without = {
        name for name, table in metadata.tables.items() if not stamp <= set(table.columns.keys())
    }
    assert without <= WITHOUT_A_STAMP


def test_every_row_of_a_learner_names_the_learner() -> None:
    """Rows bound to a learner carry the learner's key, and go when the learner goes."""
    for name, table in metadata.tables.items():
        if name in NOBODYS:
            continue
        (key,) = table.columns["learner_id"].foreign_keys
        assert (key.target_fullname, key.ondelete) == ("learner.id", "CASCADE"), name


def test_every_constraint_has_a_name() -> None:
    """A later revision can change any constraint, because each can be named."""
    for table in metadata.tables.values():
        for constraint in table.constraints:
            assert constraint.name, (table.name, constraint)


def test_wrong_types_are_refused_by_the_database_itself(library: Library) -> None:
    """Even plain SQL cannot put words or bytes where a number belongs."""
    with sqlite3.connect(library.database) as plain:
        for wrong in ("many", b"\x05\x00"):
            with pytest.raises(sqlite3.IntegrityError, match="INTEGER"):
                plain.execute("UPDATE library_revision SET revision = ?", (wrong,))
        with pytest.raises(sqlite3.IntegrityError, match="REAL"):
            plain.execute("UPDATE cue SET rate_low = 'fast'")
        with pytest.raises(sqlite3.IntegrityError, match="TEXT"):
            plain.execute("UPDATE cue SET code = x'00'")
    plain.close()


LISTED = [
    (table.name, str(constraint.name))
    for table in metadata.tables.values()
    for constraint in table.constraints
    if isinstance(constraint, CheckConstraint) and " IN ('" in str(constraint.sqltext)
]


@pytest.fixture(scope="module")
def filled(tmp_path_factory: pytest.TempPathFactory) -> Iterator[sqlite3.Connection]:
    """Give a plain connection to a library with a row in every table."""
    with fill_library(tmp_path_factory.mktemp("filled")) as library:
        connection = sqlite3.connect(library.database)
        yield connection
        connection.close()


def test_the_filled_library_has_a_row_in_every_table(filled: sqlite3.Connection) -> None:
    """What the other tests say of every table, they say of rows that are there."""
    for table in metadata.tables:
        assert filled.execute(f'SELECT COUNT(*) FROM "{table}"').fetchone()[0] > 0, table  # noqa: S608


@pytest.mark.parametrize(("table", "constraint"), LISTED)
def test_a_word_outside_its_list_is_refused_at_write(
    filled: sqlite3.Connection, table: str, constraint: str
) -> None:
    """No row can be poisoned: every listed column refuses a word that is not in its list."""
    column = constraint.removeprefix(f"ck_{table}_")
    with pytest.raises(sqlite3.IntegrityError, match=constraint):
        filled.execute(f"UPDATE \"{table}\" SET {column} = 'nonsense'")  # noqa: S608
    filled.rollback()


def make_cue(code: str, kind: str) -> Cue:
    """Return a cue's row."""
    return Cue(id=make_key(), code=code, kind=kind, focus="none", **stamp_at(0).as_columns())


def test_a_bad_kind_never_reaches_the_table(library: Library) -> None:
    """A cue of an unknown kind is refused, and takes its whole transaction with it."""
    with pytest.raises(InputError, match="ck_cue_kind"):
        write_rows(library, make_cue("good", "analogy"), make_cue("bad", "nonsense"))
    with library.transaction() as tx:
        assert set(tx.exec(select(Cue.code)).all()) == {"full-spoon", "slow-and-even"}


def test_a_row_without_its_owner_is_refused(library: Library) -> None:
    """Foreign keys hold on every connection."""
    orphan = Session(id=make_key(), learner_id=make_key(), **stamp_at(0).as_columns())
    with pytest.raises(InputError, match="FOREIGN KEY"):
        write_rows(library, orphan)


def test_a_session_belongs_to_one_learner_or_one_group(library: Library) -> None:
    """A session of nobody is refused."""
    nobodys = Session(id=make_key(), **stamp_at(0).as_columns())
    with pytest.raises(InputError, match="ck_session_whose"):
        write_rows(library, nobodys)


def test_the_engine_keeps_commits_through_a_power_cut(library: Library) -> None:
    """Write-ahead log, full synchronous, foreign keys, patience with other writers."""
    library.close()  # the next connection is one that has not been through the making of tables
    with library.transaction() as tx:
        found = {
            name: tx.connection().exec_driver_sql(f"PRAGMA {name}").scalar()
            for name in ("journal_mode", "synchronous", "foreign_keys", "busy_timeout")
        }
    assert found["journal_mode"] == "wal"
    assert found["synchronous"] == 2  # FULL
    assert found["foreign_keys"] == 1
    assert int(found["busy_timeout"] or 0) >= 5000


def fail_after_writing(library: Library) -> None:
    """Write, then fail before the transaction ends."""
    with library.transaction() as tx:
        tx.get_one(LibraryRevision, "evidence").revision = 77
        tx.flush()
        raise RuntimeError


def test_an_error_in_a_transaction_leaves_nothing(library: Library) -> None:
    """What went before an error in the same use-case is not stored either."""
    with pytest.raises(RuntimeError):
        fail_after_writing(library)
    with library.transaction() as tx:
        assert tx.get_one(LibraryRevision, "evidence").revision != 77
