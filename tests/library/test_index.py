from __future__ import annotations

from dataclasses import replace

import pytest
from benchmarks.lookup import main, make_cues

from cuebook.library.cues import Claim, Cue, Wording
from cuebook.library.index import CueIndex, load_kin, spread_to_kin
from cuebook.library.understand import Scored, Understanding, understand
from cuebook.vocabulary import load_vocabulary

CUE = Cue(
    "long-step",
    "explicit_rule",
    "internal",
    (Wording("Take a longer step."),),
    tasks=("walking",),
    regions=("leg",),
    claims=(Claim("step_length", "improves"),),
    problem="short shuffling steps",
    phrases=("one two", "feet never pass one another"),
)


def test_features_of_a_cue_are_joined_as_a_noisy_or() -> None:
    """Two features of 0.5 each make 0.75: 1 - (1 - 0.5)(1 - 0.5)."""
    cue = replace(CUE, claims=(Claim("step_length", "improves"), Claim("speed", "improves")))
    problem = Understanding(features=(Scored("step_length", 0.5), Scored("speed", 0.5)))
    assert CueIndex([cue]).match(problem)[0].features == pytest.approx(0.75)


def test_what_the_problem_leaves_open_counts_half() -> None:
    """A problem without task or region speaks neither for nor against a cue bound to one."""
    problem = Understanding(features=(Scored("step_length", 1.0),))
    match = CueIndex([CUE]).match(problem)[0]
    assert (match.task, match.region) == (0.5, 0.5)


def test_a_near_task_earns_a_share_and_a_far_one_nothing() -> None:
    """Turning while walking is near to walking, keyboard playing is not."""
    spread = spread_to_kin((Scored("walking", 1.0),), "task")
    assert spread["walking"] == 1.0
    assert 0 < spread["turning_while_walking"] < 1
    assert "keyboard_playing" not in spread


@pytest.mark.parametrize("list_name", ["task", "region"])
def test_kinship_is_mutual_and_known(list_name: str) -> None:
    """If one is near to another, the other is as near to it, and both are in the vocabulary."""
    kin = load_kin(list_name)
    for one, others in kin.items():
        assert load_vocabulary().has(list_name, one)
        for other, share in others.items():
            assert kin[other][one] == share
            assert 0 < share < 1


def test_a_phrase_said_in_full_matches_in_full() -> None:
    """The share of a problem phrase that is said lies between nothing and all of it."""
    index = CueIndex([CUE])
    assert index.match(understand("short, shuffling steps"))[0].phrase == pytest.approx(1.0)
    assert 0 < index.match(understand("short sleeves"))[0].phrase < 1


def test_the_benchmark_runs_and_the_look_up_is_fast_enough(
    capsys: pytest.CaptureFixture[str],
) -> None:
    """The benchmark command works on a small library and finds its goal met."""
    assert main(["--cues", "80", "400"]) == 0
    assert "400 cues" in capsys.readouterr().out
    assert len({cue.code for cue in make_cues(400)}) == 400
