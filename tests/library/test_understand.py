from __future__ import annotations

import csv
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.library.understand import Understanding, understand
from cuebook.vocabulary import load_vocabulary

OWN_WORDS = (
    "not,no,never,without,used,to,any,more,but,and,left,knee,foot,tiny,steps,shuffles,wobbles,"
    "jerky,smooth,late,balance,fine,good,doesn't,can't,stop,walk,reach,row,beat,;,."
)
OWN_PROBLEMS = Path(__file__).parent / "data" / "problems_own.csv"


def read_problems() -> list[dict[str, str]]:
    """Return the sentences written for these tests, with the features and task they are about."""
    with OWN_PROBLEMS.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def get_features(problem: str) -> list[str]:
    """Return the features of a problem, surest first."""
    return [feature.slug for feature in understand(problem).features]


def get_tasks(problem: str) -> list[str]:
    """Return the tasks of a problem, surest first."""
    return [task.slug for task in understand(problem).tasks]


def test_most_problems_lead_to_a_right_feature_among_the_first_three() -> None:
    """Nine in ten of our own sentences name a right feature in the first three."""
    problems = read_problems()
    right = [
        bool(set(row["features"].split(";")) & set(get_features(row["problem"])[:3]))
        for row in problems
    ]
    assert sum(right) / len(problems) >= 0.9


def test_most_problems_lead_to_the_right_task() -> None:
    """Nine in ten of our own sentences that are about one task put that task first."""
    problems = [row for row in read_problems() if row["task"]]
    right = [get_tasks(row["problem"])[:1] == [row["task"]] for row in problems]
    assert sum(right) / len(problems) >= 0.9


def test_small_steps_are_about_step_length_in_walking() -> None:
    """Tiny shuffling steps are understood: step length first, walking first."""
    understood = understand("Takes tiny steps and shuffles down the corridor")
    assert understood.features[0].slug == "step_length"
    assert understood.tasks[0].slug == "walking"
    assert "tiny" in understood.features[0].words
    assert {region.slug for region in understood.regions} >= {"leg", "foot"}


@pytest.mark.parametrize(
    ("problem", "gone"),
    [
        ("She no longer shuffles", "step_length"),
        ("He doesn't wobble any more", "balance"),
        ("Never jerky now", "smoothness"),
        ("used to slump at the desk", "posture"),
        ("has stopped dragging the toes", "foot_clearance"),
        ("Has got rid of the limp", "symmetry"),
    ],
)
def test_what_is_no_longer_so_is_not_the_problem(problem: str, gone: str) -> None:
    """A fault that is denied, or over, is named as resolved and not looked up."""
    understood = understand(problem)
    assert gone not in {feature.slug for feature in understood.features}
    assert gone in understood.resolved


@pytest.mark.parametrize(
    ("problem", "feature"),
    [
        ("The reach is not smooth", "smoothness"),
        ("can't stand without wobbling", "balance"),
        ("he doesn't stop wobbling", "balance"),
        ("not only wobbles, falls over too", "balance"),
        ("can't help leaning the trunk forward to reach", "trunk_control"),
        ("the arm doesn't swing any more", "range"),
        ("no rhythm at all", "rhythm"),
        ("her toes don't clear the step", "foot_clearance"),
    ],
)
def test_a_not_that_belongs_to_the_trouble_does_not_take_it_away(
    problem: str, feature: str
) -> None:
    """Denying a wanted quality, or denying twice, leaves the trouble where it is."""
    assert feature in get_features(problem)[:3]


def test_what_is_praised_is_not_the_problem() -> None:
    """A sentence that praises one thing and then finds fault is about the fault."""
    understood = understand("Lovely balance, but always late on the beat")
    assert understood.features[0].slug == "timing"
    assert "balance" not in {feature.slug for feature in understood.features}


@pytest.mark.parametrize(
    ("slipped", "meant"),
    [
        ("stumbels over kerbs", "stumbles over kerbs"),
        ("unsteddy on one leg", "unsteady on one leg"),
        ("shufles and drags the tose", "shuffles and drags the toes"),
        ("his rythm is uneven", "his rhythm is uneven"),
    ],
)
def test_typing_slips_change_nothing_in_what_is_understood(slipped: str, meant: str) -> None:
    """A mistyped word of the vocabulary is read as the word it was meant to be."""
    assert get_features(slipped)[:2] == get_features(meant)[:2]


@pytest.mark.parametrize("word", ["stairs", "choir", "flock", "shady", "packing", "marsh"])
def test_a_plain_word_is_not_bent_into_one_of_ours(word: str) -> None:
    """A common word that merely looks like a lay word leads nowhere by its looks."""
    features = understand(f"all about the {word}").features
    assert all(feature.score < 0.3 for feature in features)


@pytest.mark.parametrize(
    ("problem", "side"),
    [
        ("Her left foot hits the floor harder than the right one", "left"),
        ("right shoulder hikes", "right"),
        ("both hands are late", "both"),
        ("the hands are late", None),
    ],
)
def test_the_side_in_trouble_is_the_one_named_first(problem: str, side: str | None) -> None:
    """The side is read from the sentence, and stays open if none is named."""
    assert understand(problem).side == side


def test_rate_words_are_kept_as_words() -> None:
    """Slow and fast are noted as rate words, whatever features they lead to."""
    assert understand("fine when slow, falls apart at full speed").rate_words == ("slow", "fast")


@pytest.mark.parametrize(
    ("problem", "feature", "region"),
    [
        ("dynamic knee valgus", "alignment", "knee"),
        ("festination", "tempo", "leg"),
        ("dysmetria on the left", "accuracy", "arm"),
        ("Trendelenburg sign", "alignment", "pelvis"),
        ("shooting the slide", "sequencing", "pelvis"),
    ],
)
def test_trade_terms_are_understood(problem: str, feature: str, region: str) -> None:
    """A term of the trade leads to its features and region."""
    understood = understand(problem)
    assert feature in get_features(problem)[:3]
    assert region in {scored.slug for scored in understood.regions}


@pytest.mark.parametrize("nothing", ["", "   ", "?!", "qqq zzz", "the and of"])
def test_nothing_said_is_nothing_understood(nothing: str) -> None:
    """An empty or meaningless sentence is understood as nothing, not as a guess."""
    assert understand(nothing).is_empty


def check_shape(understood: Understanding) -> None:
    """Check what holds for every understanding whatever."""
    vocabulary = load_vocabulary()
    for name, scored in (
        ("feature", understood.features),
        ("region", understood.regions),
        ("task", understood.tasks),
    ):
        scores = [item.score for item in scored]
        assert scores == sorted(scores, reverse=True)
        assert all(0 < score <= 1 for score in scores)
        assert len({item.slug for item in scored}) == len(scored)
        assert all(vocabulary.has(name, item.slug) for item in scored)


@given(st.text(max_size=400))
def test_any_text_is_understood_without_an_error(text: str) -> None:
    """Whatever is typed, an answer of the right shape comes back."""
    check_shape(understand(text))


@given(
    st.lists(
        st.sampled_from(OWN_WORDS.split(",")),
        max_size=25,
    )
)
def test_any_string_of_our_own_words_is_understood_without_an_error(words: list[str]) -> None:
    """Whatever order lay words, negations and praise come in, the answer keeps its shape."""
    check_shape(understand(" ".join(words)))


@given(st.sampled_from([row["problem"] for row in read_problems()]))
def test_case_and_spaces_do_not_change_what_is_understood(problem: str) -> None:
    """Capitals and extra spaces are no part of the meaning."""
    assert understand(problem.upper().replace(" ", "  ")) == understand(problem)
