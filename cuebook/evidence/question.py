"""What a review asks, and what it is told beside the changes. Light: loads no numpy."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from cuebook.errors import UsageError

if TYPE_CHECKING:
    from cuebook.evidence.result import Ranking

DEFAULT_ALLOWANCE = 0.3


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
class WatchMetric:
    """A second metric that a cue might make worse, with its own ranking."""

    metric: str
    ranking: Ranking
