"""Which difference would matter, and which change of one learner is more than noise."""

from __future__ import annotations

import math

from scipy.special import stdtrit

from cuebook.evidence.display_scale import convert_effect
from cuebook.evidence.question import ReviewQuestion
from cuebook.evidence.result import DetectableChange, Worthwhile

DEFAULT_SHARE = 0.2
"""Of the day-to-day spread of the learners' own level."""
ENOUGH_CHANGES = 20
SMALLEST_WORTHWHILE = 1e-12
"""Where no change differs from another; an effect of 0 is not worthwhile even then."""
WITHIN_SESSION = frozenset({"during", "immediate"})


def choose_worthwhile(
    question: ReviewQuestion,
    *,
    n_changes: int,
    state_variance: float | None,
    within_variance: float | None,
    sd_change: float,
    resolution: float | None,
) -> Worthwhile:
    """Return the smallest worthwhile difference on the transformed scale.

    Parameters
    ----------
    state_variance : true within-learner variance of the state before (noise of attempts removed).
    within_variance : the same with the noise; either is None where visits are too few to tell.
    sd_change : SD of the changes, which stands in where visits are too few.
    resolution : smallest step of the metric on the transformed scale; None: not known.

    Notes
    -----
    What the teacher set wins, then the registry's, then 0.2 of the day-to-day spread, at least the
    resolution.
    """
    if question.worthwhile is not None:
        by = "set for this goal" if question.worthwhile_source == "teacher" else "of the registry"
        return Worthwhile(question.worthwhile, question.worthwhile_source, by)
    spread = math.sqrt(max(state_variance or 0.0, 0.25 * (within_variance or 0.0)))
    note = "default, 0.2 of day-to-day spread; not a clinical threshold"
    if spread == 0:
        spread = sd_change
        note = "default, 0.2 of the spread of the changes; not a clinical threshold"
    if n_changes < ENOUGH_CHANGES:
        note += f"; provisional until there are {ENOUGH_CHANGES} changes"
    value = max(DEFAULT_SHARE * spread, resolution or 0.0, SMALLEST_WORTHWHILE)
    return Worthwhile(value, "default", note)


def convert_step(
    step: float | None, question: ReviewQuestion, mean_before: float | None
) -> float | None:
    """Return a small step in the metric's own unit on the transformed scale.

    Parameters
    ----------
    step : such as the resolution, or a difference that a teacher calls worthwhile.
    mean_before : mean oriented before-value, at which a log or sqrt metric is stepped from.

    Returns
    -------
    None where the step or the place it starts from is not known, and for logit metrics.
    """
    if step is None or question.transform == "none":
        return step
    if mean_before is None:
        return None
    own = mean_before if question.better == "higher" else -mean_before
    if question.transform == "log":
        typical = question.target if question.better == "target" else math.exp(own)
        return math.log1p(step / typical) if typical else None
    if question.transform == "sqrt":
        return step / (2 * max(own, math.sqrt(3 / 8)))
    return None


def compute_detectable(
    question: ReviewQuestion,
    *,
    attempt_variance: float,
    freedom: float,
    block_variance: float,
    mean_before: float | None,
) -> DetectableChange:
    """Return the MDC95 of a typical learner.

    Parameters
    ----------
    attempt_variance : variance of one attempt of a typical learner.
    freedom : its degrees of freedom; infinity where it is known well.
    block_variance : what moves a mean from one block to the next beside the attempts.

    References
    ----------
    Weir, J. P. (2005), J. Strength Cond. Res. 19:231: the minimal detectable change.
    """
    before, after = question.mdc_attempts_before, question.mdc_attempts_after
    quantile = 1.96 if math.isinf(freedom) else float(stdtrit(freedom, 0.975))
    value = quantile * math.sqrt(attempt_variance * (1 / before + 1 / after) + block_variance)
    bounds = sorted(convert_effect(sign * value, question, mean_before) for sign in (-1.0, 1.0))
    return DetectableChange(
        value=value,
        attempts_before=before,
        attempts_after=after,
        freedom=freedom,
        occasion="same session" if question.contrast in WITHIN_SESSION else "between days",
        low_display=bounds[0],
        high_display=bounds[1],
    )
