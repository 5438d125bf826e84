"""Changes within one visit: during a cue, and straight after it."""

from __future__ import annotations

from collections.abc import Sequence

from cuebook.practice.changes import Change, ChangeKey, ConfusedPair, NoChange
from cuebook.practice.sets import FlaggedSet, build_set
from cuebook.practice.timeline import Use, Visit
from cuebook.practice.visit_sets import MetricView, PlacedSet, find_after, find_before, make_key

NO_BEFORE = "no_before"
NOT_CLEAN_BETWEEN = "no_clean_between"
NO_AFTER = "no_after"
NO_VALUES_DURING = "no_values_during"
STOPPED = "stopped"


def derive_during(visit: Visit, use: Use, view: MetricView, recipe: str) -> Change | NoChange:
    """Return the change under the cue: attempts of the use minus its fresh before."""
    before = find_before(visit, use, view, recipe)
    key = _key(visit, use, view, recipe)
    if use.record.stop_reason is not None:
        return _none(use, "during", STOPPED, before, key)
    if before is None:
        return _none(use, "during", _why_no_before(use), None, key)
    after = build_set(use.values_by_metric.get(view.metric, ()), recipe, view.scale)
    if after is None:
        return _none(use, "during", NO_VALUES_DURING, before, key)
    return _make(visit, use, "during", key, before, after, view, recipe)


def derive_immediate(visit: Visit, use: Use, view: MetricView, recipe: str) -> Change | NoChange:
    """Return the change straight after the cue: first clean set after minus fresh before."""
    before = find_before(visit, use, view, recipe)
    key = _key(visit, use, view, recipe)
    if use.record.stop_reason is not None:
        return _none(use, "immediate", STOPPED, before, key)
    if before is None:
        return _none(use, "immediate", _why_no_before(use), None, key)
    after = find_after(visit, use, view, recipe)
    if after is None:
        return _none(use, "immediate", NO_AFTER, before, key)
    return _make(visit, use, "immediate", key, before, after.made, view, recipe)


def find_confused(visit: Visit, view: MetricView, recipe: str) -> tuple[ConfusedPair, ...]:
    """Return runs of different cues between the same two sets, with their total change."""
    found = []
    run: list[Use] = []
    for use in visit.uses:
        run.append(use)
        after = find_after(visit, use, view, recipe)
        if after is None:
            continue
        before = find_before(visit, run[0], view, recipe)
        cues = tuple(use.record.cue for use in run if use.record.cue is not None)
        if len(run) > 1 and before is not None and len(set(cues)) > 1:
            found.append(
                ConfusedPair(
                    use.record.learner,
                    visit.session.session,
                    cues,
                    _key(visit, use, view, recipe),
                    after.made.attempts.mean - before.made.attempts.mean,
                )
            )
        run = []
    return tuple(found)


def _key(visit: Visit, use: Use, view: MetricView, recipe: str) -> ChangeKey:
    return make_key(visit, view, recipe, use.steps[0].block.tempo)


def _why_no_before(use: Use) -> str:
    return NO_BEFORE if use.first == 0 or use.record.is_first else NOT_CLEAN_BETWEEN


def _none(
    use: Use, contrast: str, reason: str, before: PlacedSet | None, key: ChangeKey
) -> NoChange:
    return NoChange(
        use.record, contrast, reason, None if before is None else before.made.attempts, key
    )


def _make(
    visit: Visit,
    use: Use,
    contrast: str,
    key: ChangeKey,
    before: PlacedSet,
    after: FlaggedSet,
    view: MetricView,
    recipe: str,
) -> Change:
    flags = [*use.record.flags, *before.made.flags, *after.flags]
    if _is_chained(visit.uses, visit, use, before, view, recipe):
        flags.append("chained")
    return Change(
        use.record,
        contrast,
        key,
        before.made.attempts,
        after.attempts,
        flags=tuple(dict.fromkeys(flags)),
    )


def _is_chained(
    uses: Sequence[Use],
    visit: Visit,
    use: Use,
    before: PlacedSet,
    view: MetricView,
    recipe: str,
) -> bool:
    """Return whether the before is at the same time the after of the use before it."""
    if use.record.is_first:
        return False
    last = uses[use.record.k - 2]
    after = find_after(visit, last, view, recipe)
    return after is not None and after.place == before.place
