"""What a review is asked, as values; light, so that a screen can hold one."""

from __future__ import annotations

from dataclasses import asdict, dataclass
from pathlib import Path


@dataclass(frozen=True, slots=True)
class ReviewRequest:
    """A question to the library."""

    metric: str
    task: str | None = None
    """None: every task on which the metric was measured, if it is only one."""
    contrast: str = "immediate"
    better: str | None = None
    """higher, lower or target:VALUE; None: the metric's own direction."""
    age_band: str | None = None
    background: str | None = None
    worthwhile: float | None = None
    """Smallest difference that matters, in the metric's unit; None: a stated default."""
    allowance: float | None = None
    """Allowance for hidden choice, in residual SD; None: the released default."""

    @property
    def key(self) -> dict[str, object]:
        """Return the question as a plain mapping: the key of a stored ranking."""
        return asdict(self)


@dataclass(frozen=True, slots=True)
class TableRequest:
    """A question to a table of uses from anywhere."""

    path: Path
    better: str
    transform: str = "none"
    unit: str = ""
    metric: str | None = None
    task: str | None = None
    contrast: str | None = None
    worthwhile: float | None = None
    allowance: float | None = None


@dataclass(frozen=True, slots=True)
class ReviewDocument:
    """A ranking as the plain document that faces show and scripts read."""

    document: dict[str, object]
