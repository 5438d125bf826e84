from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import pytest
from support.libraries import RULE, SPOON, make_library, stamp_at

from cuebook.errors import UnknownCodeError
from cuebook.library.cues import Claim, Cue, Wording
from cuebook.library.seed_sets import load_seed_cues, load_seed_sets
from cuebook.store.opening import Library, open_library
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.cues import read_cues
from cuebook.store.reading.rankings import read_revision
from cuebook.store.writing import cues
from cuebook.store.writing.cues import CuesKept


@pytest.fixture
def library(tmp_path: Path) -> Iterator[Library]:
    with make_library(tmp_path / "library") as made:
        yield made


def keep(library: Library, *given: Cue) -> CuesKept:
    """Import cues in a transaction of their own."""
    with library.transaction() as tx:
        return cues.keep_cues(tx, stamp_at(10), given)


def read(library: Library) -> dict[str, Cue]:
    """Return the cues by code."""
    with open_for_reading(library.folder) as connection:
        return {cue.code: cue for cue in read_cues(connection)}


def read_counter(library: Library) -> int:
    """Return how often cues have changed."""
    with open_for_reading(library.folder) as connection:
        return read_revision(connection, "cues")


def test_keeping_the_same_cues_again_changes_nothing(library: Library) -> None:
    """A set imported twice is there once, and nobody is told of a change."""
    before = read_counter(library)
    assert keep(library, SPOON, RULE) == CuesKept(0, 0, 2)
    assert read(library) == {"full-spoon": SPOON, "slow-and-even": RULE}
    assert read_counter(library) == before


def test_the_seed_sets_come_back_as_they_are(tmp_path: Path) -> None:
    """Every seed cue survives the library unchanged, whatever it holds."""
    with open_library(tmp_path) as library:
        with library.transaction() as tx:
            assert not cues.has_cues(tx)
            for cue_set in load_seed_sets():
                cues.keep_cues(tx, stamp_at(0), cue_set.cues, cue_set.code)
            assert cues.has_cues(tx)
        assert tuple(read(library).values()) == load_seed_cues()


def test_new_words_are_a_new_wording_and_the_old_stay(library: Library) -> None:
    """Evidence stays tied to the exact words it was gathered with."""
    reworded = replace(RULE, wordings=(*RULE.wordings, Wording("Slow, even.", "en", 2, 1)))
    assert keep(library, reworded) == CuesKept(0, 1, 0)
    assert read(library)["slow-and-even"] == reworded
    with library.transaction() as tx:
        newest = cues.get_wording_id(tx, "slow-and-even")
        first = cues.get_wording_id(tx, "slow-and-even", revision=1)
        assert newest == cues.get_wording_id(tx, "slow-and-even", revision=2)
    assert newest != first


def test_other_words_under_a_used_revision_get_the_next(library: Library) -> None:
    """Nobody can change stored words by forgetting to raise their revision."""
    changed = replace(RULE, wordings=(Wording("Quick and even."),))
    assert keep(library, changed) == CuesKept(0, 1, 0)
    assert read(library)["slow-and-even"].wordings == (
        *RULE.wordings,
        Wording("Quick and even.", "en", 2, 1),
    )
    assert keep(library, changed) == CuesKept(0, 0, 1)


def test_a_changed_description_is_taken_over(library: Library) -> None:
    """Claims, tags and cautions of a known cue follow the set that is imported."""
    described = replace(
        SPOON, caution="Sit upright.", claims=(Claim("smoothness", "silent"),), phrases=()
    )
    before = read_counter(library)
    assert keep(library, described) == CuesKept(0, 0, 0, 1)
    assert read(library)["full-spoon"] == described
    assert read_counter(library) == before + 1


def test_a_language_has_its_own_revisions(library: Library) -> None:
    """The newest wording is the newest of the language asked for."""
    with library.transaction() as tx:
        german = cues.get_wording_id(tx, "full-spoon", language="de")
        english = cues.get_wording_id(tx, "full-spoon")
        assert german != english
        # A language the cue does not have: the newest words of any.
        assert cues.get_wording_id(tx, "full-spoon", language="fr") == english


def ask_for(library: Library, code: str, revision: int | None = None) -> None:
    """Ask for a wording."""
    with library.transaction() as tx:
        cues.get_wording_id(tx, code, revision=revision)


def test_unknown_cues_and_wordings_name_the_nearest(library: Library) -> None:
    """A slip in a code or revision says what there is."""
    with pytest.raises(UnknownCodeError, match="Unknown cue 'full-spoom'") as caught:
        ask_for(library, "full-spoom")
    assert "full-spoon" in caught.value.hint
    with pytest.raises(UnknownCodeError, match="wording of full-spoon '9'"):
        ask_for(library, "full-spoon", 9)
