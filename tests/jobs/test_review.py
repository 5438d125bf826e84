"""A review of a library: from what was logged to what can be said."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any

import pytest

from cuebook.cli.main import run
from cuebook.errors import NeedsAnswerError, UnknownCodeError, UsageError
from cuebook.jobs import people
from cuebook.jobs.log_entries import BlockEntry, LearnerNote
from cuebook.jobs.log_use import log_before_after
from cuebook.jobs.review import make_scale, read_better, review_library
from cuebook.jobs.review_opening import describe_opening
from cuebook.jobs.review_request import ReviewRequest
from cuebook.jobs.review_stored import read_questions, read_stored_review
from cuebook.jobs.review_words import describe_review, format_chance, format_number
from cuebook.metrics.registry import load_registry

LEARNERS = ("heron-lamp", "otter-bell", "wren-cup")
CUE = "paving-slab-stride"
MORNING = datetime(2026, 3, 2, 9, 0, tzinfo=UTC)
QUESTION = ReviewRequest("gait_speed_m_s")


def log_visit(library: Path, learner: str, day: int, cue: str | None, gain: float = 0.1) -> None:
    """Log one meeting: two attempts before, practice, two after."""
    entry = BlockEntry(
        "walking",
        learner=learner,
        phase="acquisition",
        cue=cue,
        session="new",
        at=MORNING + timedelta(days=day, hours=LEARNERS.index(learner)),
    )
    level = 1.0 + 0.01 * day
    log_before_after(
        library,
        entry,
        {"gait_speed_m_s": (level, level + 0.04)},
        {"gait_speed_m_s": (level + gain, level + gain + 0.02)},
    )


@pytest.fixture
def library(tmp_path: Path) -> Path:
    """Return a library of three learners who may be ranked, with one cued visit each."""
    folder = tmp_path / "library"
    for learner in LEARNERS:
        people.add_learner(folder, people.NewLearner(learner))
        people.set_consent(folder, learner, "use_for_ranking", "yes")
        log_visit(folder, learner, 0, CUE)
    return folder


@pytest.fixture
def longer(library: Path) -> Path:
    """Return the library with more visits, with and without the cue."""
    for day in range(1, 7):
        for learner in LEARNERS:
            log_visit(library, learner, 2 * day, None if day % 2 else CUE, 0.02 if day % 2 else 0.2)
    return library


def review(library: Path, request: ReviewRequest = QUESTION) -> Mapping[str, Any]:
    """Return the document of a review."""
    return review_library(library, request).document


def test_what_cannot_be_ranked_is_shown_as_recorded(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A first use is there with its values in the metric's unit, its change and why not ranked."""
    monkeypatch.setenv("COLUMNS", "80")
    folder = tmp_path / "library"
    people.add_learner(folder, people.NewLearner("heron-lamp"))
    people.set_consent(folder, "heron-lamp", "use_for_ranking", "yes")
    log_visit(folder, "heron-lamp", 0, CUE)
    document = review(folder)
    assert document["cues"] == []
    assert document["opening"][0] == "Nothing can be ranked yet."
    assert document["opening"][1].startswith("Missing: ")
    (first,) = document["recorded"]
    assert (first["cue"], first["learner"], first["unit"]) == (CUE, "heron-lamp", "m/s")
    assert first["before"] == pytest.approx([1.0, 1.04])
    assert first["after"] == pytest.approx([1.1, 1.12])
    assert first["change"] == pytest.approx(0.09)
    assert first["reason"] == "too few uses to rank"
    said = " ".join(" ".join(describe_review(document)).split())
    assert f"Recorded, cannot rank yet: {CUE}, heron-lamp: 1 1.04 before" in said
    assert "change +0.09 m/s; too few uses to rank" in said


def test_three_single_uses_settle_nothing(library: Path) -> None:
    """One use each of three learners is listed, with no word on whether the cue works."""
    document = review(library)
    (line,) = document["cues"]
    assert (line["verdict"], line["grade"], line["uses"], line["learners"]) == (
        "cannot_tell", "C", 3, 3,
    )  # fmt: skip
    assert document["reference"] == "mean_of_cues"
    assert "without a cue" in document["opening"][-1]


def test_the_worthwhile_difference_of_a_log_metric_is_said_in_per_cent(longer: Path) -> None:
    """A worthwhile 0.1 m/s of a speed about 1.05 m/s is read as some 9 to 10 per cent of it."""
    document = review(longer, replace(QUESTION, worthwhile=0.1))
    (line,) = [one for one in describe_review(document) if one.startswith("Worthwhile")]
    value = float(line.split()[1])
    assert line.split()[2] == "%"
    assert 8.5 < value < 10.0


def test_withdrawn_consent_takes_a_learner_out_at_once(longer: Path) -> None:
    """The next review has neither the learner's uses nor the learner, and says how many."""
    before = review(longer)
    people.set_consent(longer, "wren-cup", "use_for_ranking", "no")
    after = review(longer)
    assert (before["n_learners"], after["n_learners"]) == (3, 2)
    assert after["n_uses"] < before["n_uses"]
    assert "wren-cup" not in str(after["recorded"])
    assert any("did not agree to be ranked" in line for line in after["withheld"])


def test_a_ranking_is_kept_and_marked_old_after_a_new_log(longer: Path) -> None:
    """What was answered is there to be read at once; a new use makes it not current."""
    assert read_stored_review(longer, QUESTION) is None
    document = review(longer)
    stored = read_stored_review(longer, QUESTION)
    assert stored is not None
    assert stored.is_current
    assert stored.n_uses == document["n_uses"]
    assert [line["cue"] for line in stored.document["cues"]] == [
        line["cue"] for line in document["cues"]
    ]
    log_visit(longer, "heron-lamp", 30, CUE)
    old = read_stored_review(longer, QUESTION)
    assert old is not None
    assert not old.is_current
    assert read_stored_review(longer, replace(QUESTION, contrast="retention")) is None


def test_withdrawn_consent_makes_the_kept_ranking_old(longer: Path) -> None:
    """A stored ranking that rests on a learner who withdrew is not shown as current."""
    review(longer)
    people.set_consent(longer, "wren-cup", "use_for_ranking", "no")
    stored = read_stored_review(longer, QUESTION)
    assert stored is None or not stored.is_current


def test_a_review_that_is_not_to_be_kept_is_not(longer: Path) -> None:
    """Without keeping, the library stays as it was."""
    review_library(longer, QUESTION, keep=False)
    assert read_stored_review(longer, QUESTION) is None


def test_the_questions_with_data_are_listed(longer: Path, tmp_path: Path) -> None:
    """Each measured metric and task is a question, with how much lies behind it."""
    (line,) = read_questions(longer)
    assert (line.request.metric, line.request.task) == ("gait_speed_m_s", "walking")
    assert line.n_learners == 3
    assert line.n_values == 3 * 7 * 4
    assert "gait_speed_m_s" not in line.title
    assert review(longer, line.request)["cues"]
    assert read_questions(tmp_path / "nowhere") == ()


def test_words_name_metrics_and_fit_eighty_columns(
    longer: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A person reads names, not ids, in lines of at most 80 characters."""
    monkeypatch.setenv("COLUMNS", "80")
    lines = describe_review(review(longer))
    assert lines[0].startswith("What shifted: ")
    assert [line for line in lines if len(line) > 80] == []
    assert "gait_speed_m_s" not in "\n".join(lines)
    assert CUE in "\n".join(lines)


def test_the_command_prints_what_the_job_found(
    longer: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The command line gives the same words, and one line for an unknown metric."""
    assert run(["review", "--metric", "gait_speed_m_s", "--library", str(longer)]) == 0
    assert CUE in capsys.readouterr().out
    assert run(["review", "--metric", "gait_sped_m_s", "--library", str(longer)]) == 4
    said = capsys.readouterr()
    assert "gait_speed_m_s" in said.err
    assert (said.out, len(said.err.splitlines())) == ("", 1)


@pytest.mark.parametrize(
    ("request_", "error"),
    [
        (ReviewRequest("no_such_metric"), UnknownCodeError),
        (replace(QUESTION, task="flying"), UnknownCodeError),
        (replace(QUESTION, age_band="ancient"), UnknownCodeError),
        (replace(QUESTION, background="alchemy"), UnknownCodeError),
        (replace(QUESTION, better="up"), UsageError),
        (replace(QUESTION, worthwhile=0.0), UsageError),
    ],
)
def test_questions_that_cannot_be_asked_are_refused(
    longer: Path, request_: ReviewRequest, error: type[Exception]
) -> None:
    """Unknown codes and impossible options are errors with a word for each."""
    with pytest.raises(error):
        review_library(longer, request_)


def test_filters_narrow_the_learners(longer: Path) -> None:
    """Nobody has the background asked for: nothing is ranked, and no error."""
    document = review(longer, replace(QUESTION, background="music", task="walking"))
    assert document["cues"] == []
    assert document["n_learners"] == 0


def test_a_metric_without_a_direction_needs_an_answer() -> None:
    """Cadence is neither good nor bad by itself: the option that settles it is named."""
    entry = next(one for one in load_registry().entries if one.better == "none")
    with pytest.raises(NeedsAnswerError) as caught:
        make_scale(entry, None)
    assert "--better" in caught.value.hint
    assert make_scale(entry, "target:0").target == 0.0


def test_directions_are_read_exactly() -> None:
    """The three forms are read, anything else is refused."""
    assert read_better("lower") == ("lower", None)
    assert read_better("target:-2.5") == ("target", -2.5)
    for text in ("higher:1", "target", "target:", "target:x", "target:inf", ""):
        with pytest.raises(UsageError):
            read_better(text)


def make_line(cue: str, verdict: str, more_uses: int | None) -> dict[str, Any]:
    """Return what the opening reads of a cue."""
    return {"cue": cue, "verdict": verdict, "words": verdict, "more_uses": more_uses}


@pytest.mark.parametrize("harmful", ["stop_and_look", "seems_worse", "may_be_worse"])
def test_more_of_a_harmful_cue_is_never_advised(harmful: str) -> None:
    """However little is missing to settle it, the harmful cue is not what to do next."""
    document = {
        "reference": "practice_alone",
        "cues": [make_line("bowl", harmful, 1), make_line("spoon", "cannot_tell", 30)],
    }
    lines = describe_opening(document)
    assert any(line.startswith("Take care: bowl") for line in lines)
    (following,) = [line for line in lines if line.startswith("Next:")]
    assert "bowl" not in following
    assert "30 more uses of spoon" in following
    document["cues"] = [make_line("bowl", harmful, 1)]
    assert not any(line.startswith("Next:") for line in describe_opening(document))


def test_without_practice_alone_it_is_the_next_thing() -> None:
    """The line to beat comes before more of any cue."""
    document = {"reference": "mean_of_cues", "cues": [make_line("spoon", "cannot_tell", 3)]}
    assert "without a cue" in describe_opening(document)[-1]


def test_numbers_are_read_aloud_as_they_are() -> None:
    """A true minus, a dash for none, and never a chance of 0 or 100 per cent."""
    assert format_number(-0.1234) == "−0.123"
    assert format_number(None) == "–"
    assert format_number(2.0, signed=False) == "2"
    assert [format_chance(p) for p in (0.0, 0.5, 1.0, None)] == ["<1 %", "50 %", ">99 %", "–"]


def test_a_stop_is_counted_beside_the_cue(library: Path) -> None:
    """A use that had to stop gives no change and is still told."""
    entry = BlockEntry(
        "walking",
        learner="heron-lamp",
        cue=CUE,
        session="new",
        at=MORNING + timedelta(days=3),
        note=LearnerNote(stop="pain"),
    )
    log_before_after(library, entry, {"gait_speed_m_s": (1.0,)}, {})
    document = review(library)
    (line,) = document["cues"]
    assert (line["uses"], line["stopped"]) == (3, 1)


def test_a_stop_of_a_cue_without_changes_is_listed_with_its_reason(tmp_path: Path) -> None:
    """Where a cue cannot be ranked, its stopped use is listed and says so."""
    folder = tmp_path / "library"
    people.add_learner(folder, people.NewLearner("heron-lamp"))
    people.set_consent(folder, "heron-lamp", "use_for_ranking", "yes")
    entry = BlockEntry(
        "walking", learner="heron-lamp", cue=CUE, at=MORNING, note=LearnerNote(stop="pain")
    )
    log_before_after(folder, entry, {"gait_speed_m_s": (1.0,)}, {})
    document = review(folder)
    assert [(line["cue"], line["reason"]) for line in document["recorded"]] == [
        (CUE, "this learner had to stop")
    ]
