from __future__ import annotations

import threading
from pathlib import Path

import pytest
from support.screens import paste, press, read_screen, read_widget, settle, take_first_cue

from cuebook.errors import StoreUnavailableError
from cuebook.jobs.find_cue import FoundCues
from cuebook.jobs.people import PersonLine
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.practice import read_practice_log
from cuebook.tui.app import CuebookApp
from cuebook.tui.ports import LibraryJobs

SHUFFLES = "Takes tiny steps and shuffles down the corridor"
DANGER = "Chest goes tight when she walks up the hill"


def list_files(folder: Path) -> list[str]:
    """Return every file of a library."""
    return [str(path.relative_to(folder)) for path in folder.rglob("*") if path.is_file()]


def holds(path: Path, words: bytes) -> bool:
    """Return whether a file holds some words anywhere."""
    return words in path.read_bytes()


class SlowJobs(LibraryJobs):
    """A look-up that does not come back until it is let go."""

    def __init__(self, location: Path) -> None:
        super().__init__(location)
        self.begun = threading.Event()
        self.let_go = threading.Event()

    def find(self, text: str, who: PersonLine | None, task: str | None) -> FoundCues:
        """Wait, then look up."""
        self.begun.set()
        self.let_go.wait(timeout=30)
        return super().find(text, who, task)


class BrokenJobs(LibraryJobs):
    """A look-up that meets what the user can act on, or a fault of the program."""

    def __init__(self, location: Path, error: Exception) -> None:
        super().__init__(location)
        self._error = error

    def find(self, text: str, who: PersonLine | None, task: str | None) -> FoundCues:
        """Fail."""
        del text, who, task
        raise self._error


@pytest.mark.parametrize("size", [(80, 24), (60, 20), (120, 40)])
async def test_the_caution_stands_before_the_words(library: Path, size: tuple[int, int]) -> None:
    """In the list and in the detail the caution is read first; the words have their own line."""
    app = CuebookApp(library)
    async with app.run_test(size=size) as pilot:
        await paste(pilot, SHUFFLES)
        lines = [line.strip() for line in read_screen(app).split("\n")]
        words = "Stride on as if from one paving slab to the next."
        own_line = lines.index(words)
        assert any(line.startswith("! Freezing") for line in lines[:own_line])
        first = next(at for at, line in enumerate(lines) if words in line)
        assert any(line.startswith("! Freezing") for line in lines[:first])
        detail = read_widget(app, "#about")
        for word in ("Carries: step length", "Leaves out: foot height", "Why this one:"):
            assert word in detail


async def test_what_was_understood_is_said_in_plain_words(library: Path) -> None:
    """Features, body and task are named; a second sentence replaces them."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await paste(pilot, SHUFFLES)
        understood = read_widget(app, "#understood")
        assert "step length" in understood
        assert "body: leg" in understood
        assert "task: walking" in understood
        await press(pilot, *["backspace"] * len(SHUFFLES))
        assert read_widget(app, "#understood") == ""
        assert app.screen.query_one("#cues").option_count == 0  # type: ignore[attr-defined]


async def test_an_answer_to_words_that_changed_since_is_dropped(library: Path) -> None:
    """Only what belongs to the words that stand there now is shown."""
    jobs = SlowJobs(library)
    app = CuebookApp(jobs=jobs)
    async with app.run_test(size=(80, 24)) as pilot:
        await pilot.press(*"shuffle")
        await pilot.pause()
        assert jobs.begun.wait(timeout=10)
        await pilot.press(*["backspace"] * 7)
        jobs.let_go.set()
        await settle(pilot)
        assert app.screen.query_one("#cues").option_count == 0  # type: ignore[attr-defined]


async def test_keys_are_taken_while_a_look_up_runs(library: Path) -> None:
    """A look-up that takes long holds up neither typing nor another place."""
    jobs = SlowJobs(library)
    app = CuebookApp(jobs=jobs)
    async with app.run_test(size=(80, 24)) as pilot:
        await pilot.press(*"tiny steps".replace(" ", "_"))
        assert jobs.begun.wait(timeout=10)
        await pilot.press("x")
        assert "tiny_stepsx" in read_screen(app)
        await pilot.press("f3")
        await pilot.pause()
        assert "[Log]" in read_screen(app)
        jobs.let_go.set()
        await settle(pilot)


async def test_a_danger_shows_what_to_do_and_no_cue(library: Path) -> None:
    """A sentence that describes a danger stops: first what to do, and no cue."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await paste(pilot, DANGER)
        assert "! Stop. Stay with the person." in read_screen(app)
        assert app.screen.query_one("#cues").option_count == 0  # type: ignore[attr-defined]
        assert read_widget(app, "#about") == ""


async def test_stopped_and_referred_is_noted_without_the_words(library: Path) -> None:
    """F9 notes the stop of one learner; of the sentence nothing is kept anywhere."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await paste(pilot, DANGER)
        await press(pilot, "f9")
        assert "For whom?" in read_screen(app)
        await paste(pilot, "heron")
        await press(pilot, "enter")
        assert "Which task?" in read_screen(app)
        await paste(pilot, "walking")
        await press(pilot, "enter")
        assert "stopped: red flag, referred" in read_widget(app, "#lines")
    with open_for_reading(library) as connection:
        log = read_practice_log(connection, ())
    (part,) = log.sessions[0].blocks[0].participations
    assert (part.stop_reason, log.sessions[0].blocks[0].cue) == ("red_flag", None)
    assert not [name for name in list_files(library) if holds(library / name, b"goes tight")]


async def test_the_note_of_a_stop_does_nothing_where_nothing_is_stopped(library: Path) -> None:
    """Without a stop message F9 asks nothing and stores nothing."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await paste(pilot, SHUFFLES)
        await press(pilot, "f9")
        assert not app.screen.is_modal


async def test_nothing_found_says_what_to_add(library: Path) -> None:
    """Words that mean nothing get advice instead of a confident wrong cue."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await paste(pilot, "hm")
        assert "Say what goes wrong" in read_screen(app)


async def test_only_cues_for_a_task_that_was_picked(library: Path) -> None:
    """F6 keeps to one task; the task that a cue brings along does not narrow the next look-up."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await take_first_cue(pilot, SHUFFLES)
        assert app.shared.task == "walking"
        assert not app.shared.task_was_picked
        await press(pilot, "f2", "f6")
        await paste(pilot, "rowing")
        await press(pilot, "enter")
        assert app.shared.task == "rowing_stroke"
        found = app.screen._found  # type: ignore[attr-defined]
        assert all("rowing_stroke" in hit.cue.tasks for hit in found.hits)


async def test_an_error_of_the_store_is_read_in_a_box(library: Path) -> None:
    """What the user can act on is said with what to do next, in a box that closes."""
    error = StoreUnavailableError("The library is locked.", "Close the other program.")
    app = CuebookApp(jobs=BrokenJobs(library, error))
    async with app.run_test(size=(80, 24)) as pilot:
        await paste(pilot, "shuffles")
        shown = read_screen(app)
        assert "The library is locked." in shown
        assert "Close the other program." in shown
        await press(pilot, "escape")
        assert not app.screen.is_modal


async def test_a_fault_of_the_program_is_one_plain_sentence(library: Path) -> None:
    """A fault in the background is seen, without its text and without a traceback."""
    app = CuebookApp(jobs=BrokenJobs(library, ValueError("secret words")))
    async with app.run_test(size=(80, 24)) as pilot:
        await paste(pilot, "shuffles")
        shown = read_screen(app)
        assert "Cuebook met a fault of its own (ValueError)." in shown
        assert "secret" not in shown
        assert "Traceback" not in shown
