"""What a review asks, and what it is told beside the changes. Light: loads no numpy."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from cuebook.errors import UsageError

if TYPE_CHECKING:
    from cuebook.evidence.result import Ranking

DEFAULT_ALLOWANCE = 0.3
NO_HARM_REASONS = frozenset({"planned_end", "equipment"})
"""Reasons for stopping that say nothing about the cue."""
FALL_SLUGS = frozenset({"fall", "injury", "fall_or_near_fall"})


@dataclass(frozen=True, slots=True, kw_only=True)
class ReviewQuestion:
    """Metric, contrast and direction, with the choices that the answer depends on."""

    metric: str
    contrast: str = "immediate"
    unit: str = ""
    better: str = "higher"
    """higher, lower or target."""
    transform: str = "none"
    """none, log, logit or sqrt."""
    target: float | None = None
    """The best value of a target metric, in its own unit; else None."""
    resolution: float | None = None
    """Smallest step the metric can show, in its own unit; None: not known."""
    worthwhile: float | None = None
    """Smallest worthwhile effect on the scale of ``effect``; None: the default rule."""
    worthwhile_source: str = "teacher"
    """Who set ``worthwhile``: teacher or registry."""
    allowance: float = DEFAULT_ALLOWANCE
    """Assumed size of unrecorded reasons for choosing a cue, as a share of the residual SD."""
    mdc_attempts_before: int = 3
    mdc_attempts_after: int = 3
    evidence_revision: int | None = None
    """State of the log the changes were derived from; None: a table from elsewhere."""
    task: str | None = None
    filters: Mapping[str, str] = field(default_factory=dict)
    """What the changes were narrowed to, as words for the reader."""

    def __post_init__(self) -> None:
        if self.allowance < 0:
            raise UsageError(
                f"The bias allowance is {self.allowance}; it must be 0 or more.",
                "Give a share such as 0.3; 0 claims that nothing hidden steered the choice.",
            )
        if self.worthwhile is not None and not self.worthwhile > 0:
            raise UsageError(
                f"The worthwhile difference is {self.worthwhile}; it must be above 0.",
                "Give the smallest effect that would matter.",
            )
        if min(self.mdc_attempts_before, self.mdc_attempts_after) < 1:
            raise UsageError("A change needs at least one attempt before and after.")


@dataclass(frozen=True, slots=True)
class HarmCount:
    """What went wrong in all uses of one cue, measured or not."""

    uses: int
    stops: Mapping[str, int] = field(default_factory=dict)
    """Stopped uses per reason (slugs of list reason_for_stopping)."""
    events: Mapping[str, int] = field(default_factory=dict)
    """Events per slug of list event."""
    pain_up: int = 0
    """Uses in which pain rose by 2 or more."""
    times_said: int = 0
    """0: not counted."""
    declined: int = 0
    """Declined before starting: not uses."""

    @property
    def stopped(self) -> int:
        """Uses stopped for a reason that may lie with the cue."""
        return sum(n for reason, n in self.stops.items() if reason not in NO_HARM_REASONS)

    @property
    def falls(self) -> int:
        """Falls and injuries, as stop reasons or as events."""
        stops = sum(n for reason, n in self.stops.items() if reason in FALL_SLUGS)
        return max(stops, sum(n for slug, n in self.events.items() if slug in FALL_SLUGS))

    @property
    def total(self) -> int:
        """Harms in all: stops, near-falls and rises of pain that did not stop the use."""
        near = sum(n for slug, n in self.events.items() if slug == "near_fall")
        unstopped_falls = max(0, self.falls - sum(self.stops.get(slug, 0) for slug in FALL_SLUGS))
        return self.stopped + near + unstopped_falls + self.pain_up

    def must_look(self) -> bool:
        """Say whether somebody must look before the cue is said again."""
        kinds = [n for reason, n in self.stops.items() if reason not in NO_HARM_REASONS]
        too_many = self.uses >= 5 and self.stopped > 0.2 * self.uses
        return self.falls > 0 or max(kinds, default=0) >= 2 or too_many


@dataclass(frozen=True, slots=True)
class WatchMetric:
    """A second metric that a cue might make worse, with its own ranking."""

    metric: str
    ranking: Ranking
