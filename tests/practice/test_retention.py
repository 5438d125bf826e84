"""Retention: one record a session, from its opening set to the next opening a night later."""

from __future__ import annotations

from dataclasses import replace
from datetime import timedelta
from typing import Any

import pytest
from support.practice_logs import (
    START,
    block,
    derive,
    find_change,
    find_reason,
    list_changes,
    visit,
)

from cuebook.practice.log import LoggedSession


def at(hours: float, signs: str, **facts: object) -> LoggedSession:
    """Return a session some hours after the first."""
    later = visit(signs, name=f"after-{hours:g}", **facts)  # type: ignore[arg-type]
    return replace(later, started_at=START + timedelta(hours=hours))


@pytest.mark.parametrize(
    ("hours", "contrast"),
    [(23.9, None), (24, "retention"), (28 * 24, "retention"), (28 * 24 + 1, "followup")],
)
def test_the_contrast_follows_from_the_time_between(hours: float, contrast: str | None) -> None:
    """A night at least; up to 28 days it is retention, beyond that follow-up, never both."""
    derived = derive(visit("b A o"), at(hours, "b"))
    across = {one.contrast for one in derived.changes if one.contrast != "immediate"}
    assert across == ({contrast} if contrast else set())


def test_with_dates_only_the_calendar_day_counts() -> None:
    """Two dates in a row are one day, whatever the hours say; the same date is none."""
    first = visit("b A o", is_date_only=True)
    change = find_change(derive(first, at(15, "b", is_date_only=True)), "A", "retention")
    assert (change.days, "date_only" in change.flags) == (1, True)
    same_day = derive(first, at(3, "b", is_date_only=True))
    assert find_reason(same_day, "A", "retention") == "no_later_opening"


def test_the_label_of_the_opening_does_not_matter() -> None:
    """An opening labelled retention is one like an opening labelled baseline."""
    derived = derive(visit("b A o"), visit("r A o", day=2))
    assert find_change(derived, "A", "retention").days == 2


def test_an_opening_after_a_cue_is_none() -> None:
    """What is measured after the next session's first cue does not count."""
    derived = derive(visit("b A o"), visit("B o b", day=2), visit("b", day=4))
    assert find_reason(derived, "A", "retention") == "another_cue_between"


def test_a_cue_not_known_between_spoils_it_too() -> None:
    """Practice with cues nobody noted counts as a cue in between."""
    unknown = LoggedSession("u", START + timedelta(days=2), (block("u/1", "p", 1, others="some"),))
    derived = derive(visit("b A o"), unknown, visit("b", day=4))
    assert find_reason(derived, "A", "retention") == "another_cue_between"


def test_practice_alone_between_does_not_spoil_it() -> None:
    """A session of practice alone without an opening lets the next opening count."""
    derived = derive(visit("b A o"), visit("p", day=2), visit("b", day=4))
    assert find_change(derived, "A", "retention").days == 4


def test_practice_on_the_same_day_with_an_opening_of_its_own_ends_it() -> None:
    """Else the same days would be counted twice, for the cue and for practice alone."""
    derived = derive(visit("b A o"), at(6, "b p o"), visit("b", day=4))
    assert find_reason(derived, "A", "retention") == "practice_again_too_soon"
    assert find_change(derived, None, "retention").days == pytest.approx(3.75)


def test_a_test_on_the_same_day_is_passed_over() -> None:
    """A mere measure some hours later is too soon, and the next opening counts."""
    derived = derive(visit("b A o"), at(6, "b"), visit("b", day=4))
    assert find_change(derived, "A", "retention").days == 4


def test_a_cue_said_twice_is_one_cue_of_the_session() -> None:
    """Weights are 1/m over distinct cues; practice alone in a cued session adds nothing."""
    derived = derive(visit("b A o B o A o p o"), visit("b", day=7))
    (change,) = [one for one in derived.changes if one.contrast == "retention"]
    assert change.cue_weights == (("A", 0.5), ("B", 0.5))
    assert find_reason(derived, None, "retention") == "practice_in_a_cued_session"
    assert find_reason(derived, "B", "retention") == "counted_with_the_session"


def test_a_session_of_practice_alone_is_the_reference() -> None:
    """It gives retention by the same rule and belongs to no cue."""
    derived = derive(visit("b p o"), visit("b", day=7))
    change = find_change(derived, None, "retention")
    assert (change.cue_weights, change.days) == ((), 7)


def test_a_session_with_a_cue_not_known_gives_no_record() -> None:
    """Which cue the record belongs to could not be said."""
    session = visit("b A o p")
    last = replace(session.blocks[3], others="unknown")
    derived = derive(replace(session, blocks=(*session.blocks[:3], last)), visit("b", day=7))
    assert find_reason(derived, "A", "retention") == "cue_not_known"


def test_marks_of_all_cues_of_the_session_stay_on_the_record() -> None:
    """A second cue given among other cues marks the record it shares."""
    session = visit("b A o B o")
    marked = replace(session.blocks[3], others="some")
    blocks = (*session.blocks[:3], marked, session.blocks[4])
    derived = derive(replace(session, blocks=blocks), visit("b", day=7))
    assert "others" in find_change(derived, "B", "retention").flags
    assert "others" not in find_change(derived, "A", "immediate").flags


def test_a_session_among_many_other_cues_gives_no_record() -> None:
    """It is left out of the ranking and kept on the learner's own page."""
    session = visit("b A o B o")
    many = replace(session.blocks[3], others="many")
    days = (
        replace(session, blocks=(*session.blocks[:3], many, session.blocks[4])),
        visit("b", day=7),
    )
    assert find_reason(derive(*days), "A", "retention") == "many_other_cues"
    assert find_reason(derive(*days), "B", "immediate") == "many_other_cues"
    own = derive(*days, only_learner="ann")
    assert list_changes(own, "immediate") == {"A": 2, "B": 2}
    assert find_change(own, "B", "retention").days == 7


def test_one_session_ends_one_record_and_begins_the_next() -> None:
    """Several sessions may each serve once as before and once as after."""
    derived = derive(visit("b A o"), visit("b B o", day=7), visit("b", day=14))
    assert list_changes(derived, "retention") == {"A": 70, "B": 70}


def test_only_a_measure_at_the_same_beat_is_the_next_opening() -> None:
    """Within 10 % of the tempo counts as the same; another tempo or place is another key."""

    def opening(name: str, day: float, **facts: Any) -> LoggedSession:
        measured = block(f"{name}/1", "b", 1, values=[day], **facts)
        return LoggedSession(name, START + timedelta(days=day), (measured,))

    first = LoggedSession(
        "first",
        START,
        (
            block("first/1", "b", 1, values=[0.0], tempo=60.0),
            block("first/2", "A", 2, tempo=60.0),
        ),
    )
    derived = derive(
        first,
        opening("faster", 2, tempo=90.0),
        opening("outdoors", 3, tempo=60.0, conditions=(("place", "outdoors"),)),
        opening("same", 4, tempo=64.0),
    )
    assert find_change(derived, "A", "retention").days == 4


def test_a_session_not_to_be_used_is_no_opening_but_its_cues_count() -> None:
    """Its values are left out; a cue given in it still came between."""
    skipped = derive(visit("b A o"), visit("b", day=2, do_not_use=True), visit("b", day=4))
    assert find_change(skipped, "A", "retention").days == 4
    spoiled = derive(visit("b A o"), visit("b B o", day=2, do_not_use=True), visit("b", day=4))
    assert find_reason(spoiled, "A", "retention") == "another_cue_between"
    assert find_reason(spoiled, "B", "immediate") == "session_not_to_be_used"


def test_practice_alone_needs_an_opening_before_it() -> None:
    """For the reference, practice takes the place of the cue: a measure after it is no opening."""
    derived = derive(visit("p o"), visit("b", day=7))
    assert find_reason(derived, None, "retention") == "session_began_with_cue"
    cued = derive(visit("p o A o"), visit("b", day=7))
    assert find_change(cued, "A", "retention").difference == 71 - 2
