from __future__ import annotations

import subprocess
import sys
import threading
from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from support.screens import paste, press, read_screen, read_widget, settle

from cuebook.errors import CuebookError, UnknownCodeError
from cuebook.jobs.log_entries import BlockEntry
from cuebook.jobs.log_use import log_before_after
from cuebook.jobs.people import NewLearner, add_learner, set_consent
from cuebook.jobs.review_request import ReviewRequest
from cuebook.tui import fitting
from cuebook.tui.app import CuebookApp
from cuebook.tui.ports import LibraryJobs
from cuebook.tui.review_answer import describe_answer, describe_harm, describe_lost

METRIC = "step_length_cm"
CUES = ("paving-slab-stride", "long-step-heel-first", None)
GAINS_CM = (6.0, 1.0, 1.0)


@pytest.fixture(scope="module")
def walked(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Make a library in which four learners practised two cues, and without a cue."""
    folder = tmp_path_factory.mktemp("walked") / "library"
    for learner, code in enumerate(("heron-lamp", "pond-rope", "copper-gate", "willow-drum")):
        add_learner(folder, NewLearner(code=code, age_years=78))
        set_consent(folder, code, "use_for_ranking", "yes")
        for visit, (cue, gain) in enumerate(zip(CUES, GAINS_CM, strict=True)):
            base = 40.0 + learner + 0.5 * visit
            before, after = (base, base + 1, base + 0.5), (base + gain, base + gain + 1)
            entry = BlockEntry(task="walking", learner=code, cue=cue, session="new")
            log_before_after(folder, entry, {METRIC: before}, {METRIC: after})
    return folder


class CannedJobs(LibraryJobs):
    """Fitting gives what is set, as soon as it is let go."""

    def __init__(self, location: Path, document: Mapping[str, Any] | Exception) -> None:
        super().__init__(location)
        self._document = document
        self.let_go = threading.Event()

    def fit(self, request: ReviewRequest) -> Mapping[str, Any]:
        """Wait; then give the document or fail."""
        del request
        self.let_go.wait(timeout=30)
        if isinstance(self._document, Exception):
            raise self._document
        return self._document


def make_document(**changed: object) -> dict[str, Any]:
    """Return the review of one cue."""
    cue = {
        "cue": "iron-over-linen",
        "first_words": "Slide your hand along like an iron over linen.",
        "caution": "Old burns: use the sister image",
        "sign": "+/-",
        "words": "gained smoothness, lost movement time",
        "verdict": "traded",
        "uses": 14,
        "learners": 6,
        "effect": 0.4,
        "low80": 0.2,
        "high80": 0.6,
        "low95": 0.1,
        "high95": 0.7,
        "p_better": 0.998,
        "grade_words": "random order",
        "marks": ["rank_not_known", "in_tie_band"],
        "missing": ["3 more learners", "random order"],
        "harm_details": {"uses": 16, "stops": {"pain": 2}, "events": {"near_fall": 1}},
        "watch": [
            {"metric": "movement_time_s", "p_worse": 0.97, "trade_off": True},
            {"metric": "path_length_cm", "p_worse": 0.1, "trade_off": False},
        ],
    }
    return {
        "cues": [{**cue, **changed}],
        "opening": ["Today: nothing stands out."],
        "practice_alone": {"effect": 0.1, "low95": -0.1, "high95": 0.3},
        "unit": "cm",
        "worthwhile": 0.05,
        "worthwhile_note": None,
        "n_uses": 14,
    }


@pytest.mark.parametrize("width", [56, 76, 116])
def test_everything_a_cue_stands_for_is_in_words(width: int) -> None:
    """Sign, words, caution, interval, basis, harms, losses and limits are all written out."""
    text = describe_answer(make_document(), width).plain
    for words in (
        "+/- iron-over-linen: gained smoothness, lost movement time",
        "! Old burns: use the sister image",
        "+0.4 (95 %: +0.1 to +0.7), chance >99 %",
        "14 uses, 6 learners; basis: random order",
        "Harm: stopped 2 (pain), near-fall 1 in 16 uses",
        "Keep an eye on: movement time (chance worse 97 %)",
        "Mind: rank not known; missing: 3 more learners, random order",
        "Practice alone: +0.1 cm (95 %: −0.1 to +0.3)",
        "Dots: less than 0.05 cm (as you set it).",
    ):
        assert words in text
    assert text.index("! Old burns") < text.index("Slide your hand along")
    assert "│ practice alone" in text


def test_no_harm_is_said_too() -> None:
    """A cue without harm says so with its number of uses; nothing is left to be guessed."""
    cue = {"uses": 5, "harm_details": {"uses": 5, "stops": {"planned_end": 5}, "events": {}}}
    assert describe_harm(cue) == "none noted in 5 uses"
    assert describe_lost({"watch": [{"metric": "x", "p_worse": 0.5, "trade_off": False}]}) == ""


async def test_a_ranking_shows_bars_and_is_there_at_once_the_next_time(walked: Path) -> None:
    """First it is ranked off the screen; opened again it stands there "as of N uses"."""
    app = CuebookApp(walked)
    async with app.run_test(size=(120, 40)) as pilot:
        await press(pilot, "f4")
        answer = read_widget(app, "#answer")
        assert "paving-slab-stride" in answer
        assert "━" in answer
        assert "●" in answer
        assert answer.startswith(("Today:", "Nothing"))
    again = CuebookApp(jobs=CannedJobs(walked, CouldNotBeAskedError()))
    async with again.run_test(size=(80, 24)) as pilot:
        await press(pilot, "f4")
        assert "As of 12 uses." in read_screen(again)
        assert read_widget(again, "#answer").startswith(("Today:", "Nothing"))


class CouldNotBeAskedError(CuebookError):
    """A fit that must not be asked for."""

    def __init__(self) -> None:
        super().__init__("The stored ranking is current; nothing had to be fitted.")


async def test_an_outdated_ranking_is_marked_until_the_new_one_is_there(walked: Path) -> None:
    """After one more use the last ranking is shown, marked, and keys are free meanwhile."""
    LibraryJobs(walked).log_block(BlockEntry(task="walking", learner="pond-rope", phase="baseline"))
    jobs = CannedJobs(walked, make_document(n_uses=13))
    app = CuebookApp(jobs=jobs)
    async with app.run_test(size=(80, 24)) as pilot:
        await pilot.press("f4")
        while "Outdated" not in read_screen(app):
            await pilot.pause()
        assert "Outdated: as of 12 uses. Being brought up to date …" in read_screen(app)
        assert "paving-slab-stride" in read_widget(app, "#answer")
        await pilot.press("pagedown", "f1")
        assert "Rank anew" in read_screen(app)
        await pilot.press("escape")
        jobs.let_go.set()
        await settle(pilot)
        assert "As of now: 14 uses." in read_screen(app)
        assert "iron-over-linen" in read_widget(app, "#answer")


async def test_when_it_was_measured_is_chosen_by_a_key(walked: Path) -> None:
    """M asks when; the question says it, and it is ranked for that alone."""
    app = CuebookApp(walked)
    async with app.run_test(size=(80, 24)) as pilot:
        await press(pilot, "f4")
        assert "measured straight after, cue off (M changes)" in read_widget(app, "#asked")
        await press(pilot, "m")
        await paste(pilot, "next time")
        await press(pilot, "enter")
        assert "measured next time, before any cue (M changes)" in read_widget(app, "#asked")
        document = app.screen.document  # type: ignore[attr-defined]
        assert document["contrast"] == "retention"


async def test_what_went_wrong_in_ranking_is_read_in_a_box(walked: Path) -> None:
    """The other process's error is said in its words; the screen stays usable."""
    jobs = CannedJobs(walked, UnknownCodeError("Unknown metric 'x'.", "Nearest known: y."))
    jobs.let_go.set()
    app = CuebookApp(jobs=jobs)
    async with app.run_test(size=(80, 24)) as pilot:
        await press(pilot, "f4", "r")
        assert "Unknown metric 'x'." in read_screen(app)
        await press(pilot, "escape", "f2")
        assert "[Find]" in read_screen(app)


def test_the_other_process_says_what_went_wrong(walked: Path) -> None:
    """A question the library cannot answer comes back as an error a user can act on."""
    with pytest.raises(CuebookError) as refused:
        fitting.fit_apart(walked, ReviewRequest("step_lenght_cm", "walking"))
    assert "step_length_cm" in str(refused.value)


def test_the_command_line_asks_the_same_question() -> None:
    """Every part of the question that the screens set is handed to the other process."""
    request = replace(ReviewRequest("sparc", "reaching", "retention"), better="lower")
    command = fitting.make_command("somewhere", request)
    assert command[:2] == [sys.executable, "-P"]
    for pair in (
        ("--metric", "sparc"),
        ("--task", "reaching"),
        ("--contrast", "retention"),
        ("--better", "lower"),
        ("--library", "somewhere"),
    ):
        assert command[command.index(pair[0]) + 1] == pair[1]


def test_a_ranking_no_longer_wanted_is_ended() -> None:
    """The other process is killed as soon as nobody waits for it any more."""
    process = subprocess.Popen(
        [sys.executable, "-c", "import time; time.sleep(60)"],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )
    with pytest.raises(fitting.NoLongerWantedError):
        fitting.wait_for(process, lambda: False)
    assert process.poll() is not None
