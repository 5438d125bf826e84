from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from datetime import timedelta
from pathlib import Path

import pytest
from sqlmodel import Session, select
from support.libraries import (
    START,
    add_learner,
    add_measured_block,
    fill_library,
    make_library,
    stamp_at,
)

from cuebook.errors import InputError, UnknownCodeError
from cuebook.store.opening import Library
from cuebook.store.originals import drop_original_files, get_original_path, keep_original_file
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.people import read_group_lines, read_learner_lines, read_person
from cuebook.store.reading.rankings import read_revision
from cuebook.store.tables import metadata
from cuebook.store.tables.people import Hold, Learner, Staff
from cuebook.store.tables.practice import Block, Participation
from cuebook.store.tables.recordings import Original
from cuebook.store.writing import people, practice, recordings


@pytest.fixture
def library(tmp_path: Path) -> Iterator[Library]:
    with make_library(tmp_path / "library") as made:
        yield made


def test_codes_are_two_plain_words_nobody_has(library: Library) -> None:
    """The program's codes are words of its list, never the same twice, never initials."""
    with library.transaction() as tx:
        made = []
        for _ in range(40):
            code = people.make_code(tx)
            people.add_learner(tx, stamp_at(0), code)
            made.append(code)
    assert len(set(made)) == 40
    assert all(re.fullmatch(r"[a-z]{3,}-[a-z]{2,}", code) for code in made)


def test_codes_run_out_with_plain_words(library: Library, monkeypatch: pytest.MonkeyPatch) -> None:
    """When every pair of words is taken the user is asked for a code of their own."""
    monkeypatch.setattr("pathlib.Path.read_text", lambda *_given: "heron\nlamp\n")
    with (
        pytest.raises(InputError, match="All codes of two words are taken"),
        library.transaction() as tx,
    ):
        people.make_code(tx)


def test_a_learner_added_twice_under_one_key_is_there_once(library: Library) -> None:
    """Replay of an entry adds nothing and gives the same key."""
    key = "018f22e2-79b0-7cc3-98c4-dc0c0c073990"
    with library.transaction() as tx:
        for _ in range(2):
            assert people.add_learner(tx, stamp_at(0), "fox-bell", key=key) == key
    with library.transaction() as tx:
        assert sorted(tx.exec(select(Learner.code)).all()) == ["fox-bell", "heron-lamp"]


def test_backgrounds_and_needs_can_be_changed(library: Library) -> None:
    """What is set replaces what was there; nothing is there twice."""
    with library.transaction() as tx:
        key = people.get_learner(tx, "heron-lamp").id
        people.set_backgrounds(tx, stamp_at(1), key, ["music", "dance", "music"])
        people.set_access_needs(tx, stamp_at(1), key, ["low_vision", "aphasia"])
        people.set_access_needs(tx, stamp_at(2), key, ["aphasia"])
    with open_for_reading(library.folder) as connection:
        person = read_person(connection, "heron-lamp")
    assert person.backgrounds == ("dance", "music")
    assert person.access_needs == ("aphasia",)


def test_a_hold_lasts_until_somebody_clears_it_by_name_of_role(library: Library) -> None:
    """Cuebook records who cleared; it clears nobody, and the cleared hold stays in history."""
    with library.transaction() as tx:
        key = people.get_learner(tx, "heron-lamp").id
        people.add_holds(
            tx, stamp_at(1), key, ["walking", "reaching"], until="seen", by_role="doctor"
        )
        assert people.list_open_holds(tx, [key], "walking") == [("heron-lamp", "seen", "doctor")]
        assert people.clear_hold(tx, stamp_at(9), key, "walking", cleared_by="doctor") == 1
        assert people.clear_hold(tx, stamp_at(9), key, "walking", cleared_by="doctor") == 0
        assert people.list_open_holds(tx, [key], "walking") == []
    with open_for_reading(library.folder) as connection:
        assert [hold.tasks for hold in read_person(connection, "heron-lamp").holds] == [
            ("reaching",)
        ]
    with library.transaction() as tx:
        cleared = tx.exec(select(Hold).where(Hold.task == "walking")).one()
        assert (cleared.cleared_by, cleared.cleared_at) == ("doctor", stamp_at(9).occurred_at)


def test_members_come_and_go_with_dates(library: Library) -> None:
    """A group knows who was in it at a time; somebody may come back."""
    with library.transaction() as tx:
        heron = people.get_learner(tx, "heron-lamp").id
        wren = add_learner(tx, "wren-oak")
        group = people.add_group(tx, stamp_at(0), "class")
        assert people.add_group(tx, stamp_at(0), "class") == group
        for key in (heron, wren, heron):
            people.add_member(tx, group, key, START)
        assert people.end_membership(tx, group, heron, START + timedelta(days=7))
        assert not people.end_membership(tx, group, heron, START + timedelta(days=7))
    with library.transaction() as tx:
        for day, codes in (
            (1, ["heron-lamp", "wren-oak"]),
            (7, ["wren-oak"]),
            (None, ["wren-oak"]),
        ):
            at = None if day is None else START + timedelta(days=day)
            assert [member.code for member in people.list_members(tx, group, at)] == codes
        people.add_member(tx, group, heron, START + timedelta(days=14))
        assert len(people.list_members(tx, group)) == 2
    with open_for_reading(library.folder) as connection:
        (line,) = read_group_lines(connection)
    assert sorted(line.members) == ["heron-lamp", "wren-oak"]


def test_staff_is_added_once(library: Library) -> None:
    """The default person on this machine is there once, however often asked for."""
    with library.transaction() as tx:
        assert people.add_staff(tx) == people.add_staff(tx) == "local"
        assert len(tx.exec(select(Staff)).all()) == 1


def get_missing(library: Library, getter: Callable[[Session, str], object]) -> None:
    """Ask for somebody who is not there."""
    with library.transaction() as tx:
        getter(tx, "heron-lampp")


@pytest.mark.parametrize(
    "getter",
    [people.get_learner, people.get_group, practice.get_session, practice.get_block],
)
def test_somebody_unknown_is_named_with_what_to_do(
    library: Library, getter: Callable[[Session, str], object]
) -> None:
    """An unknown code or id says which, and the nearest or where to look."""
    with pytest.raises(UnknownCodeError, match="heron-lampp") as caught:
        get_missing(library, getter)
    assert caught.value.hint


def read_counter(library: Library) -> int:
    """Return how often something that evidence rests on has changed."""
    with open_for_reading(library.folder) as connection:
        return read_revision(connection, "evidence")


def test_whatever_evidence_rests_on_raises_the_counter(library: Library) -> None:
    """A stored ranking is known to be old after any write that could change it; once a write."""
    with library.transaction() as tx:
        key = people.get_learner(tx, "heron-lamp").id
        session = practice.start_session(tx, stamp_at(0), learner_id=key)
    add_measured_block_of = {"session_id": session, "learner_id": key}
    parts: list[str] = []

    def practise(tx: Session) -> None:
        block = add_measured_block(
            tx, stamp_at(1), **add_measured_block_of, phase="acquisition", values={}
        )
        parts.append(practice.add_participation(tx, stamp_at(1), block, key))

    writes: list[Callable[[Session], object]] = [
        practise,
        lambda tx: people.add_consent(tx, stamp_at(1), key, "use_for_ranking", "no"),
        lambda tx: people.set_backgrounds(tx, stamp_at(1), key, ["music"]),
        lambda tx: practice.add_happenings(tx, stamp_at(1), parts[0], key, ["near_fall"]),
        lambda tx: practice.add_typed_values(tx, stamp_at(1), parts[0], key, {"sparc": (1.0,)}),
    ]
    for write in writes:
        before = read_counter(library)
        with library.transaction() as tx:
            write(tx)
        assert read_counter(library) == before + 1


def read_all_bytes(folder: Path) -> bytes:
    """Return the bytes of every file in a folder and below."""
    return b"".join(path.read_bytes() for path in folder.rglob("*") if path.is_file())


def test_an_erased_learner_leaves_no_trace_in_any_file(tmp_path: Path) -> None:
    """Code, name, words, key and recordings are gone from every byte of the library's folder."""
    with fill_library(tmp_path) as library:
        content = b"time,x\n0,0.25\n"
        kept = keep_original_file(library.originals, content)
        with library.transaction() as tx:
            key = people.get_learner(tx, "heron-lamp").id
            row = tx.exec(select(Original)).one()
            row.sha256 = kept.sha256
        traces = (b"heron-lamp", b"Somebody Invented", b"fell in May", key.encode(), content)
        (tmp_path / "before-upgrade-from-0000.sqlite3").write_bytes(b"heron-lamp")
        before = read_all_bytes(tmp_path)
        assert all(trace in before for trace in traces)
        with library.transaction() as tx:
            unused = people.erase_learner(tx, key)
        drop_original_files(library.originals, unused)
        library.scrub()
        after = read_all_bytes(tmp_path)
    assert unused == [kept.sha256]
    assert [trace for trace in traces if trace in after] == []


def test_erasing_leaves_the_others_as_they_were(tmp_path: Path) -> None:
    """The group's session keeps what belongs to its other members; empty blocks go."""
    with fill_library(tmp_path) as library:
        with library.transaction() as tx:
            unused = people.erase_learner(tx, people.get_learner(tx, "heron-lamp").id)
            assert unused == ["ab" * 32]
        with library.transaction() as tx:
            assert tx.exec(select(Learner.code)).all() == ["copper-gate"]
            assert len(tx.exec(select(Participation)).all()) == 1
            assert len(tx.exec(select(Block)).all()) == 1
            for name in ("ranking_cache", "draft", "correction", "measurement", "original"):
                rows = tx.connection().execute(metadata.tables[name].select()).all()
                assert rows == [], name
            broken = tx.connection().exec_driver_sql("PRAGMA foreign_key_check").all()
            assert broken == []
    with open_for_reading(tmp_path) as connection:
        assert [line.code for line in read_learner_lines(connection)] == ["copper-gate"]


def test_an_original_somebody_else_uses_stays(library: Library) -> None:
    """A recording shared by two learners is deleted with the last of them."""
    keys = []
    with library.transaction() as tx:
        original = recordings.keep_original(tx, stamp_at(0), "cd" * 32, 5)
        for key in (people.get_learner(tx, "heron-lamp").id, add_learner(tx, "wren-oak")):
            session = practice.start_session(tx, stamp_at(0), learner_id=key)
            block = practice.add_block(
                tx, stamp_at(0), session, practice.NewBlock("baseline", "reaching")
            )
            part = practice.add_participation(tx, stamp_at(0), block, key)
            recordings.add_recording(
                tx,
                stamp_at(0),
                original_id=original,
                learner_id=key,
                block_id=block,
                trial_id=practice.add_trial(tx, stamp_at(0), part, key),
                rule={},
            )
            keys.append(key)
    with library.transaction() as tx:
        assert people.erase_learner(tx, keys[0]) == []
    with library.transaction() as tx:
        assert people.erase_learner(tx, keys[1]) == ["cd" * 32]
    assert not get_original_path(library.originals, "cd" * 32).exists()
