"""How far the uses of a cue can carry a claim: random order, chosen by the teacher, too few."""

from __future__ import annotations

from dataclasses import dataclass

LEARNERS_NEEDED = 5
USES_NEEDED = 10
PRACTICE_LEARNERS_NEEDED = 3
MOST_DEVIATIONS = 0.10
MOST_LATE = 0.50
WORDS = {"A": "random order", "B": "chosen by the teacher", "C": "too few"}
WEAK_WORDS = "weak comparison"


@dataclass(frozen=True, slots=True, kw_only=True)
class GradeInput:
    """What a grade depends on; shares are of the cue's uses with a change."""

    uses: int
    learners: int
    share_random: float
    share_deviating: float = 0.0
    """Random slots in which another cue was given than the schedule said."""
    practice_learners: int = 0
    """Learners of this cue who also have practice-only changes."""
    other_cues_noted: bool = False
    """Some uses had other cues beside the lead cue, or it was not stated."""
    share_late: float = 0.0
    """Values typed more than a day later, without a recording."""
    changed_after_result: bool = False
    """The cue or the reason for it was altered after the after-value was in."""
    several_cues: bool = False
    """Some changes belong to several cues of a session."""
    capped_reasons: tuple[str, ...] = ()
    """Why no cue of this review can be above C, such as too few repeated visits."""


@dataclass(frozen=True, slots=True)
class Grade:
    """A letter for the document, words for the screen, and why it is not better."""

    letter: str
    words: str
    reasons: tuple[str, ...]


def grade_cue(given: GradeInput) -> Grade:
    """Return the evidence grade of one cue."""
    too_few = []
    if given.learners < LEARNERS_NEEDED:
        too_few.append(f"{given.learners} of {LEARNERS_NEEDED} learners")
    if given.uses < USES_NEEDED:
        too_few.append(f"{given.uses} of {USES_NEEDED} uses")
    not_random = _list_why_not_random(given)
    if not_random and given.practice_learners < PRACTICE_LEARNERS_NEEDED:
        too_few.append(
            f"practice alone with {given.practice_learners} of "
            f"{PRACTICE_LEARNERS_NEEDED} of its learners"
        )
    weak = list(given.capped_reasons)
    if given.share_late > MOST_LATE:
        weak.append("most values were typed later")
    if given.several_cues and not_random:
        weak.append("some changes belong to several cues")
    if too_few or weak:
        words = WORDS["C"] if too_few else WEAK_WORDS
        return Grade("C", words, (*too_few, *weak, *not_random))
    if not_random or given.several_cues:
        several = ("some changes belong to several cues",) if given.several_cues else ()
        return Grade("B", WORDS["B"], (*not_random, *several))
    return Grade("A", WORDS["A"], ())


def _list_why_not_random(given: GradeInput) -> tuple[str, ...]:
    reasons = []
    if given.share_random < 1:
        reasons.append("not all uses came in a random order")
    if given.share_deviating > MOST_DEVIATIONS:
        reasons.append("another cue was given than the random order said")
    if given.changed_after_result:
        reasons.append("a cue was altered after its result was known")
    if given.other_cues_noted:
        reasons.append("other cues were given beside it")
    return tuple(reasons)
