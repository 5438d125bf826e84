"""What an entry of the log must satisfy before anything is written."""

from __future__ import annotations

import math
from collections.abc import Iterable

from cuebook.errors import InputError, UsageError
from cuebook.jobs.log_entries import BlockEntry, LearnerNote
from cuebook.metrics.registry import load_registry
from cuebook.vocabulary import require_slug

MAX_VALUES = 500
"""Typed attempts of one learner in one block: more than this is a slip of the keyboard."""

SIDES = ("left", "right", "both")
OTHERS = ("none", "some", "many", "unknown")
CHOSEN = ("random", "planned", "going_badly", "learner_asked", "unknown")
PRESENCE = ("present", "absent", "not_observed")
MAX_TEXT = 2000


def check_entry(entry: BlockEntry) -> str:
    """Check a block's words against the lists and return its phase.

    Raises
    ------
    UnknownCodeError : a word is not in its list; names the nearest.
    UsageError : the words do not fit together.
    InputError : a value is not possible.
    """
    if (entry.learner is None) == (entry.group is None):
        raise UsageError("A block is for one learner or for one group.", "Name one of the two.")
    if entry.except_codes and entry.group is None:
        raise UsageError("Exceptions need a group.", "Name the group with --group.")
    if entry.except_codes and entry.cue is None:
        raise UsageError("Exceptions need a cue that the others got.", "Name it with --cue.")
    require_slug("task", entry.task)
    phase = entry.phase or ("acquisition" if entry.cue else "baseline")
    require_slug("phase", phase)
    if entry.cue and phase != "acquisition":
        raise UsageError(
            f"A cue is said in practice; the phase '{phase}' is a measure with the cue off.",
            "Leave out --cue, or log the practice as --phase acquisition.",
        )
    _check_word("side", entry.side, SIDES)
    _check_word("others", entry.others, OTHERS)
    _check_word("chosen", entry.chosen, CHOSEN)
    for note in (entry.note, *entry.notes.values()):
        check_note(note, phase)
    return phase


def check_note(note: LearnerNote, phase: str) -> None:
    """Check what is said of one learner in a block of this phase."""
    _check_word("present", note.present, PRESENCE)
    for list_name, word in (
        ("observed_change", note.observed),
        ("reaction", note.reaction),
        ("event", note.event),
        ("reason_for_stopping", note.stop),
    ):
        if word is not None:
            require_slug(list_name, word)
    if note.words is not None and len(note.words) > MAX_TEXT:
        raise InputError(
            f"The learner's words are {len(note.words)} characters long.",
            f"Keep them under {MAX_TEXT}.",
        )
    if note.said is not None and phase != "acquisition":
        raise UsageError("Times said belong to practice.", "Leave out --said in this phase.")
    if note.present == "absent" and any(note.values.values()):
        raise UsageError("Somebody absent has no values.", "Log them as present.")
    for metric, values in note.values.items():
        check_values(metric, values)


def check_values(metric: str, values: Iterable[float]) -> None:
    """Check typed numbers of one metric against what the metric allows."""
    entry = load_registry().get(metric)
    typed = tuple(values)
    if len(typed) > MAX_VALUES:
        raise InputError(f"{metric}: {len(typed)} values in one block.", "Split them over blocks.")
    for value in typed:
        if not math.isfinite(value):
            raise InputError(f"{metric}: {value} is not a number.", "Leave it out.")
        if value < 0 and entry.transform in {"log", "sqrt"}:
            raise InputError(
                f"{metric}: {value:g} cannot be negative.", f"It is measured in {entry.unit}."
            )


def _check_word(what: str, word: str | None, known: tuple[str, ...]) -> None:
    if word is not None and word not in known:
        raise UsageError(f"'{word}' is no answer for {what}.", f"Known: {', '.join(known)}.")
