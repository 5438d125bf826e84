from __future__ import annotations

from typing import TYPE_CHECKING

from cuebook.jobs.demo.truth import read_truth
from cuebook.library.seed_sets import load_seed_cues

if TYPE_CHECKING:
    from support.demonstration import Demo

CUES = {cue.code: cue for cue in load_seed_cues()}
TRUTH = read_truth()
TRIED_ALL_THE_SAME = {("pocket-fern", "train-into-station"), ("pocket-fern", "calm-shore-waves")}
"""Images tried on a learner who takes words literally, before the profile said so."""
BORROWED = {("standing_balance", "chin-level-look-ahead"), ("standing_balance", "far-shop-signs")}
"""Said while standing, though written for walking."""


def test_every_cue_of_the_plan_is_a_seed_cue_with_a_truth(demo: Demo) -> None:
    """What is said in the plan can be found in the library, and its truth in the file."""
    said = {block.cue for _, block in demo.plan.iterate_blocks() if block.cue}
    assert said == set(TRUTH.cues)
    assert said <= set(CUES)


def test_cues_are_said_for_the_task_they_are_written_for(demo: Demo) -> None:
    """A cue is used on its own task, two of them also while standing."""
    odd = {
        (block.task, block.cue)
        for _, block in demo.plan.iterate_blocks()
        if block.cue and block.task not in CUES[block.cue].tasks
    }
    assert odd == BORROWED


def test_no_cue_goes_against_a_profile(demo: Demo) -> None:
    """Access needs and safety notes are kept, but for the two images planted for that."""
    learners = {learner.code: learner for learner in demo.plan.learners}
    against = set()
    for _, block, part in demo.plan.iterate_uses():
        if block.cue:
            cue, learner = CUES[block.cue], learners[part.learner]
            assert learner.safety_note not in cue.note_avoid
            if not set(cue.access_avoid).isdisjoint(learner.access_needs):
                assert part.reaction == "confused"
                against.add((learner.code, cue.code))
    assert against == TRIED_ALL_THE_SAME


def test_cues_for_therapists_only_are_said_by_one_to_one_learner(demo: Demo) -> None:
    """Nothing that is for a therapist alone is said to a group, or by anybody else."""
    roles = {one.code: one.role for one in demo.plan.staff}
    used = [
        session
        for session, block, _ in demo.plan.iterate_uses()
        if block.cue and CUES[block.cue].status == "therapist_only"
    ]
    assert used
    assert all(session.group is None for session in used)
    assert {roles[session.entered_by] for session in used} == {"therapist"}


def test_planted_truths_meet_what_the_cues_claim() -> None:
    """The best and the trade cue claim smoothness; the harmful one said it may cost it."""
    by_role = {cue.role: CUES[cue.code] for cue in TRUTH.cues.values() if cue.task == "reaching"}
    assert "smoothness" in by_role["best"].features
    assert "smoothness" in by_role["trade"].features
    assert by_role["trade"].watch_metric == "movement_time_s"
    assert "smoothness" in by_role["harmful"].may_worsen
