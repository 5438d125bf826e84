from __future__ import annotations

import math
from dataclasses import replace

import pytest

from cuebook.jobs.demo.course import Course
from cuebook.jobs.demo.truth import CueTruth, LatentTruth, Truth, read_truth

QUIET = LatentTruth(
    name="smoothness",
    task="reaching",
    base={"button-lake": 1.0},
    attempt_sd=0.0,
    set_sd=0.0,
    response_sd=0.0,
    day_sd=0.0,
    practice_gain=0.3,
    practice_sd=0.0,
    fatigue=-0.1,
    learning=0.5,
    kept_after_rest=0.5,
)
CUE = CueTruth("a-cue", "reaching", "best", {"smoothness": 1.0}, kept_share=0.4)


def begin_course(latent: LatentTruth = QUIET) -> Course:
    """Return a course without any chance in it, its first visit begun."""
    truth: Truth = replace(read_truth(), latents={latent.name: latent})
    course = Course(truth, "reaching", "button-lake", seed=1)
    course.open_visit()
    return course


def see(course: Course) -> float:
    """Return where the latent stands now."""
    return course.measure(1)[0]["smoothness"]


def test_practice_alone_helps_a_little() -> None:
    """A block without a cue shifts the learner by the practice gain and no more."""
    course = begin_course()
    assert see(course) == pytest.approx(1.0)
    course.practise(None)
    assert see(course) == pytest.approx(1.3)


def test_a_cue_adds_its_effect_to_practice() -> None:
    """Practice and cue add up; a further block of the visit gives a little less."""
    course = begin_course()
    course.practise(CUE)
    assert see(course) == pytest.approx(1.0 + 0.3 + 1.0)
    course.practise(None)
    assert see(course) == pytest.approx(1.0 + 0.3 + 1.0 + 0.2)


def test_rest_takes_part_of_it() -> None:
    """After a rest the planned share of the shift is left."""
    course = begin_course()
    course.practise(CUE)
    course.rest()
    assert see(course) == pytest.approx(1.0 + 0.5 * 1.3)


def test_the_next_visit_keeps_only_what_was_kept() -> None:
    """At the next opening there is learning and the kept share, and then that fades."""
    course = begin_course()
    course.practise(CUE)
    course.open_visit()
    assert see(course) == pytest.approx(1.0 + 0.5 * math.log(2) + 0.4)
    course.open_visit()
    assert see(course) == pytest.approx(1.0 + 0.5 * math.log(3) + 0.4 * 0.5)


def test_a_cue_that_leaves_nothing_is_gone_at_the_next_visit() -> None:
    """Strong at once and gone at the next opening is what a kept share of 0 means."""
    course = begin_course()
    course.practise(replace(CUE, kept_share=0.0))
    assert see(course) == pytest.approx(2.3)
    course.open_visit()
    assert see(course) == pytest.approx(1.0 + 0.5 * math.log(2))


def test_an_effect_of_ones_own_replaces_the_common_one() -> None:
    """A learner with an effect of their own gets that, whatever the others get."""
    cue = replace(CUE, learner_effects={"button-lake": {"smoothness": -0.7}})
    course = begin_course()
    course.practise(cue)
    assert see(course) == pytest.approx(1.0 + 0.3 - 0.7)


def test_a_learner_answers_a_cue_alike_every_time() -> None:
    """The own answer of a pair is drawn once, not with each use."""
    course = begin_course(replace(QUIET, attempt_sd=1.0, fatigue=0.0))
    before = [latent.carry for latent in course._latents.values()]
    course.practise(CUE)
    first = [latent.carry for latent in course._latents.values()]
    course.practise(CUE)
    second = [latent.carry for latent in course._latents.values()]
    assert first[0] - before[0] != pytest.approx(1.3)
    assert second[0] - first[0] == pytest.approx(first[0] - before[0])


def test_attempts_spread_as_planned() -> None:
    """Attempts of a set spread around the learner's state by the attempt SD."""
    course = begin_course(replace(QUIET, attempt_sd=2.0))
    values = [state["smoothness"] for state in course.measure(20_000)]
    mean = sum(values) / len(values)
    spread = math.sqrt(sum((value - mean) ** 2 for value in values) / (len(values) - 1))
    assert mean == pytest.approx(1.0, abs=0.05)
    assert spread == pytest.approx(2.0, rel=0.02)
