from __future__ import annotations

import threading
from pathlib import Path

import pytest
from support.screens import paste, press, read_screen, read_widget

from cuebook.jobs.people import PersonLine, list_members
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.practice import read_practice_log
from cuebook.tui.app import CuebookApp
from cuebook.tui.pick_box import MOST_ROWS, Choice, PickBox, narrow_choices
from cuebook.tui.ports import LibraryJobs


class SlowPeople(LibraryJobs):
    """Adding somebody takes until it is let go."""

    def __init__(self, location: Path) -> None:
        super().__init__(location)
        self.let_go = threading.Event()

    def add_learner(self) -> PersonLine:
        """Wait, then add."""
        self.let_go.wait(timeout=30)
        return super().add_learner()


@pytest.mark.parametrize(
    ("key", "may_be_ranked"), [("y", True), ("g", True), ("n", False), ("enter", False)]
)
async def test_a_new_learner_is_asked_once_and_no_answer_is_no(
    tmp_path: Path, key: str, may_be_ranked: bool
) -> None:
    """F7 adds a learner under a code of two words and notes the answer given."""
    app = CuebookApp(tmp_path / "library")
    async with app.run_test(size=(80, 24)) as pilot:
        await press(pilot, "f5", "f7")
        assert "May results be used to rank cues?" in read_screen(app)
        await press(pilot, key)
        assert app.shared.who is not None
        code = app.shared.who.code
        assert len(code.split("-")) == 2
    with open_for_reading(tmp_path / "library") as connection:
        learners = read_practice_log(connection, ()).learners
    assert code not in learners or learners[code].may_be_ranked is may_be_ranked


async def test_adding_somebody_holds_no_key_up(library: Path) -> None:
    """While a learner is being stored one can go on typing."""
    jobs = SlowPeople(library)
    app = CuebookApp(jobs=jobs)
    async with app.run_test(size=(80, 24)) as pilot:
        await press(pilot, "f5")
        await pilot.press("f7", *"shuffles")
        await pilot.pause()
        assert "shuffles" in read_screen(app)
        jobs.let_go.set()
        await press(pilot, "end")
        assert "New learner:" in read_screen(app)


@pytest.mark.parametrize("size", [(80, 24), (60, 20)])
async def test_a_group_of_known_and_new_learners_is_made_by_keys(
    library: Path, size: tuple[int, int]
) -> None:
    """A code, one known learner and two new ones make a group that is then picked."""
    app = CuebookApp(library)
    async with app.run_test(size=size) as pilot:
        await press(pilot, "f5", "f9")
        await paste(pilot, "Monday Class")
        await press(pilot, "f9")
        assert "is no code" in read_screen(app)
        await press(pilot, *["backspace"] * 12)
        await paste(pilot, "monday")
        await press(pilot, "f9")
        assert "Nobody is in it yet." in read_screen(app)
        await press(pilot, "down", "enter", "f7", "f7", "f7", "f8")
        assert "[x] heron-lamp" in read_screen(app)
        assert "In the group: 1 known, 2 new." in read_screen(app)
        await press(pilot, "f9")
        assert "For: group monday" in read_screen(app)
    members = list_members(library, "monday")
    assert len(members) == 3
    assert members[0] == "heron-lamp"


async def test_long_lists_hold_200_rows_and_say_so(library: Path) -> None:
    """A list of thousands shows 200 and asks to keep typing."""
    choices = [Choice(f"learner-{number:04}", "") for number in range(8412)]
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        app.push_screen(PickBox("For whom?", choices))
        await pilot.pause()
        assert "200 of 8,412 shown; keep typing." in read_screen(app)
        assert app.screen.query_one("#choices").option_count == MOST_ROWS  # type: ignore[attr-defined]
        await paste(pilot, "8411")
        assert read_widget(app, "#how_many") == ""
        assert "> learner-8411" in read_screen(app)


def test_what_is_typed_in_full_comes_first() -> None:
    """A whole word beats one that only begins with it, which beats one that holds it."""
    choices = [
        Choice("reaching_standing", "reaching in standing", is_plain=True),
        Choice("far_reaching", "far reaching", is_plain=True),
        Choice("reaching", "reaching", is_plain=True),
    ]
    order = [one.slug for one in narrow_choices(choices, "Reaching")]
    assert order == ["reaching", "reaching_standing", "far_reaching"]
