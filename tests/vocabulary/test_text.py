from __future__ import annotations

from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.vocabulary.lay_words import load_lay_words
from cuebook.vocabulary.text import LanguageRules, fold, stem, tokenise

RULES = load_lay_words().rules


def list_words(text: str) -> list[str]:
    """Return the words of a tokenised sentence."""
    return [token.word for token in tokenise(text, RULES)]


@pytest.mark.parametrize(
    ("one", "other"),
    [
        ("steps", "step"), ("stepping", "step"), ("hopped", "hop"), ("gliding", "glides"),
        ("writes", "wrote"), ("fell", "falls"), ("feet", "foot"), ("carries", "carrying"),
        ("squeezes", "squeezing"), ("stiffness", "stiff"), ("swung", "swinging"),
        ("crosses", "crossing"), ("smoothly", "smooth"), ("moved", "move"), ("tries", "trying"),
    ],
)  # fmt: skip
def test_forms_of_one_word_share_a_stem(one: str, other: str) -> None:
    """Plural, past and -ing forms are compared as one word."""
    assert stem(one, RULES) == stem(other, RULES)


@pytest.mark.parametrize(
    ("one", "other"),
    [
        ("note", "not"), ("hoping", "hopping"), ("spine", "spin"), ("barely", "bar"),
        ("putt", "put"), ("speed", "spe"), ("string", "str"), ("seconds", "second"),
    ],
)  # fmt: skip
def test_different_words_keep_different_stems(one: str, other: str) -> None:
    """Cutting endings never merges words that mean different things here."""
    assert stem(one, RULES) != stem(other, RULES)


def test_contractions_are_opened_with_and_without_apostrophe() -> None:
    """However it is typed, "doesn't" holds a "not"."""
    for typed in ("doesn't lift", "doesnt lift", "doesn\u2019t lift", "does not lift"):
        assert list_words(typed) == ["does", "not", "lift"]
    assert list_words("can't stop") == ["can", "not", "stop"]
    assert list_words("she's late") == ["she", "late"]


def test_accents_case_and_hyphens_do_not_matter() -> None:
    """A plié is a plie, and stop-start is two words."""
    assert fold("PLIÉ, Stop-Start") == "plie, stop start"


def test_a_but_opens_a_clause_and_an_and_opens_a_part() -> None:
    """Contrast words and full stops cut clauses; commas and joining words cut parts."""
    tokens = tokenise("Good balance and rhythm, but stiff. Late", RULES)
    by_word = {token.word: token for token in tokens}
    assert by_word["balance"].clause == by_word["rhythm"].clause
    assert by_word["balance"].part != by_word["rhythm"].part
    assert len({by_word[word].clause for word in ("rhythm", "stiff", "late")}) == 3


def test_light_words_take_no_room_but_a_run_of_them_does() -> None:
    """Distance counts words that carry meaning, and no run of light words is endless."""
    tokens = tokenise("catches her on the toe", RULES)
    assert tokens[-1].at - tokens[0].at == 1
    run = tokenise("the " * 40, RULES)
    assert run[-1].at - run[0].at >= 9


def test_a_language_without_rules_still_gives_words() -> None:
    """A language of which nothing is known is cut at its words and left unstemmed."""
    assert [token.stem for token in tokenise("Pasos cortos", LanguageRules())] == [
        "pasos",
        "cortos",
    ]


@given(st.text(max_size=300))
def test_tokenising_never_raises_and_positions_never_fall(text: str) -> None:
    """Any text whatever is cut into tokens whose positions only grow."""
    tokens = tokenise(text, RULES)
    for earlier, later in pairwise(tokens):
        assert (earlier.clause, earlier.part, earlier.at) <= (later.clause, later.part, later.at)


@given(st.text(alphabet=st.characters(codec="ascii"), max_size=120))
def test_case_and_extra_spaces_change_nothing(text: str) -> None:
    """The same words in capitals, or further apart, give the same tokens."""
    wide = text.upper().replace(" ", "   ")
    assert tokenise(wide, RULES) == tokenise(text, RULES)
