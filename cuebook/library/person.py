"""What the look-up needs to know of whom a cue is for."""

from __future__ import annotations

import math
from dataclasses import dataclass

from cuebook.vocabulary import load_vocabulary


@dataclass(frozen=True, slots=True)
class SafetyNote:
    """Something to heed with a person; a hard note is never broken."""

    slug: str | None = None
    """Slug of the vocabulary list safety_note; None for a note in free words only."""
    words: str = ""
    is_hard: bool = False
    tasks: tuple[str, ...] = ()
    """Tasks the note is about; empty: as the vocabulary has it, or every task for free words."""
    features: tuple[str, ...] = ()
    """Features the note is about; empty: as the vocabulary has it."""

    @property
    def line(self) -> str:
        """Return the note as one line to read before a cue."""
        if self.slug is None:
            return self.words
        entry = load_vocabulary().entry("safety_note", self.slug)
        told = self.words or entry.notes
        return f"{entry.label}: {told}" if told else entry.label


@dataclass(frozen=True, slots=True)
class Hold:
    """A hard stop for some tasks until somebody entitled has cleared it."""

    tasks: tuple[str, ...]
    until: str = ""
    by_role: str = ""

    @property
    def line(self) -> str:
        """Return what must happen before the tasks may be done again, and who says so."""
        until = f" until {self.until}" if self.until else ""
        by_role = f" (cleared by: {self.by_role})" if self.by_role else ""
        return f"on hold{until}{by_role}"


@dataclass(frozen=True, slots=True)
class Person:
    """One learner, as far as the choice of a cue is concerned."""

    code: str | None = None
    """None for somebody described on the spot."""
    age_years: int | None = None
    age_band: str | None = None
    """Slug of the age band; None if not known. Years, if known, go first."""
    experience: str | None = None
    backgrounds: tuple[str, ...] = ()
    """What the person knows and likes; empty means that nothing is known of it."""
    access_needs: tuple[str, ...] = ()
    notes: tuple[SafetyNote, ...] = ()
    holds: tuple[Hold, ...] = ()
    language: str = "en"
    declined: frozenset[str] = frozenset()
    """Codes of cues the person declined or disliked: never offered again."""
    paused: frozenset[str] = frozenset()
    """Codes of cues paused for the person after a fall or an injury."""

    @property
    def ages(self) -> tuple[float, float] | None:
        """Return the youngest and oldest the person may be, in years; None if not known."""
        if self.age_years is not None:
            return (self.age_years, self.age_years)
        if self.age_band is None:
            return None
        band = load_vocabulary().entry("age_band", self.age_band)
        return (band.low or 0, math.inf if band.high is None else band.high)

    def find_hold(self, task: str) -> Hold | None:
        """Return the hold on a task; None if the person may do it."""
        return next((hold for hold in self.holds if task in hold.tasks), None)


@dataclass(frozen=True, slots=True)
class Group:
    """Learners who meet together."""

    code: str
    members: tuple[Person, ...]


def list_people(who: Person | Group | None) -> tuple[Person, ...]:
    """Return the people a cue is for; none if nobody is named."""
    if who is None:
        return ()
    return who.members if isinstance(who, Group) else (who,)
