"""Transfer: another tempo, place, load or task, measured before any cue and after the use."""

from __future__ import annotations

from dataclasses import replace
from datetime import timedelta
from typing import Any

from support.practice_logs import (
    START,
    block,
    derive,
    find_change,
    find_reason,
    list_changes,
)

from cuebook.practice.log import LoggedSession

OUTDOORS = (("place", "outdoors"),)


def meet(signs: str, day: float = 0, **facts: Any) -> LoggedSession:
    """Return a session; y is a baseline and x a test in the transfer place, t another task's cue.

    Each measure reads its place (from 1) plus 10 a day.
    """
    blocks = []
    for number, sign in enumerate(signs.split(), start=1):
        name = f"day-{day:g}/{number}"
        value = [number + 10.0 * day]
        if sign in "xy":
            phase = "x" if sign == "x" else "b"
            given = {"conditions": OUTDOORS, **facts}
            blocks.append(block(name, phase, number, values=value, **given))
        elif sign == "t":
            blocks.append(block(name, "C", number, task="wiping"))
        else:
            blocks.append(block(name, sign, number, values=value if sign in "bo" else ()))
    return LoggedSession(f"day-{day:g}", START + timedelta(days=day), tuple(blocks))


def test_transfer_on_the_same_day() -> None:
    """Measured there before the cue and after it, in one session."""
    derived = derive(meet("b y A o x"))
    change = find_change(derived, "A", "transfer")
    assert (change.difference, change.days, change.key.conditions) == (5 - 2, 0, OUTDOORS)
    assert find_reason(derived, "A", "transfer_later") == "measured_on_the_other_occasion"


def test_transfer_on_a_later_day_is_another_contrast() -> None:
    """The first transfer test of a later session, if no practice came between."""
    derived = derive(meet("b y A o"), meet("x", day=3))
    change = find_change(derived, "A", "transfer_later")
    assert (change.difference, change.days) == (31 - 2, 3)
    assert find_reason(derived, "A", "transfer") == "measured_on_the_other_occasion"


def test_both_occasions_give_a_change_each() -> None:
    """Same-day and later-day are two contrasts, each with its own first test."""
    derived = derive(meet("b y A o x"), meet("x x", day=3))
    assert list_changes(derived, "transfer") == {"A": 5 - 2}
    assert list_changes(derived, "transfer_later") == {"A": 31 - 2}


def test_a_second_session_on_the_same_day_is_not_a_later_day() -> None:
    """The calendar day decides, not the session."""
    evening = replace(meet("x", day=1), started_at=START + timedelta(hours=6))
    assert list_changes(derive(meet("b y A o"), evening), "transfer") == {"A": 11 - 2}


def test_never_measured_there_before() -> None:
    """Without a set in the transfer place before the cue there is nothing to compare with."""
    derived = derive(meet("b A o x"))
    assert find_reason(derived, "A", "transfer") == "never_measured_there_before"


def test_a_measure_there_after_the_cue_is_no_before() -> None:
    """The before stands before the cue, not between the cue and the test."""
    derived = derive(meet("b A y x"))
    assert find_reason(derived, "A", "transfer") == "never_measured_there_before"


def test_the_before_may_be_an_earlier_session_within_28_days() -> None:
    """Up to 28 days earlier, with no cue on either task between."""
    near = derive(meet("y", day=0), meet("b A o x", day=28))
    assert list_changes(near, "transfer") == {"A": 284 - 1}
    far = derive(meet("y", day=0), meet("b A o x", day=29))
    assert find_reason(far, "A", "transfer") == "never_measured_there_before"
    cued = derive(meet("y", day=0), meet("B", day=1), meet("b A o x", day=2))
    assert find_reason(cued, "A", "transfer") == "never_measured_there_before"


def test_a_test_later_than_28_days_is_none() -> None:
    """The after-set comes at most 28 days later."""
    assert list_changes(derive(meet("y A"), meet("x", day=28)), "transfer_later") == {"A": 280}
    late = derive(meet("b y A o"), meet("x", day=29))
    assert find_reason(late, "A", "transfer_later") == "no_transfer_measure"


def test_another_practice_before_the_test_ends_it() -> None:
    """Another cue, practice alone, or a cue on another task: the test is not this cue's alone."""
    for signs in ("b y A o B o x", "b y A o p o x", "b y A o t x"):
        derived = derive(meet(signs))
        assert find_reason(derived, "A", "transfer") == "no_transfer_measure"


def test_a_second_cue_of_the_session_has_no_transfer() -> None:
    """Its before would stand before both cues, and the two could not be told apart."""
    derived = derive(meet("b y A x B x"))
    assert list_changes(derived, "transfer") == {"A": 4 - 2}
    assert find_reason(derived, "B", "transfer") == "never_measured_there_before"


def test_a_test_in_the_same_key_is_no_transfer() -> None:
    """Where nothing differs from the practice, the label alone makes no transfer."""
    derived = derive(meet("b y A o x", conditions=()))
    assert find_reason(derived, "A", "transfer") == "no_transfer_measure"


def test_another_tempo_is_a_transfer() -> None:
    """A beat of 90 where none was set is another key; the set before needs that beat too."""
    session = meet("b y A o x", tempo=90.0, conditions=())
    assert find_change(derive(session), "A", "transfer").key.tempo == "90"
    slower = replace(session.blocks[1], tempo=60.0)
    derived = derive(replace(session, blocks=(session.blocks[0], slower, *session.blocks[2:])))
    assert find_reason(derived, "A", "transfer") == "never_measured_there_before"


def test_practice_alone_is_the_reference_by_the_same_rule() -> None:
    """Practice takes the place of the cue: a second practice has no before of its own."""
    derived = derive(meet("b y p o x p o x"))
    assert [one.difference for one in derived.changes if one.contrast == "transfer"] == [5 - 2]


def test_a_new_task_can_be_the_transfer() -> None:
    """A transfer test on another task, measured there before, counts for the cue."""
    session = LoggedSession(
        "one",
        START,
        (
            block("one/1", "b", 1, values=[1.0], task="wiping"),
            block("one/2", "A", 2),
            block("one/3", "x", 3, values=[4.0], task="wiping"),
        ),
    )
    change = find_change(derive(session), "A", "transfer")
    assert (change.difference, change.key.task, change.use.task) == (3, "wiping", "reaching")
