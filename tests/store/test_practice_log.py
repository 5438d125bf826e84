from __future__ import annotations

from collections.abc import Iterator, Mapping
from datetime import UTC, datetime, timedelta
from pathlib import Path
from zoneinfo import ZoneInfo

import pytest
from sqlmodel import Session, select
from support.libraries import START, add_learner, add_measured_block, make_library, stamp_at

from cuebook.practice.log import LoggedBlock, PracticeLog
from cuebook.store.opening import Library
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.practice import read_practice_log
from cuebook.store.stamps import make_stamp
from cuebook.store.tables.practice import Block, Trial
from cuebook.store.writing import people, practice
from cuebook.store.writing.measurements import (
    TYPED_CHOICES,
    correct_typed_value,
    make_choices,
)

SPARC: Mapping[str, tuple[float, ...]] = {"sparc": (-1.7, -1.6)}


@pytest.fixture
def library(tmp_path: Path) -> Iterator[Library]:
    with make_library(tmp_path / "library") as made:
        yield made


def read_log(library: Library, *metrics: str) -> PracticeLog:
    """Read the log by the reading path."""
    with open_for_reading(library.folder) as connection:
        return read_practice_log(connection, metrics or ("sparc",))


def read_blocks(library: Library) -> tuple[LoggedBlock, ...]:
    """Return the blocks of the only session."""
    (session,) = read_log(library).sessions
    return session.blocks


def start(tx: Session) -> tuple[str, str]:
    """Start a session of heron-lamp; return (session, learner)."""
    learner = people.get_learner(tx, "heron-lamp").id
    return practice.start_session(tx, stamp_at(0), learner_id=learner), learner


def test_a_log_comes_back_as_it_was_written(library: Library) -> None:
    """Baseline, practice and post come back with order, cue, counts and attempts as typed."""
    with library.transaction() as tx:
        session, learner = start(tx)
        add_measured_block(tx, stamp_at(1), session, learner, "baseline", {"sparc": (-1.8, -1.9)})
        add_measured_block(tx, stamp_at(3), session, learner, "acquisition", {}, cue="full-spoon")
        add_measured_block(tx, stamp_at(9), session, learner, "immediate_post", SPARC)
    log = read_log(library)
    assert log.learners["heron-lamp"].may_be_ranked
    assert log.learners["heron-lamp"].age_band == "65-74"
    assert log.learners["heron-lamp"].backgrounds == ("cooking",)
    (session_read,) = log.sessions
    assert session_read.started_at == START
    blocks = session_read.blocks
    assert [block.number for block in blocks] == [1, 2, 3]
    assert [block.phase for block in blocks] == ["baseline", "acquisition", "immediate_post"]
    cued = blocks[1]
    assert (cued.cue, cued.wording, cued.kind) == ("full-spoon", 2, "analogy")
    (part,) = cued.participations
    assert (part.times_said, part.attempts, part.presence) == (2, 10, "present")
    (first,) = blocks[0].participations
    assert [value.value for value in first.values["sparc"]] == [-1.8, -1.9]
    typed = make_choices(TYPED_CHOICES).digest
    assert {value.recipe for value in first.values["sparc"]} == {typed}
    assert not any(block.is_changed_after_result for block in blocks)
    assert not any(block.is_randomised for block in blocks)


def test_only_the_metrics_asked_for_are_read(library: Library) -> None:
    """Values of another metric stay out; without any, the log has none."""
    with library.transaction() as tx:
        session, learner = start(tx)
        add_measured_block(
            tx, stamp_at(1), session, learner, "baseline", {"sparc": (-1.8,), "ldlj": (-5.0,)}
        )
    for metrics in (("ldlj",), ("ldlj", "sparc"), ("gait_speed_m_s",)):
        log = read_log(library, *metrics)
        (part,) = log.sessions[0].blocks[0].participations
        assert set(part.values) == set(metrics) & {"ldlj", "sparc"}


def test_a_block_logged_late_takes_its_place_in_time(library: Library) -> None:
    """A block with an earlier time goes before later ones; the same minute keeps entry order."""
    with library.transaction() as tx:
        session, learner = start(tx)
        for minute, phase in ((1, "baseline"), (9, "immediate_post"), (9.2, "immediate_post")):
            add_measured_block(tx, stamp_at(minute), session, learner, phase, SPARC)
        add_measured_block(
            tx, stamp_at(4), session, learner, "acquisition", {}, cue="slow-and-even"
        )
        add_measured_block(tx, stamp_at(9), session, learner, "transfer", SPARC)
    blocks = read_blocks(library)
    assert [block.phase for block in blocks] == [
        *("baseline", "acquisition", "immediate_post", "immediate_post", "transfer"),
    ]
    assert [block.number for block in blocks] == [1, 2, 3, 4, 5]


def test_a_cue_entered_after_its_result_is_marked(library: Library) -> None:
    """A cue that is logged once the after-value is known cannot count as chosen beforehand."""
    later = timedelta(minutes=30)
    with library.transaction() as tx:
        session, learner = start(tx)
        add_measured_block(tx, stamp_at(1), session, learner, "baseline", SPARC)
        add_measured_block(tx, stamp_at(9), session, learner, "immediate_post", SPARC)
        add_measured_block(
            tx, stamp_at(4, later), session, learner, "acquisition", {}, cue="full-spoon"
        )
    assert [block.is_changed_after_result for block in read_blocks(library)] == [False, True, False]


def test_a_use_entered_in_one_go_is_not_marked(library: Library) -> None:
    """Before, cue and after entered together, even a day later, is no cue after the result."""
    entered = datetime(2026, 3, 3, 12, tzinfo=UTC)
    with library.transaction() as tx:
        session, learner = start(tx)
        for minute, phase in ((1, "baseline"), (4, "acquisition"), (9, "immediate_post")):
            moment = START + timedelta(minutes=minute)
            cue = "full-spoon" if phase == "acquisition" else None
            stamp = make_stamp(moment, entered_at=entered)
            add_measured_block(tx, stamp, session, learner, phase, SPARC, cue=cue)
    blocks = read_blocks(library)
    assert not any(block.is_changed_after_result for block in blocks)
    assert {
        value.is_late
        for block in blocks
        for part in block.participations
        for value in part.values["sparc"]
    } == {True}


@pytest.mark.parametrize(
    ("drawn_minute", "is_randomised"), [(0, True), (1, True), (2, False), (4, False), (60, False)]
)
def test_only_an_order_drawn_before_the_measure_counts_as_random(
    library: Library,
    drawn_minute: float,
    is_randomised: bool,
) -> None:
    """A draw that could have known the before-measure is not random."""
    with library.transaction() as tx:
        session, learner = start(tx)
        slots = practice.add_schedule(
            tx,
            stamp_at(drawn_minute),
            learner,
            task="reaching",
            rule="random",
            seed=1,
            arms=("full-spoon", None),
            slots=("full-spoon",),
        )
        add_measured_block(tx, stamp_at(1), session, learner, "baseline", SPARC)
        add_measured_block(
            tx, stamp_at(4), session, learner, "acquisition", {}, cue="full-spoon", slot_id=slots[0]
        )
    cued = read_blocks(library)[1]
    assert cued.is_randomised == is_randomised
    assert cued.assigned == "full-spoon"


def test_a_draw_between_two_uses_may_count_for_the_second(library: Library) -> None:
    """Drawn after the first practice but before the set that follows it: random for the second."""
    with library.transaction() as tx:
        session, learner = start(tx)
        add_measured_block(tx, stamp_at(1), session, learner, "baseline", SPARC)
        add_measured_block(tx, stamp_at(4), session, learner, "acquisition", {}, cue="full-spoon")
        slots = practice.add_schedule(
            tx, stamp_at(6), learner, task="reaching", rule="r", seed=1, arms=(None,), slots=(None,)
        )
        add_measured_block(tx, stamp_at(9), session, learner, "immediate_post", SPARC)
        add_measured_block(tx, stamp_at(12), session, learner, "acquisition", {}, slot_id=slots[0])
    blocks = read_blocks(library)
    assert [block.is_randomised for block in blocks] == [False, False, False, True]
    assert blocks[3].assigned is None
    assert blocks[3].cue is None


def test_attempts_after_a_stop_are_told_apart(library: Library) -> None:
    """What was measured after a stop in the same block is marked, and the stop is kept."""
    with library.transaction() as tx:
        session, learner = start(tx)
        block = add_measured_block(
            tx,
            stamp_at(4),
            session,
            learner,
            "acquisition",
            {},
            cue="full-spoon",
            stop_reason="pain",
        )
        part = practice.add_participation(tx, stamp_at(4), block, learner)
        practice.add_typed_values(tx, stamp_at(4), part, learner, {"sparc": (-1.5,)})
        practice.add_typed_values(tx, stamp_at(5), part, learner, {"sparc": (-1.4,)})
        practice.add_happenings(tx, stamp_at(4), part, learner, ["pain", "distress"])
    (read,) = read_blocks(library)[0].participations
    assert [value.is_after_stop for value in read.values["sparc"]] == [False, True]
    assert (read.stop_reason, read.events, read.is_stopped) == ("pain", ("pain", "distress"), True)


def test_calendar_days_are_those_of_the_place(library: Library) -> None:
    """A session late in the evening keeps its local day, whatever the day in UTC."""
    evening = datetime(2026, 3, 2, 21, 30, tzinfo=ZoneInfo("America/Halifax"))
    with library.transaction() as tx:
        learner = people.get_learner(tx, "heron-lamp").id
        practice.start_session(tx, make_stamp(evening), learner_id=learner)
    (session,) = read_log(library).sessions
    assert session.started_at == evening
    assert session.started_at.date() == evening.date()
    assert session.started_at.astimezone(UTC).day == 3


def test_values_marked_invalid_and_sessions_not_to_use_are_marked(library: Library) -> None:
    """Nothing is dropped on reading: the marks travel with the log."""
    with library.transaction() as tx:
        session, learner = start(tx)
        add_measured_block(tx, stamp_at(1), session, learner, "baseline", SPARC)
        tx.exec(select(Trial)).all()[0].is_valid = False
        practice.get_session(tx, session).do_not_use = True
    (read,) = read_log(library).sessions
    assert read.do_not_use
    values = read.blocks[0].participations[0].values["sparc"]
    assert [value.is_valid for value in values] == [False, True]


def test_conditions_of_a_set_up_make_part_of_the_key(library: Library) -> None:
    """Side, aid and instrument come back as conditions; other facts of the set-up do not."""
    with library.transaction() as tx:
        session, learner = start(tx)
        new = practice.NewBlock(
            "baseline",
            "reaching",
            side="left",
            tempo=60.0,
            protocol={"instrument": "stopwatch", "walking_aid": "stick", "distance_cm": "30"},
        )
        block = practice.add_block(tx, stamp_at(1), session, new)
        practice.add_participation(tx, stamp_at(1), block, learner)
        again = practice.add_block(tx, stamp_at(2), session, new)
        rows = [tx.get_one(Block, key) for key in (block, again)]
        assert rows[0].protocol_id == rows[1].protocol_id
    first = read_blocks(library)[0]
    assert dict(first.conditions) == {
        "side": "left",
        "instrument": "stopwatch",
        "walking_aid": "stick",
    }
    assert first.tempo == 60.0


def test_members_of_a_group_share_an_event(library: Library) -> None:
    """A cue said to several carries one event; presence and consent are each learner's own."""
    with library.transaction() as tx:
        keys = [people.get_learner(tx, "heron-lamp").id]
        keys += [add_learner(tx, code, may_be_ranked=False) for code in ("wren-oak", "fox-bell")]
        group = people.add_group(tx, stamp_at(0), "class")
        session = practice.start_session(tx, stamp_at(0), group_id=group)
        block = practice.add_block(
            tx, stamp_at(1), session, practice.NewBlock("acquisition", "walking", event_id=session)
        )
        for key, presence in zip(keys, ("present", "absent", "not_observed"), strict=True):
            practice.add_participation(tx, stamp_at(1), block, key, presence=presence)
    log = read_log(library)
    (read,) = log.sessions[0].blocks
    assert read.event == f"class:{session}"
    assert [(part.learner, part.presence) for part in read.participations] == [
        ("heron-lamp", "present"),
        ("wren-oak", "absent"),
        ("fox-bell", "not_observed"),
    ]
    assert [log.learners[part.learner].may_be_ranked for part in read.participations] == [
        True,
        False,
        False,
    ]


def test_a_corrected_number_counts_and_its_correction_may_be_late(library: Library) -> None:
    """The newest value counts; one corrected days later is a value typed late."""
    with library.transaction() as tx:
        session, learner = start(tx)
        add_measured_block(tx, stamp_at(1), session, learner, "baseline", SPARC)
        trial = tx.exec(select(Trial).order_by(Trial.id)).all()[0]
        three_days = stamp_at(3 * 24 * 60)
        assert correct_typed_value(tx, three_days, trial.id, "sparc", -1.2, why="read wrongly")
        assert not correct_typed_value(tx, three_days, trial.id, "sparc", -1.2)
    values = read_blocks(library)[0].participations[0].values["sparc"]
    assert [(value.value, value.is_late) for value in values] == [(-1.2, True), (-1.6, False)]
