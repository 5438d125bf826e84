"""What happened in practice, answer by answer: for everybody, and for one learner apart."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import TypeVar

from cuebook.jobs.log_checks import CHOSEN, OTHERS
from cuebook.jobs.log_entries import LearnerNote
from cuebook.vocabulary import load_vocabulary

OBSERVED_KEYS: Mapping[str, str] = {
    "c": "clear",
    "s": "some",
    "n": "none",
    "w": "worse",
    "m": "mixed",
    "v": "not_seen",
}
TURNING_KEYS: Mapping[str, tuple[str, str]] = {
    "r": ("reaction", "reaction"),
    "e": ("event", "event"),
    "x": ("stop", "reason_for_stopping"),
}
"""Key to the field it turns and the list the field's words come from."""
OWN_WORDS_KEY, OTHERS_KEY, CHOSEN_KEY, PRESENCE_KEY = "o", "k", "z", "space"
MEMBER_KEYS = "abdfghijlpqtuy"
"""Every letter that is no answer; further members are reached with Up and Down."""
Word = TypeVar("Word")
EXCEPTION = "exception"
"""Was there and heard the cue, but was not given it."""


@dataclass(frozen=True, slots=True)
class PracticeAnswers:
    """Answers as far as they are given; nothing has to be said."""

    members: tuple[str, ...] = ()
    """Codes of a group's members; empty: one learner, who is everybody."""
    has_cue: bool = True
    marked: str | None = None
    """The member the next answers are about; None: everybody."""
    everybody: LearnerNote = field(default_factory=LearnerNote)
    own: Mapping[str, LearnerNote] = field(default_factory=dict)
    """What was said of one member alone; its empty fields are those of everybody."""
    presence: Mapping[str, str] = field(default_factory=dict)
    """present, exception, absent or not_observed; a member that is missing is present."""
    others: str = "none"
    chosen: str = "planned"
    digits: str = ""
    """The last keys of a number that is being typed."""

    def press(self, key: str) -> PracticeAnswers:
        """Return the answers after one more key; a key that means nothing changes nothing."""
        if key.isdigit() and len(key) == 1 and self.has_cue:
            digits = (self.digits + key)[-2:]
            return replace(_note(self, said=int(digits)), digits=digits)
        fresh = replace(self, digits="")
        if key == "backspace":
            return _note(fresh, said=None)
        if key in OBSERVED_KEYS:
            return _note(fresh, observed=OBSERVED_KEYS[key])
        if key in TURNING_KEYS:
            return _turn(fresh, *TURNING_KEYS[key])
        if key == OTHERS_KEY:
            return replace(fresh, others=_after(OTHERS, self.others))
        if key == CHOSEN_KEY:
            return replace(fresh, chosen=_after(CHOSEN, self.chosen))
        return _press_for_members(fresh, key)

    def put_words(self, words: str) -> PracticeAnswers:
        """Return the answers with the learner's own words."""
        return _note(self, words=words or None)

    @property
    def needs_mark(self) -> bool:
        """Whether an event or a stop cannot be noted yet: they belong to one learner."""
        return bool(self.members) and self.marked is None

    @property
    def own_note(self) -> LearnerNote:
        """Return what is said of whoever is marked, without what they share with everybody."""
        return self.everybody if self.marked is None else self.own.get(self.marked, LearnerNote())

    def get_note(self, code: str | None) -> LearnerNote:
        """Return what is said of a member, or of everybody (None)."""
        if code is None:
            return self.everybody
        own = self.own.get(code, LearnerNote())
        presence = self.presence.get(code, "present")
        if presence in {"absent", "not_observed"}:
            return LearnerNote(present=presence)
        if presence == EXCEPTION:
            return replace(own, said=None)
        common = self.everybody
        return LearnerNote(
            said=common.said if own.said is None else own.said,
            observed=own.observed or common.observed,
            reaction=own.reaction or common.reaction,
            event=own.event,
            words=own.words,
            stop=own.stop,
        )

    @property
    def notes(self) -> dict[str, LearnerNote]:
        """Return the notes of the members of whom something else is said than of everybody."""
        return {
            code: self.get_note(code)
            for code in self.members
            if code in self.own or self.presence.get(code, "present") not in {"present", EXCEPTION}
        }

    @property
    def excepted(self) -> tuple[str, ...]:
        """Return the members who were there and were not given this cue."""
        return tuple(code for code in self.members if self.presence.get(code) == EXCEPTION)

    @property
    def absent(self) -> frozenset[str]:
        """Return the members who were not there."""
        return frozenset(code for code in self.members if self.presence.get(code) == "absent")

    def find_key(self, code: str) -> str:
        """Return the letter that marks a member; a blank if there are more members than letters."""
        at = self.members.index(code)
        return MEMBER_KEYS[at] if at < len(MEMBER_KEYS) else " "


def _press_for_members(answers: PracticeAnswers, key: str) -> PracticeAnswers:
    members, marked = answers.members, answers.marked
    if not members:
        return answers
    if key in {"up", "down"}:
        rows: tuple[str | None, ...] = (None, *members)
        at = rows.index(marked) + (1 if key == "down" else -1)
        return replace(answers, marked=rows[at % len(rows)])
    if key == PRESENCE_KEY and marked is not None:
        return _turn_presence(answers, marked)
    at = MEMBER_KEYS.find(key) if len(key) == 1 else -1
    if not 0 <= at < len(members):
        return answers
    if members[at] == marked:
        return _turn_presence(answers, marked)
    return replace(answers, marked=members[at])


def _turn_presence(answers: PracticeAnswers, code: str) -> PracticeAnswers:
    words = ("present", EXCEPTION, "absent", "not_observed")
    order = words if answers.has_cue else tuple(word for word in words if word != EXCEPTION)
    turned = _after(order, answers.presence.get(code, "present"))
    return replace(answers, presence={**answers.presence, code: turned})


def _turn(answers: PracticeAnswers, name: str, list_name: str) -> PracticeAnswers:
    if name in {"event", "stop"} and answers.needs_mark:
        return answers
    order = (None, *load_vocabulary().slugs(list_name))
    return _note(answers, **{name: _after(order, getattr(answers.own_note, name))})


def _note(answers: PracticeAnswers, **changed: object) -> PracticeAnswers:
    """Return the answers with something changed of whoever is marked, or of everybody."""
    note = replace(answers.own_note, **changed)  # type: ignore[arg-type]  # names of its fields
    if answers.marked is None:
        return replace(answers, everybody=note)
    return replace(answers, own={**answers.own, answers.marked: note})


def _after(order: tuple[Word, ...], word: Word) -> Word:
    """Return the word after the present one; after the last, the first."""
    return order[(order.index(word) + 1) % len(order)]
