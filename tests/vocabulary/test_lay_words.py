from __future__ import annotations

import pytest

from cuebook.vocabulary import load_vocabulary
from cuebook.vocabulary.lay_words import Sense, load_lay_words, read_lay_words

LISTS = ("feature", "region", "task")


@pytest.mark.parametrize("list_name", LISTS)
def test_every_slug_has_at_least_eight_phrases(list_name: str) -> None:
    """No feature, region or task is left without enough lay words to be found by."""
    document = read_lay_words()
    for slug in load_vocabulary().slugs(list_name):
        phrases = [text for texts in document[list_name][slug].values() for text in texts]
        assert len(phrases) >= 8, slug


@pytest.mark.parametrize("list_name", LISTS)
def test_no_phrase_leads_to_an_unknown_slug(list_name: str) -> None:
    """Every heading of the word list is a slug of the vocabulary."""
    assert set(read_lay_words()[list_name]) == set(load_vocabulary().slugs(list_name))


def test_every_sense_and_group_of_the_list_is_known() -> None:
    """Headings inside an entry are senses, and each group named in a phrase exists."""
    document = read_lay_words()
    known_senses = {sense.value for sense in Sense}
    for list_name in LISTS:
        for by_sense in document[list_name].values():
            assert set(by_sense) <= known_senses
            for text in (text for texts in by_sense.values() for text in texts):
                for choice in text.removeprefix(">").replace("|", " ").split():
                    assert not choice.startswith("@") or choice[1:] in document["groups"], text


def test_no_phrase_asks_for_every_word() -> None:
    """A bare star or an empty phrase, which would fit anything, is in no list."""
    for text in load_lay_words().leads:
        for choice in text.removeprefix(">").replace("|", " ").split():
            assert len(choice.rstrip("*")) >= 1, text
        assert text.strip(">* "), text


def test_trade_terms_are_led_by_the_vocabulary() -> None:
    """A trade term leads to the features and regions that the vocabulary gives it."""
    leads = load_lay_words().leads[">dynamic knee valgus"]
    assert {(lead.list_name, lead.slug) for lead in leads} == {
        ("feature", "alignment"),
        ("region", "knee"),
    }


def test_an_unknown_language_falls_back_to_english() -> None:
    """A language without a word list is searched in English rather than not at all."""
    assert load_lay_words("xx").language == "en"
    assert load_lay_words("en-GB").language == "en"
