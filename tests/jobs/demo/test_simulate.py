from __future__ import annotations

import csv
import hashlib
import math
from collections import Counter
from itertools import pairwise
from pathlib import Path
from statistics import mean
from typing import TYPE_CHECKING

import pytest

from cuebook.jobs.demo.plan import DemoBlock, DemoParticipation
from cuebook.jobs.demo.quillgate import build_quillgate
from cuebook.jobs.demo.reach import ReachState
from cuebook.jobs.demo.simulate import DEMO_SEED, write_recordings
from cuebook.jobs.demo.truth import read_truth
from cuebook.vocabulary import load_vocabulary

if TYPE_CHECKING:
    from support.demonstration import Demo

TRAP = "shoulder-stays-home"
TRUTH = read_truth()


def list_reach_uses(demo: Demo) -> list[tuple[DemoBlock, DemoParticipation]]:
    """Return the uses of the goal that the demonstration shows."""
    return [(block, part) for _, block, part in demo.plan.iterate_uses("reaching", "Quillgate")]


def hash_folder(folder: Path) -> dict[str, str]:
    """Return the digest of every file below a folder, by its path."""
    return {
        file.relative_to(folder).as_posix(): hashlib.sha256(file.read_bytes()).hexdigest()
        for file in sorted(folder.rglob("*.csv"))
    }


def test_same_seed_writes_the_same_bytes(demo: Demo, tmp_path: Path) -> None:
    """Written again, plan and files are the same to the last byte."""
    again = write_recordings(tmp_path, DEMO_SEED)
    assert again == demo.plan
    assert hash_folder(tmp_path) == hash_folder(demo.folder)


def test_another_seed_writes_other_movements(demo: Demo, tmp_path: Path) -> None:
    """No recording of one seed occurs under another."""
    write_recordings(tmp_path, DEMO_SEED + 1)
    digests = set(hash_folder(tmp_path).values())
    assert digests.isdisjoint(hash_folder(demo.folder).values())


def test_files_are_those_of_the_plan_and_all_differ(demo: Demo) -> None:
    """Every recording of the plan lies in the folder, nothing else does, no two are alike."""
    digests = hash_folder(demo.folder)
    files = demo.plan.list_files()
    assert sorted(files) == sorted(digests)
    assert len(set(files)) == len(files)
    assert len(set(digests.values())) == len(digests)


def test_every_file_reads_as_its_task_says(demo: Demo) -> None:
    """Headers are those of the reading, numbers are finite, time runs forward at one rate."""
    for _, block in demo.plan.iterate_blocks():
        files = [trial.file for part in block.participations for trial in part.trials]
        for file in [file for file in files if file]:
            reading = demo.plan.get_reading(block.task)
            assert reading is not None
            with (demo.folder / file).open(encoding="ascii", newline="") as text:
                header, *rows = csv.reader(text)
            assert header == list(reading.columns.values())
            numbers = [[float(cell) for cell in row] for row in rows]
            assert all(math.isfinite(number) for row in numbers for number in row)
            steps_s = [after[0] - before[0] for before, after in pairwise(numbers)]
            if reading.rate_hz is None:
                assert min(steps_s) > 1.0
                assert len(rows) > 20
            else:
                assert steps_s == pytest.approx([1.0 / reading.rate_hz] * len(steps_s))
                assert len(rows) > 150


def test_about_two_hundred_uses_over_six_weeks_by_eight_learners(demo: Demo) -> None:
    """The goal has the uses it was planned with, a quarter of them without a cue."""
    uses = list_reach_uses(demo)
    assert 190 <= len(uses) <= 225
    assert len({part.learner for _, part in uses}) == 8
    assert len({block.occurred_at.isocalendar().week for block, _ in uses}) == 6
    assert sum(block.cue is None for block, _ in uses) >= 0.25 * len(uses)
    assert len({block.cue for block, _ in uses if block.cue}) >= 7


def test_uses_have_three_attempts_before_and_three_after(demo: Demo) -> None:
    """Around every use that was not stopped lie two recorded sets of three, cue off."""
    for session in demo.plan.sessions:
        reaching = [block for block in session.blocks if block.task == "reaching"]
        for index, use in enumerate(reaching):
            if use.phase != "acquisition":
                continue
            assert use.participations[0].trials == ()
            around = [(reaching[index - 1], "baseline")]
            if use.participations[0].stop_reason is None:
                around.append((reaching[index + 1], "immediate_post"))
            for block, phase in around:
                assert block.phase == phase
                assert [len(part.trials) for part in block.participations] == [3]


def test_the_best_cue_was_only_given_in_random_order(demo: Demo) -> None:
    """Every use of the best cue comes from an order drawn before, by enough learners."""
    best = [(block, part) for block, part in list_reach_uses(demo) if block.cue == get_best()]
    assert {block.chosen for block, _ in best} == {"random"}
    assert len(best) >= 18
    assert len({part.learner for _, part in best}) >= 6


def get_best() -> str:
    """Return the code of the planted best cue."""
    return next(cue.code for cue in TRUTH.cues.values() if cue.role == "best")


def test_random_blocks_are_the_slots_of_their_schedule_in_order(demo: Demo) -> None:
    """What was given is what the slot held, slot after slot, and drawn before the first visit."""
    schedules = {schedule.code: schedule for schedule in demo.plan.schedules}
    taken: dict[str, list[int]] = {code: [] for code in schedules}
    for block, _ in list_reach_uses(demo):
        assert (block.chosen == "random") == (block.schedule is not None)
        if block.schedule is not None and block.slot is not None:
            taken[block.schedule].append(block.slot)
            assert block.assigned == block.cue == schedules[block.schedule].slots[block.slot]
    assert len(taken) == 8
    assert all(slots == list(range(len(slots))) for slots in taken.values())
    first = min(session.started_at for session in demo.plan.sessions)
    assert all(schedule.drawn_at < first for schedule in schedules.values())


def test_the_trap_cue_was_only_reached_for_on_bad_days(demo: Demo) -> None:
    """Before the trap cue the reaches were much worse than the learner's own usual."""
    uses = list_reach_uses(demo)
    assert {block.chosen for block, _ in uses if block.cue == TRAP} == {"going_badly"}
    assert {block.cue for block, _ in uses if block.chosen == "going_badly"} == {TRAP}
    movements = build_quillgate(TRUTH, DEMO_SEED).movements
    before: dict[str, list[tuple[str | None, float]]] = {}
    for session in demo.plan.sessions:
        for first, use in pairwise(session.blocks):
            if use.phase == "acquisition" and use.task == "reaching":
                part = first.participations[0]
                states = [movements[trial.file or ""] for trial in part.trials]
                level = mean(one.smoothness for one in states if isinstance(one, ReachState))
                before.setdefault(part.learner, []).append((use.cue, level))
    below = [
        level - mean(seen for _, seen in sets)
        for sets in before.values()
        for cue, level in sets
        if cue == TRAP
    ]
    assert len(below) >= 10
    assert mean(below) < -1.0


def test_one_cue_has_two_uses(demo: Demo) -> None:
    """Of one reaching cue and one release cue there are two uses: nothing can be told."""
    counts = Counter(block.cue for _, block, _ in demo.plan.iterate_uses())
    assert counts["low-shoulder-hand-forward"] == 2
    assert counts["map-on-a-table"] == 2


def test_the_harmful_cue_ended_twice_with_pain(demo: Demo) -> None:
    """Two stops of the same kind, and nothing was measured of that learner afterwards."""
    stopped = [
        (session, block, part)
        for session, block, part in demo.plan.iterate_uses("reaching")
        if part.stop_reason
    ]
    assert [part.stop_reason for _, _, part in stopped] == ["pain", "pain"]
    assert {block.cue for _, block, _ in stopped} == {"back-still-elbow-straight"}
    assert all(session.blocks[-1] == block for session, block, _ in stopped)


def test_near_falls_are_noted_with_and_without_a_cue(demo: Demo) -> None:
    """Two learners nearly fell under one cue, were spared it from then on; one without any."""
    seen = [
        (block, part)
        for _, block, part in demo.plan.iterate_uses("walking")
        if "near_fall" in part.events
    ]
    by_cue = {part.learner: block.cue for block, part in seen}
    assert by_cue == {
        "pebble-coat": "barrow-wide-path",
        "willow-drum": None,
        "harbour-wren": "barrow-wide-path",
    }
    for block, part in seen:
        later = {
            other.cue
            for _, other, one in demo.plan.iterate_uses("walking")
            if one.learner == part.learner and other.occurred_at > block.occurred_at
        }
        assert block.cue is None or block.cue not in later
    assert [part.stop_reason for _, part in seen] == [None, None, "fall_or_near_fall"]


def test_whoever_stopped_is_not_measured_again_in_the_meeting(demo: Demo) -> None:
    """After a stop a learner takes no part in later blocks of the meeting."""
    for session in demo.plan.sessions:
        stopped: set[str] = set()
        for block in session.blocks:
            assert stopped.isdisjoint(part.learner for part in block.participations)
            stopped |= {part.learner for part in block.participations if part.stop_reason}


def test_group_meetings_say_one_cue_to_all_and_name_who_was_away(demo: Demo) -> None:
    """A cue said to the room has one event, and whoever did not come is marked absent."""
    meetings = [session for session in demo.plan.sessions if session.group]
    assert len(meetings) == 6
    events = [b.event for one in meetings for b in one.blocks if b.phase == "acquisition"]
    assert len(set(events)) == len(events) == 12
    assert all(events)
    presences = Counter(
        part.presence for one in meetings for b in one.blocks for part in b.participations
    )
    assert presences["absent"] > 0
    for one in meetings:
        opening = one.blocks[0].participations
        assert {part.learner for part in opening} == set(one.learners)
        assert sum(bool(part.trials) for part in opening) == 4
        assert not any(part.trials for part in opening if part.presence == "absent")


def test_learners_without_consent_to_ranking_take_part_all_the_same(demo: Demo) -> None:
    """There is something to leave out: both have uses."""
    users = {part.learner for _, _, part in demo.plan.iterate_uses()}
    assert {one.code for one in demo.plan.learners if not one.may_be_ranked} <= users


def test_holds_are_kept(demo: Demo) -> None:
    """Nobody does a task they are stopped from, and all of them do another."""
    learners = {learner.code: learner for learner in demo.plan.learners}
    held = {code for code, learner in learners.items() if learner.hold}
    for _, block in demo.plan.iterate_blocks():
        assert not any(learners[one.learner].is_held(block.task) for one in block.participations)
    assert held <= {part.learner for _, _, part in demo.plan.iterate_uses()}


def test_sessions_run_in_order_of_time_with_zone(demo: Demo) -> None:
    """Sessions are numbered in order; blocks lie inside; notes are typed afterwards."""
    sessions = demo.plan.sessions
    assert [one.number for one in sessions] == list(range(1, len(sessions) + 1))
    assert all(a.started_at <= b.started_at for a, b in pairwise(sessions))
    for one in sessions:
        assert one.started_at.tzinfo is not None
        assert str(one.started_at.tzinfo) == demo.plan.zone
        times = [block.occurred_at for block in one.blocks]
        assert one.started_at <= times[0]
        assert times == sorted(times)
        assert times[-1] < one.ended_at < one.entered_at
        assert [block.number for block in one.blocks] == list(range(1, len(times) + 1))
    assert len({one.started_at.utcoffset() for one in sessions}) == 2


def test_nobody_is_in_two_places(demo: Demo) -> None:
    """A learner's sessions do not overlap, nor do a staff member's."""
    for name_people in (
        lambda one: one.learners,
        lambda one: (one.entered_by,),
    ):
        busy: dict[str, list[tuple[float, float]]] = {}
        for one in demo.plan.sessions:
            for person in name_people(one):
                span = (one.started_at.timestamp(), one.ended_at.timestamp())
                busy.setdefault(person, []).append(span)
        for spans in busy.values():
            assert all(before[1] <= after[0] for before, after in pairwise(sorted(spans)))


def test_all_slugs_are_in_the_vocabulary(demo: Demo) -> None:
    """What a teacher picked from a list stands in that list."""
    words = load_vocabulary()
    for _, block in demo.plan.iterate_blocks():
        assert words.has("phase", block.phase)
        assert words.task(block.task)
        assert block.others == "none"
        assert (block.chosen is not None) == (block.phase == "acquisition")
        for part in block.participations:
            assert part.presence in {"present", "absent"}
            assert part.observed is None or words.has("observed_change", part.observed)
            assert part.reaction is None or words.has("reaction", part.reaction)
            assert all(words.has("event", event) for event in part.events)
            assert part.stop_reason is None or words.has("reason_for_stopping", part.stop_reason)
            assert (part.times_said is not None) == (block.cue is not None and not is_away(part))


def is_away(part: DemoParticipation) -> bool:
    """Return whether a learner did not come."""
    return part.presence == "absent"


def test_trials_are_a_file_or_typed_values_never_both(demo: Demo) -> None:
    """A movement that was recorded has no value written beside it."""
    for _, block in demo.plan.iterate_blocks():
        for part in block.participations:
            assert all((trial.file is None) == bool(trial.values) for trial in part.trials)


def test_nothing_names_a_person_or_a_device(demo: Demo) -> None:
    """Files hold a header and numbers; everything else goes by invented codes."""
    allowed = set("0123456789.,-\n")
    headers = {"time_s,hand_x_m,hand_y_m", "time_s,cop_x_cm,cop_y_cm", "onset"}
    for file in demo.folder.rglob("*.csv"):
        header, _, body = file.read_text(encoding="ascii").partition("\n")
        assert header in headers
        assert set(body) <= allowed
    codes = {learner.code for learner in demo.plan.learners}
    staff = {one.code for one in demo.plan.staff}
    assert {one.entered_by for one in demo.plan.sessions} <= staff
    assert {learner for one in demo.plan.sessions for learner in one.learners} <= codes
    assert {member for group in demo.plan.groups for member in group.members} == codes


def test_only_those_who_agreed_were_recorded(demo: Demo) -> None:
    """A movement was recorded of nobody who had not said yes to it."""
    agreed = {one.code for one in demo.plan.learners if one.consents["record_motion"] == "yes"}
    recorded = {
        part.learner
        for _, block in demo.plan.iterate_blocks()
        for part in block.participations
        if any(trial.file for trial in part.trials)
    }
    assert recorded
    assert recorded <= agreed
