"""Stops and harms: no change from a stopped use, and every harm counted over all uses."""

from __future__ import annotations

from dataclasses import replace

import pytest
from support.practice_logs import (
    METRIC,
    derive,
    derive_log,
    find_change,
    find_reason,
    list_changes,
    make_log,
    visit,
)

from cuebook.practice.changes import CONTRASTS
from cuebook.practice.log import LoggedSession


def change_part(session: LoggedSession, number: int, **facts: object) -> LoggedSession:
    """Return a session in which the one learner's part in a block differs."""
    blocks = list(session.blocks)
    part = replace(blocks[number - 1].participations[0], **facts)  # type: ignore[arg-type]
    blocks[number - 1] = replace(blocks[number - 1], participations=(part,))
    return replace(session, blocks=tuple(blocks))


def test_a_stopped_use_gives_no_change_in_any_contrast() -> None:
    """Whatever was measured before or after it, and the reason says so."""
    derived = derive(visit("b A o x", stopped=[2]), visit("r x", day=2))
    assert not derived.changes
    assert {find_reason(derived, "A", contrast) for contrast in CONTRASTS} == {"stopped"}


def test_what_follows_a_stop_needs_a_new_clean_set_and_is_marked() -> None:
    """Later uses of the session have no before unless one was made, and carry after_stop."""
    fresh = derive(visit("b A o B o", stopped=[2]))
    assert list_changes(fresh, "immediate") == {"B": 2}
    assert "after_stop" in find_change(fresh, "B", "immediate").flags
    stale = derive(visit("b A B o", stopped=[2]))
    assert find_reason(stale, "B", "immediate") == "no_clean_between"


def test_the_same_cue_after_a_stop_is_a_use_of_its_own() -> None:
    """A stop is not hidden by going on with the same cue."""
    derived = derive(visit("b A A o", stopped=[2]))
    assert [(use.k, use.stop_reason) for use in derived.uses] == [(1, "pain"), (2, None)]
    assert (derived.harms["A"].uses, dict(derived.harms["A"].stops)) == (2, {"pain": 1})


def test_a_stop_in_a_measure_marks_the_uses_after_it() -> None:
    """Who had to stop while being measured is after a stop as well."""
    derived = derive(visit("b b A o", stopped=[1]))
    assert "after_stop" in find_change(derived, "A", "immediate").flags


def test_a_planned_end_is_no_stop() -> None:
    """A block that ended as planned gives its change."""
    derived = derive(change_part(visit("b A o"), 2, stop_reason="planned_end"))
    assert list_changes(derived, "immediate") == {"A": 2}
    assert not derived.harms["A"].stops


def test_a_near_fall_without_a_stop_is_a_harm_with_a_change() -> None:
    """The change is kept and the event is counted."""
    derived = derive(change_part(visit("b A o"), 2, events=("near_fall", "pain_up")))
    assert list_changes(derived, "immediate") == {"A": 2}
    assert dict(derived.harms["A"].events) == {"near_fall": 1, "pain_up": 1}


def test_harms_are_counted_over_all_uses_measured_or_not() -> None:
    """The denominator holds uses without values and sessions that give no change."""
    derived = derive(
        visit("b A o", stopped=[2]),
        visit("A", day=1),
        visit("A", day=2, do_not_use=True),
    )
    assert (derived.harms["A"].uses, dict(derived.harms["A"].stops)) == (3, {"pain": 1})


def test_stops_of_practice_alone_are_the_comparison() -> None:
    """They are counted the same way, under no cue."""
    derived = derive(visit("b p o", stopped=[2]), visit("p", day=1))
    assert (derived.harms[None].uses, dict(derived.harms[None].stops)) == (2, {"pain": 1})


def test_harms_of_learners_not_ranked_do_not_count() -> None:
    """Who did not agree to ranking is in neither the harms nor their denominator."""
    log = make_log(visit("b A o", stopped=[2]), without_consent=["ann"])
    derived = derive_log(log)
    assert not derived.harms
    assert dict(derived.left_out) == {"no_consent_for_ranking": 1}
    assert derive_log(log, only_learner="ann").harms["A"].uses == 1


def test_what_was_said_adds_up_in_a_merged_use() -> None:
    """Attempts, times said and minutes of adjacent blocks add up, and the worst mark stays."""
    session = visit("b A A o")
    session = change_part(session, 2, attempts=3, times_said=1, minutes=1.5)
    session = change_part(session, 3, attempts=4, times_said=2, minutes=2.0)
    blocks = (*session.blocks[:2], replace(session.blocks[2], others="some"), session.blocks[3])
    (use,) = derive(replace(session, blocks=blocks)).uses
    assert (use.attempts, use.times_said, use.minutes, use.others) == (7, 3, 3.5, "some")
    assert use.flags == ("others",)


def test_an_unusable_measure_between_does_not_part_a_use() -> None:
    """A measure whose attempts are all invalid is no clean set."""
    session = visit("b A o A o")
    spoiled = tuple(
        replace(one, is_valid=False) for one in session.blocks[2].participations[0].values[METRIC]
    )
    derived = derive(change_part(session, 3, values={METRIC: spoiled}))
    assert list_changes(derived, "immediate") == {"A": 5 - 1}


def test_a_cue_at_another_seat_height_is_a_cue_on_the_same_task() -> None:
    """Other footwear or seat height make another key, never another task."""
    session = visit("b A o B o")
    higher = replace(session.blocks[3], conditions=(("seat_height_cm", "50"),))
    blocks = (*session.blocks[:2], session.blocks[3], session.blocks[4])
    between = (blocks[0], blocks[1], replace(higher, number=3), blocks[3])
    derived = derive(replace(session, blocks=between))
    assert find_reason(derived, "A", "immediate") == "no_after"
    assert [use.k for use in derived.uses] == [1, 2]


@pytest.mark.parametrize("fact", [("side", "left"), ("walking_aid", "frame")])
def test_another_side_or_aid_is_another_task(fact: tuple[str, str]) -> None:
    """A cue for the other side bars nothing; that there was one is marked."""
    session = visit("b A B o")
    other = replace(session.blocks[2], conditions=(fact,))
    blocks = (*session.blocks[:2], other, session.blocks[3])
    derived = derive(replace(session, blocks=blocks))
    assert list_changes(derived, "immediate") == {"A": 4 - 1}
    assert "other_task_cued" in find_change(derived, "A", "immediate").flags
