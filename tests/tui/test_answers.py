from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from cuebook.jobs.log_checks import check_entry
from cuebook.jobs.people import PersonLine
from cuebook.tui.answers import MEMBER_KEYS, OBSERVED_KEYS, TURNING_KEYS, PracticeAnswers
from cuebook.tui.logbook import Sitting, make_practice, make_same_again
from cuebook.tui.practice_words import describe_answers, describe_members
from cuebook.tui.state import Shared

MEMBERS = ("heron-lamp", "pond-rope", "copper-gate", "willow-drum")
KEYS = st.lists(
    st.sampled_from(
        [*"0123456789abcdefghijklmnopqrstuvwxyz", "space", "up", "down", "backspace", "tab"]
    ),
    max_size=40,
)


def press(answers: PracticeAnswers, *keys: str) -> PracticeAnswers:
    """Press keys, one after the other."""
    for key in keys:
        answers = answers.press(key)
    return answers


def test_no_letter_has_two_meanings() -> None:
    """A member's letter is never the letter of an answer."""
    answer_keys = {*OBSERVED_KEYS, *TURNING_KEYS, "o", "k", "z"}
    assert not answer_keys & set(MEMBER_KEYS)
    assert len(MEMBER_KEYS) >= 12


def test_what_is_said_of_one_learner_overrides_what_is_said_of_everybody() -> None:
    """A learner's own answer holds for them alone; the others keep the group's."""
    answers = press(PracticeAnswers(MEMBERS), "s", "3", "b", "w")
    assert answers.get_note("pond-rope").observed == "worse"
    assert answers.get_note("pond-rope").said == 3
    assert answers.get_note("heron-lamp").observed == "some"
    assert set(answers.notes) == {"pond-rope"}


def test_an_event_or_a_stop_belongs_to_one_learner() -> None:
    """As long as nobody is marked in a group, an event or a stop is not taken."""
    answers = press(PracticeAnswers(MEMBERS), "e", "x")
    assert answers.everybody.event is None
    assert answers.everybody.stop is None
    marked = press(answers, "a", "e", "x")
    assert marked.get_note("heron-lamp").event == "pain"
    assert marked.get_note("heron-lamp").stop == "planned_end"
    assert marked.get_note("pond-rope").event is None


def test_the_same_letter_again_turns_there_to_exception_and_absent() -> None:
    """The letter marks first; each further press is another answer, and it comes round."""
    answers = press(PracticeAnswers(MEMBERS), "b")
    seen = []
    for _ in range(4):
        answers = answers.press("b")
        seen.append(answers.presence["pond-rope"])
    assert seen == ["exception", "absent", "not_observed", "present"]


def test_without_a_cue_nobody_can_be_an_exception_to_it() -> None:
    """Practice without a cue knows there, absent and not observed only."""
    answers = press(PracticeAnswers(MEMBERS, has_cue=False), "a", "a")
    assert answers.presence["heron-lamp"] == "absent"


def test_two_digits_are_one_number_and_another_key_ends_it() -> None:
    """1 then 2 is twelve; after another answer a digit begins a new number."""
    assert press(PracticeAnswers(), "1", "2").everybody.said == 12
    assert press(PracticeAnswers(), "1", "s", "2").everybody.said == 2
    assert press(PracticeAnswers(), "1", "backspace").everybody.said is None


@given(keys=KEYS, members=st.sampled_from([(), MEMBERS]), has_cue=st.booleans())
def test_whatever_is_pressed_makes_an_entry_that_can_be_stored(
    keys: list[str], members: tuple[str, ...], has_cue: bool
) -> None:
    """Random keys never crash the box, and what they say passes the checks of the log."""
    answers = press(PracticeAnswers(members, has_cue), *keys)
    who = PersonLine("monday" if members else "heron-lamp", bool(members), "", "")
    shared = Shared(who=who, task="walking")
    cue = "paving-slab-stride" if has_cue else None
    entry = make_practice(Sitting(who, members), shared, answers, cue)
    assert check_entry(entry) == "acquisition"
    for width in (30, 56, 100):
        assert describe_answers(answers, width)
        if members:
            rows, at = describe_members(answers, width)
            assert all(len(row) <= max(width, 33) for row in rows.split("\n"))
            assert at < len(rows.split("\n"))


@given(keys=KEYS)
def test_same_again_never_repeats_what_followed(keys: list[str]) -> None:
    """Cue, task and who was there carry over; an answer, an event or a stop never does."""
    answers = press(PracticeAnswers(MEMBERS), *keys)
    who = PersonLine("monday", is_group=True, label="", note="")
    shared = Shared(who=who, task="walking", side="left")
    first = make_practice(Sitting(who, MEMBERS), shared, answers, "paving-slab-stride")
    again = make_same_again(first)
    assert (again.cue, again.task, again.side) == (first.cue, first.task, first.side)
    assert again.except_codes == first.except_codes
    for note in (again.note, *again.notes.values()):
        told = (note.said, note.observed, note.reaction, note.event, note.stop, note.words)
        assert set(told) == {None}
    away = {code for code, note in first.notes.items() if note.present != "present"}
    assert set(again.notes) == away
