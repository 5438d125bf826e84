from __future__ import annotations

from dataclasses import replace
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest

from cuebook.errors import CuebookError, InputError, UnknownCodeError, UsageError
from cuebook.jobs import people
from cuebook.jobs.last_card import OPENING_LINE, read_last_card
from cuebook.jobs.log_entries import BlockEntry, LearnerNote
from cuebook.jobs.log_use import add_values, end_session, log_before_after, log_block
from cuebook.jobs.meetings import list_sessions, show_session
from cuebook.practice.changes import Derived
from cuebook.practice.derive import derive_changes
from cuebook.practice.log import LoggedBlock, PracticeLog
from cuebook.practice.scales import AttemptScale
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.practice import read_practice_log

CUE = "paving-slab-stride"
CLASS = tuple(f"member-{letter}" for letter in "abcdefghijkl")
MORNING = datetime(2026, 3, 2, 9, 0, tzinfo=UTC)
SPARC = AttemptScale("sparc", "none", "higher", None, None)


@pytest.fixture
def library(tmp_path: Path) -> Path:
    """Return a library with heron-lamp, who may be ranked."""
    folder = tmp_path / "library"
    people.add_learner(folder, people.NewLearner("heron-lamp", age_years=70))
    people.set_consent(folder, "heron-lamp", "use_for_ranking", "yes")
    return folder


@pytest.fixture
def class_of_twelve(library: Path) -> Path:
    """Return a library in which twelve learners form a group."""
    for code in CLASS:
        people.add_learner(library, people.NewLearner(code))
        people.set_consent(library, code, "use_for_ranking", "yes")
    people.add_group(library, "lane-class", CLASS)
    return library


def read_log(library: Path) -> PracticeLog:
    """Read the log by the reading path."""
    with open_for_reading(library) as connection:
        return read_practice_log(connection, ("sparc", "gait_speed_m_s"))


def read_blocks(library: Path) -> list[LoggedBlock]:
    """Return all blocks in order."""
    return [block for session in read_log(library).sessions for block in session.blocks]


def derive(library: Path) -> Derived:
    """Return what is derived of the log for sparc."""
    return derive_changes(read_log(library), "sparc", SPARC)


ENTRY = BlockEntry("walking", learner="heron-lamp")


def test_before_and_after_make_three_blocks_and_one_change(library: Path) -> None:
    """The shorthand stores baseline, practice and post, and a change can be derived from them."""
    entry = replace(ENTRY, cue=CUE, at=MORNING, note=LearnerNote(said=3, observed="some"))
    logged = log_before_after(library, entry, {"sparc": (-1.8, -1.7)}, {"sparc": (-1.5, -1.6)})
    assert len(logged.block_ids) == 3
    blocks = read_blocks(library)
    assert [block.phase for block in blocks] == ["baseline", "acquisition", "immediate_post"]
    assert [block.cue for block in blocks] == [None, CUE, None]
    assert [block.chosen for block in blocks] == ["unknown", "planned", "unknown"]
    assert blocks[1].participations[0].times_said == 3
    (change,) = [one for one in derive(library).changes if one.contrast == "immediate"]
    assert change.use.cue == CUE
    assert change.difference == pytest.approx(0.2)
    assert (change.before.n, change.after.n) == (2, 2)


def test_what_is_said_back_is_what_is_stored(library: Path) -> None:
    """The answer names session, phases, cue, numbers, in words a person can check."""
    entry = replace(ENTRY, cue=CUE, at=MORNING, note=LearnerNote(said=1))
    logged = log_before_after(library, entry, {"sparc": (-1.8,)}, {"sparc": (-1.5,)})
    assert logged.lines[0] == "New session: heron-lamp"
    said = " ".join(logged.lines)
    for part in ("sparc -1.8", CUE, "said 1 time", "sparc -1.5"):
        assert part in said
    assert logged.learners == ("heron-lamp",)


def test_blocks_of_one_day_go_into_the_open_session(library: Path) -> None:
    """Logging goes on in today's session until it is ended; another day opens another."""
    first = log_block(library, replace(ENTRY, at=MORNING))
    second = log_block(library, replace(ENTRY, cue=CUE, at=MORNING + timedelta(minutes=9)))
    assert second.session_id == first.session_id
    assert second.lines[0] == "Session goes on: heron-lamp"
    end_session(library, first.session_id)
    third = log_block(library, replace(ENTRY, at=MORNING + timedelta(hours=1)))
    fourth = log_block(library, replace(ENTRY, at=MORNING + timedelta(days=1)))
    fifth = log_block(
        library, replace(ENTRY, at=MORNING + timedelta(days=1, hours=1), session="new")
    )
    sixth = log_block(library, replace(ENTRY, session=first.session_id, at=MORNING))
    ids = [logged.session_id for logged in (first, third, fourth, fifth)]
    assert len(set(ids)) == 4
    assert sixth.session_id == first.session_id


def test_a_group_of_twelve_shares_one_event_with_two_exceptions(class_of_twelve: Path) -> None:
    """Ten get the cue under one event; two who heard it are neither cued nor practice alone."""
    entry = BlockEntry(
        "walking",
        group="lane-class",
        cue=CUE,
        except_codes=CLASS[:2],
        notes={CLASS[11]: LearnerNote(present="absent")},
        at=MORNING,
    )
    logged = log_block(class_of_twelve, entry)
    assert set(logged.learners) == set(CLASS)
    cued, heard = read_blocks(class_of_twelve)
    assert [part.learner for part in cued.participations] == list(CLASS[2:])
    assert [part.learner for part in heard.participations] == list(CLASS[:2])
    assert cued.event is not None
    assert (heard.cue, heard.others, heard.event) == (None, "some", None)
    presence = {part.learner: part.presence for part in cued.participations}
    assert presence.pop(CLASS[11]) == "absent"
    assert set(presence.values()) == {"present"}
    derived = derive(class_of_twelve)
    assert {use.learner for use in derived.uses if use.cue == CUE} == set(CLASS[2:11])
    assert not [use for use in derived.uses if use.learner == CLASS[11]]
    assert any("without this cue" in line for line in logged.lines)


def test_a_stop_of_one_leaves_the_others_going(class_of_twelve: Path) -> None:
    """A stop belongs to one learner's use; a fall is a stop, whatever else was typed."""
    entry = BlockEntry(
        "walking",
        group="lane-class",
        cue=CUE,
        notes={
            CLASS[0]: LearnerNote(stop="pain", event="pain"),
            CLASS[1]: LearnerNote(event="fall"),
        },
        at=MORNING,
    )
    log_block(class_of_twelve, entry)
    (block,) = read_blocks(class_of_twelve)
    stops = {part.learner: part.stop_reason for part in block.participations}
    assert stops.pop(CLASS[0]) == "pain"
    assert stops.pop(CLASS[1]) == "fall_or_near_fall"
    assert set(stops.values()) == {None}
    tally = derive(class_of_twelve).harms[CUE]
    assert tally.uses == 12
    assert dict(tally.stops) == {"pain": 1, "fall_or_near_fall": 1}


def test_a_hold_is_said_first_and_the_entry_still_kept(library: Path) -> None:
    """Cuebook warns with the words of the hold and who clears it; what happened is stored."""
    people.add_hold(library, "heron-lamp", ("walking",), until="heel settled", by_role="doctor")
    logged = log_block(library, replace(ENTRY, at=MORNING))
    assert "on hold" in logged.cautions[0]
    assert "heel settled" in logged.cautions[0]
    assert "doctor" in logged.cautions[0]
    assert len(read_blocks(library)) == 1
    people.clear_hold(library, "heron-lamp", "walking", cleared_by="doctor")
    assert not any("on hold" in line for line in log_block(library, ENTRY).cautions)


def test_values_can_be_added_to_a_block_later(library: Path) -> None:
    """Numbers typed after the meeting go to the block they belong to."""
    logged = log_block(
        library, replace(ENTRY, at=MORNING, note=LearnerNote(values={"sparc": (-2.0,)}))
    )
    more = add_values(library, logged.block_ids[0], "heron-lamp", {"sparc": (-1.9, -1.8)})
    assert more.session_id == logged.session_id
    (block,) = read_blocks(library)
    values = [value.value for value in block.participations[0].values["sparc"]]
    assert values == [-2.0, -1.9, -1.8]


REFUSED: dict[str, tuple[BlockEntry, type[CuebookError], str]] = {
    "unknown learner": (replace(ENTRY, learner="heron-lampp"), UnknownCodeError, "heron-lamp"),
    "unknown group": (BlockEntry("walking", group="lane"), UnknownCodeError, "group"),
    "unknown task": (replace(ENTRY, task="walkin"), UnknownCodeError, "walking"),
    "unknown cue": (replace(ENTRY, cue=CUE + "s"), UnknownCodeError, CUE),
    "unknown wording": (replace(ENTRY, cue=CUE, wording=9), UnknownCodeError, "wording"),
    "unknown session": (replace(ENTRY, session="no-such"), UnknownCodeError, "session"),
    "unknown metric": (
        replace(ENTRY, note=LearnerNote(values={"sparcc": (1.0,)})),
        UnknownCodeError,
        "sparc",
    ),
    "unknown reaction": (
        replace(ENTRY, cue=CUE, note=LearnerNote(reaction="liket")),
        UnknownCodeError,
        "liked",
    ),
    "unknown side": (replace(ENTRY, side="middle"), UsageError, "left"),
    "cue in a measure": (replace(ENTRY, cue=CUE, phase="baseline"), UsageError, "cue"),
    "nobody": (BlockEntry("walking"), UsageError, "learner"),
    "both": (replace(ENTRY, group="lane-class"), UsageError, "learner"),
    "exception of nobody": (replace(ENTRY, cue=CUE, except_codes=("x",)), UsageError, "group"),
    "impossible value": (
        replace(ENTRY, note=LearnerNote(values={"gait_speed_m_s": (-1.0,)})),
        InputError,
        "negative",
    ),
    "no number": (
        replace(ENTRY, note=LearnerNote(values={"sparc": (float("nan"),)})),
        InputError,
        "sparc",
    ),
    "absent with values": (
        replace(ENTRY, note=LearnerNote(present="absent", values={"sparc": (-1.0,)})),
        UsageError,
        "present",
    ),
    "NUL in words": (
        replace(ENTRY, cue=CUE, note=LearnerNote(words="a\x00b")),
        InputError,
        "NUL",
    ),
}


@pytest.mark.parametrize("case", REFUSED)
def test_what_does_not_fit_is_refused_and_nothing_is_stored(library: Path, case: str) -> None:
    """Each refusal says what was wrong and what would do; the library is as it was."""
    entry, kind, word = REFUSED[case]
    with pytest.raises(kind) as caught:
        log_block(library, entry)
    assert word in str(caught.value)
    assert caught.value.hint
    assert list_sessions(library) == ()


def test_an_exception_who_is_no_member_is_refused(class_of_twelve: Path) -> None:
    """A code that is not in the group is met with the nearest that is."""
    entry = BlockEntry("walking", group="lane-class", cue=CUE, except_codes=("member-z",))
    with pytest.raises(UnknownCodeError, match="member of lane-class"):
        log_block(class_of_twelve, entry)
    assert list_sessions(class_of_twelve) == ()


def test_a_session_of_somebody_else_is_refused(class_of_twelve: Path) -> None:
    """A block cannot land in another learner's session."""
    logged = log_block(class_of_twelve, replace(ENTRY, at=MORNING))
    entry = BlockEntry("walking", learner=CLASS[0], session=logged.session_id)
    with pytest.raises(UsageError, match="somebody else"):
        log_block(class_of_twelve, entry)


def test_the_last_card_gives_the_exact_words_and_what_followed(library: Path) -> None:
    """Holds first, then the last cue word for word, what followed, and what to do first."""
    people.add_hold(library, "heron-lamp", ("rowing_stroke",), until="seen", by_role="doctor")
    assert read_last_card(library, learner="heron-lamp").last_session_on is None
    note = LearnerNote(said=2, reaction="liked", words="like stepping stones")
    entry = replace(ENTRY, cue=CUE, at=MORNING, note=note)
    log_before_after(library, entry, {"sparc": (-1.8, -1.7)}, {"sparc": (-1.5,)})
    card = read_last_card(library, learner="heron-lamp")
    assert card.holds[0].startswith("rowing")
    assert card.last_cue == CUE
    assert card.last_words == "Stride on as if from one paving slab to the next."
    assert "liked it" in card.followed[0]
    assert "like stepping stones" in card.followed[0]
    assert "-1.75" in card.values[0]
    assert card.opening == OPENING_LINE
    assert card.lines[-1] == OPENING_LINE
    order = [card.lines.index(line) for line in card.lines if line.startswith(("On hold", "Last"))]
    assert order == sorted(order)


def test_the_card_of_a_group_names_whose_hold_it_is(class_of_twelve: Path) -> None:
    """In a group's card each hold and note says whom it concerns."""
    people.add_hold(class_of_twelve, CLASS[3], ("walking",), until="seen", by_role="doctor")
    log_block(class_of_twelve, BlockEntry("walking", group="lane-class", cue=CUE, at=MORNING))
    card = read_last_card(class_of_twelve, group="lane-class")
    assert card.holds[0].startswith(f"{CLASS[3]}, ")
    assert card.last_cue == CUE


def test_a_session_is_shown_in_plain_lines(library: Path) -> None:
    """A session's note holds phases, words and reactions, and says what it is not."""
    entry = replace(ENTRY, cue=CUE, at=MORNING, note=LearnerNote(said=2, reaction="liked"))
    logged = log_block(library, entry)
    lines = show_session(library, logged.session_id)
    assert any("Stride on as if from one paving slab to the next." in line for line in lines)
    assert any("said 2, liked it" in line for line in lines)
    assert "clinical record" in lines[-1]
    with pytest.raises(UnknownCodeError, match="Unknown session"):
        show_session(library, "nonsense")


def test_withdrawing_consent_takes_past_uses_out_at_once(library: Path) -> None:
    """A no to ranking counts for what was logged before, too; the log itself stays."""
    entry = replace(ENTRY, cue=CUE, at=MORNING)
    log_before_after(library, entry, {"sparc": (-1.8,)}, {"sparc": (-1.5,)})
    assert derive(library).changes
    people.set_consent(library, "heron-lamp", "use_for_ranking", "no")
    assert not derive(library).changes
    assert len(read_blocks(library)) == 3


def test_a_childs_assent_is_needed_beside_the_guardians_yes(library: Path) -> None:
    """A guardian's yes without the child's own counts as no."""
    people.set_consent(library, "heron-lamp", "use_for_ranking", "yes", given_by="parent_guardian")
    assert not read_log(library).learners["heron-lamp"].may_be_ranked
    people.set_consent(
        library, "heron-lamp", "use_for_ranking", "yes", given_by="parent_guardian", assent="yes"
    )
    assert read_log(library).learners["heron-lamp"].may_be_ranked
