from __future__ import annotations

import hashlib
import math
import sqlite3
from collections.abc import Iterator
from contextlib import closing
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from sqlmodel import Session, select
from support.libraries import add_measured_block, make_library, stamp_at

from cuebook.errors import InputError, StoreUnavailableError
from cuebook.metrics.values import Recipe as Choices
from cuebook.store.opening import Library
from cuebook.store.originals import drop_original_files, get_original_path, keep_original_file
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.meetings import read_past_values
from cuebook.store.reading.people import require_learner_key
from cuebook.store.reading.practice import read_practice_log
from cuebook.store.reading.rankings import read_measured_questions
from cuebook.store.tables.practice import Trial
from cuebook.store.tables.recordings import Measurement, Original, Recipe, Recording
from cuebook.store.writing import people, practice, recordings
from cuebook.store.writing.measurements import (
    Measured,
    add_measurements,
    correct_typed_value,
    keep_recipe,
)

SHA = hashlib.sha256(b"a recording").hexdigest()
RULE = {"columns": {"x": "hand_x"}, "units": {"x": "m"}}


@pytest.fixture
def library(tmp_path: Path) -> Iterator[Library]:
    with make_library(tmp_path / "library") as made:
        yield made


@dataclass(frozen=True)
class Place:
    """Where a recording belongs."""

    learner_id: str
    block_id: str
    trial_id: str


def make_place(tx: Session) -> Place:
    """Make a baseline of heron-lamp with one attempt."""
    learner = people.get_learner(tx, "heron-lamp").id
    session = practice.start_session(tx, stamp_at(0), learner_id=learner)
    block = practice.add_block(tx, stamp_at(1), session, practice.NewBlock("baseline", "reaching"))
    part = practice.add_participation(tx, stamp_at(1), block, learner)
    return Place(learner, block, practice.add_trial(tx, stamp_at(1), part, learner))


def add_reading(
    tx: Session, place: Place, rule: dict[str, Any], value: float, replaces: str | None = None
) -> str:
    """Add a reading of the recording with one value; return its key."""
    key = recordings.add_recording(
        tx,
        stamp_at(2),
        original_id=recordings.keep_original(tx, stamp_at(2), SHA, 11),
        learner_id=place.learner_id,
        block_id=place.block_id,
        trial_id=place.trial_id,
        rule=rule,
        replaces=replaces,
    )
    measured = Measured("sparc", value, {"definition": 1})
    add_measurements(tx, place.trial_id, place.learner_id, [measured], recording_id=key)
    return key


def read_values(library: Library) -> list[float]:
    """Return the present values of heron-lamp."""
    with open_for_reading(library.folder) as connection:
        key = require_learner_key(connection, "heron-lamp")
        return [value.value for value in read_past_values(connection, key)]


def test_an_original_is_kept_once_under_its_hash(tmp_path: Path) -> None:
    """Bytes are found under their SHA-256, unchanged, for the owner only; twice adds nothing."""
    content = b"time,x\n0,0\n"
    kept = keep_original_file(tmp_path, content)
    assert kept.sha256 == hashlib.sha256(content).hexdigest()
    assert kept.path == tmp_path / "objects" / kept.sha256[:2] / kept.sha256
    assert kept.path.read_bytes() == content
    assert kept.path.stat().st_mode & 0o077 == 0
    before = kept.path.stat().st_mtime_ns
    assert keep_original_file(tmp_path, content) == kept
    assert kept.path.stat().st_mtime_ns == before
    assert [path.name for path in kept.path.parent.iterdir()] == [kept.sha256]


@given(content=st.binary(max_size=300))
@settings(max_examples=25, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_any_bytes_come_back_the_same(tmp_path: Path, content: bytes) -> None:
    """Originals are never altered, whatever is in them."""
    assert keep_original_file(tmp_path, content).path.read_bytes() == content


def test_an_original_that_cannot_be_written_leaves_nothing(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A full disk while writing is said in plain words, and no half file stays behind."""

    def fail(_descriptor: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("cuebook.store.originals.os.fsync", fail)
    with pytest.raises(StoreUnavailableError, match="No space left"):
        keep_original_file(tmp_path, b"content")
    assert [path for path in tmp_path.rglob("*") if path.is_file()] == []


def test_dropped_originals_are_gone_and_missing_ones_are_no_error(tmp_path: Path) -> None:
    """Deleting an original twice is harmless."""
    kept = keep_original_file(tmp_path, b"content")
    drop_original_files(tmp_path, [kept.sha256, "0" * 64])
    assert not get_original_path(tmp_path, kept.sha256).exists()


def test_the_same_bytes_tell_where_they_are_already(library: Library) -> None:
    """Earlier readings of the same bytes are found with learner, block, phase and rule."""
    with library.transaction() as tx:
        place = make_place(tx)
        key = add_reading(tx, place, RULE, -1.6)
        (earlier,) = recordings.find_earlier_readings(tx, SHA)
        assert recordings.find_earlier_readings(tx, "0" * 64) == []
    assert (earlier.learner, earlier.block_id) == ("heron-lamp", place.block_id)
    assert (earlier.phase, earlier.task, earlier.is_current) == ("baseline", "reaching", True)
    assert (earlier.recording_id, earlier.trial_id) == (key, place.trial_id)
    assert earlier.rule_digest == recordings.make_rule_digest(dict(reversed(RULE.items())))


def test_another_reading_counts_and_the_old_one_stays_in_history(library: Library) -> None:
    """Read anew under another rule, the same attempt has its new value; the old is kept."""
    with library.transaction() as tx:
        place = make_place(tx)
        first = add_reading(tx, place, RULE, -1.6)
        add_reading(tx, place, {**RULE, "units": {"x": "cm"}}, -1.9, replaces=first)
    assert read_values(library) == [-1.9]
    with library.transaction() as tx:
        assert len(tx.exec(select(Original)).all()) == 1
        assert len(tx.exec(select(Trial)).all()) == 1
        current = {row.id: row.is_current for row in tx.exec(select(Recording)).all()}
        assert len(current) == 2
        assert not current[first]
        assert len(tx.exec(select(Measurement)).all()) == 2
    with open_for_reading(library.folder) as connection:
        log = read_practice_log(connection, ("sparc",))
        (question,) = read_measured_questions(connection)
    (part,) = log.sessions[0].blocks[0].participations
    assert [value.value for value in part.values["sparc"]] == [-1.9]
    assert question.n_values == 1


def test_going_back_to_an_old_rule_brings_back_its_reading(library: Library) -> None:
    """The same rule as before adds no third reading and no second value."""
    with library.transaction() as tx:
        place = make_place(tx)
        first = add_reading(tx, place, RULE, -1.6)
        second = add_reading(tx, place, {**RULE, "person": 2}, -1.9, replaces=first)
        assert add_reading(tx, place, RULE, -1.6, replaces=second) == first
    assert read_values(library) == [-1.6]
    with library.transaction() as tx:
        assert len(tx.exec(select(Recording)).all()) == 2
        assert len(tx.exec(select(Measurement)).all()) == 2


def test_values_written_twice_are_there_once(library: Library) -> None:
    """Replay adds nothing: a value is never changed by being written again."""
    with library.transaction() as tx:
        place = make_place(tx)
        for value in (-1.6, -1.1):
            measured = Measured("sparc", value, {"definition": 1})
            add_measurements(tx, place.trial_id, place.learner_id, [measured])
    assert read_values(library) == [-1.6]


@pytest.mark.parametrize("value", [None, math.nan, math.inf, np.float64("nan")])
def test_what_could_not_be_measured_is_empty_with_its_reason(
    library: Library, value: float | None
) -> None:
    """NaN is stored as nothing, and always with a reason."""
    with library.transaction() as tx:
        place = make_place(tx)
        for metric, reason in (("sparc", "too short"), ("ldlj", None)):
            measured = Measured(metric, value, {}, reason=reason)
            add_measurements(tx, place.trial_id, place.learner_id, [measured])
    with closing(sqlite3.connect(library.database)) as plain:
        rows = plain.execute("SELECT metric, value, reason FROM measurement ORDER BY metric")
        assert rows.fetchall() == [("ldlj", None, "no value"), ("sparc", None, "too short")]


def test_numpy_values_and_facts_are_stored_as_plain_ones(library: Library) -> None:
    """What a metric function hands over needs no care by the caller."""
    measured = Measured(
        "sparc",
        np.float64(-1.5),
        {"cutoff_hz": np.float64(6.0), "order": np.int64(2)},
        n_used=int(np.int32(3)),
        flags=("filled",),
        quality={"rate_hz": np.float32(100.0), "noise": math.nan, "gaps": np.array([1, 2])},
    )
    with library.transaction() as tx:
        place = make_place(tx)
        add_measurements(tx, place.trial_id, place.learner_id, [measured])
    with library.transaction() as tx:
        row = tx.exec(select(Measurement)).one()
        recipe = tx.exec(select(Recipe)).one()
    assert (row.value, row.n_used, row.flags) == (-1.5, 3, ["filled"])
    assert row.quality == {"rate_hz": 100.0, "noise": None, "gaps": [1, 2]}
    assert recipe.choices == {"cutoff_hz": 6.0, "order": 2}


@given(
    choices=st.dictionaries(
        st.text("abc", min_size=1), st.floats(allow_nan=False, allow_infinity=False), max_size=4
    )
)
@settings(max_examples=25, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_equal_choices_are_one_recipe(library: Library, choices: dict[str, float]) -> None:
    """A recipe is stored once, under the very hash that the metrics package gives it."""
    with library.transaction() as tx:
        key = keep_recipe(tx, choices)
        assert keep_recipe(tx, dict(reversed(choices.items()))) == key
        assert tx.get_one(Recipe, key).digest == Choices(choices).digest


def test_a_correction_keeps_the_old_number_with_who_when_and_why(library: Library) -> None:
    """The newest number counts; the old one stays in history."""
    with library.transaction() as tx:
        learner = people.get_learner(tx, "heron-lamp").id
        session = practice.start_session(tx, stamp_at(0), learner_id=learner)
        add_measured_block(tx, stamp_at(1), session, learner, "baseline", {"sparc": (-1.8,)})
        trial = tx.exec(select(Trial.id)).one()
        assert correct_typed_value(tx, stamp_at(5), trial, "sparc", -1.2, why="read wrongly")
    assert read_values(library) == [-1.2]
    with closing(sqlite3.connect(library.database)) as plain:
        found = plain.execute("SELECT field, old, new, why, entered_by FROM correction")
        assert found.fetchall() == [("sparc", "-1.8", "-1.2", "read wrongly", "local")]


def correct(library: Library, trial_id: str) -> None:
    """Try to correct a number of an attempt."""
    with library.transaction() as tx:
        correct_typed_value(tx, stamp_at(5), trial_id, "sparc", 0.0)


def test_a_computed_value_cannot_be_corrected(library: Library) -> None:
    """What a recording gave is only ever followed by a newer reading."""
    with library.transaction() as tx:
        place = make_place(tx)
        add_reading(tx, place, RULE, -1.6)
    with pytest.raises(InputError, match="No number was typed"):
        correct(library, place.trial_id)
    assert read_values(library) == [-1.6]
