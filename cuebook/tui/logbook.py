"""From what was answered on a screen to the entry that is stored. Pure."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from cuebook.jobs.log_entries import BlockEntry, LearnerNote, Values
from cuebook.jobs.people import PersonLine
from cuebook.tui.answers import PracticeAnswers
from cuebook.tui.state import Shared

REFERRED = "red_flag"


@dataclass(frozen=True, slots=True)
class Sitting:
    """Whom entries are for, and what carries over from one block to the next."""

    who: PersonLine
    members: tuple[str, ...] = ()
    absent: frozenset[str] = frozenset()
    """Members who were absent in the last block: they stay so until somebody says otherwise."""
    last_practice: BlockEntry | None = None
    """None: nothing practised yet that could be done again."""

    def start_answers(self, *, has_cue: bool) -> PracticeAnswers:
        """Return empty answers for the next practice."""
        return PracticeAnswers(
            members=self.members,
            has_cue=has_cue,
            presence=dict.fromkeys(self.absent, "absent"),
        )


def make_practice(
    sitting: Sitting, shared: Shared, answers: PracticeAnswers, cue: str | None
) -> BlockEntry:
    """Return the entry of a practice with a cue, or without one (None)."""
    return replace(
        _make_entry(sitting, shared, "acquisition"),
        cue=cue,
        except_codes=answers.excepted,
        others=answers.others,
        chosen=answers.chosen,
        note=answers.everybody,
        notes=answers.notes,
    )


def make_measure(sitting: Sitting, shared: Shared, phase: str, values: Values) -> BlockEntry:
    """Return the entry of one learner's measure; without values it was not observed."""
    note = LearnerNote(values=values) if values else LearnerNote(present="not_observed")
    return replace(_make_entry(sitting, shared, phase), note=note)


def make_group_measure(
    sitting: Sitting, shared: Shared, phase: str, by_member: Mapping[str, Values]
) -> BlockEntry:
    """Return the entry of a measure of some members; the others were not observed or absent."""
    notes = {}
    for code in sitting.members:
        if code in by_member:
            notes[code] = LearnerNote(values=by_member[code])
        else:
            absent = code in sitting.absent
            notes[code] = LearnerNote(present="absent" if absent else "not_observed")
    return replace(_make_entry(sitting, shared, phase), notes=notes)


def make_same_again(last: BlockEntry) -> BlockEntry:
    """Return the last practice once more: cue, task, side and who was there, no answers.

    What followed, and above all a stop or an event, is never said of a block by copying it.
    """
    notes = {
        code: LearnerNote(present=note.present)
        for code, note in last.notes.items()
        if note.present != "present"
    }
    return replace(last, note=LearnerNote(), notes=notes, session=None)


def make_referral(who: PersonLine, code: str, task: str) -> BlockEntry:
    """Return the entry "stopped and referred" of one learner, alone or in their group.

    It holds no word of the sentence that called for it.
    """
    stopped = LearnerNote(stop=REFERRED)
    entry = BlockEntry(task=task, phase="acquisition")
    if not who.is_group:
        return replace(entry, learner=code, note=stopped)
    others = LearnerNote(present="not_observed")
    return replace(entry, group=who.code, note=others, notes={code: stopped})


def _make_entry(sitting: Sitting, shared: Shared, phase: str) -> BlockEntry:
    who = sitting.who
    return BlockEntry(
        task=shared.task or "",
        learner=None if who.is_group else who.code,
        group=who.code if who.is_group else None,
        side=shared.side,
        phase=phase,
    )
