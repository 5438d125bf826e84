"""Find a cue for a problem: danger first, then what it is about, then the cues that fit."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from functools import cache

from cuebook.library.advice import advise
from cuebook.library.cues import Cue
from cuebook.library.index import CueIndex
from cuebook.library.lookup import Hit, ObservedEffect, Request, find_cues
from cuebook.library.person import Group, Person, list_people
from cuebook.library.safety import check_safety
from cuebook.library.seed_sets import load_seed_cues
from cuebook.library.stop_messages import Contacts, compose_stop_message
from cuebook.library.understand import Scored, Understanding, understand
from cuebook.vocabulary import load_vocabulary, require_slug

FORMAT = "cuebook.find/1"
_SURE_TASK = 0.5
"""From this score on a task's own caution is read before all cues."""


@dataclass(frozen=True, slots=True)
class Stop:
    """The answer to a sentence that describes a danger."""

    action: str
    """Slug of the vocabulary list safety_action."""
    message: str


@dataclass(frozen=True)
class FoundCues:
    """The answer to one problem; holds nothing of a text that was stopped."""

    stop: Stop | None = None
    """None if cues may be shown; if set, everything below is empty."""
    cautions: tuple[str, ...] = ()
    """Lines to read before any cue."""
    understanding: Understanding = field(default_factory=Understanding)
    hits: tuple[Hit, ...] = ()
    advice: str = ""
    """What to add or do when there is no hit; empty otherwise."""


def find_cue(
    text: str,
    cues: CueIndex | Iterable[Cue] | None = None,
    who: Person | Group | None = None,
    request: Request | None = None,
    effects: Mapping[str, ObservedEffect] | None = None,
    warnings: Mapping[str, tuple[str, ...]] | None = None,
    contacts: Contacts | None = None,
) -> FoundCues:
    """Return the cues for a problem, or the stop that its text calls for.

    Without cues those of the seed sets are used. Raises UnknownCodeError for a task, cycle, kind,
    background or the like that the vocabulary does not hold, naming the nearest.
    """
    request = request or Request()
    _check_slugs(who, request)
    safety = check_safety(text)
    if safety is not None and safety.stops:
        return FoundCues(stop=Stop(safety.action, compose_stop_message(safety.action, contacts)))
    understanding = understand(text)
    index = _get_seed_index() if cues is None else cues
    hits = find_cues(understanding, index, who, request, effects, warnings)
    tasks = (request.task,) if request.task else _list_sure_tasks(understanding.tasks)
    return FoundCues(
        cautions=(*(safety.cautions if safety else ()), *list_task_cautions(tasks)),
        understanding=understanding,
        hits=hits,
        advice="" if hits else advise(understanding, who, request),
    )


@cache
def _get_seed_index() -> CueIndex:
    return CueIndex(load_seed_cues())


def _list_sure_tasks(tasks: tuple[Scored, ...]) -> tuple[str, ...]:
    return tuple(task.slug for task in tasks[:1] if task.score >= _SURE_TASK)


def list_task_cautions(tasks: tuple[str, ...]) -> tuple[str, ...]:
    """Return the cautions that stand before every cue of some tasks."""
    vocabulary = load_vocabulary()
    lines = []
    for task in tasks:
        caution = vocabulary.task(task).caution_first
        if caution:
            label = vocabulary.task(task).label
            lines.append(f"{label[:1].upper()}{label[1:]}: {caution}")
    return tuple(lines)


def _check_slugs(who: Person | Group | None, request: Request) -> None:
    asked = (("task", request.task), ("tempo_cycle", request.cycle), ("cue_kind", request.kind))
    for list_name, slug in asked:
        if slug is not None:
            require_slug(list_name, slug)
    for person in list_people(who):
        for slug in person.backgrounds:
            require_slug("background", slug)
        for slug in person.access_needs:
            require_slug("access_need", slug)


def to_document(found: FoundCues) -> dict[str, object]:
    """Return an answer in the shape cuebook.find/1."""
    stop = found.stop
    understanding = found.understanding
    return {
        "format": FORMAT,
        "stop": None if stop is None else {"action": stop.action, "message": stop.message},
        "cautions": list(found.cautions),
        "features": _list_scores("feature", understanding.features),
        "regions": _list_scores("region", understanding.regions),
        "tasks": _list_scores("task", understanding.tasks),
        "side": understanding.side,
        "resolved": list(understanding.resolved),
        "cues": [_describe_hit(hit) for hit in found.hits],
        "advice": found.advice or None,
    }


def _list_scores(key: str, scored: tuple[Scored, ...]) -> list[dict[str, object]]:
    return [{key: item.slug, "score": item.score} for item in scored]


def _describe_hit(hit: Hit) -> dict[str, object]:
    cue = hit.cue
    return {
        "cue": cue.code,
        "kind": cue.kind,
        "focus": cue.focus,
        "caution": " ".join(_end(line) for line in hit.cautions),
        "wording": hit.text,
        "language": hit.wording.language,
        "revision": hit.wording.revision,
        "tasks": list(cue.tasks),
        "captures": cue.captures,
        "leaves_out": cue.leaves_out,
        "target_metric": cue.target_metric,
        "watch_metric": cue.watch_metric,
        "status": cue.status,
        "score": hit.score,
        "why": list(hit.why),
        "effect": None if hit.effect is None else _describe_effect(hit.effect),
    }


def _describe_effect(effect: ObservedEffect) -> dict[str, object]:
    return {"p_better": effect.p_better, "uses": effect.uses, **effect.details}


def _end(line: str) -> str:
    """Return a line with a full stop behind it, so that several can stand in one text."""
    return line if line.endswith((".", "!", "?")) else f"{line}."
