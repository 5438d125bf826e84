"""Every use gives, for every contrast, a change or exactly one reason."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import replace
from datetime import timedelta
from itertools import count, pairwise
from typing import TypeVar

from hypothesis import given, settings
from hypothesis import strategies as st
from support.practice_logs import (
    METRIC,
    SCALE,
    START,
    attempt,
    block,
    count_answers,
    list_changes,
    make_log,
    visit,
)

from cuebook.practice.derive import derive_changes
from cuebook.practice.log import LoggedBlock, LoggedSession, PracticeLog

LEARNERS = ("ann", "ben", "cat")
OUTDOORS = (("place", "outdoors"),)
T = TypeVar("T")


def draw_usually(draw: st.DrawFn, usual: T, *rare: T) -> T:
    """Draw the usual case mostly: where every fact were as likely as not, no set would match."""
    place = draw(st.integers(0, 13 * len(rare)))
    return rare[place % len(rare)] if place >= 12 * len(rare) else usual


@st.composite
def draw_block(draw: st.DrawFn, name: str, number: int) -> LoggedBlock:
    """Draw any block a user could log."""
    sign = draw(st.sampled_from(["b", "b", "o", "o", "p", "A", "A", "B", "r", "x"]))
    learners = draw_usually(draw, LEARNERS[:2], LEARNERS, LEARNERS[:1], LEARNERS[1:])
    values = {
        learner: draw_usually(
            draw, draw(st.lists(st.floats(-5, 5), min_size=1, max_size=3)), list[float]()
        )
        for learner in learners
    }
    tempo: float | None = None
    conditions: tuple[tuple[str, str], ...] = ()
    if draw(st.booleans()) and sign in "bx":
        conditions = OUTDOORS  # a place to transfer to
    return block(
        name,
        sign,
        number,
        learners=learners,
        values=values,
        stopped=[one for one in learners if draw_usually(draw, False, True)],
        task=draw_usually(draw, "reaching", "wiping"),
        others=draw_usually(draw, "none", "some", "many", "unknown"),
        tempo=draw_usually(draw, tempo, 60.0, 63.0, 90.0),
        conditions=draw_usually(draw, conditions, (("side", "left"),), OUTDOORS),
        event=draw_usually(draw, None, "monday:1"),
    )


@st.composite
def draw_log(draw: st.DrawFn) -> PracticeLog:
    """Draw any log a user could make."""
    sessions = []
    day = 0.0
    for place in range(draw(st.integers(1, 4))):
        day += draw(st.sampled_from([1.0, 0.2, 3.0, 30.0]))
        n_blocks = draw(st.integers(1, 8))
        blocks = tuple(
            draw(draw_block(f"s{place}/{number}", number)) for number in range(1, n_blocks + 1)
        )
        started_at = START + timedelta(days=day)
        do_not_use = draw_usually(draw, False, True)
        sessions.append(LoggedSession(f"s{place}", started_at, blocks, do_not_use=do_not_use))
    barred = draw_usually(draw, [], [LEARNERS[0]])
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
    session = visit("b A o")
    part = session.blocks[2].participations[0]
    spoiled = replace(
        part,
        values={METRIC: (attempt(9.0, is_valid=False), attempt(8.0, is_after_stop=True))},
    )
    blocks = (*session.blocks[:2], replace(session.blocks[2], participations=(spoiled,)))
    derived = derive_changes(make_log(replace(session, blocks=blocks)), METRIC, SCALE)
    assert list_changes(derived, "immediate") == {}


def number_values(log: PracticeLog) -> PracticeLog:
    """Replace every measured block's values by one: its place in time, which then names the set."""
    places = count(1)
    sessions = []
    for session in sorted(log.sessions, key=lambda one: one.started_at):
        blocks = []
        for one in sorted(session.blocks, key=lambda one: one.number):
            place = float(next(places))
            parts = tuple(
                replace(part, values={METRIC: (attempt(place),)}) if part.values else part
                for part in one.participations
            )
            blocks.append(replace(one, participations=parts))
        sessions.append(replace(session, blocks=tuple(blocks)))
    return PracticeLog(log.learners, tuple(sessions))


@settings(max_examples=400)
@given(draw_log())
def test_intervals_of_one_contrast_never_overlap(log: PracticeLog) -> None:
    """From before to after, changes of one learner, contrast and key may touch, never overlap."""
    derived = derive_changes(number_values(log), METRIC, SCALE)
    spans = defaultdict(list)
    for change in derived.changes:
        assert change.before.mean < change.after.mean
        named = (change.use.learner, change.contrast, change.key)
        spans[named].append((change.before.mean, change.after.mean))
    for listed in spans.values():
        for (_, ended), (began, _) in pairwise(sorted(listed)):
            assert ended <= began


@given(draw_log())
def test_uses_are_met_once_and_k_counts_up(log: PracticeLog) -> None:
    """Every use has an own name, and k is 1, 2, … within learner, session, task, side and aid."""
    uses = derive_changes(log, METRIC, SCALE).uses
    assert len({use.use for use in uses}) == len(uses)
    sides = {one.block: one.conditions for session in log.sessions for one in session.blocks}
    runs = defaultdict(list)
    for use in uses:
        side = dict(sides[use.use.partition(":")[0]]).get("side")
        runs[use.learner, use.session, use.task, side].append(use.k)
    for ks in runs.values():
        assert ks == list(range(1, len(ks) + 1))


@given(draw_log())
def test_a_use_that_is_stopped_changes_nothing(log: PracticeLog) -> None:
    """No change of any contrast comes from a stopped use, and each stop is counted as a harm."""
    derived = derive_changes(log, METRIC, SCALE)
    assert not any(change.use.stop_reason for change in derived.changes)
    stopped = sum(use.stop_reason is not None for use in derived.uses)
    assert stopped == sum(sum(tally.stops.values()) for tally in derived.harms.values())
    assert len(derived.uses) == sum(tally.uses for tally in derived.harms.values())
