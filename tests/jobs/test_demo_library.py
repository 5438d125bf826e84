"""The demonstration end to end: files written, taken in by the importer, ranked."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path
from typing import Any

import pytest

from cuebook.errors import InputError
from cuebook.jobs.demo.build import (
    MARK_NAME,
    build_demo,
    prepare_demo_folder,
    take_in_plan,
)
from cuebook.jobs.demo.plan import DemoPlan
from cuebook.jobs.demo.show import GOAL, Demonstration, describe_demo
from cuebook.jobs.demo.simulate import write_recordings
from cuebook.jobs.review import make_scale, review_library
from cuebook.metrics.registry import load_registry
from cuebook.practice.derive import derive_changes
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.practice import read_practice_log

BEST, NULLS = "cloth-along-the-table", ("opening-drawer", "one-go-two-counts")
HARMFUL, TRADE, REGRESSION = "back-still-elbow-straight", "iron-over-linen", "shoulder-stays-home"


@dataclass(frozen=True)
class Built:
    """A demonstration that has been built and ranked."""

    folder: Path
    demo: Demonstration

    @property
    def cues(self) -> dict[str, Any]:
        """Return the ranked cues by code."""
        return {cue["cue"]: cue for cue in self.demo.document["cues"]}


@pytest.fixture(scope="module")
def built(tmp_path_factory: pytest.TempPathFactory) -> Built:
    """Build the demonstration once."""
    folder = tmp_path_factory.mktemp("demonstration")
    imported = build_demo(folder)
    library = folder / "library"
    document = review_library(library, GOAL).document
    return Built(folder, Demonstration(library, imported, document))


def test_the_planted_best_and_null_cues_are_told_apart(built: Built) -> None:
    """The best cue helps, the null cues do not, and their intervals show it."""
    best = built.cues[BEST]
    assert best["verdict"] == "helps"
    for null in NULLS:
        assert built.cues[null]["verdict"] != "helps"
        assert built.cues[null]["high95"] < best["effect"]
        assert built.cues[null]["low95"] < 0 < built.cues[null]["high95"]


@pytest.mark.parametrize("trap", [HARMFUL, TRADE, REGRESSION])
def test_planted_traps_are_not_called_helpful(built: Built, trap: str) -> None:
    """Harm, a trade and regression to the mean are never called 'helps'."""
    assert built.cues[trap]["verdict"] != "helps"


def test_the_trade_names_what_was_lost(built: Built) -> None:
    """A cue that smooths and slows is shown with both."""
    assert built.cues[TRADE]["verdict"] == "traded"
    assert "movement time" in built.cues[TRADE]["words"]


def test_a_harmful_cue_is_pointed_out_and_more_of_it_is_never_advised(built: Built) -> None:
    """Stops for pain bring 'stop and look', and no sentence asks for more uses of it."""
    assert built.cues[HARMFUL]["verdict"] == "stop_and_look"
    for line in built.demo.document["opening"]:
        assert not (line.startswith("Next:") and HARMFUL in line)


def test_raw_before_and_after_would_have_crowned_the_regression_trap(built: Built) -> None:
    """The trap is a real one: its mean raw change beats every null cue's."""
    with open_for_reading(built.demo.library) as connection:
        log = read_practice_log(connection, ["sparc"])
    derived = derive_changes(log, "sparc", make_scale(load_registry().get("sparc"), None))
    raw: dict[str | None, list[float]] = {}
    for change in derived.changes:
        if change.contrast == "immediate" and change.use.task == "reaching":
            raw.setdefault(change.use.cue, []).append(change.difference)
    means = {cue: sum(values) / len(values) for cue, values in raw.items()}
    assert all(means[REGRESSION] > means[null] for null in NULLS)


def test_learners_who_did_not_agree_are_absent_and_counted(built: Built) -> None:
    """Two learners without consent for ranking are in no number, and that is said."""
    withheld = " ".join(built.demo.document["withheld"])
    assert "did not agree to be ranked" in withheld


def test_what_is_printed_names_library_counts_and_how_to_open_it(built: Built) -> None:
    """The output starts with the place and ends with the way in."""
    lines = describe_demo(built.demo)
    assert str(built.demo.library) in lines[0]
    assert "1468 recordings" in lines[1]
    assert lines[-1].startswith("Open it: cuebook --library")
    assert any(line.startswith("Practice alone:") for line in lines)


def test_a_second_call_builds_nothing_anew(built: Built) -> None:
    """A finished demonstration is recognised."""
    assert prepare_demo_folder(built.folder, fresh=False)
    assert (built.folder / MARK_NAME).is_file()


def test_a_folder_with_something_else_is_left_alone(tmp_path: Path) -> None:
    """A folder that is no demonstration is refused, even with fresh."""
    (tmp_path / "own.txt").write_text("mine", encoding="utf-8")
    with pytest.raises(InputError):
        prepare_demo_folder(tmp_path, fresh=True)
    assert (tmp_path / "own.txt").read_text(encoding="utf-8") == "mine"


def _find_reach_after_best(plan: DemoPlan) -> str:
    """Return a recording made straight after the best cue."""
    for session in plan.sessions:
        for before, after in pairwise(session.blocks):
            if before.cue == BEST and after.phase == "immediate_post":
                return next(trial.file for trial in after.participations[0].trials if trial.file)
    raise AssertionError


def _break_up(rows: list[str]) -> list[str]:
    """Return the rows of a reach that stands still four times on its way."""
    header, *samples = rows
    places = [row.split(",", 1)[1] for row in samples]
    broken: list[str] = []
    for at, place in enumerate(places):
        stops = at in {int(len(places) * share) for share in (0.3, 0.4, 0.5, 0.6)}
        broken += [place] * (30 if stops else 1)
    return [header, *(f"{at / 100:.2f},{place}" for at, place in enumerate(broken)), ""]


def test_the_ranking_comes_from_the_files(built: Built, tmp_path: Path) -> None:
    """Replacing one recording by a broken-up reach lowers the cue it followed."""
    plan = write_recordings(tmp_path / "recordings")
    path = tmp_path / "recordings" / _find_reach_after_best(plan)
    path.write_text(
        "\n".join(_break_up(path.read_text(encoding="ascii").splitlines())), encoding="ascii"
    )
    take_in_plan(tmp_path / "library", tmp_path / "recordings", plan)
    document: dict[str, Any] = review_library(tmp_path / "library", GOAL).document
    effects = {cue["cue"]: cue["effect"] for cue in document["cues"]}
    assert effects[BEST] < built.cues[BEST]["effect"]
