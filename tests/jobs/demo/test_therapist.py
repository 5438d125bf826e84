from __future__ import annotations

from collections import Counter, deque
from datetime import UTC, datetime

import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.jobs.demo.plan import DemoSchedule
from cuebook.jobs.demo.streams import open_stream
from cuebook.jobs.demo.therapist import Choice, Therapist, draw_schedule, make_agenda

ROUND = ["", "", "cue-a", "cue-b", "cue-c", "cue-d"]


def draw(seed: int, slots: int = 18) -> DemoSchedule:
    """Return a drawn order of one learner."""
    return draw_schedule("button-lake", ROUND, slots, seed, datetime(2025, 3, 3, 8, tzinfo=UTC))


@given(seed=st.integers(0, 10_000))
def test_every_round_holds_every_condition(seed: int) -> None:
    """A drawn order is a shuffle of the same six slots, again and again."""
    schedule = draw(seed)
    assert schedule.arms == (None, "cue-a", "cue-b", "cue-c", "cue-d")
    for first in (0, 6, 12):
        one_round = Counter(cue or "" for cue in schedule.slots[first : first + 6])
        assert one_round == Counter(ROUND)


def test_a_drawn_order_can_be_drawn_again() -> None:
    """The stored seed and rule give the stored slots."""
    assert draw(7).slots == draw(7).slots
    assert len({draw(seed).slots for seed in range(20)}) == 20


def test_places_in_a_round_are_equally_likely() -> None:
    """No condition has a favourite place: a third of first slots are without a cue."""
    first = Counter(draw(seed, 6).slots[0] for seed in range(3000))
    assert first[None] / 3000 == pytest.approx(2 / 6, abs=0.03)
    assert first["cue-a"] / 3000 == pytest.approx(1 / 6, abs=0.025)


@given(seed=st.integers(0, 10_000))
def test_own_choices_do_not_disturb_the_drawn_order(seed: int) -> None:
    """Strewn with own choices, the slots still come one after the other."""
    own = {"cue-x": {"button-lake": 3}, "": {"button-lake": 1, "maple-coin": 5}}
    agenda = make_agenda(draw(seed), own, {"cue-x": ["button-lake"]}, open_stream(seed, "agenda"))
    assert [one.slot for one in agenda if one.slot is not None] == list(range(18))
    why = Counter((one.cue, one.chosen) for one in agenda if one.slot is None)
    assert why == Counter({("cue-x", "learner_asked"): 3, (None, "planned"): 1})


def make_therapist(trap_cue: str | None = "trap") -> Therapist:
    """Return a therapist who always notices a bad day and has three ordinary sets in mind."""
    agenda = deque([Choice("cue-a", "random", 0)])
    return Therapist(agenda, trap_cue, -1.0, 1.0, open_stream(1, "test"), seen=[0.0, 0.1, -0.1])


def test_a_bad_day_puts_the_drawn_slot_off() -> None:
    """When it goes badly the trap cue is reached for, and the slot stays next in line."""
    therapist = make_therapist()
    assert therapist.choose([-1.5, -2.0, -1.0]) == Choice("trap", "going_badly")
    assert therapist.choose([0.0, 0.2, 0.1]) == Choice("cue-a", "random", 0)


def test_a_learner_without_images_never_gets_the_trap_image() -> None:
    """Where images do not reach, a bad day changes nothing."""
    assert make_therapist(None).choose([-3.0]) == Choice("cue-a", "random", 0)


def test_an_empty_agenda_means_practice_without_a_cue() -> None:
    """When nothing is left to give, there is practice alone."""
    therapist = make_therapist()
    therapist.agenda.clear()
    assert therapist.choose([0.0]) == Choice(None, "planned")
