"""Changes within one visit: during a cue, and straight after it."""

from __future__ import annotations

from cuebook.practice.changes import Change, ConfusedPair, NoChange
from cuebook.practice.sets import FlaggedSet, build_set
from cuebook.practice.timeline import Use, Visit
from cuebook.practice.visit_sets import (
    MetricView,
    PlacedSet,
    find_after,
    find_before,
    join_flags,
    make_key,
)

NO_VALUES = "no_values"
NO_BEFORE = "no_before"
NOT_CLEAN_BETWEEN = "no_clean_between"
NO_AFTER = "no_after"
NO_VALUES_DURING = "no_values_during"
STOPPED = "stopped"


def derive_during(visit: Visit, use: Use, view: MetricView) -> Change | NoChange:
    """Return the change under the cue: attempts of the use minus its fresh before."""
    after = build_set(use.list_values(view.metric), view.recipe, view.scale)
    return _compare(visit, use, view, "during", after)


def derive_immediate(visit: Visit, use: Use, view: MetricView) -> Change | NoChange:
    """Return the change straight after the cue: first clean set after minus fresh before."""
    after = find_after(visit, use, view)
    return _compare(visit, use, view, "immediate", None if after is None else after.made)


def _compare(
    visit: Visit, use: Use, view: MetricView, contrast: str, after: FlaggedSet | None
) -> Change | NoChange:
    before = find_before(visit, use, view)
    key = make_key(view, use.steps[0])
    reason = _find_reason(visit, use, view, contrast, before, after)
    if reason is not None or before is None or after is None:
        attempts = None if before is None else before.made.attempts
        return NoChange(use.record, contrast, reason or NO_AFTER, attempts, key)
    chained = ("chained",) if _is_chained(visit, use, before, view) else ()
    return Change(
        use.record,
        contrast,
        key,
        before.made.attempts,
        after.attempts,
        flags=join_flags(use.record.flags, before.made.flags, after.flags, chained),
    )


def _find_reason(
    visit: Visit,
    use: Use,
    view: MetricView,
    contrast: str,
    before: PlacedSet | None,
    after: FlaggedSet | None,
) -> str | None:
    """Return the one reason why there is no change, the gravest first; None if there is one."""
    if use.record.stop_reason is not None:
        return STOPPED
    if not any(step.has_usable(view.metric) for step in visit.steps):
        return NO_VALUES
    if before is None:
        return NO_BEFORE if use.record.is_first else NOT_CLEAN_BETWEEN
    if after is None:
        return NO_VALUES_DURING if contrast == "during" else NO_AFTER
    return None


def find_confused(visit: Visit, view: MetricView) -> tuple[ConfusedPair, ...]:
    """Return runs of different cues between the same two sets, with their total change."""
    found = []
    run: list[Use] = []
    for use in visit.uses:
        run.append(use)
        after = find_after(visit, use, view)
        if after is None:
            continue
        before = find_before(visit, run[0], view)
        cues = tuple(use.record.cue for use in run if use.record.cue is not None)
        if before is not None and before.step.is_comparable_to(after.step) and len(set(cues)) > 1:
            found.append(
                ConfusedPair(
                    use.record.learner,
                    visit.session.session,
                    cues,
                    make_key(view, use.steps[0]),
                    after.made.attempts.mean - before.made.attempts.mean,
                )
            )
        run = []
    return tuple(found)


def _is_chained(visit: Visit, use: Use, before: PlacedSet, view: MetricView) -> bool:
    """Return whether the before is at the same time the after of the use before it."""
    if use.record.is_first:
        return False
    after = find_after(visit, visit.uses[use.record.k - 2], view)
    return after is not None and after.place == before.place
