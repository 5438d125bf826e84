"""What a user says happened, as values: one block, and what differs between learners."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import datetime

Values = Mapping[str, tuple[float, ...]]


@dataclass(frozen=True, slots=True)
class LearnerNote:
    """What happened to one learner in one block; every field may stay empty."""

    present: str = "present"
    """present, absent or not_observed."""
    values: Values = field(default_factory=dict)
    """Typed numbers per metric, one trial each, in the order they were made."""
    said: int | None = None
    """Times the cue was said; None: not counted."""
    observed: str | None = None
    """A slug of list observed_change: the teacher's tick, never an outcome."""
    reaction: str | None = None
    event: str | None = None
    words: str | None = None
    """The learner's own words for it."""
    stop: str | None = None
    """A slug of list reason_for_stopping: ends this learner's use, not the block."""


@dataclass(frozen=True, slots=True)
class BlockEntry:
    """One block as it is logged: for one learner, or for a group and its exceptions."""

    task: str
    learner: str | None = None
    """Exactly one of learner and group is given."""
    group: str | None = None
    except_codes: tuple[str, ...] = ()
    """Members who were there but did not get this cue."""
    phase: str | None = None
    """None: acquisition with a cue, baseline without."""
    side: str | None = None
    cue: str | None = None
    wording: int | None = None
    """Revision of the wording; None: the newest."""
    others: str = "none"
    """Other cues given: none, some, many or unknown."""
    chosen: str = "planned"
    session: str | None = None
    """'new', the id of a session, or None: today's open session, else a new one."""
    at: datetime | None = None
    """When it happened, with zone; None: now."""
    note: LearnerNote = field(default_factory=LearnerNote)
    """Holds for every learner that has no note of their own."""
    notes: Mapping[str, LearnerNote] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Logged:
    """What is on disk now, said back in plain words."""

    session_id: str
    block_ids: tuple[str, ...]
    learners: tuple[str, ...]
    lines: tuple[str, ...]
    cautions: tuple[str, ...] = ()
