"""Cues as values: the idea, its exact words, and what it claims to move."""

from __future__ import annotations

from dataclasses import dataclass

IMPROVES, SILENT, MAY_WORSEN = "improves", "silent", "may_worsen"
SIDE_PLACE = "{side}"
"""Stands in a wording where left or right is filled in."""
IMAGE_KINDS = frozenset({"analogy", "learner_own"})
READY, THERAPIST_ONLY = "ready", "therapist_only"


@dataclass(frozen=True, slots=True)
class Wording:
    """The exact words of a cue in one language; a change of words is a new revision."""

    text: str
    """May hold ``{side}``, to be filled with left or right."""
    language: str = "en"
    """BCP 47 tag."""
    revision: int = 1
    replaces: int | None = None
    """Revision of the same language that this one replaces; None for a first wording."""


@dataclass(frozen=True, slots=True)
class Claim:
    """What a cue is said to do to one feature; compared with what is measured."""

    feature: str
    says: str
    """improves, silent or may_worsen."""


@dataclass(frozen=True, slots=True)
class Cue:
    """One idea that is said, with what a teacher must know before saying it."""

    code: str
    kind: str
    focus: str
    wordings: tuple[Wording, ...]
    tasks: tuple[str, ...] = ()
    regions: tuple[str, ...] = ()
    claims: tuple[Claim, ...] = ()
    pair: str = ""
    """Cues of one pair answer the same problem, one by an image, one by a rule; empty: alone."""
    sister_of: str | None = None
    """Code of the cue whose image this one replaces for people of another background."""
    status: str = READY
    problem: str = ""
    phrases: tuple[str, ...] = ()
    """Other ways in which people have put the problem."""
    cycle: str | None = None
    """What one cycle is for the rates below; None if the cue is bound to no rate."""
    rate_low: float | None = None
    """Cycles a minute, included; None if the cue is bound to no rate."""
    rate_high: float | None = None
    """Cycles a minute, included; None if the cue is bound to no rate."""
    age_low: int | None = None
    """Years, included; None if open."""
    age_high: int | None = None
    """Years, included; None if open."""
    experience: tuple[str, ...] = ()
    """Levels the cue is meant for; empty means any."""
    background_good: tuple[str, ...] = ()
    """Backgrounds that know the scene of the image; empty means that anybody does."""
    background_avoid: tuple[str, ...] = ()
    access_avoid: tuple[str, ...] = ()
    """Access needs to which the cue does not speak."""
    note_avoid: tuple[str, ...] = ()
    """Safety notes with which the cue is not given."""
    captures: str = ""
    leaves_out: str = ""
    caution: str = ""
    """Shown before the words; empty if there is none."""
    target_metric: str | None = None
    watch_metric: str | None = None
    """What might get worse meanwhile; None if nothing is known to."""

    @property
    def features(self) -> tuple[str, ...]:
        """Return the features the cue claims to improve."""
        return tuple(claim.feature for claim in self.claims if claim.says == IMPROVES)

    @property
    def may_worsen(self) -> tuple[str, ...]:
        """Return the features the cue may make worse."""
        return tuple(claim.feature for claim in self.claims if claim.says == MAY_WORSEN)

    @property
    def is_image(self) -> bool:
        """Return whether the cue speaks in an image rather than in plain words."""
        return self.kind in IMAGE_KINDS

    def wording(self, language: str = "en", revision: int | None = None) -> Wording:
        """Return the newest wording (or one revision) in the nearest language there is.

        Languages are tried as in RFC 4647, section 3.4: the tag itself, then the tag shortened
        from the right; then any tag of the same first part; then the language of the cue's first
        wording. With a revision that no wording has, the newest is returned.
        """
        tags = [wording.language for wording in self.wordings]
        chosen = match_language(language, tags) or tags[0]
        same = [wording for wording in self.wordings if wording.language == chosen]
        for wording in same:
            if wording.revision == revision:
                return wording
        return max(same, key=lambda wording: wording.revision)


@dataclass(frozen=True, slots=True)
class CueSet:
    """A set of cues that travels as one file."""

    code: str
    title: str
    cues: tuple[Cue, ...]
    about: str = ""
    language: str = "en"


def match_language(wanted: str, tags: list[str]) -> str | None:
    """Return the tag that speaks a wanted language best, or None if none does."""
    by_lower = {tag.lower(): tag for tag in reversed(tags)}
    parts = wanted.lower().split("-")
    for length in range(len(parts), 0, -1):
        shortened = "-".join(parts[:length])
        if shortened in by_lower:
            return by_lower[shortened]
    return next((tag for tag in tags if tag.lower().split("-")[0] == parts[0]), None)


def fill_side(text: str, side: str | None) -> str:
    """Return a wording's text with left or right filled in; open if no side is known."""
    return text.replace(SIDE_PLACE, side if side in ("left", "right") else "left/right")
