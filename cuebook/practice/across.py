"""Changes across days: what is left at the next opening measure, before any cue."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import timedelta

from cuebook.practice.changes import Change, NoChange
from cuebook.practice.timeline import UNKNOWN, Use, Visit
from cuebook.practice.visit_sets import MetricView, PlacedSet, find_opening, join_flags, make_key
from cuebook.practice.within import NO_BEFORE, NO_VALUES, STOPPED

ACROSS_CONTRASTS = ("retention", "followup")
RETENTION_DAYS = 28
STARTED_WITH_CUE = "session_began_with_cue"
CUE_BETWEEN = "another_cue_between"
NO_LATER_OPENING = "no_later_opening"
TOO_SOON = "practice_again_too_soon"
TOO_LATE = "later_than_28_days"
WITHIN_28_DAYS = "within_28_days"
CUE_NOT_KNOWN = "cue_not_known"
WITH_SESSION = "counted_with_the_session"
PRACTICE_IN_CUED = "practice_in_a_cued_session"
OTHERS_MANY = "many_other_cues"


@dataclass(frozen=True, slots=True)
class _Gap:
    days: float
    is_far_enough: bool
    """A night lies between."""
    is_date_only: bool


@dataclass(frozen=True, slots=True)
class _Pair:
    """The opening sets of two visits, or the reason why there are not two."""

    before: PlacedSet | None
    later: PlacedSet | None = None
    gap: _Gap | None = None
    reason: str = ""


def derive_across(
    visits: Sequence[Visit], index: int, view: MetricView, *, keeps_many: bool = False
) -> dict[tuple[str, str], Change | NoChange]:
    """Return retention and follow-up of one visit by use and contrast.

    There is one record a session and a reason for its other uses. The record stands with the
    first cued use (first use, in a session of practice alone) and belongs to the session's
    distinct cues in equal shares. ``keeps_many``: also sessions with many other cues.
    """
    visit = visits[index]
    cued = [use for use in visit.uses if use.record.cue is not None]
    bearer = next(iter(cued or visit.uses), None)
    found: dict[tuple[str, str], Change | NoChange] = {}
    if bearer is None:
        return found
    if not keeps_many and any(use.record.others == "many" for use in visit.uses):
        pair = _Pair(None, reason=OTHERS_MANY)
    else:
        pair = _pair_openings(visits, index, view)
    for contrast in ACROSS_CONTRASTS:
        for use in visit.uses:
            name = use.record.use, contrast
            if use is bearer:
                found[name] = _record(visit, bearer, cued, contrast, view, pair)
            else:
                why = PRACTICE_IN_CUED if cued and use.record.cue is None else WITH_SESSION
                found[name] = NoChange(use.record, contrast, why)
    return found


def _record(
    visit: Visit, bearer: Use, cued: Sequence[Use], contrast: str, view: MetricView, pair: _Pair
) -> Change | NoChange:
    before, later, gap = pair.before, pair.later, pair.gap
    if before is None:
        return NoChange(bearer.record, contrast, pair.reason)
    key = make_key(view, before.step)
    if later is None or gap is None:
        return NoChange(bearer.record, contrast, pair.reason, before.made.attempts, key)
    if (gap.days <= RETENTION_DAYS) != (contrast == "retention"):
        why = TOO_LATE if contrast == "retention" else WITHIN_28_DAYS
        return NoChange(bearer.record, contrast, why, before.made.attempts, key)
    cues = list(dict.fromkeys(use.record.cue for use in cued if use.record.cue))
    return Change(
        bearer.record,
        contrast,
        key,
        before.made.attempts,
        later.made.attempts,
        weights=tuple((cue, 1.0 / len(cues)) for cue in cues),
        days=gap.days,
        flags=join_flags(
            *(use.record.flags for use in cued or visit.uses),
            before.made.flags,
            later.made.flags,
            ["date_only"] if gap.is_date_only else [],
        ),
    )


def _pair_openings(visits: Sequence[Visit], index: int, view: MetricView) -> _Pair:
    visit = visits[index]
    before = find_opening(visit, view)
    if any(step.kind == UNKNOWN for step in visit.steps):
        return _Pair(before, reason=CUE_NOT_KNOWN)
    if any(step.part.is_stopped for step in visit.steps):
        return _Pair(before, reason=STOPPED)
    if before is None:
        return _Pair(None, reason=_why_no_opening(visit, view))
    for later_visit in visits[index + 1 :]:
        later = find_opening(later_visit, view, before.step, is_after=True)
        gap = _measure_gap(visit, later_visit)
        if later is not None and gap.is_far_enough:
            return _Pair(before, later, gap)
        if later_visit.has_cue:
            return _Pair(before, reason=CUE_BETWEEN)
        if later is not None and later_visit.uses:
            # That visit is a reference of its own, from this very set on: two would overlap.
            return _Pair(before, reason=TOO_SOON)
    return _Pair(before, reason=NO_LATER_OPENING)


def _why_no_opening(visit: Visit, view: MetricView) -> str:
    if visit.uses[0].first == 0:
        return STARTED_WITH_CUE
    is_measured = any(step.has_usable(view.metric) for step in visit.steps)
    return NO_BEFORE if is_measured else NO_VALUES


def _measure_gap(visit: Visit, later: Visit) -> _Gap:
    """Return the days between two visits, by clock or, where only dates are kept, by date."""
    if visit.session.is_date_only or later.session.is_date_only:
        days = float((later.started_at.date() - visit.started_at.date()).days)
        return _Gap(days, days >= 1, is_date_only=True)
    gap = later.started_at - visit.started_at
    return _Gap(gap / timedelta(days=1), gap >= timedelta(hours=24), is_date_only=False)
