"""The log of practice as values: what was done, with whom, in which order, and what it read."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import datetime

ACQUISITION = "acquisition"
BASELINE = "baseline"
TRANSFER = "transfer"
NOT_A_STOP = frozenset({"planned_end"})
"""Reasons for stopping that are no stop: the block ended as planned."""


@dataclass(frozen=True, slots=True)
class AttemptValue:
    """The measurement of one attempt, on the metric's own scale."""

    value: float | None
    """None if it could not be measured; then ``reason`` says why."""
    recipe: str
    """Hash of the choices behind it: only equal ones are compared."""
    is_valid: bool = True
    """False if the user marked it invalid."""
    is_after_stop: bool = False
    """Made after this learner had stopped in the block."""
    is_late: bool = False
    """Typed more than 24 hours after its session, without a recording."""
    reason: str | None = None


@dataclass(frozen=True, slots=True)
class LoggedParticipation:
    """One learner in one block."""

    learner: str
    presence: str = "present"
    values: Mapping[str, tuple[AttemptValue, ...]] = field(default_factory=dict)
    """Attempt values per metric, in the order made."""
    times_said: int | None = None
    attempts: int | None = None
    minutes: float | None = None
    reaction: str | None = None
    events: tuple[str, ...] = ()
    stop_reason: str | None = None

    @property
    def is_stopped(self) -> bool:
        """Return whether this learner had to stop."""
        return self.stop_reason is not None and self.stop_reason not in NOT_A_STOP


@dataclass(frozen=True, slots=True)
class LoggedBlock:
    """One block of a session."""

    block: str
    number: int
    phase: str
    task: str
    participations: tuple[LoggedParticipation, ...]
    conditions: tuple[tuple[str, str], ...] = ()
    """Side, aid, footwear, help, seat height, instrument: facts that make a key differ."""
    tempo: float | None = None
    """Cycles a minute; None if no beat was set."""
    cue: str | None = None
    wording: int | None = None
    kind: str | None = None
    others: str = "none"
    chosen: str = "unknown"
    assigned: str | None = None
    is_randomised: bool = False
    """Taken from a stored schedule, drawn before the before-set was measured."""
    event: str | None = None
    delivery: str | None = None
    is_changed_after_result: bool = False
    """The cue or the reason for choosing it was altered after the after-value was entered."""


@dataclass(frozen=True, slots=True)
class LoggedSession:
    """One meeting."""

    session: str
    started_at: datetime
    """With its zone."""
    blocks: tuple[LoggedBlock, ...]
    is_date_only: bool = False
    do_not_use: bool = False


@dataclass(frozen=True, slots=True)
class LoggedLearner:
    """What the ranking must know of a learner."""

    learner: str
    may_be_ranked: bool
    """Only a current yes to use in ranking counts."""
    age_band: str | None = None
    backgrounds: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class PracticeLog:
    """Everything that happened, as far as it is logged."""

    learners: Mapping[str, LoggedLearner]
    sessions: tuple[LoggedSession, ...]
