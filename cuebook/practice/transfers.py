"""Changes in a transfer condition: another tempo, place, load or task, with the cue off."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import timedelta

from cuebook.practice.changes import Change, ChangeKey, NoChange
from cuebook.practice.log import TRANSFER
from cuebook.practice.timeline import CLEAN, TaskKey, Use, Visit, is_same_tempo
from cuebook.practice.visit_sets import MetricView, PlacedSet, get_set

WINDOW = timedelta(days=28)
NO_TRANSFER = "no_transfer_measure"
NEVER_MEASURED = "never_measured_there_before"
OTHER_OCCASION = "measured_on_the_other_occasion"
STOPPED = "stopped"


@dataclass(frozen=True, slots=True)
class _Place:
    """A block of a visit, in the order of the learner's whole practice."""

    visit: Visit
    place: int

    @property
    def order(self) -> tuple[object, ...]:
        step = self.visit.steps[self.place]
        return (self.visit.started_at, self.visit.session.session, step.block.number)


def derive_transfers(
    visits: Mapping[TaskKey, Sequence[Visit]],
    visit: Visit,
    use: Use,
    view: MetricView,
    recipe: str,
) -> dict[str, Change | NoChange]:
    """Return same-day and later-day transfer of one use: two contrasts, at most one change."""
    contrasts = ("transfer", "transfer_later")
    if use.record.stop_reason is not None:
        return {name: NoChange(use.record, name, STOPPED) for name in contrasts}
    found = _find_transfer(visits, visit, use, view, recipe)
    if found is None:
        return {name: NoChange(use.record, name, NO_TRANSFER) for name in contrasts}
    after, placed = found
    occasion = (
        "transfer" if after.visit.session.session == visit.session.session else "transfer_later"
    )
    before = _find_before(visits, visit, after, placed, view, recipe)
    answers: dict[str, Change | NoChange] = {}
    for name in contrasts:
        if name != occasion:
            answers[name] = NoChange(use.record, name, OTHER_OCCASION)
        elif before is None:
            answers[name] = NoChange(use.record, name, NEVER_MEASURED)
        else:
            task, conditions = after.visit.task
            tempo = placed.step.block.tempo
            key = ChangeKey(
                view.metric, recipe, task, conditions, None if tempo is None else f"{tempo:g}"
            )
            flags = (*use.record.flags, *before.made.flags, *placed.made.flags)
            answers[name] = Change(
                use.record,
                name,
                key,
                before.made.attempts,
                placed.made.attempts,
                days=(after.visit.started_at - visit.started_at) / timedelta(days=1),
                flags=tuple(dict.fromkeys(flags)),
            )
    return answers


def _walk(visits: Mapping[TaskKey, Sequence[Visit]]) -> list[_Place]:
    places = [
        _Place(visit, place)
        for of_task in visits.values()
        for visit in of_task
        for place in range(len(visit.steps))
    ]
    return sorted(places, key=lambda place: (*map(str, place.order[:2]), place.order[2]))


def _iterate_after(
    visits: Mapping[TaskKey, Sequence[Visit]], visit: Visit, use: Use
) -> Iterator[_Place]:
    start = _Place(visit, use.last).order
    for place in _walk(visits):
        if place.order > start and place.visit.started_at - visit.started_at <= WINDOW:
            yield place


def _find_transfer(
    visits: Mapping[TaskKey, Sequence[Visit]],
    visit: Visit,
    use: Use,
    view: MetricView,
    recipe: str,
) -> tuple[_Place, PlacedSet] | None:
    """Return the first clean transfer set after a use, before another cue on either task."""
    barred: set[TaskKey] = set()
    for place in _iterate_after(visits, visit, use):
        step = place.visit.steps[place.place]
        if step.kind != CLEAN:
            # Practice, with or without a cue, ends what this use alone can be credited with.
            barred.add(place.visit.task)
            if place.visit.task == visit.task:
                return None
            continue
        if step.block.phase != TRANSFER or place.visit.task in barred:
            continue
        if place.visit.session.do_not_use:
            continue
        placed = get_set(place.visit, place.place, view, recipe)
        if placed is not None:
            return place, placed
    return None


def _find_before(
    visits: Mapping[TaskKey, Sequence[Visit]],
    visit: Visit,
    after: _Place,
    placed: PlacedSet,
    view: MetricView,
    recipe: str,
) -> PlacedSet | None:
    """Return the latest clean set in the transfer key before any cue of the use's session."""
    own_tasks = {visit.task, after.visit.task}
    best: PlacedSet | None = None
    for place in _walk(visits):
        if place.order >= after.order:
            break
        step = place.visit.steps[place.place]
        is_same_session = place.visit.session.session == visit.session.session
        if place.visit.started_at > visit.started_at and not is_same_session:
            break
        if step.bars_cue_free and place.visit.task in own_tasks:
            if is_same_session:
                break
            best = None  # a cue on either task came between
            continue
        if (
            place.visit.task != after.visit.task
            or step.kind != CLEAN
            or place.visit.session.do_not_use
            or visit.started_at - place.visit.started_at > WINDOW
            or not is_same_tempo(step.block.tempo, placed.step.block.tempo)
        ):
            continue
        found = get_set(place.visit, place.place, view, recipe)
        best = found or best
    return best
