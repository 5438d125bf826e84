"""Groups: each learner present in a block has an own use with own sets and the same event id."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from support.practice_logs import START, block, derive, find_reason, list_changes

from cuebook.practice.log import LoggedBlock, LoggedParticipation, LoggedSession


def meet(*blocks: LoggedBlock) -> LoggedSession:
    """Return one session of a group."""
    return LoggedSession("class", START, blocks)


def measure(number: int, sign: str, values: Mapping[str, float]) -> LoggedBlock:
    """Return a measured block with one value a learner."""
    own = {learner: [value] for learner, value in values.items()}
    return block(f"class/{number}", sign, number, learners=list(values), values=own)


def cue(
    number: int, sign: str, learners: Sequence[str], stopped: Sequence[str] = ()
) -> LoggedBlock:
    """Return a block with a cue given to some learners together."""
    return block(
        f"class/{number}", sign, number, learners=learners, stopped=stopped, event=f"class:{number}"
    )


def test_those_present_without_values_are_met_and_have_no_values() -> None:
    """12 present, 3 with values: 12 met, 3 changes, 9 times no values, one event id."""
    names = [f"l{number:02d}" for number in range(12)]
    measured = dict.fromkeys(names[:3], 1.0)
    derived = derive(
        meet(
            measure(1, "b", measured),
            cue(2, "A", names),
            measure(3, "o", dict.fromkeys(names[:3], 2.0)),
        )
    )
    reasons = [one.reason for one in derived.without if one.contrast == "immediate"]
    assert (derived.harms["A"].uses, reasons) == (12, ["no_values"] * 9)
    assert {use.event for use in derived.uses} == {"class:2"}
    assert len([one for one in derived.changes if one.contrast == "immediate"]) == 3


def test_the_k_of_late_comers_is_their_own() -> None:
    """Who came after the first cue has k = 1 at the second, and a change of their own."""
    derived = derive(
        meet(
            measure(1, "b", {"ann": 1.0}),
            cue(2, "A", ["ann"]),
            measure(3, "o", {"ann": 2.0, "ben": 5.0}),
            cue(4, "B", ["ann", "ben"]),
            measure(5, "o", {"ann": 4.0, "ben": 6.0}),
        )
    )
    assert {(use.learner, use.cue, use.k) for use in derived.uses} == {
        ("ann", "A", 1),
        ("ann", "B", 2),
        ("ben", "B", 1),
    }
    changes = {
        (one.use.learner, one.use.cue): one.difference
        for one in derived.changes
        if one.contrast == "immediate"
    }
    assert changes == {("ann", "A"): 1.0, ("ann", "B"): 2.0, ("ben", "B"): 1.0}


def test_who_left_early_met_only_what_they_attended() -> None:
    """A block somebody was away from gives them no use and bars nothing of theirs."""
    away = LoggedParticipation("ben", presence="absent")
    second = cue(4, "B", ["ann"])
    second = LoggedBlock(
        second.block,
        4,
        "acquisition",
        second.task,
        (*second.participations, away),
        cue="B",
        event=second.event,
    )
    derived = derive(
        meet(
            measure(1, "b", {"ann": 1.0, "ben": 1.0}),
            cue(2, "A", ["ann", "ben"]),
            measure(3, "o", {"ann": 2.0, "ben": 3.0}),
            second,
        )
    )
    assert {(use.learner, use.cue) for use in derived.uses} == {
        ("ann", "A"),
        ("ann", "B"),
        ("ben", "A"),
    }


def test_the_stop_of_one_learner_leaves_the_others() -> None:
    """One learner stops: no change of theirs, all of the others', one harm of two uses."""
    derived = derive(
        meet(
            measure(1, "b", {"ann": 1.0, "ben": 1.0}),
            cue(2, "A", ["ann", "ben"], stopped=["ann"]),
            measure(3, "o", {"ann": 2.0, "ben": 3.0}),
        )
    )
    assert find_reason(derived, "A", "immediate") == "stopped"
    assert list_changes(derived, "immediate") == {"A": 2.0}
    assert [one.use.learner for one in derived.changes] == ["ben"]
    assert (derived.harms["A"].uses, dict(derived.harms["A"].stops)) == (2, {"pain": 1})


def test_who_declined_before_starting_had_no_use() -> None:
    """Declined is counted as declined, not as a use, and the cue bars nothing for them."""
    parts = (
        LoggedParticipation("ann", attempts=3),
        LoggedParticipation("ben", reaction="declined"),
    )
    given = LoggedBlock("class/2", 2, "acquisition", "reaching", parts, cue="A")
    derived = derive(meet(measure(1, "b", {"ann": 1.0, "ben": 1.0}), given))
    assert [use.learner for use in derived.uses] == ["ann"]
    assert (derived.harms["A"].uses, derived.harms["A"].declined) == (1, 1)


def test_who_declined_later_stays_in() -> None:
    """A cue declined after it was tried keeps its change: that is how the cue works."""
    parts = tuple(
        LoggedParticipation(name, reaction="declined", attempts=2, values={}) for name in ["ann"]
    )
    given = LoggedBlock("class/2", 2, "acquisition", "reaching", parts, cue="A")
    derived = derive(meet(measure(1, "b", {"ann": 1.0}), given, measure(3, "o", {"ann": 4.0})))
    assert list_changes(derived, "immediate") == {"A": 3.0}
    assert derived.harms["A"].declined == 0
