"""Changes across days: what is left at the next opening measure, before any cue."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import timedelta

from cuebook.practice.changes import Change, NoChange
from cuebook.practice.timeline import ALONE, CUED, UNKNOWN, Visit, is_same_tempo
from cuebook.practice.visit_sets import MetricView, PlacedSet, find_opening, make_key

RETENTION_DAYS = 28
STARTED_WITH_CUE = "session_began_with_cue"
CUE_BETWEEN = "another_cue_between"
NO_LATER_OPENING = "no_later_opening"
TOO_LATE = "later_than_28_days"
WITHIN_28_DAYS = "within_28_days"
CUE_NOT_KNOWN = "cue_not_known"
WITH_SESSION = "counted_with_the_session"
PRACTICE_IN_CUED = "practice_in_a_cued_session"
STOPPED = "stopped"


@dataclass(frozen=True, slots=True)
class _Later:
    opening: PlacedSet
    visit: Visit
    days: float
    is_date_only: bool


def derive_across(
    visits: Sequence[Visit], index: int, view: MetricView, recipe: str
) -> dict[str, list[Change | NoChange]]:
    """Return retention and follow-up of one visit: one record a session, a reason a use.

    The record stands with the session's first cued use (first use, in a session of practice
    alone) and belongs to its distinct cues in equal shares.
    """
    visit = visits[index]
    found: dict[str, list[Change | NoChange]] = {"retention": [], "followup": []}
    if not visit.uses:
        return found
    cued = [use for use in visit.uses if use.record.cue is not None]
    bearer = (cued or list(visit.uses))[0]
    reason, before, later = _judge(visits, index, view, recipe)
    for contrast, answers in found.items():
        for use in visit.uses:
            if use is not bearer:
                why = PRACTICE_IN_CUED if cued and use.record.cue is None else WITH_SESSION
                answers.append(NoChange(use.record, contrast, why))
                continue
            if later is None or before is None:
                answers.append(
                    NoChange(
                        use.record,
                        contrast,
                        reason,
                        None if before is None else before.made.attempts,
                    )
                )
                continue
            is_retention = later.days <= RETENTION_DAYS
            if is_retention != (contrast == "retention"):
                why = TOO_LATE if contrast == "retention" else WITHIN_28_DAYS
                answers.append(NoChange(use.record, contrast, why, before.made.attempts))
                continue
            cues = list(dict.fromkeys(use.record.cue for use in cued if use.record.cue))
            flags = [*use.record.flags, *before.made.flags, *later.opening.made.flags]
            if later.is_date_only:
                flags.append("date_only")
            answers.append(
                Change(
                    use.record,
                    contrast,
                    make_key(visit, view, recipe, before.step.block.tempo),
                    before.made.attempts,
                    later.opening.made.attempts,
                    weights=tuple((cue, 1.0 / len(cues)) for cue in cues),
                    days=later.days,
                    flags=tuple(dict.fromkeys(flags)),
                )
            )
    return found


def _judge(
    visits: Sequence[Visit], index: int, view: MetricView, recipe: str
) -> tuple[str, PlacedSet | None, _Later | None]:
    """Return the reason there is no record, the opening, and the later opening."""
    visit = visits[index]
    before = find_opening(visit, view, recipe)
    if any(step.kind == UNKNOWN for step in visit.steps):
        return CUE_NOT_KNOWN, before, None
    if any(step.part.is_stopped for step in visit.steps):
        return STOPPED, before, None
    if before is None:
        return _why_no_opening(visit), None, None
    for later_visit in visits[index + 1 :]:
        opening = find_opening(later_visit, view, recipe)
        days, is_far_enough, is_date_only = _measure_gap(visit, later_visit)
        if (
            opening is not None
            and is_far_enough
            and is_same_tempo(opening.step.block.tempo, before.step.block.tempo)
        ):
            return "", before, _Later(opening, later_visit, days, is_date_only)
        if later_visit.has_cue:
            return CUE_BETWEEN, before, None
    return NO_LATER_OPENING, before, None


def _why_no_opening(visit: Visit) -> str:
    first_use = next((step.kind for step in visit.steps if step.kind in {CUED, ALONE}), None)
    opened = any(step.kind not in {CUED, ALONE} for step in visit.steps[: visit.uses[0].first])
    if first_use is not None and not opened:
        return STARTED_WITH_CUE
    return "no_before"


def _measure_gap(visit: Visit, later: Visit) -> tuple[float, bool, bool]:
    """Return days between two visits, whether that is a night's sleep, and if only by date."""
    is_date_only = visit.session.is_date_only or later.session.is_date_only
    if is_date_only:
        days = float((later.started_at.date() - visit.started_at.date()).days)
        return days, days >= 1, True
    gap = later.started_at - visit.started_at
    return gap / timedelta(days=1), gap >= timedelta(hours=24), False
