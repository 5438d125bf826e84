from __future__ import annotations

import re

import pytest

from cuebook.jobs.demo.people import SETTINGS, DemoLearner, list_members, read_learners
from cuebook.vocabulary import load_vocabulary

LEARNERS = read_learners()


def test_three_settings_of_eight() -> None:
    """Each setting has eight learners, and nobody is in two."""
    assert [len(list_members(setting)) for setting in SETTINGS] == [8, 8, 8]
    assert len({learner.code for learner in LEARNERS}) == 24


def test_two_learners_did_not_agree_to_be_ranked() -> None:
    """Exactly two must be missing from every ranking."""
    left_out = [learner.code for learner in LEARNERS if not learner.may_be_ranked]
    assert left_out == ["saddle-moss", "spoon-cloud"]


def test_no_answer_is_a_no() -> None:
    """Only a yes lets somebody into the ranking."""
    answers = {learner.consents["use_for_ranking"]: learner.may_be_ranked for learner in LEARNERS}
    assert answers == {"yes": True, "no": False}
    assert all("not_asked" in learner.consents.values() for learner in LEARNERS)


def test_three_learners_are_on_hold_for_some_tasks() -> None:
    """A hold stops its tasks and no other."""
    held = {one.code: one.hold.tasks for one in LEARNERS if one.hold}
    assert set(held) == {"willow-drum", "anchor-plum", "candle-rook"}
    jumper = next(one for one in LEARNERS if one.code == "anchor-plum")
    assert jumper.is_held("jumping_landing")
    assert not jumper.is_held("rowing_stroke")


@pytest.mark.parametrize("learner", LEARNERS, ids=lambda one: one.code)
def test_learners_are_described_in_the_vocabulary(learner: DemoLearner) -> None:
    """Every slug of a learner is one the program knows."""
    words = load_vocabulary()
    assert words.has("age_band", learner.age_band)
    assert words.has("experience", learner.experience)
    assert all(words.has("background", slug) for slug in learner.backgrounds)
    assert all(words.has("access_need", slug) for slug in learner.access_needs)
    assert learner.safety_note is None or words.has("safety_note", learner.safety_note)
    assert learner.show_once is None or words.has("safety_action", learner.show_once)
    assert all(words.has("consent_item", item) for item in learner.consents)
    assert all(words.has("consent_answer", answer) for answer in learner.consents.values())
    assert words.has("consent_giver", learner.consent_given_by)
    assert words.has("consent_how", learner.consent_how)
    assert words.has("assent", learner.assent)
    assert words.task(learner.goal.task).slug == learner.goal.task
    assert words.has("feature", learner.goal.feature)
    assert all(words.task(task) for task in (learner.hold.tasks if learner.hold else ()))


def test_codes_are_two_plain_words() -> None:
    """Nobody is named: a code is two words and no initials, date or number."""
    assert all(re.fullmatch(r"[a-z]{3,}-[a-z]{3,}", learner.code) for learner in LEARNERS)
