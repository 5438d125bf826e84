"""The sets of a visit for one metric: which clean attempts stand before, between and after uses."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from cuebook.practice.changes import ChangeKey
from cuebook.practice.log import BASELINE
from cuebook.practice.scales import AttemptScale
from cuebook.practice.sets import FlaggedSet, build_set
from cuebook.practice.timeline import CLEAN, Step, Use, Visit, is_same_tempo


@dataclass(frozen=True, slots=True)
class PlacedSet:
    """A set and where in the visit it was made."""

    made: FlaggedSet
    step: Step
    place: int
    """Index of its block in the visit."""


@dataclass(frozen=True, slots=True)
class MetricView:
    """A metric as the derivation looks at it."""

    metric: str
    scale: AttemptScale
    drop_first: bool = False


def list_recipes(visits: Iterable[Visit], metric: str) -> tuple[str, ...]:
    """Return the recipes a metric has values of, sorted; the empty one if there are none."""
    seen = {
        value.recipe
        for visit in visits
        for step in visit.steps
        for value in step.part.values.get(metric, ())
    }
    return tuple(sorted(seen)) or ("",)


def make_key(visit: Visit, view: MetricView, recipe: str, tempo: float | None) -> ChangeKey:
    """Return the key of a comparison."""
    task, conditions = visit.task
    return ChangeKey(view.metric, recipe, task, conditions, None if tempo is None else f"{tempo:g}")


def get_set(visit: Visit, place: int, view: MetricView, recipe: str) -> PlacedSet | None:
    """Return the set made in one block of a visit, if it has a usable value."""
    step = visit.steps[place]
    made = build_set(
        step.part.values.get(view.metric, ()),
        recipe,
        view.scale,
        drop_first=view.drop_first and place == _find_first_measured(visit),
    )
    return None if made is None else PlacedSet(made, step, place)


def _find_first_measured(visit: Visit) -> int | None:
    """Return the block that holds the first attempt of the visit."""
    for place, step in enumerate(visit.steps):
        if any(step.part.values.values()):
            return place
    return None


def list_clean_sets(
    visit: Visit, places: range, view: MetricView, recipe: str, tempo: float | None
) -> Iterator[PlacedSet]:
    """Yield the clean sets of some blocks of a visit at one tempo, in order."""
    if visit.session.do_not_use:
        return
    for place in places:
        step = visit.steps[place]
        if step.kind != CLEAN or not is_same_tempo(step.block.tempo, tempo):
            continue
        placed = get_set(visit, place, view, recipe)
        if placed is not None:
            yield placed


def find_before(visit: Visit, use: Use, view: MetricView, recipe: str) -> PlacedSet | None:
    """Return the fresh before of a use: the last clean set since the use before it ended.

    Of several the one labelled baseline, else the latest; they are not pooled, and there is no
    reaching back.
    """
    start = _find_end_of_last_practice(visit, use.first)
    tempo = use.steps[0].block.tempo
    sets = list(list_clean_sets(visit, range(start, use.first), view, recipe, tempo))
    if not sets:
        return None
    baselines = [placed for placed in sets if placed.step.block.phase == BASELINE]
    return (baselines or sets)[-1]


def find_after(visit: Visit, use: Use, view: MetricView, recipe: str) -> PlacedSet | None:
    """Return the first clean set after a use, before the next practice begins."""
    end = _find_next_practice(visit, use.last + 1)
    tempo = use.steps[0].block.tempo
    return next(iter(list_clean_sets(visit, range(use.last + 1, end), view, recipe, tempo)), None)


def find_opening(visit: Visit, view: MetricView, recipe: str) -> PlacedSet | None:
    """Return the opening set of a visit: its first clean set, made before any cue.

    In a visit of practice alone it must stand before that practice.
    """
    stop = len(visit.steps)
    for place, step in enumerate(visit.steps):
        if step.bars_cue_free or (not visit.has_cue and step.is_use):
            stop = place
            break
    for place in range(stop):
        step = visit.steps[place]
        if step.kind != CLEAN or visit.session.do_not_use:
            continue
        placed = get_set(visit, place, view, recipe)
        if placed is not None:
            return placed
    return None


def _find_end_of_last_practice(visit: Visit, place: int) -> int:
    for earlier in range(place - 1, -1, -1):
        if visit.steps[earlier].kind != CLEAN:
            return earlier + 1
    return 0


def _find_next_practice(visit: Visit, place: int) -> int:
    for later in range(place, len(visit.steps)):
        if visit.steps[later].kind != CLEAN:
            return later
    return len(visit.steps)
