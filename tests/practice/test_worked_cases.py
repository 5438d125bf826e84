"""The worked cases of the rules by which changes are made, one test a case."""

from __future__ import annotations

from datetime import timedelta

import pytest
from support.practice_logs import (
    START,
    block,
    derive,
    find_change,
    find_reason,
    list_changes,
    visit,
)

from cuebook.practice.log import LoggedSession


def test_baseline_cue_post_gives_immediate() -> None:
    """B A o: immediate A is o - b."""
    derived = derive(visit("b A o"))
    assert list_changes(derived, "immediate") == {"A": 3 - 1}


def test_attempts_of_the_use_give_during() -> None:
    """B A o with attempts under the cue: during A is A - b."""
    derived = derive(visit("b A o", values={2: [7.0, 9.0]}))
    assert list_changes(derived, "during") == {"A": 8 - 1}


def test_two_cues_with_a_measure_between_are_chained() -> None:
    """B A o B o: immediate A = o1 - b, immediate B = o2 - o1, chained; during B = B - o1."""
    derived = derive(visit("b A o B o", values={4: [11.0]}))
    assert list_changes(derived, "immediate") == {"A": 2, "B": 2}
    assert "chained" in find_change(derived, "B", "immediate").flags
    assert "chained" not in find_change(derived, "A", "immediate").flags
    assert list_changes(derived, "during") == {"B": 11 - 3}


def test_two_cues_between_two_sets_cannot_be_told_apart() -> None:
    """B A B o: during A only; A has no after, B no clean before; the pair is listed."""
    derived = derive(visit("b A B o", values={2: [5.0], 3: [6.0]}))
    assert list_changes(derived, "during") == {"A": 5 - 1}
    assert find_reason(derived, "A", "immediate") == "no_after"
    assert find_reason(derived, "B", "immediate") == "no_clean_between"
    assert find_reason(derived, "B", "during") == "no_clean_between"
    (pair,) = derived.confused
    assert (pair.cues, pair.total_change) == (("A", "B"), 4 - 1)


def test_the_same_cue_twice_in_a_row_is_one_use() -> None:
    """B A A o: one use of A."""
    derived = derive(visit("b A A o"))
    assert [use.cue for use in derived.uses] == ["A"]
    assert list_changes(derived, "immediate") == {"A": 4 - 1}


def test_a_second_baseline_is_the_fresh_before() -> None:
    """B A o b B o: the before of B is the second b."""
    derived = derive(visit("b A o b B o"))
    assert list_changes(derived, "immediate") == {"A": 3 - 1, "B": 6 - 4}
    assert "chained" not in find_change(derived, "B", "immediate").flags


def test_practice_alone_is_a_use_of_its_own() -> None:
    """B p o A o: practice alone o1 - b; A = o2 - o1 with k = 2."""
    derived = derive(visit("b p o A o"))
    assert list_changes(derived, "immediate") == {None: 3 - 1, "A": 5 - 3}
    assert find_change(derived, "A", "immediate").use.k == 2


def test_a_session_that_began_with_a_cue_has_no_before() -> None:
    """A o: no before, and no retention."""
    derived = derive(visit("A o"), visit("b", day=7))
    assert find_reason(derived, "A", "immediate") == "no_before"
    assert find_reason(derived, "A", "retention") == "session_began_with_cue"


def test_a_stop_gives_no_change_and_counts_as_harm() -> None:
    """B A (stop) o: no change; harm 1 of 1; no retention."""
    derived = derive(visit("b A o", stopped=[2]), visit("b", day=7))
    assert derived.changes == ()
    assert find_reason(derived, "A", "immediate") == "stopped"
    assert find_reason(derived, "A", "retention") == "stopped"
    assert (derived.harms["A"].uses, dict(derived.harms["A"].stops)) == (1, {"pain": 1})


def test_the_next_opening_is_a_retention_test() -> None:
    """Day 0: b A o; day 7: b: retention A is b7 - b0, days 7."""
    derived = derive(visit("b A o"), visit("b", day=7))
    change = find_change(derived, "A", "retention")
    assert (change.difference, change.days) == (71 - 1, 7)


def test_several_cues_share_one_retention_record() -> None:
    """Day 0: b A o B o; day 7: b: one record, A .5 and B .5."""
    derived = derive(visit("b A o B o"), visit("b", day=7))
    (change,) = [one for one in derived.changes if one.contrast == "retention"]
    assert change.weights == (("A", 0.5), ("B", 0.5))


def test_another_cue_between_spoils_retention() -> None:
    """Day 0: b A o; day 3: B, no values; day 7: b: another cue came between."""
    derived = derive(visit("b A o"), visit("B", day=3), visit("b", day=7))
    assert find_reason(derived, "A", "retention") == "another_cue_between"


def test_retention_uses_the_next_opening_only() -> None:
    """Day 0: b A o; day 3: b; day 7: b: retention uses day 3 only."""
    derived = derive(visit("b A o"), visit("b", day=3), visit("b", day=7))
    assert find_change(derived, "A", "retention").days == 3


def test_later_than_four_weeks_is_follow_up() -> None:
    """Day 0: b A o; day 40: b: follow-up, not retention."""
    derived = derive(visit("b A o"), visit("b", day=40))
    assert find_change(derived, "A", "followup").days == 40
    assert find_reason(derived, "A", "retention") == "later_than_28_days"


def test_a_group_gives_each_learner_an_own_use_and_one_event() -> None:
    """12 present, 3 with values: 12 met, 3 changes, one event id."""
    learners = [f"l{number:02d}" for number in range(12)]
    some = {learner: [1.0] for learner in learners[:3]}
    after = {learner: [2.0] for learner in learners[:3]}
    session = LoggedSession(
        "class",
        START,
        (
            block("class/1", "b", 1, learners=learners, values=some),
            block("class/2", "A", 2, learners=learners, event="monday:1"),
            block("class/3", "o", 3, learners=learners, values=after),
        ),
    )
    derived = derive(session)
    immediate = [one for one in derived.changes if one.contrast == "immediate"]
    assert (len(derived.uses), len(immediate)) == (12, 3)
    assert {use.event for use in derived.uses} == {"monday:1"}


@pytest.mark.parametrize(("hours", "is_retention"), [(23, False), (24, True)])
def test_retention_needs_a_night(hours: float, is_retention: bool) -> None:
    """An opening sooner than 24 hours later is no retention test."""
    later = visit("b", day=0.0, name="later")
    later = LoggedSession("later", START + timedelta(hours=hours), later.blocks)
    derived = derive(visit("b A o"), later)
    assert ("A" in list_changes(derived, "retention")) is is_retention


def test_calendar_days_count_where_only_dates_are_stored() -> None:
    """With dates alone one calendar day is enough, and that is flagged."""
    first, second = visit("b A o", is_date_only=True), visit("b", day=1, is_date_only=True)
    change = find_change(derive(first, second), "A", "retention")
    assert (change.days, "date_only" in change.flags) == (1, True)


def test_of_two_sets_before_a_cue_the_baseline_counts() -> None:
    """B o A o: the set labelled baseline, although the other is later; of two, the later."""
    assert list_changes(derive(visit("b o A o")), "immediate") == {"A": 4 - 1}
    assert list_changes(derive(visit("b b A o")), "immediate") == {"A": 4 - 2}
    assert list_changes(derive(visit("r o A o")), "immediate") == {"A": 4 - 2}


def test_only_different_cues_between_sets_of_one_key_are_listed_as_a_pair() -> None:
    """One cue with practice alone is no pair, nor are two cues between two tempos."""
    assert derive(visit("b A p o")).confused == ()
    blocks = (
        block("one/1", "b", 1, values=[1.0], tempo=60.0),
        block("one/2", "A", 2, tempo=60.0),
        block("one/3", "B", 3, tempo=90.0),
        block("one/4", "o", 4, values=[2.0], tempo=90.0),
    )
    assert derive(LoggedSession("one", START, blocks)).confused == ()
