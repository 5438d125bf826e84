"""When practice alone may be the line that cues are compared with."""

from __future__ import annotations

import statistics
from collections.abc import Sequence

from cuebook.evidence.prepared import ReferenceCheck
from cuebook.practice.changes import Change

FEWEST_CHANGES = 6
FEWEST_LEARNERS = 3
FEWEST_DAYS = 3


def check_reference(changes: Sequence[Change]) -> ReferenceCheck:
    """Return whether practice alone is identified, and what limits the comparison.

    It must have been measured often enough, with learners who also got cues, at places in the
    session and over weeks that the cued uses share, and with as much practice.
    """
    alone = [change for change in changes if not change.cue_weights]
    cued = [change for change in changes if change.cue_weights]
    learners = {change.use.learner for change in alone} & {change.use.learner for change in cued}
    n_alone = sum(change.use.learner in learners for change in alone)
    days = {(change.use.learner, change.use.session) for change in alone}
    n_days = len({session for _, session in days})
    reasons = []
    is_shown = (
        n_alone >= FEWEST_CHANGES and len(learners) >= FEWEST_LEARNERS and n_days >= FEWEST_DAYS
    )
    if not is_shown:
        reasons.append(
            f"practice alone was measured {n_alone} times with {len(learners)} learners who also "
            f"got cues, on {n_days} days; {FEWEST_CHANGES}, {FEWEST_LEARNERS} and {FEWEST_DAYS} "
            "are needed: add blocks without a cue"
        )
    caps = False
    if is_shown:
        for what, of_alone, of_cued in (
            ("place in the session", [c.use.k for c in alone], [c.use.k for c in cued]),
            ("number of visits", [c.use.t for c in alone], [c.use.t for c in cued]),
        ):
            inside = sum(min(of_alone) <= place <= max(of_alone) for place in of_cued)
            if 2 * inside < len(cued):
                caps = True
                reasons.append(f"practice alone and cues differ in {what}")
        if _differ_in_attempts(alone, cued):
            caps = True
            reasons.append("practice alone and cues differ in how much was practised")
    return ReferenceCheck(
        is_shown=is_shown,
        caps_at_c=caps,
        reasons=tuple(reasons),
        practice_randomised=bool(alone) and all(change.use.randomised for change in alone),
        n_practice=len(alone),
        n_practice_learners=len({change.use.learner for change in alone}),
        n_days=n_days,
    )


def _differ_in_attempts(alone: Sequence[Change], cued: Sequence[Change]) -> bool:
    counted = [
        [change.use.attempts for change in group if change.use.attempts] for group in (alone, cued)
    ]
    if not all(counted):
        return False
    one, other = (statistics.median(group) for group in counted)
    return not 0.5 <= one / other <= 2.0
