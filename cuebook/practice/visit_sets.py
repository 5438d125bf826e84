"""The sets of a visit for one metric: which clean attempts stand before, between and after uses."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from cuebook.practice.changes import ChangeKey
from cuebook.practice.log import BASELINE
from cuebook.practice.scales import AttemptScale
from cuebook.practice.sets import FlaggedSet, build_set
from cuebook.practice.timeline import CLEAN, Step, Use, Visit


@dataclass(frozen=True, slots=True)
class PlacedSet:
    """A set and where in the visit it was made."""

    made: FlaggedSet
    step: Step
    place: int
    """Index of its block in the visit."""


@dataclass(frozen=True, slots=True)
class MetricView:
    """A metric, made by one recipe, as the derivation looks at it."""

    metric: str
    scale: AttemptScale
    recipe: str = ""
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


def make_key(view: MetricView, step: Step) -> ChangeKey:
    """Return the key of a comparison that a step stands in."""
    tempo = step.block.tempo
    return ChangeKey(
        view.metric,
        view.recipe,
        step.block.task,
        step.conditions,
        None if tempo is None else f"{tempo:g}",
    )


def join_flags(*lists: Iterable[str]) -> tuple[str, ...]:
    """Return flags in the order met, each once."""
    return tuple(dict.fromkeys(flag for flags in lists for flag in flags))


def get_set(visit: Visit, place: int, view: MetricView) -> PlacedSet | None:
    """Return the clean set made in one block of a visit, if it is clean and has a usable value."""
    step = visit.steps[place]
    if step.kind != CLEAN or visit.session.do_not_use:
        return None
    made = build_set(
        step.part.values.get(view.metric, ()),
        view.recipe,
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


def list_sets(
    visit: Visit, places: range, view: MetricView, like: Step | None = None
) -> list[PlacedSet]:
    """Return the clean sets of some blocks of a visit in order, all comparable to one step."""
    found = (
        get_set(visit, place, view)
        for place in places
        if like is None or visit.steps[place].is_comparable_to(like)
    )
    return [placed for placed in found if placed is not None]


def find_before(visit: Visit, use: Use, view: MetricView) -> PlacedSet | None:
    """Return the fresh before of a use: the last clean set since the use before it ended.

    Of several the one labelled baseline, else the latest; they are not pooled, and there is no
    reaching back.
    """
    start = use.first
    while start > 0 and visit.steps[start - 1].kind == CLEAN:
        start -= 1
    sets = list_sets(visit, range(start, use.first), view, use.steps[0])
    baselines = [placed for placed in sets if placed.step.block.phase == BASELINE]
    picked = baselines or sets
    return picked[-1] if picked else None


def find_after(visit: Visit, use: Use, view: MetricView) -> PlacedSet | None:
    """Return the first clean set after a use, before the next practice begins."""
    end = use.last + 1
    while end < len(visit.steps) and visit.steps[end].kind == CLEAN:
        end += 1
    sets = list_sets(visit, range(use.last + 1, end), view, use.steps[0])
    return sets[0] if sets else None


def find_opening(
    visit: Visit, view: MetricView, like: Step | None = None, *, is_after: bool = False
) -> PlacedSet | None:
    """Return the opening set of a visit: its first clean set, made before any cue.

    As the before-set of a visit of practice alone it must stand before that practice too; as an
    after-set (``is_after``) only a cue ends it, and it must be comparable to the before-set's step.
    """
    ends_at_practice = not is_after and not visit.has_cue
    stop = len(visit.steps)
    for place, step in enumerate(visit.steps):
        if step.bars_cue_free or (ends_at_practice and step.is_use):
            stop = place
            break
    sets = list_sets(visit, range(stop), view, like)
    return sets[0] if sets else None
