"""Cues said to a whole group: one event, however many hear it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from support.simulated_occasions import ClassScenario, simulate_classes

from cuebook.evidence.group_events import FEWEST_EVENTS, code_events, name_group
from cuebook.evidence.preparation import prepare_uses
from cuebook.evidence.prepared import PreparedUses
from cuebook.evidence.question import ReviewQuestion
from cuebook.evidence.ranking import rank_cues
from cuebook.practice.changes import Change

FEW = ClassScenario(n_classes=1, n_members=6, n_cues=2, n_sessions=7, uses_a_session=1)
MANY = ClassScenario(n_classes=3, n_members=6, n_cues=3, n_sessions=8, uses_a_session=2)


def prepare(changes: tuple[Change, ...] | list[Change]) -> PreparedUses:
    """Return immediate changes made ready."""
    return prepare_uses(changes, contrast="immediate")


def copy_members(changes: tuple[Change, ...]) -> list[Change]:
    """Return the changes with every learner there twice under two names."""
    return [
        replace(
            change,
            use=replace(
                change.use,
                learner=f"{change.use.learner}{copy}",
                use=f"{change.use.use}{copy}",
                session=f"{change.use.session}{copy}",
            ),
        )
        for change in changes
        for copy in "ab"
    ]


def test_few_events_are_counted_as_one_use_each() -> None:
    """Fewer than eight events: one row an event, its mean and the mean's variance, all people."""
    changes = simulate_classes(1, FEW).changes
    prepared = prepare(changes)
    assert FEW.n_sessions < FEWEST_EVENTS
    assert prepared.is_collapsed
    assert prepared.change.size == FEW.n_sessions
    assert set(prepared.people.tolist()) == {FEW.n_members}
    assert prepared.learner_labels == ("group:class0",)
    means = {
        event: np.mean([c.difference for c in changes if c.use.event == event])
        for event in {c.use.event for c in changes}
    }
    assert sorted(prepared.change) == pytest.approx(sorted(means.values()))
    assert any("one use each" in note for note in prepared.notes)


def test_many_events_get_an_effect_each() -> None:
    """Eight events or more keep a row a person and carry the event's code."""
    changes = simulate_classes(1, MANY).changes
    prepared = prepare(changes)
    assert not prepared.is_collapsed
    assert prepared.event is not None
    assert prepared.change.size == len(changes)
    assert len(set(prepared.event.tolist())) == len({c.use.event for c in changes})
    assert set(prepared.people.tolist()) == {1}


@pytest.mark.parametrize("scenario", [FEW, MANY])
def test_copying_the_learners_of_an_event_does_not_narrow_a_cue(scenario: ClassScenario) -> None:
    """Twice the people in the same events: no interval narrows by more than the attempt noise.

    Attempt noise of an event's mean halves in variance; what events share does not.
    """
    changes = simulate_classes(2, scenario).changes
    question = ReviewQuestion(metric="simulated", allowance=0.0)
    one = {cue.cue: cue for cue in rank_cues(prepare(changes), question).cues}
    other = {cue.cue: cue for cue in rank_cues(prepare(copy_members(changes)), question).cues}
    assert one.keys() == other.keys()
    for cue, own in one.items():
        narrowed = other[cue].sd / own.sd
        assert narrowed > 0.85, f"{cue}: {narrowed:.2f}"
        assert narrowed > 2**-0.5


def test_an_event_of_one_learner_is_an_ordinary_use() -> None:
    """A code that nobody shares marks no event."""
    assert code_events(["a", "b", None]) is None
    codes = code_events(["a", "b", None, "b"])
    assert codes is not None
    assert codes.tolist() == [-1, 0, -1, 0]


def test_the_group_is_named_before_the_colon() -> None:
    """Events of one group stand for one group of people."""
    assert name_group("lane-class:0199") == name_group("lane-class:0200") == "group:lane-class"


def test_learners_outside_the_event_keep_their_rows_when_events_are_few() -> None:
    """Only shared rows are joined; a learner met alone stays a learner."""
    changes = list(simulate_classes(1, FEW).changes)
    alone = [
        replace(change, use=replace(change.use, event=None, use=f"{change.use.use}-alone"))
        for change in changes
        if change.use.learner == "l000"
    ]
    prepared = prepare(changes + alone)
    assert prepared.is_collapsed
    assert "l000" in prepared.learner_labels
    assert prepared.change.size == FEW.n_sessions + len(alone)
