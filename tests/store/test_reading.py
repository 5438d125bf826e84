from __future__ import annotations

import ast
import sqlite3
import subprocess
import sys
from collections.abc import Callable, Iterator
from contextlib import closing
from pathlib import Path

import pytest
from support.libraries import RULE, SPOON, START, add_learner, fill_library, make_library, stamp_at

import cuebook.store.reading
from cuebook.errors import StoreUnavailableError, UnknownCodeError
from cuebook.library.person import Hold, SafetyNote
from cuebook.practice.log import PracticeLog
from cuebook.store.opening import Library
from cuebook.store.places import DATABASE_NAME
from cuebook.store.question_keys import make_question_key
from cuebook.store.reading import cues, meetings, people, practice, rankings
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.tables import metadata

Reader = Callable[[sqlite3.Connection], object]


def read_key(connection: sqlite3.Connection) -> str:
    """Return the key of heron-lamp."""
    return people.require_learner_key(connection, "heron-lamp")


QUESTION = make_question_key({"metric": "sparc", "task": "reaching"})
READERS: dict[str, Reader] = {
    "read_cues": cues.read_cues,
    "read_rankable": people.read_rankable,
    "read_learner_lines": people.read_learner_lines,
    "read_group_lines": people.read_group_lines,
    "require_learner_key": read_key,
    "require_group_key": lambda c: people.require_group_key(c, "lane-class"),
    "read_person": lambda c: people.read_person(c, "heron-lamp"),
    "read_group": lambda c: people.read_group(c, "lane-class"),
    "read_consents": lambda c: people.read_consents(c, "heron-lamp"),
    "read_meetings": lambda c: meetings.read_meetings(c, learner_key=read_key(c)),
    "read_past_blocks": lambda c: meetings.read_past_blocks(c, learner_key=read_key(c)),
    "read_past_values": lambda c: meetings.read_past_values(c, read_key(c)),
    "read_practice_log": lambda c: practice.read_practice_log(c, ("sparc", "ldlj")),
    "read_revision": lambda c: rankings.read_revision(c, "cues"),
    "read_ranking": lambda c: rankings.read_ranking(c, QUESTION),
    "read_measured_questions": rankings.read_measured_questions,
}


@pytest.fixture(scope="module")
def filled(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return the folder of a library with a row in every table."""
    folder = tmp_path_factory.mktemp("filled")
    fill_library(folder).close()
    return folder


@pytest.fixture
def connection(filled: Path) -> Iterator[sqlite3.Connection]:
    with open_for_reading(filled) as made:
        yield made


def test_every_reader_is_held_to_the_schema() -> None:
    """The contract below covers every public function of the reading path."""
    folder = Path(next(iter(cuebook.store.reading.__path__)))
    public = {
        node.name
        for path in folder.glob("*.py")
        for node in ast.parse(path.read_text("utf-8")).body
        if isinstance(node, ast.FunctionDef) and not node.name.startswith("_")
    }
    assert public - {"open_for_reading"} <= set(READERS)


@pytest.mark.parametrize("name", READERS)
def test_hand_written_sql_names_only_what_the_tables_have(filled: Path, name: str) -> None:
    """Every table and column a reader touches is in the metadata, and it only ever reads."""
    touched: set[tuple[str, str]] = set()
    allowed = {sqlite3.SQLITE_READ, sqlite3.SQLITE_SELECT, sqlite3.SQLITE_FUNCTION}
    forbidden: set[int] = set()

    def watch(action: int, table: str | None, column: str | None, *_rest: str | None) -> int:
        if action == sqlite3.SQLITE_READ and table:
            touched.add((table, column or ""))
        elif action not in allowed:
            forbidden.add(action)
        return sqlite3.SQLITE_OK

    with open_for_reading(filled) as connection:
        connection.set_authorizer(watch)
        READERS[name](connection)
        connection.set_authorizer(None)
    assert touched
    for table, column in touched:
        assert column in {"", "ROWID", *metadata.tables[table].columns.keys()}, (table, column)
    assert forbidden == set()


NEEDS_SOMEBODY = {
    *("require_learner_key", "require_group_key", "read_person", "read_group", "read_consents"),
    *("read_meetings", "read_past_blocks", "read_past_values"),
}


@pytest.fixture
def emptied(tmp_path: Path) -> Path:
    """Return the folder of a library that has its tables and no row in any."""
    with make_library(tmp_path) as library, library.transaction() as tx:
        for table in reversed(metadata.sorted_tables):
            tx.connection().execute(table.delete())
    return tmp_path


@pytest.mark.parametrize("name", sorted(set(READERS) - NEEDS_SOMEBODY))
def test_an_empty_library_reads_as_nothing(emptied: Path, name: str) -> None:
    """On a library with nobody in it each reader gives nothing."""
    with open_for_reading(emptied) as connection:
        found = READERS[name](connection)
    if isinstance(found, PracticeLog):
        found = (*found.sessions, *found.learners)
    assert not found


@pytest.mark.parametrize("name", sorted(NEEDS_SOMEBODY))
def test_an_empty_library_knows_nobody(emptied: Path, name: str) -> None:
    """Asked for somebody, an empty library says that there is nobody yet."""
    with open_for_reading(emptied) as connection:
        with pytest.raises(UnknownCodeError) as caught:
            READERS[name](connection)
        assert "There is no" in caught.value.hint


def test_the_reading_path_cannot_write(connection: sqlite3.Connection) -> None:
    """The database itself refuses a write through the reading path."""
    with pytest.raises(sqlite3.OperationalError, match="readonly"):
        connection.execute("DELETE FROM learner")


def test_a_failing_query_gives_plain_words(filled: Path) -> None:
    """What SQLite says while reading reaches the user as a store error, never as its own."""

    def read_nonsense() -> None:
        with open_for_reading(filled) as connection:
            connection.execute("SELECT * FROM no_such_table")

    with pytest.raises(StoreUnavailableError):
        read_nonsense()


def test_a_reader_sees_one_moment_of_the_library(tmp_path: Path) -> None:
    """What another program writes while somebody reads is seen by the next reader only."""
    with make_library(tmp_path) as library:
        with open_for_reading(tmp_path) as connection:
            before = people.read_learner_lines(connection)
            with library.transaction() as tx:
                add_learner(tx, "copper-gate")
            assert people.read_learner_lines(connection) == before
        with open_for_reading(tmp_path) as connection:
            assert len(people.read_learner_lines(connection)) == len(before) + 1


def test_the_reading_path_is_light() -> None:
    """A fresh interpreter that loads all of it has loaded no table classes and no numbers."""
    script = (
        "import importlib, pkgutil, sys, cuebook.store.reading as package\n"
        "for module in pkgutil.iter_modules(package.__path__, package.__name__ + '.'):\n"
        "    importlib.import_module(module.name)\n"
        "heavy = {'sqlmodel', 'sqlalchemy', 'alembic', 'pandas', 'scipy', 'numpy', 'pydantic'}\n"
        "print(sorted(heavy & set(sys.modules)))\n"
    )
    shown = subprocess.run(
        [sys.executable, "-P", "-c", script], check=True, capture_output=True, text=True
    )
    assert shown.stdout.strip() == "[]"


def test_an_older_library_is_brought_up_to_date_before_it_is_read(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """After an update of the program, the first command may be one that only reads."""
    opened: list[Path] = []
    make_library(tmp_path).close()
    with closing(sqlite3.connect(tmp_path / DATABASE_NAME)) as plain, plain:
        plain.execute("UPDATE alembic_version SET version_num = '0000'")

    def upgrade(folder: Path) -> Library:
        opened.append(folder)
        with closing(sqlite3.connect(folder / DATABASE_NAME)) as plain, plain:
            plain.execute("UPDATE alembic_version SET version_num = '0001'")
        return Library(folder, make_library(tmp_path / "other").engine)

    monkeypatch.setattr("cuebook.store.opening.open_library", upgrade)
    with open_for_reading(tmp_path) as connection:
        assert len(people.read_learner_lines(connection)) == 1
    assert opened == [tmp_path]


def test_cues_come_back_as_they_were_kept(connection: sqlite3.Connection) -> None:
    """Every field of a cue survives: wordings, claims, tags, phrases, bounds, in their order."""
    assert cues.read_cues(connection) == (SPOON, RULE)


def test_a_person_is_read_with_what_must_be_heeded(connection: sqlite3.Connection) -> None:
    """Backgrounds, needs, notes, holds and disliked cues are what the look-up filters by."""
    person = people.read_person(connection, "heron-lamp")
    assert (person.age_band, person.experience) == ("65-74", "novice")
    assert person.backgrounds == ("cooking",)
    assert person.access_needs == ("low_vision",)
    assert person.notes == (SafetyNote("fall_history", "fell in May", tasks=("walking",)),)
    assert person.holds == (Hold(("rowing_stroke",), "seen", "physiotherapist"),)
    assert person.declined == {"slow-and-even"}
    assert person.paused == frozenset()


def test_lists_name_groups_members_and_who_may_be_ranked(connection: sqlite3.Connection) -> None:
    """Lists carry what a pick list shows."""
    lines = {line.code: line for line in people.read_learner_lines(connection)}
    assert lines["heron-lamp"].may_be_ranked
    assert lines["heron-lamp"].held_tasks == ("rowing_stroke",)
    assert lines["heron-lamp"].n_sessions == 3
    assert not lines["copper-gate"].may_be_ranked
    (group,) = people.read_group_lines(connection)
    assert (group.code, group.members) == ("lane-class", ("heron-lamp", "copper-gate"))
    assert [p.code for p in people.read_group(connection, "lane-class").members] == [
        "heron-lamp",
        "copper-gate",
    ]


def test_meetings_are_listed_newest_first(connection: sqlite3.Connection) -> None:
    """A learner's meetings include those of the group; whether one is open is said."""
    lines = meetings.read_meetings(connection, learner_key=read_key(connection))
    assert [(line.who, line.n_blocks, line.is_open) for line in lines] == [
        ("lane-class", 1, True),
        ("heron-lamp", 1, True),
        ("heron-lamp", 3, False),
    ]
    assert lines[2].started_at == stamp_at(5).occurred_at
    group = people.require_group_key(connection, "lane-class")
    assert meetings.read_meetings(connection, group_key=group) == lines[:1]
    assert meetings.read_meetings(connection) == lines


def test_past_blocks_and_values_come_in_order_of_time(connection: sqlite3.Connection) -> None:
    """What was said and measured is read back as it happened, corrections included."""
    key = read_key(connection)
    blocks = meetings.read_past_blocks(connection, learner_key=key)
    assert [(block.phase, block.cue) for block in blocks] == [
        ("baseline", None),
        ("acquisition", "full-spoon"),
        ("immediate_post", None),
        ("baseline", None),
        ("acquisition", "slow-and-even"),
    ]
    practised = blocks[1]
    assert practised.words == "Carry a full spoon to the bowl."
    assert (practised.times_said, practised.events) == (2, ("tired",))
    assert blocks == tuple(
        block
        for line in reversed(meetings.read_meetings(connection))
        for block in meetings.read_past_blocks(connection, session_id=line.session_id)
        if block.learner == "heron-lamp"
    )
    values = meetings.read_past_values(connection, key)
    assert [value.value for value in values] == [-1.81, -1.7, -1.5, -1.6, -1.55]


def test_the_last_ranking_is_read_with_its_evidence_revision(
    connection: sqlite3.Connection,
) -> None:
    """A stored ranking says of which evidence it is the ranking."""
    stored = rankings.read_ranking(connection, QUESTION)
    assert stored is not None
    assert stored.document == {"cues": [], "n_uses": 1}
    assert (stored.evidence_revision, stored.n_uses, stored.engine) == (3, 1, "1")
    assert stored.made_at == stamp_at(50).occurred_at
    assert rankings.read_ranking(connection, make_question_key({"metric": "ldlj"})) is None


def test_measured_questions_count_present_values(connection: sqlite3.Connection) -> None:
    """What can be asked is what has values, with how many of how many learners."""
    (question,) = rankings.read_measured_questions(connection)
    assert (question.metric, question.task) == ("sparc", "reaching")
    assert (question.n_values, question.n_learners) == (5, 1)


def test_unknown_codes_name_the_nearest(connection: sqlite3.Connection) -> None:
    """A slip of the keyboard is met with the nearest known code."""
    with pytest.raises(UnknownCodeError, match="heron-lampp") as caught:
        people.read_person(connection, "heron-lampp")
    assert "heron-lamp" in caught.value.hint
    with pytest.raises(UnknownCodeError, match="Unknown group"):
        people.read_group(connection, "lane")


def test_consents_give_the_newest_answer(tmp_path: Path) -> None:
    """The answer given last counts, at once; an older one that is entered late does not."""
    from cuebook.store.writing import people as writing  # noqa: PLC0415 - the name is taken here

    with make_library(tmp_path) as library, library.transaction() as tx:
        key = writing.get_learner(tx, "heron-lamp").id
        writing.add_consent(tx, stamp_at(60), key, "use_for_ranking", "no", how="written")
        writing.add_consent(tx, stamp_at(30), key, "use_for_ranking", "yes")
        writing.add_consent(
            tx, stamp_at(90), key, "take_part", "yes", given_by="parent_guardian", assent="no"
        )
    with open_for_reading(tmp_path) as connection:
        answers = {line.item: line for line in people.read_consents(connection, "heron-lamp")}
        assert people.read_rankable(connection) == frozenset()
    assert (answers["use_for_ranking"].answer, answers["use_for_ranking"].how) == ("no", "written")
    assert answers["take_part"].given_by == "parent_guardian"
    assert answers["use_for_ranking"].given_at > START
