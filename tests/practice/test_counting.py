"""Every use gives, for every contrast, a change or exactly one reason."""

from __future__ import annotations

from dataclasses import replace
from datetime import timedelta

from hypothesis import given
from hypothesis import strategies as st
from support.practice_logs import (
    METRIC,
    SCALE,
    START,
    block,
    count_answers,
    list_changes,
    make_log,
)

from cuebook.practice.derive import derive_changes
from cuebook.practice.log import LoggedBlock, LoggedSession, PracticeLog

LEARNERS = ("ann", "ben", "cat")


@st.composite
def draw_block(draw: st.DrawFn, name: str, number: int) -> LoggedBlock:
    """Draw any block a user could log."""
    sign = draw(st.sampled_from(["b", "b", "o", "o", "p", "A", "A", "B", "r", "x"]))
    learners = draw(st.lists(st.sampled_from(LEARNERS), min_size=1, unique=True))
    values = {
        learner: draw(st.lists(st.floats(-5, 5), max_size=3))
        for learner in learners
        if draw(st.booleans())
    }
    return block(
        name,
        sign,
        number,
        learners=learners,
        values=values,
        stopped=[one for one in learners if draw(st.integers(0, 9)) == 0],
        task=draw(st.sampled_from(["reaching", "reaching", "wiping"])),
        others=draw(st.sampled_from(["none", "none", "none", "some", "many", "unknown"])),
        tempo=draw(st.sampled_from([None, None, 60.0, 63.0, 90.0])),
        event=draw(st.sampled_from([None, "monday:1"])),
    )


@st.composite
def draw_log(draw: st.DrawFn) -> PracticeLog:
    """Draw any log a user could make."""
    sessions = []
    day = 0.0
    for place in range(draw(st.integers(1, 5))):
        day += draw(st.sampled_from([0.2, 1.0, 3.0, 30.0]))
        blocks = tuple(
            draw(draw_block(f"s{place}/{number}", number))
            for number in range(1, draw(st.integers(1, 7)) + 1)
        )
        sessions.append(
            LoggedSession(
                f"s{place}",
                START + timedelta(days=day),
                blocks,
                do_not_use=draw(st.integers(0, 9)) == 0,
            )
        )
    barred = draw(st.lists(st.sampled_from(LEARNERS), max_size=1))
    return make_log(*sessions, without_consent=barred)


@given(draw_log())
def test_every_use_has_for_every_contrast_a_change_or_exactly_one_reason(
    log: PracticeLog,
) -> None:
    """The counts add up, whatever was logged."""
    derived = derive_changes(log, METRIC, SCALE)
    for changes, reasons in count_answers(derived).values():
        assert (changes, reasons) in {(1, 0), (0, 1)}


@given(draw_log(), st.randoms(use_true_random=False))
def test_the_order_of_entry_does_not_matter(log: PracticeLog, random: object) -> None:
    """Order and days follow when things happened, never when they were entered."""
    sessions = list(log.sessions)
    random.shuffle(sessions)  # type: ignore[attr-defined]
    mixed = [replace(one, blocks=tuple(reversed(one.blocks))) for one in sessions]
    again = derive_changes(PracticeLog(log.learners, tuple(mixed)), METRIC, SCALE)
    assert again == derive_changes(log, METRIC, SCALE)


@given(draw_log())
def test_learners_without_consent_change_nothing(log: PracticeLog) -> None:
    """What a learner who did not agree did leaves every number as it is."""
    derived = derive_changes(log, METRIC, SCALE)
    barred = {code for code, learner in log.learners.items() if not learner.may_be_ranked}
    assert not any(use.learner in barred for use in derived.uses)
    without = [
        replace(
            session,
            blocks=tuple(
                replace(
                    one,
                    participations=tuple(
                        part for part in one.participations if part.learner not in barred
                    ),
                )
                for one in session.blocks
            ),
        )
        for session in log.sessions
    ]
    alone = derive_changes(PracticeLog(log.learners, tuple(without)), METRIC, SCALE)
    assert (alone.changes, alone.without, alone.harms) == (
        derived.changes,
        derived.without,
        derived.harms,
    )


def test_an_invalid_attempt_is_no_value() -> None:
    """What the user marked invalid, or was made after a stop, is not used."""
    from support.practice_logs import attempt, visit  # noqa: PLC0415

    session = visit("b A o")
    part = session.blocks[2].participations[0]
    spoiled = replace(
        part,
        values={METRIC: (attempt(9.0, is_valid=False), attempt(8.0, is_after_stop=True))},
    )
    blocks = (*session.blocks[:2], replace(session.blocks[2], participations=(spoiled,)))
    derived = derive_changes(make_log(replace(session, blocks=blocks)), METRIC, SCALE)
    assert list_changes(derived, "immediate") == {}
