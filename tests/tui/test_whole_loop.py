from __future__ import annotations

from pathlib import Path

import pytest
from support.screens import press, read_screen, settle, type_text

from cuebook.jobs.people import NewLearner, add_group, add_learner, set_consent
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.practice import read_practice_log
from cuebook.tui.app import CuebookApp

SENTENCE = "Takes tiny steps and shuffles down the corridor"


@pytest.fixture
def library(tmp_path: Path) -> Path:
    """Make a library with one learner who agreed to be ranked."""
    folder = tmp_path / "library"
    add_learner(folder, NewLearner(code="heron-lamp", age_years=78))
    set_consent(folder, "heron-lamp", "use_for_ranking", "yes")
    return folder


@pytest.mark.parametrize("size", [(80, 24), (60, 20), (120, 40)])
async def test_find_log_and_see_what_shifted_by_keys_alone(
    library: Path, size: tuple[int, int]
) -> None:
    """A cue is found, logged with three values before and after, and shown with its change."""
    app = CuebookApp(library)
    async with app.run_test(size=size) as pilot:
        await type_text(pilot, SENTENCE)
        found = read_screen(app)
        assert "Stride on as if from one paving slab" in found
        assert found.index("! ") < found.index("Stride on as if")
        await press(pilot, "down", "enter")
        assert "[Log]" in read_screen(app)
        await press(pilot, "f5")
        await type_text(pilot, "heron")
        await press(pilot, "enter")
        assert "Take the opening measure now" in read_screen(app)
        await press(pilot, "o")
        await type_text(pilot, "41 43 42")
        await press(pilot, "enter")
        await press(pilot, "c", "3", "s", "enter")
        await press(pilot, "p")
        await type_text(pilot, "47 46 49")
        await press(pilot, "enter")
        assert "Stored for heron-lamp." in read_screen(app)
        await press(pilot, "f4")
        await press(pilot, "enter")
        await settle(pilot)
        answer = str(app.screen.query_one("#answer").render())
        assert "Recorded, cannot rank yet" in answer
        assert "41 43 42 before, 47 46 49 after, change +5.33 cm" in answer
        assert "too few uses to rank" in answer


async def test_a_use_takes_five_keys_once_the_cue_is_chosen(library: Path) -> None:
    """Times said and what was seen are stored with four keys."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await type_text(pilot, SENTENCE)
        await press(pilot, "down", "enter")
        await press(pilot, "f5")
        await press(pilot, "enter")
        await press(pilot, "c", "2", "c", "enter")
    with open_for_reading(library) as connection:
        log = read_practice_log(connection, ())
    (part,) = log.sessions[0].blocks[0].participations
    assert (log.sessions[0].blocks[0].cue, part.times_said) == ("paving-slab-stride", 2)


async def test_a_group_of_twelve_with_two_exceptions_takes_few_keys(tmp_path: Path) -> None:
    """One cue for twelve, two of them excepted: six keys after the cue is chosen."""
    library = tmp_path / "library"
    codes = [f"learner-{number}" for number in range(1, 13)]
    for code in codes:
        add_learner(library, NewLearner(code=code, age_years=70))
        set_consent(library, code, "use_for_ranking", "yes")
    add_group(library, "monday", tuple(codes))
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await press(pilot, "f5")
        await type_text(pilot, "monday")
        await press(pilot, "enter")
        await type_text(pilot, SENTENCE)
        await press(pilot, "down", "enter")
        await press(pilot, "c")
        await press(pilot, "d", "d", "j", "j", "enter")
        assert "without this cue: learner-3, learner-8" in str(
            app.screen.query_one("#lines").render()
        )
    with open_for_reading(library) as connection:
        log = read_practice_log(connection, ())
    cued, heard = log.sessions[0].blocks
    assert len(cued.participations) == 10
    assert cued.event is not None
    assert {part.learner for part in heard.participations} == {"learner-3", "learner-8"}
    assert (heard.cue, heard.others) == (None, "some")


async def test_a_danger_shows_what_to_do_and_no_cue(library: Path) -> None:
    """A sentence that describes a danger stops: no cue is listed."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await type_text(pilot, "Chest goes tight when she walks up the hill")
        assert "stop" in read_screen(app).lower()
        assert app.screen.query_one("#cues").option_count == 0  # type: ignore[attr-defined]


async def test_wrong_numbers_are_said_beside_the_field(library: Path) -> None:
    """A slip in a measure is explained where it was typed, and nothing is stored."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await type_text(pilot, SENTENCE)
        await press(pilot, "down", "enter")
        await press(pilot, "f5")
        await press(pilot, "enter")
        await press(pilot, "o")
        await type_text(pilot, "41 x 42")
        await press(pilot, "enter")
        assert "is not a number" in read_screen(app)
        await press(pilot, "escape")
    with open_for_reading(library) as connection:
        assert read_practice_log(connection, ()).sessions == ()


async def test_an_empty_library_opens_and_says_what_to_do(tmp_path: Path) -> None:
    """The first start works without a library and names the next key."""
    app = CuebookApp(tmp_path / "nothing")
    async with app.run_test(size=(80, 24)) as pilot:
        assert "F5: for whom" in read_screen(app)
        await press(pilot, "f4")
        assert "Nothing is measured yet" in read_screen(app)
        await press(pilot, "f1")
        assert "F10       Leave" in read_screen(app)


async def test_a_new_learner_is_asked_for_consent_once(tmp_path: Path) -> None:
    """F7 adds a learner under a code of two words and notes the answer given."""
    library = tmp_path / "library"
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await press(pilot, "f5")
        await press(pilot, "f7")
        assert "May results be used to rank cues?" in read_screen(app)
        await press(pilot, "y")
        assert app.shared.who is not None
        code = app.shared.who.code
    with open_for_reading(library) as connection:
        assert read_practice_log(connection, ()).learners[code].may_be_ranked
