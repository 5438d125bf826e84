"""What a metric function gives back, and what the engine makes of it."""

from __future__ import annotations

import hashlib
import json
import math
from collections.abc import Mapping
from dataclasses import dataclass, field


@dataclass(frozen=True, slots=True)
class MetricValue:
    """The answer of one metric function."""

    value: float
    """NaN if it cannot be computed; then there is a reason."""
    n_used: int = 1
    """How many samples, intervals or movements stand behind it."""
    flags: tuple[str, ...] = ()
    reason: str | None = None
    """Why there is no value; None if there is one."""


def give_none(reason: str, *flags: str) -> MetricValue:
    """Return a missing value with its reason: never 0, never silent."""
    return MetricValue(math.nan, 0, flags, reason)


@dataclass(frozen=True, slots=True)
class Measurement:
    """One metric of one recording, with everything needed to compare it."""

    metric: str
    value: float | None
    """None if it could not be computed; then ``reason`` says why."""
    unit: str
    better: str
    n_used: int
    segment: str | None
    """Which part of the recording; None: the whole."""
    recipe: Mapping[str, object]
    """The choices: definition, filter, thresholds. Equal recipes may be compared."""
    quality: Mapping[str, object]
    """Facts of this file: rate, duration, missing, longest gap, noise."""
    flags: tuple[str, ...] = ()
    reason: str | None = None


@dataclass(frozen=True, slots=True)
class Recipe:
    """The choices behind a value, as canonical text and its hash."""

    choices: Mapping[str, object] = field(default_factory=dict)

    @property
    def canonical(self) -> str:
        """Return JSON with sorted keys: equal choices give equal text."""
        return json.dumps(dict(self.choices), sort_keys=True, separators=(",", ":"))

    @property
    def digest(self) -> str:
        """Return the SHA-256 of the canonical text."""
        return hashlib.sha256(self.canonical.encode()).hexdigest()
