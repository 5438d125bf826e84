"""What a change is, as a value: after minus before, or the one reason there is none."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

CONTRASTS = ("during", "immediate", "retention", "transfer", "transfer_later", "followup")
"""When the after-set was taken; ``followup`` is shown over time and never ranked."""

RANKED_CONTRASTS = CONTRASTS[:-1]


@dataclass(frozen=True, slots=True)
class AttemptSet:
    """All usable attempt values of one learner in one block for one key, summed up."""

    mean: float
    n: int
    sum_of_squares: float
    """Of deviations from the mean: (n - 1) SD^2; 0 for a single attempt."""
    sampling_variance: float | None = None
    """Known variance of the mean (hits out of m); None: from the attempts' spread."""


@dataclass(frozen=True, slots=True)
class ChangeKey:
    """What must be equal before two sets may be compared."""

    metric: str
    recipe: str
    """Hash of the choices behind the values."""
    task: str
    conditions: tuple[tuple[str, str], ...] = ()
    """Side, aid, footwear, help, seat height, instrument: facts that make a key differ."""
    tempo: str | None = None


@dataclass(frozen=True, slots=True)
class UseRecord:
    """One use of a cue, or of practice alone, by one learner."""

    use: str
    learner: str
    cue: str | None
    """None: practice alone."""
    task: str
    session: str
    k: int
    """Place among this learner's uses on the task in the session, from 1."""
    t: int
    """Place among this learner's sessions on the task, from 0."""
    wording: int | None = None
    kind: str | None = None
    attempts: int | None = None
    times_said: int | None = None
    minutes: float | None = None
    event: str | None = None
    """Shared by the learners of a group who were given the cue together."""
    assigned: str | None = None
    randomised: bool = False
    chosen: str = "unknown"
    others: str = "none"
    stop_reason: str | None = None
    flags: tuple[str, ...] = ()

    @property
    def is_first(self) -> bool:
        """Return whether it is the first use of the visit."""
        return self.k == 1


@dataclass(frozen=True, slots=True)
class Change:
    """After minus before, one metric, one learner, one use, one contrast."""

    use: UseRecord
    contrast: str
    key: ChangeKey
    before: AttemptSet
    after: AttemptSet
    weights: tuple[tuple[str, float], ...] = ()
    """Cues and their shares; empty: the use's own cue alone (or practice alone)."""
    days: float = 0.0
    """Days from the session of the use to the after-set; 0 within one session."""
    flags: tuple[str, ...] = ()

    @property
    def difference(self) -> float:
        """Return the change on the transformed, oriented scale: plus is better."""
        return self.after.mean - self.before.mean

    @property
    def cue_weights(self) -> tuple[tuple[str, float], ...]:
        """Return which cues it belongs to; empty for practice alone."""
        if self.weights:
            return self.weights
        return ((self.use.cue, 1.0),) if self.use.cue else ()


@dataclass(frozen=True, slots=True)
class NoChange:
    """The one reason why a use gave no change for a contrast."""

    use: UseRecord
    contrast: str
    reason: str
    """A slug: stopped, no_values, no_before, no_after, session_began_with_cue …"""
    before: AttemptSet | None = None
    """Kept where only the after-set is missing."""
    key: ChangeKey | None = None


@dataclass(frozen=True, slots=True)
class HarmTally:
    """Harms of one cue (or of practice alone) over all its uses, measured or not."""

    uses: int = 0
    times_said: int = 0
    stops: Mapping[str, int] = field(default_factory=dict)
    events: Mapping[str, int] = field(default_factory=dict)
    declined: int = 0


@dataclass(frozen=True, slots=True)
class ConfusedPair:
    """Two cues between the same two sets: they cannot be told apart."""

    learner: str
    session: str
    cues: tuple[str, ...]
    key: ChangeKey
    total_change: float


@dataclass(frozen=True, slots=True)
class Derived:
    """Everything derived from a log for one metric."""

    uses: tuple[UseRecord, ...]
    changes: tuple[Change, ...]
    without: tuple[NoChange, ...]
    harms: Mapping[str | None, HarmTally]
    confused: tuple[ConfusedPair, ...] = ()
    left_out: Mapping[str, int] = field(default_factory=dict)
    """How many uses were left out altogether, by reason."""
