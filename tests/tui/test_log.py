from __future__ import annotations

import threading
from pathlib import Path

import pytest
from support.screens import paste, pick_who, press, read_screen, read_widget, settle, take_first_cue

from cuebook.errors import StoreUnavailableError
from cuebook.jobs.log_entries import BlockEntry, Logged
from cuebook.practice.log import PracticeLog
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.meetings import read_meetings
from cuebook.store.reading.practice import read_practice_log
from cuebook.tui.app import CuebookApp
from cuebook.tui.ports import LibraryJobs

STEPS = "tiny steps when walking"
MEMBERS = tuple(f"learner-{number}" for number in range(1, 13))


def read_log(library: Path) -> PracticeLog:
    """Return what is on disk."""
    with open_for_reading(library) as connection:
        return read_practice_log(connection, ("step_length_cm",))


class SlowStore(LibraryJobs):
    """Storing waits until it is let go."""

    def __init__(self, location: Path) -> None:
        super().__init__(location)
        self.let_go = threading.Event()

    def log_block(self, entry: BlockEntry) -> Logged:
        """Wait, then store."""
        self.let_go.wait(timeout=30)
        return super().log_block(entry)


class LockedStore(LibraryJobs):
    """Nothing can be stored."""

    def log_block(self, entry: BlockEntry) -> Logged:
        """Fail."""
        del entry
        raise StoreUnavailableError("The library is locked.", "Close the other program.")


async def test_a_use_takes_five_keys_once_the_cue_is_chosen(library: Path) -> None:
    """Times said and what was seen are stored with four keys."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await take_first_cue(pilot, STEPS)
        await pick_who(pilot, "heron")
        await press(pilot, "c", "2", "c", "enter")
    (block,) = read_log(library).sessions[0].blocks
    assert (block.cue, block.participations[0].times_said) == (app.shared.cue, 2)


@pytest.mark.parametrize("size", [(80, 24), (60, 20), (120, 40)])
async def test_a_group_of_twelve_with_two_exceptions_takes_few_keys(
    class_library: Path, size: tuple[int, int]
) -> None:
    """One cue for twelve, two of them excepted: six keys after the cue is chosen."""
    app = CuebookApp(class_library)
    async with app.run_test(size=size) as pilot:
        await pick_who(pilot, "monday")
        await take_first_cue(pilot, STEPS)
        await press(pilot, "c", "d", "d", "j")
        assert ">j learner-8: there" in read_screen(app)
        assert "d learner-3: not this cue" in read_widget(app, "#rows")
        await press(pilot, "j", "enter")
        assert "without this cue: learner-3, learner-8" in read_widget(app, "#lines")
    cued, heard = read_log(class_library).sessions[0].blocks
    assert len(cued.participations) == 10
    assert cued.event is not None
    assert {part.learner for part in heard.participations} == {"learner-3", "learner-8"}
    assert (heard.cue, heard.others) == (None, "some")


async def test_one_learner_of_a_group_stops_and_the_others_go_on(class_library: Path) -> None:
    """Reaction, event and stop are one learner's; the group's answer stays the others'."""
    app = CuebookApp(class_library)
    async with app.run_test(size=(80, 24)) as pilot:
        await pick_who(pilot, "monday")
        await take_first_cue(pilot, STEPS)
        await press(pilot, "c", "s", "e")
        assert "Mark the learner first" in read_screen(app)
        await press(pilot, "b", "w", "e", "x", "x")
        assert ">b learner-2: worse, pain, pain" in read_screen(app)
        await press(pilot, "enter")
    (block,) = read_log(class_library).sessions[0].blocks
    by_learner = {part.learner: part for part in block.participations}
    assert by_learner["learner-2"].stop_reason == "pain"
    assert {by_learner[code].stop_reason for code in MEMBERS if code != "learner-2"} == {None}


async def test_values_of_some_of_a_group(class_library: Path) -> None:
    """Numbers are typed for some; the rest is stored as not observed or absent, never made up."""
    app = CuebookApp(class_library)
    async with app.run_test(size=(80, 24)) as pilot:
        await pick_who(pilot, "monday")
        await take_first_cue(pilot, STEPS)
        await press(pilot, "c", "l", "l", "l", "enter")
        await press(pilot, "p")
        await paste(pilot, "44 45")
        await press(pilot, "enter", "down")
        await paste(pilot, "50 x")
        await press(pilot, "enter")
        assert "'x' is not a number" in read_screen(app)
        await press(pilot, "backspace", "5", "1", "f9")
    practice, measure = read_log(class_library).sessions[0].blocks
    assert practice.phase == "acquisition"
    present = {
        part.learner: [value.value for value in part.values["step_length_cm"]]
        for part in measure.participations
        if part.values.get("step_length_cm")
    }
    assert present == {"learner-1": [44, 45], "learner-3": [50, 51]}


async def test_the_card_comes_first_and_asks_for_the_opening_measure(library: Path) -> None:
    """Whoever is picked, the card stands before any entry, and the opening before any cue."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await press(pilot, "f3")
        assert "Nobody is picked yet" in read_screen(app)
        await press(pilot, "o")
        assert "For whom?" in read_screen(app)
        await pick_who(pilot, "heron")
        assert "No session yet." in read_screen(app)
        assert "Take the opening measure now, before any cue. O takes it." in read_screen(app)
        await press(pilot, "o")
        assert "Which task? T picks one" in read_screen(app)


async def test_a_session_left_open_is_shown_and_goes_on(library: Path) -> None:
    """Opened again, Log shows what is stored today and adds to the same session."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await take_first_cue(pilot, STEPS)
        await pick_who(pilot, "heron")
        await press(pilot, "c", "enter")
    again = CuebookApp(library)
    async with again.run_test(size=(80, 24)) as pilot:
        await pick_who(pilot, "heron")
        await press(pilot, "f3")
        lines = read_widget(again, "#lines")
        assert "Today so far:" in lines
        assert "practice with the cue: walking" in lines
        await take_first_cue(pilot, STEPS)
        await press(pilot, "c", "enter")
    (session,) = read_log(library).sessions
    assert len(session.blocks) == 2


async def test_same_again_keeps_the_cue_and_copies_no_answer(library: Path) -> None:
    """One key logs the practice once more; what followed has to be said anew."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await take_first_cue(pilot, STEPS)
        await pick_who(pilot, "heron")
        await press(pilot, "s")
        assert "Nothing practised here yet" in read_screen(app)
        await press(pilot, "c", "3", "w", "e", "x", "x", "enter", "s")
    first, second = read_log(library).sessions[0].blocks
    assert first.cue == second.cue
    assert first.participations[0].stop_reason == "pain"
    assert second.participations[0].stop_reason is None
    assert second.participations[0].times_said is None


async def test_entries_made_quickly_after_n_share_one_new_session(library: Path) -> None:
    """N ends the session; however fast the entries follow, they begin one new session."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await take_first_cue(pilot, STEPS)
        await pick_who(pilot, "heron")
        await press(pilot, "c", "enter")
        await pilot.press("n", "c", "enter", "s", "s")
        await settle(pilot)
        await press(pilot, "n")
        assert "Session ended." in read_screen(app)
        await press(pilot, "n")
        assert "Session ended." not in read_screen(app)
        await press(pilot, "c", "enter")
    sessions = read_log(library).sessions
    assert [len(session.blocks) for session in sessions] == [1, 3, 1]
    with open_for_reading(library) as connection:
        assert [line.is_open for line in read_meetings(connection)] == [True, False, False]


async def test_an_entry_is_stored_even_if_one_leaves_at_once(library: Path) -> None:
    """Leaving waits for what was handed over, and says nothing is stored before it is."""
    jobs = SlowStore(library)
    app = CuebookApp(jobs=jobs)
    async with app.run_test(size=(80, 24)) as pilot:
        await take_first_cue(pilot, STEPS)
        await pick_who(pilot, "heron")
        await pilot.press("c", "enter", "s")
        await pilot.pause()
        assert "Storing …" in read_screen(app)
        assert "Stored" not in read_screen(app)
        threading.Timer(0.3, jobs.let_go.set).start()
        await pilot.press("f10")
    assert len(read_log(library).sessions[0].blocks) == 2


async def test_what_could_not_be_stored_is_said_so(library: Path) -> None:
    """An entry that the library refuses is never called stored."""
    app = CuebookApp(jobs=LockedStore(library))
    async with app.run_test(size=(80, 24)) as pilot:
        await take_first_cue(pilot, STEPS)
        await pick_who(pilot, "heron")
        await press(pilot, "c", "enter")
        shown = read_screen(app)
        assert "The library is locked." in shown
        assert "Nothing of this entry is stored." in shown
        await press(pilot, "enter")
        assert "Stored" not in read_screen(app)
    assert read_log(library).sessions == ()


async def test_wrong_numbers_are_said_beside_the_field(library: Path) -> None:
    """A slip in a measure is explained where it was typed, and nothing is stored."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await take_first_cue(pilot, STEPS)
        await pick_who(pilot, "heron")
        await press(pilot, "o")
        await paste(pilot, "41 x 42")
        await press(pilot, "enter")
        assert "'x' is not a number" in read_screen(app)
        await press(pilot, "escape")
    assert read_log(library).sessions == ()


async def test_no_numbers_said_twice_is_not_observed(library: Path) -> None:
    """An empty measure is asked about once; then it is an answer, not a value."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await take_first_cue(pilot, STEPS)
        await pick_who(pilot, "heron")
        await press(pilot, "o", "enter")
        assert "Enter once more notes: not observed." in read_screen(app)
        await press(pilot, "enter")
        assert "Stored for heron-lamp." in read_screen(app)
    (block,) = read_log(library).sessions[0].blocks
    assert all(not part.values for part in block.participations)


async def test_side_task_and_measure_are_kept_for_the_next_block(library: Path) -> None:
    """What was set once stands in the line of context and in what is stored."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await pick_who(pilot, "heron")
        await press(pilot, "f3", "t")
        await paste(pilot, "reaching")
        await press(pilot, "enter", "d", "d")
        assert "task: reaching   side: right" in read_screen(app)
        await press(pilot, "o", "f6")
        await paste(pilot, "movement time")
        await press(pilot, "enter")
        await paste(pilot, "1.2 1.3")
        await press(pilot, "enter", "a", "s", "enter", "p")
        assert "Movement time in s (movement_time_s)" in read_screen(app)
        await press(pilot, "escape")
    blocks = read_log(library).sessions[0].blocks
    assert [(block.phase, block.task) for block in blocks] == [
        ("baseline", "reaching"),
        ("acquisition", "reaching"),
    ]


async def test_the_learners_own_words_and_the_incident_reminder(library: Path) -> None:
    """Own words are typed in a line of their own; a fall asks for the incident record."""
    app = CuebookApp(library)
    async with app.run_test(size=(80, 24)) as pilot:
        await take_first_cue(pilot, STEPS)
        await pick_who(pilot, "heron")
        await press(pilot, "c", "o")
        await paste(pilot, "mind the [beans]")
        await press(pilot, "enter", *["e"] * 5)
        shown = read_screen(app)
        assert "own words: mind the [beans]" in shown
        assert "event: fall" in shown
        assert "Fill in your own incident record" in shown
        await press(pilot, "enter")
    (block,) = read_log(library).sessions[0].blocks
    assert block.participations[0].stop_reason == "fall_or_near_fall"
