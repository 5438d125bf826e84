"""Small libraries for tests: written through the writing API, with a fixed clock."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import UTC, datetime, timedelta
from pathlib import Path

from sqlmodel import Session, SQLModel, col, select

from cuebook.library.cues import Claim, Cue, Wording
from cuebook.store.keys import make_key
from cuebook.store.opening import Library, open_library
from cuebook.store.stamps import Stamp, make_stamp
from cuebook.store.tables.people import Goal, LocalName
from cuebook.store.tables.practice import Block, Trial
from cuebook.store.tables.recordings import Measurement
from cuebook.store.tables.upkeep import Draft
from cuebook.store.writing import cues, people, practice, rankings, recordings
from cuebook.store.writing.measurements import Measured, add_measurements, correct_typed_value

START = datetime(2026, 3, 2, 9, 0, tzinfo=UTC)

SPOON = Cue(
    code="full-spoon",
    kind="analogy",
    focus="holistic",
    wordings=(
        Wording("Move as if carrying a full spoon."),
        Wording("Bewege dich wie mit einem vollen Löffel.", "de"),
        Wording("Carry a full spoon to the bowl.", "en", 2, 1),
    ),
    tasks=("reaching", "drinking"),
    regions=("arm",),
    claims=(Claim("smoothness", "improves"), Claim("speed", "may_worsen")),
    pair="smooth-reach",
    sister_of="level-tray",
    problem="The hand jerks on its way",
    phrases=("shaky reach", "spills it"),
    cycle="repetition",
    rate_low=10.0,
    rate_high=40.5,
    age_low=13,
    age_high=85,
    experience=("novice", "intermediate"),
    background_good=("cooking", "family_life"),
    background_avoid=("music",),
    access_avoid=("no_mental_imagery",),
    note_avoid=("stiff_hand",),
    captures="Steady speed along the path.",
    leaves_out="How far the trunk leans.",
    caution="Support the arm.",
    target_metric="sparc",
    watch_metric="movement_time_s",
)
RULE = Cue(
    code="slow-and-even",
    kind="explicit_rule",
    focus="internal",
    wordings=(Wording("Move your {side} hand slowly and evenly."),),
    tasks=("reaching",),
)


def make_library(folder: Path) -> Library:
    """Return a new library with two cues and the learner heron-lamp."""
    library = open_library(folder)
    with library.transaction() as tx:
        cues.keep_cues(tx, stamp_at(0), (SPOON, RULE), "test-set")
        add_learner(tx, "heron-lamp")
    return library


def write_rows(library: Library, *rows: SQLModel) -> None:
    """Write rows in one transaction."""
    with library.transaction() as tx:
        tx.add_all(rows)


def stamp_at(minutes: float, entered_after: timedelta = timedelta()) -> Stamp:
    """Return a stamp some minutes after the fixed start, entered then or later."""
    moment = START + timedelta(minutes=minutes)
    return make_stamp(moment, entered_at=moment + entered_after)


def add_learner(tx: Session, code: str, *, may_be_ranked: bool = True) -> str:
    """Add a learner with an answer to the question about ranking."""
    key = people.add_learner(
        tx, stamp_at(0), code, age_band="65-74", experience="novice", backgrounds=("cooking",)
    )
    answer = "yes" if may_be_ranked else "no"
    people.add_consent(tx, stamp_at(0), key, "use_for_ranking", answer)
    return key


def add_measured_block(
    tx: Session,
    stamp: Stamp,
    session_id: str,
    learner_id: str,
    phase: str,
    values: Mapping[str, Sequence[float]],
    *,
    cue: str | None = None,
    slot_id: str | None = None,
    stop_reason: str | None = None,
    task: str = "reaching",
) -> str:
    """Add one block of one learner with typed values; return the block's key."""
    block_id = practice.add_block(
        tx,
        stamp,
        session_id,
        practice.NewBlock(
            phase=phase,
            task=task,
            wording_id=None if cue is None else cues.get_wording_id(tx, cue),
            chosen="planned" if phase == "acquisition" else None,
            slot_id=slot_id,
        ),
    )
    part = practice.add_participation(tx, stamp, block_id, learner_id)
    if phase == "acquisition":
        use = practice.NewUse(times_said=2, attempts=10, stop_reason=stop_reason)
        practice.add_use(tx, stamp, part, learner_id, use)
    practice.add_typed_values(tx, stamp, part, learner_id, values)
    return block_id


def fill_library(folder: Path) -> Library:
    """Return a library with at least one row in every table, of one learner and one group.

    Visit one: baseline, practice with full-spoon (from a drawn order), immediate_post, typed.
    Visit two, a week later: a baseline from a recording. A group met once.
    """
    library = make_library(folder)
    with library.transaction() as tx:
        _fill_people(tx)
        _fill_visits(tx)
        _fill_upkeep(tx)
    return library


def _fill_people(tx: Session) -> None:
    people.add_staff(tx, stamp=stamp_at(0))
    learner = people.get_learner(tx, "heron-lamp").id
    people.set_access_needs(tx, stamp_at(0), learner, ["low_vision"])
    people.add_safety_note(
        tx, stamp_at(1), learner, slug="fall_history", words="fell in May", tasks=("walking",)
    )
    people.add_holds(
        tx, stamp_at(2), learner, ["rowing_stroke"], until="seen", by_role="physiotherapist"
    )
    group = people.add_group(tx, stamp_at(0), "lane-class", "Monday class")
    people.add_member(tx, group, learner, START)
    people.add_member(tx, group, add_learner(tx, "copper-gate", may_be_ranked=False), START)
    columns = stamp_at(3).as_columns()
    tx.add(LocalName(id=make_key(), learner_id=learner, name="Somebody Invented", **columns))
    tx.add(
        Goal(
            id=make_key(),
            learner_id=learner,
            words="reach a plate",
            task="reaching",
            feature="smoothness",
            metric="sparc",
            direction="higher",
            **columns,
        )
    )


def _fill_visits(tx: Session) -> None:
    learner = people.get_learner(tx, "heron-lamp").id
    slots = practice.add_schedule(
        tx,
        stamp_at(4),
        learner,
        task="reaching",
        rule="random permuted blocks",
        seed=1,
        arms=("full-spoon", None),
        slots=("full-spoon", None),
    )
    first = practice.start_session(tx, stamp_at(5), learner_id=learner)
    baseline = add_measured_block(
        tx, stamp_at(6), first, learner, "baseline", {"sparc": (-1.8, -1.7)}
    )
    tx.get_one(Block, baseline).protocol_id = practice.keep_protocol(
        tx, stamp_at(6), {"instrument": "sensor", "distance_cm": "30"}
    )
    practised = add_measured_block(
        tx, stamp_at(8), first, learner, "acquisition", {}, cue="full-spoon", slot_id=slots[0]
    )
    part = practice.add_participation(tx, stamp_at(8), practised, learner)
    practice.add_happenings(tx, stamp_at(9), part, learner, ["tired"])
    add_measured_block(tx, stamp_at(12), first, learner, "immediate_post", {"sparc": (-1.5, -1.6)})
    practice.end_session(tx, first, stamp_at(20).occurred_at)
    week = 7 * 24 * 60
    second = practice.start_session(tx, stamp_at(week), learner_id=learner)
    block = practice.add_block(
        tx, stamp_at(week + 1), second, practice.NewBlock("baseline", "reaching")
    )
    part = practice.add_participation(tx, stamp_at(week + 1), block, learner)
    trial = practice.add_trial(tx, stamp_at(week + 1), part, learner)
    original = recordings.keep_original(tx, stamp_at(week + 1), "ab" * 32, 1234)
    reading = recordings.add_recording(
        tx,
        stamp_at(week + 1),
        original_id=original,
        learner_id=learner,
        block_id=block,
        trial_id=trial,
        rule={"columns": {"x": "hand_x"}},
        rate_hz=100.0,
        duration_s=1.5,
    )
    measured = (
        Measured("sparc", -1.55, {"definition": 1, "cutoff_hz": 6.0}, quality={"rate_hz": 100.0}),
        Measured("ldlj", None, {"definition": 1}, reason="too short", flags=("short",)),
    )
    add_measurements(tx, trial, learner, measured, recording_id=reading)
    group = people.get_group(tx, "lane-class").id
    third = practice.start_session(tx, stamp_at(week + 60), group_id=group)
    block = practice.add_block(
        tx,
        stamp_at(week + 61),
        third,
        practice.NewBlock(
            "acquisition",
            "walking",
            wording_id=cues.get_wording_id(tx, "slow-and-even"),
            chosen="planned",
            event_id=make_key(),
        ),
    )
    for member, presence in ((learner, "present"), (_copper(tx), "absent")):
        part = practice.add_participation(tx, stamp_at(week + 61), block, member, presence=presence)
        if presence == "present":
            practice.add_use(
                tx, stamp_at(week + 61), part, member, practice.NewUse(reaction="disliked")
            )


def _copper(tx: Session) -> str:
    return people.get_learner(tx, "copper-gate").id


def _fill_upkeep(tx: Session) -> None:
    learner = people.get_learner(tx, "heron-lamp").id
    trial = tx.exec(
        select(Trial.id)
        .join(Measurement, col(Measurement.trial_id) == Trial.id)
        .where(Measurement.recording_id == "")
        .order_by(Trial.id)
        .limit(1)
    ).one()
    correct_typed_value(tx, stamp_at(30), trial, "sparc", -1.81, why="mistyped")
    tx.add(
        Draft(
            place="log",
            learner_id=learner,
            content={"learner": "heron-lamp"},
            saved_at=stamp_at(40).occurred_at,
        )
    )
    rankings.keep_ranking(
        tx,
        {"metric": "sparc", "task": "reaching"},
        {"cues": [], "n_uses": 1},
        evidence_revision=3,
        engine="1",
        n_uses=1,
        made_at=stamp_at(50).occurred_at,
    )
