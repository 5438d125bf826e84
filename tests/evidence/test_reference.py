"""When practice alone may be the line to beat."""

from __future__ import annotations

from cuebook.evidence.reference import check_reference
from cuebook.practice.changes import AttemptSet, Change, ChangeKey, UseRecord

KEY = ChangeKey("sparc", "typed", "reaching")
ONE = AttemptSet(0.0, 1, 0.0)


def make(learner: str, cue: str | None, t: int, *, k: int = 1, attempts: int | None = 10) -> Change:
    """Return a change of a learner at a visit."""
    use = UseRecord(
        f"{learner}-{t}-{k}-{cue}", learner, cue, "reaching", f"{learner}/{t}", k, t,
        attempts=attempts,
    )  # fmt: skip
    return Change(use, "immediate", KEY, ONE, ONE)


def make_log(
    n_learners: int = 3, n_visits: int = 2, *, k: int = 1, attempts: int | None = 10, later: int = 0
) -> list[Change]:
    """Return learners with practice alone and a cue at each visit."""
    changes = []
    for learner in "abcdef"[:n_learners]:
        for t in range(n_visits):
            changes.append(make(learner, None, t))
            changes.append(make(learner, "spoon", t + later, k=k, attempts=attempts))
    return changes


def test_six_changes_of_three_learners_on_three_days_are_enough() -> None:
    """The least that is asked for is shown, without a limit on the grade."""
    found = check_reference(make_log())
    assert (found.is_shown, found.caps_at_c, found.reasons) == (True, False, ())
    assert (found.n_practice, found.n_practice_learners, found.n_days) == (6, 3, 6)


def test_too_little_practice_alone_is_no_reference() -> None:
    """Five changes, or two learners, do not carry a line; what is missing is said."""
    for changes in (make_log()[2:], make_log(2, 6)):
        found = check_reference(changes)
        assert not found.is_shown
        assert "add blocks without a cue" in found.reasons[0]


def test_practice_alone_in_two_meetings_is_no_reference() -> None:
    """A measure taken often on two days only follows those days."""
    changes = [
        make(learner, cue, t, k=k)
        for learner, t in (("a", 0), ("b", 0))
        for k in range(1, 5)
        for cue in (None, "spoon")
    ]
    assert not check_reference(changes).is_shown


def test_learners_who_never_got_a_cue_do_not_count() -> None:
    """Practice alone of other people compares people, not cues."""
    changes = [make(learner, None, t) for learner in "abc" for t in range(3)]
    changes += [make(learner, "spoon", t) for learner in "def" for t in range(3)]
    assert not check_reference(changes).is_shown


def test_another_place_in_the_session_caps_the_grade() -> None:
    """Cues always second, practice alone always first: shown, named, no more than C."""
    found = check_reference(make_log(k=2))
    assert found.is_shown
    assert found.caps_at_c
    assert found.reasons == ("practice alone and cues differ in place in the session",)


def test_other_weeks_cap_the_grade() -> None:
    """Practice alone at the first visits, cues later: named."""
    found = check_reference(make_log(later=5))
    assert found.caps_at_c
    assert found.reasons == ("practice alone and cues differ in number of visits",)


def test_half_inside_is_enough() -> None:
    """With half of the cued changes inside the range of practice alone nothing is capped."""
    changes = [*make_log(), *(make(learner, "bowl", 9) for learner in "abc")]
    changes += [make(learner, "bowl", 9, k=2) for learner in "abc"]
    assert not check_reference(changes).caps_at_c
    assert check_reference([*changes, make("a", "bowl", 9, k=3)]).caps_at_c


def test_more_than_twice_the_practice_caps_the_grade() -> None:
    """Median attempts must lie within a factor of 2; uncounted attempts say nothing."""
    assert not check_reference(make_log(attempts=20)).caps_at_c
    assert check_reference(make_log(attempts=21)).caps_at_c
    assert check_reference(make_log(attempts=4)).caps_at_c
    assert not check_reference(make_log(attempts=None)).caps_at_c
