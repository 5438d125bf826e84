"""Effects in the unit a reader knows: the metric's own, or per cent."""

from __future__ import annotations

import math

from cuebook.evidence.question import ReviewQuestion

LARGEST_LOG = 700.0
"""Beyond this the exponential has no number; no measure changes so much."""


def get_direction(better: str) -> int:
    """Return -1 where a good change is a fall (of the value, or of the distance to a target)."""
    return 1 if better == "higher" else -1


def convert_effect(effect: float, question: ReviewQuestion, mean_before: float | None) -> float:
    """Return an oriented, transformed effect as a change of the metric itself.

    Parameters
    ----------
    effect : oriented (plus is better), on the transformed scale.
    question : gives transform and direction.
    mean_before : mean oriented before-value; needed for logit and sqrt, whose effect depends on
        where it starts.

    Returns
    -------
    Units of the metric (none, sqrt), per cent (log) or percentage points (logit); for a target
    metric the change of the distance to the target. NaN where ``mean_before`` is needed but None.
    """
    direction = get_direction(question.better)
    own = direction * effect
    if question.transform == "none":
        return own
    if question.transform == "log":
        return 100 * math.expm1(min(own, LARGEST_LOG))
    if mean_before is None:
        return math.nan
    start = direction * mean_before
    if question.transform == "logit":
        return 100 * (_expit(start + own) - _expit(start))
    return max(start + own, 0.0) ** 2 - max(start, 0.0) ** 2


def name_display_unit(question: ReviewQuestion) -> str:
    """Return the unit of ``convert_effect``."""
    return {"log": "%", "logit": "percentage points"}.get(question.transform, question.unit)


def _expit(value: float) -> float:
    return 1 / (1 + math.exp(-value)) if value >= 0 else math.exp(value) / (1 + math.exp(value))
