from __future__ import annotations

import pytest

from cuebook.errors import Place, UnknownCodeError
from cuebook.vocabulary import find_nearest, load_vocabulary, require_slug

FAMILIES = {"discrete", "still", "events", "gait", "cyclic", "jump", "rise", "any"}


def test_every_list_that_others_rely_on_is_there() -> None:
    """The lists that cues, people and sessions are written in are all present and not empty."""
    vocabulary = load_vocabulary()
    for name in (
        "feature", "region", "tempo_cycle", "tempo_band", "age_band", "experience", "background",
        "access_need", "cue_kind", "focus", "phase", "safety_note", "safety_action", "trade_term",
        "reason_for_stopping", "consent_item", "screen_word", "metric_alias",
    ):  # fmt: skip
        assert vocabulary.entries(name), name


def test_slugs_are_unique_within_their_list() -> None:
    """No slug stands twice in a list, so none can silently replace another."""
    vocabulary = load_vocabulary()
    n_entries = sum(len(vocabulary.entries(name)) for name in vocabulary.lists)
    pairs = {
        (entry.list_name, entry.slug)
        for name in vocabulary.lists
        for entry in vocabulary.entries(name)
    }
    assert len(pairs) == n_entries


def test_trade_terms_point_at_features_and_regions_that_exist() -> None:
    """Each trade term leads to known features and known regions."""
    vocabulary = load_vocabulary()
    for term in vocabulary.entries("trade_term"):
        assert term.related
        assert all(vocabulary.has("feature", feature) for feature in term.related), term.slug
        assert all(vocabulary.has("region", region) for region in term.region), term.slug


def test_every_task_has_a_family_and_a_known_cycle() -> None:
    """A task fixes a movement family, and what one cycle is where something is counted."""
    vocabulary = load_vocabulary()
    for task in vocabulary.tasks:
        assert task.family in FAMILIES
        assert task.usual_cycle is None or vocabulary.has("tempo_cycle", task.usual_cycle)


def test_unknown_slug_names_the_nearest() -> None:
    """A mistyped slug is an error that names what was probably meant."""
    with pytest.raises(UnknownCodeError) as caught:
        load_vocabulary().entry("feature", "smothness")
    assert "smoothness" in caught.value.hint
    with pytest.raises(UnknownCodeError) as caught:
        load_vocabulary().task("siting_balance")
    assert "sitting_balance" in caught.value.hint
    with pytest.raises(UnknownCodeError):
        load_vocabulary().entries("features")


def test_require_slug_says_where_the_unknown_word_stood() -> None:
    """The error of an unknown slug carries the place it was given."""
    place = Place(file="set.toml", row=7, column="region")
    with pytest.raises(UnknownCodeError) as caught:
        require_slug("region", "sholder", place)
    assert caught.value.place == place
    assert "shoulder" in caught.value.hint
    assert require_slug("task", "walking") == "walking"


def test_find_nearest_gives_nothing_rather_than_nonsense() -> None:
    """A word that looks like no known word gets no suggestion."""
    assert find_nearest("xqzvw", load_vocabulary().slugs("feature")) == ()


def test_screen_word_falls_back_to_the_term_itself() -> None:
    """A term with words for the screen gets them, any other is shown without underscores."""
    vocabulary = load_vocabulary()
    assert vocabulary.screen_word("trial") == "attempt"
    assert vocabulary.screen_word("immediate_post") == "straight after, cue off"
    assert vocabulary.screen_word("some_other_term") == "some other term"
    assert vocabulary.label("task", "sit_to_stand") == "sit to stand"
    assert vocabulary.label("feature", "range") == "Range / amplitude"


def test_the_first_part_of_a_longer_name_is_recognised() -> None:
    """A part that looks unlike the whole, letter by letter, still leads to it."""
    assert find_nearest("paving", ["paving-slab-stride", "opening-drawer"]) == (
        "paving-slab-stride",
    )
