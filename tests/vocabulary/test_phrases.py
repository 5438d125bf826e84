from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.vocabulary.lay_words import load_lay_words
from cuebook.vocabulary.phrases import PhraseIndex, find_phrase, parse_phrase
from cuebook.vocabulary.text import tokenise

WORDS = load_lay_words()
GROUPS = {"small": ["tiny", "little"]}


def occurs(written: str, sentence: str) -> bool:
    """Return whether a phrase occurs in a sentence."""
    phrase = parse_phrase(written, WORDS.rules, GROUPS)
    return find_phrase(phrase, tokenise(sentence, WORDS.rules)) is not None


@pytest.mark.parametrize(
    ("written", "sentence"),
    [
        ("@small step", "her steps are tiny"),
        ("foot|toe catch", "catches her toes on the rug"),
        ("jerk*", "all jerkily done"),
        ("not swing", "the arm doesn't swing"),
        (">hips first", "hips go first"),
    ],
)
def test_a_phrase_is_found_where_its_words_stand_near_each_other(
    written: str, sentence: str
) -> None:
    """Order, word forms and light words between do not hide a phrase."""
    assert occurs(written, sentence)


@pytest.mark.parametrize(
    ("written", "sentence"),
    [
        ("foot catch", "the foot is fine but catches come late"),
        ("not swing", "swings, not bends"),
        (">hips first", "first the hips"),
        ("tiny step", "tiny hands hold firmly one big green bucket by every step"),
        ("jerk*", "turkey"),
    ],
)
def test_a_phrase_is_not_found_across_clauses_order_or_distance(
    written: str, sentence: str
) -> None:
    """Words in another clause, in the wrong order or far away make no phrase."""
    assert not occurs(written, sentence)


@given(st.lists(st.sampled_from(sorted(WORDS.known_words)), max_size=12))
def test_the_index_finds_exactly_what_trying_each_phrase_finds(chosen: list[str]) -> None:
    """The index is a short cut, never another answer."""
    tokens = tokenise(" ".join(chosen), WORDS.rules)
    phrases = [
        parse_phrase(text, WORDS.rules, {})
        for text in ("tiny|little step", "jerk*", "not swing", "foot drag*", ">hips first", "walk*")
    ]
    found = {phrase.text for phrase, _ in PhraseIndex(phrases).find(tokens)}
    tried = {phrase.text for phrase in phrases if find_phrase(phrase, tokens) is not None}
    assert found == tried
