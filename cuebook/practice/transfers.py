"""Changes in a transfer condition: another tempo, place, load or task, with the cue off."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from datetime import timedelta

from cuebook.practice.changes import Change, NoChange
from cuebook.practice.log import TRANSFER
from cuebook.practice.timeline import CLEAN, Step, Use, Visit
from cuebook.practice.visit_sets import MetricView, PlacedSet, get_set, join_flags, make_key
from cuebook.practice.within import NO_VALUES, STOPPED

TRANSFER_CONTRASTS = ("transfer", "transfer_later")
WINDOW = timedelta(days=28)
NO_TRANSFER = "no_transfer_measure"
NEVER_MEASURED = "never_measured_there_before"
OTHER_OCCASION = "measured_on_the_other_occasion"


@dataclass(frozen=True, slots=True)
class Moment:
    """A block of a visit, in its place in the whole of a learner's practice."""

    visit: Visit
    place: int

    @property
    def step(self) -> Step:
        """Return the block as the learner went through it."""
        return self.visit.steps[self.place]

    def is_same_session(self, visit: Visit) -> bool:
        """Return whether it lies in the session of a visit."""
        return self.visit.session.session == visit.session.session


def list_moments(visits: Iterable[Sequence[Visit]]) -> tuple[Moment, ...]:
    """Return a learner's blocks of all tasks by start of session, then block number."""
    moments = (
        Moment(visit, place)
        for of_task in visits
        for visit in of_task
        for place in range(len(visit.steps))
    )
    return tuple(
        sorted(
            moments,
            key=lambda one: (
                one.visit.started_at,
                one.visit.session.session,
                one.step.block.number,
                one.step.block.block,
            ),
        )
    )


@dataclass(frozen=True, slots=True)
class _Measure:
    """A transfer measure: where it was made and its set."""

    moment: Moment
    placed: PlacedSet


def derive_transfers(
    moments: Sequence[Moment], visit: Visit, use: Use, view: MetricView
) -> dict[str, Change | NoChange]:
    """Return same-day and later-day transfer of one use.

    Of several transfer keys on one occasion the first that has a before counts.

    Parameters
    ----------
    moments : the learner's blocks of all tasks in order.
    visit, use : the use, and the visit it was made in.
    view : the metric.
    """
    if use.record.stop_reason is not None:
        return _refuse(use, STOPPED)
    measured: dict[str, list[_Measure]] = {}
    for measure in _iterate_transfers(moments, visit, use, view):
        measured.setdefault(_name_occasion(visit, measure.moment.visit), []).append(measure)
    if not measured:
        is_measured = any(step.has_usable(view.metric) for step in visit.steps)
        return _refuse(use, NO_TRANSFER if is_measured else NO_VALUES)
    answers: dict[str, Change | NoChange] = {}
    for name in TRANSFER_CONTRASTS:
        reason = NEVER_MEASURED if name in measured else OTHER_OCCASION
        answers[name] = NoChange(use.record, name, reason)
        for after in measured.get(name, ()):
            before = _find_before(moments, visit, use, after, view)
            if before is not None:
                answers[name] = _make_change(name, visit, use, before, after, view)
                break
    return answers


def _refuse(use: Use, reason: str) -> dict[str, Change | NoChange]:
    return {name: NoChange(use.record, name, reason) for name in TRANSFER_CONTRASTS}


def _name_occasion(visit: Visit, later: Visit) -> str:
    is_same_day = later.started_at.date() == visit.started_at.date()
    is_same_session = later.session.session == visit.session.session
    return "transfer" if is_same_session or is_same_day else "transfer_later"


def _make_change(
    contrast: str, visit: Visit, use: Use, before: PlacedSet, after: _Measure, view: MetricView
) -> Change:
    return Change(
        use.record,
        contrast,
        make_key(view, after.placed.step),
        before.made.attempts,
        after.placed.made.attempts,
        days=(after.moment.visit.started_at - visit.started_at) / timedelta(days=1),
        flags=join_flags(use.record.flags, before.made.flags, after.placed.made.flags),
    )


def _find_index(moments: Sequence[Moment], visit: Visit, place: int) -> int:
    step = visit.steps[place]
    return next(index for index, one in enumerate(moments) if one.step is step)


def _iterate_transfers(
    moments: Sequence[Moment], visit: Visit, use: Use, view: MetricView
) -> Iterator[_Measure]:
    """Yield the first clean transfer set after a use in each other key and on each occasion.

    Any other practice, with or without a cue and on whichever task, ends what this use alone
    can be credited with.
    """
    seen: list[tuple[str, Step]] = []
    for moment in moments[_find_index(moments, visit, use.last) + 1 :]:
        step = moment.step
        if step.kind != CLEAN or moment.visit.started_at - visit.started_at > WINDOW:
            return
        if step.block.phase != TRANSFER or step.is_comparable_to(use.steps[0]):
            continue
        occasion = _name_occasion(visit, moment.visit)
        if any(name == occasion and step.is_comparable_to(other) for name, other in seen):
            continue
        placed = get_set(moment.visit, moment.place, view)
        if placed is not None:
            seen.append((occasion, step))
            yield _Measure(moment, placed)


def _find_before(
    moments: Sequence[Moment], visit: Visit, use: Use, after: _Measure, view: MetricView
) -> PlacedSet | None:
    """Return the latest clean set in the transfer key before any cue of the use's session.

    None too if another cue of that session came before this use: the measure would stand before
    both, and its change could not be told apart. For practice alone practice is what bars.
    """
    own_tasks = {visit.task, after.moment.visit.task}
    best: PlacedSet | None = None
    for moment in moments[: _find_index(moments, visit, use.first)]:
        step = moment.step
        if step.bars_cue_free or (use.record.cue is None and step.is_use):
            if moment.is_same_session(visit):
                return None
            if moment.visit.task in own_tasks:
                best = None
        elif visit.started_at - moment.visit.started_at <= WINDOW and step.is_comparable_to(
            after.placed.step
        ):
            best = get_set(moment.visit, moment.place, view) or best
    return best
