from __future__ import annotations

import csv
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.library.safety import CAUTION_FIRST, SafetyAnswer, check_safety, read_dangers
from cuebook.library.seed_sets import load_seed_cues
from cuebook.vocabulary import load_vocabulary

DATA = Path(__file__).parent / "data"
ACTIONS = load_vocabulary().slugs("safety_action")


def read_rows(name: str) -> list[dict[str, str]]:
    """Return the rows of a data file beside these tests."""
    with (DATA / name).open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


GIVEN = [(row["problem"], row["expected_action"]) for row in read_rows("problems_safety.csv")]
OWN = [(row["sentence"], row["action"]) for row in read_rows("safety_own.csv")]


def get_action(sentence: str) -> str:
    """Return the action for a sentence, "none" if there is none."""
    answer = check_safety(sentence)
    return "none" if answer is None else answer.action


@pytest.mark.parametrize(("sentence", "action"), GIVEN)
def test_every_given_sentence_gets_its_action(sentence: str, action: str) -> None:
    """Each sentence of the given list leads to the action that stands beside it."""
    assert get_action(sentence) == action


@pytest.mark.parametrize(("sentence", "action"), OWN)
def test_every_sentence_of_our_own_gets_its_action(sentence: str, action: str) -> None:
    """Each of our own danger and harmless sentences leads to the action beside it."""
    assert get_action(sentence) == action


@pytest.mark.parametrize(("sentence", "action"), GIVEN + OWN)
def test_capitals_and_spaces_change_no_action(sentence: str, action: str) -> None:
    """A shouted or widely typed sentence is as dangerous as the plain one."""
    assert get_action(sentence.upper()) == action
    assert get_action("  " + sentence.replace(" ", "   ") + " ") == action


def test_our_own_list_is_long_enough_and_has_every_action() -> None:
    """The own list holds danger and harmless sentences by the dozen, and every action."""
    actions = [action for _, action in OWN]
    assert set(actions) == set(ACTIONS)
    assert sum(action not in ("none", CAUTION_FIRST) for action in actions) >= 60
    assert actions.count("none") >= 60


DANGERS = [sentence for sentence, action in GIVEN + OWN if action == "stop_emergency"]
HARMLESS = [sentence for sentence, action in OWN if action == "none"]


@given(st.sampled_from(DANGERS), st.sampled_from(HARMLESS))
def test_the_clause_with_the_danger_wins(danger: str, harmless: str) -> None:
    """A harmless sentence before or after an emergency never takes it back."""
    assert get_action(f"{danger}. {harmless}") == "stop_emergency"
    assert get_action(f"{harmless}, but {danger}") == "stop_emergency"


DENYING = ("No ", "Denies ", "He has never ")


@given(
    st.sampled_from(DANGERS),
    st.sampled_from([sentence for sentence in HARMLESS if not sentence.startswith(DENYING)]),
    st.sampled_from([" and ", ", and ", ", "]),
)
def test_a_danger_wins_within_one_clause_too(danger: str, harmless: str, join: str) -> None:
    """Joined by "and" or a comma only, the danger still decides."""
    assert get_action(danger + join + harmless) == "stop_emergency"
    assert get_action(harmless + join + danger) == "stop_emergency"


@pytest.mark.parametrize(
    ("sentence", "action"),
    [
        ("No chest pain today", "none"),
        ("no chest pain today but he fainted", "stop_refer_urgent"),
        ("No dizziness, no chest pain", "none"),
        ("She denies chest pain", "none"),
        ("Not dizzy but her chest hurts", "stop_emergency"),
        ("Chest pain, no dizziness", "stop_emergency"),
        ("cannot say why but the chest hurts", "stop_emergency"),
    ],
)
def test_a_no_takes_back_only_what_it_stands_before(sentence: str, action: str) -> None:
    """A denied sign does not count, and takes no other sign with it."""
    assert get_action(sentence) == action


def test_long_ago_is_a_caution_and_not_an_emergency() -> None:
    """What happened years ago asks for care, not for an ambulance."""
    assert get_action("Had a heart attack five years ago") == CAUTION_FIRST
    assert get_action("Had a heart attack five minutes ago") == "stop_emergency"
    both = "Had a heart attack five years ago and his chest hurts"
    assert get_action(both) == "stop_emergency"


def test_a_caution_has_words_and_a_stop_has_none_of_the_text() -> None:
    """A caution says what to heed; no answer repeats what was typed."""
    caution = check_safety("Takes tiny steps and shuffles down the corridor")
    assert caution is not None
    assert not caution.stops
    assert any("tell the doctor" in line.lower() for line in caution.cautions)
    stop = check_safety("Zebedee has chest pain")
    assert stop == SafetyAnswer("stop_emergency")
    assert "zebedee" not in repr(stop).lower()


def test_no_problem_or_wording_of_a_seed_cue_is_stopped() -> None:
    """What the seed cues are for can be typed as a problem without being sent away."""
    for cue in load_seed_cues():
        for text in (cue.problem, *cue.phrases, cue.wording().text):
            answer = check_safety(text)
            assert answer is None or not answer.stops, text


def test_hardly_any_ordinary_problem_is_stopped() -> None:
    """Of our own problem sentences about movement none is answered by a stop."""
    stopped = [
        row["problem"]
        for row in read_rows("problems_own.csv")
        if (answer := check_safety(row["problem"])) is not None and answer.stops
    ]
    assert stopped == []


@given(st.text(max_size=400))
def test_any_text_gets_an_answer(text: str) -> None:
    """Whatever is typed, the check gives an action of the list or none, and never an error."""
    assert get_action(text) in ACTIONS


@given(
    st.lists(
        st.sampled_from("no not without chest pain fainted dizzy but and , . fell twice".split()),  # noqa: SIM905
        max_size=30,
    )
)
def test_any_string_of_danger_words_gets_an_answer(words: list[str]) -> None:
    """Danger words, denials and joining words in any order are answered without an error."""
    assert get_action(" ".join(words)) in ACTIONS


def test_a_long_text_is_read_to_its_end() -> None:
    """A danger at the end of a page of text is found."""
    page = "She reaches for the cup and places it on the mark. " * 200
    assert get_action(page) == "none"
    assert get_action(page + "Then he had chest pain.") == "stop_emergency"


def test_the_danger_list_is_well_formed() -> None:
    """Every entry has an action of the list, single-word groups, and a caution where one shows."""
    document = read_dangers()
    for words in document["groups"].values():
        assert all(" " not in word for word in words)
    names = [entry["name"] for entry in document["danger"]]
    assert len(set(names)) == len(names)
    for entry in document["danger"]:
        assert entry["action"] in ACTIONS
        assert entry["signs"]
        if CAUTION_FIRST in (entry["action"], entry.get("past")):
            assert entry["caution"], entry["name"]
        for text in entry["signs"] + entry.get("unless", []):
            for choice in text.replace("&", " ").replace("|", " ").split():
                bare = choice.lstrip(">=@")
                assert bare.rstrip("*"), text
                assert not choice.lstrip(">=").startswith("@") or bare in document["groups"], text
