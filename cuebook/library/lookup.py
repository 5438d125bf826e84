"""Ranks the cues that answer a problem for somebody.

One score orders them, cut to 0 .. 1:

    score = match + 0.2 fit + 0.15 effect
    match = 0.45 features + 0.25 task + 0.10 region + 0.20 phrase

*features*, *task*, *region* and *phrase* are the parts of ``index.Match``; *fit* is that of
``fit.weigh_fit``, from -1 to 1; *effect* is 2 p - 1, where p is the chance, already shrunk, that
the cue helps more than practice alone. A cue not tried yet has effect 0, as has one that is as
likely to help as not: it is neither buried nor favoured.

Forbidden cues (``limits.judge_cue``) are left out before anything is ranked. Then the list is laid
out for variety: the plain rule of the same pair stands right behind its image, and further images
of a pair already shown step back.
"""

from __future__ import annotations

import heapq
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace

from cuebook.library.cues import Cue, Wording, fill_side
from cuebook.library.fit import weigh_fit
from cuebook.library.index import KIN_SHARE, CueIndex, Match, load_kin
from cuebook.library.limits import judge_cue
from cuebook.library.person import Group, Person, list_people
from cuebook.library.understand import Scored, Understanding
from cuebook.vocabulary import load_vocabulary

_FEATURE_WEIGHT, _TASK_WEIGHT, _REGION_WEIGHT, _PHRASE_WEIGHT = 0.45, 0.25, 0.10, 0.20
_FIT_WEIGHT, _EFFECT_WEIGHT = 0.2, 0.15
_LEAST_FEATURE, _LEAST_PHRASE, _LEAST_MATCH = 0.2, 0.5, 0.25
"""Below these a cue does not answer the problem: better no cue than a wrong one."""
_LEAST_SHARE = 0.5
"""A match below this share of the best one is left out: it would only dilute the answer."""
_SURE_TASK = 0.5
"""From this score on a task is taken as said, and cues for quite other tasks are left out."""
_SHORT_LIST = 200
"""Best matches whose fit is weighed; fit and effect could not lift a later one to the top ten."""
_AGAIN_COST = 0.08
"""By how much a further image of a pair already shown steps back, for each shown before."""


@dataclass(frozen=True, slots=True)
class Request:
    """What the asker sets by hand, over what the sentence says."""

    task: str | None = None
    rate: float | None = None
    """Cycles a minute; None if no beat is set."""
    cycle: str | None = None
    kind: str | None = None
    limit: int = 8


@dataclass(frozen=True)
class ObservedEffect:
    """What this library has measured of a cue, as far as the order needs it."""

    p_better: float
    """Chance, 0 to 1, that it helps more than practice alone; shrunk by the model."""
    uses: int
    details: Mapping[str, object] = field(default_factory=dict)
    """Handed on unchanged to whoever shows the hit."""


@dataclass(frozen=True, slots=True)
class ScoreParts:
    """The parts of a score."""

    match: float
    fit: float
    effect: float


@dataclass(frozen=True, slots=True)
class Hit:
    """One cue that answers a problem, ready to be shown: cautions first."""

    cue: Cue
    wording: Wording
    text: str
    """The words to say, with the side filled in where one is known."""
    score: float
    parts: ScoreParts
    cautions: tuple[str, ...] = ()
    why: tuple[str, ...] = ()
    effect: ObservedEffect | None = None
    """None if the cue has not been measured here."""


def find_cues(
    understanding: Understanding,
    cues: CueIndex | Iterable[Cue],
    who: Person | Group | None = None,
    request: Request | None = None,
    effects: Mapping[str, ObservedEffect] | None = None,
    warnings: Mapping[str, tuple[str, ...]] | None = None,
) -> tuple[Hit, ...]:
    """Return the cues that answer a problem, best first; empty if none answers it.

    Parameters
    ----------
    understanding : what the problem is about.
    cues : the cues of the library; pass a ``CueIndex`` to look up more than once.
    who : the person or group; None for nobody in particular.
    request : what is set by hand; a task set here takes the place of the tasks understood.
    effects : observed effect by cue code; a cue without one counts as not tried yet.
    warnings : lines to read first by cue code, such as harms seen with others.
    """
    request = request or Request()
    index = cues if isinstance(cues, CueIndex) else CueIndex(cues)
    if request.task is not None:
        understanding = replace(understanding, tasks=(Scored(request.task, 1.0),))
    scored = []
    for number, match in _shorten(index, understanding, request):
        hit = _make_hit(
            index.cues[number], match, understanding, who, request, effects or {}, warnings or {}
        )
        if hit is not None:
            scored.append(hit)
    scored.sort(key=lambda hit: -hit.score)
    return tuple(_lay_out(scored, request.limit))


def _shorten(
    index: CueIndex, understanding: Understanding, request: Request
) -> list[tuple[int, Match]]:
    """Return the best matches that answer the problem and the request, best first."""
    tasks = understanding.tasks
    is_task_sure = bool(tasks) and tasks[0].score >= _SURE_TASK
    answering = [
        (number, match)
        for number, match in index.match(understanding).items()
        if _answers(match, is_task_sure=is_task_sure) and _is_asked_for(index.cues[number], request)
    ]
    n_kept = max(_SHORT_LIST, 10 * request.limit)
    best = heapq.nsmallest(n_kept, answering, key=lambda item: (-_weigh_match(item[1]), item[0]))
    return [
        item for item in best if _weigh_match(item[1]) >= _LEAST_SHARE * _weigh_match(best[0][1])
    ]


def _answers(match: Match, *, is_task_sure: bool) -> bool:
    is_about_it = match.features >= _LEAST_FEATURE or match.phrase >= _LEAST_PHRASE
    is_elsewhere = is_task_sure and match.task == 0.0
    return is_about_it and not is_elsewhere and _weigh_match(match) >= _LEAST_MATCH


def _is_asked_for(cue: Cue, request: Request) -> bool:
    if request.kind is not None and cue.kind != request.kind:
        return False
    if request.task is None or not cue.tasks or request.task in cue.tasks:
        return True
    kin = load_kin("task").get(request.task, {})
    return any(kin.get(task, 0.0) >= KIN_SHARE for task in cue.tasks)


def _weigh_match(match: Match) -> float:
    return (
        _FEATURE_WEIGHT * match.features
        + _TASK_WEIGHT * match.task
        + _REGION_WEIGHT * match.region
        + _PHRASE_WEIGHT * match.phrase
    )


def _make_hit(
    cue: Cue,
    match: Match,
    understanding: Understanding,
    who: Person | Group | None,
    request: Request,
    effects: Mapping[str, ObservedEffect],
    warnings: Mapping[str, tuple[str, ...]],
) -> Hit | None:
    """Return the hit of one cue, or None if it must not be shown."""
    verdict = judge_cue(cue, who)
    if not verdict.is_allowed:
        return None
    people = tuple(person for person in list_people(who) if person.code not in verdict.out)
    fit = weigh_fit(cue, people, request.rate, request.cycle)
    effect = effects.get(cue.code)
    parts = ScoreParts(
        match=_weigh_match(match),
        fit=fit.score,
        effect=0.0 if effect is None else max(-1.0, min(1.0, 2 * effect.p_better - 1)),
    )
    score = parts.match + _FIT_WEIGHT * parts.fit + _EFFECT_WEIGHT * parts.effect
    wording = cue.wording(people[0].language if people else "en")
    own_caution = (cue.caution,) if cue.caution else ()
    return Hit(
        cue=cue,
        wording=wording,
        text=fill_side(wording.text, understanding.side),
        score=max(0.0, min(1.0, score)),
        parts=parts,
        cautions=(*warnings.get(cue.code, ()), *verdict.cautions, *own_caution),
        why=(*_explain(cue, match, understanding), *fit.reasons, *_explain_effect(effect)),
        effect=effect,
    )


def _explain(cue: Cue, match: Match, understanding: Understanding) -> list[str]:
    """Return in words why a cue answers the problem."""
    vocabulary = load_vocabulary()
    why = []
    for feature in understanding.features:
        if feature.slug in cue.features:
            said = f" ({', '.join(feature.words)})" if feature.words else ""
            why.append(f"for {vocabulary.label('feature', feature.slug).lower()}{said}")
    named = [task.slug for task in understanding.tasks if task.slug in cue.tasks]
    shown = named[:1] or cue.tasks[:1]
    near = "" if named or not understanding.tasks else ", a task near to it"
    why += [f"in {vocabulary.label('task', slug)}{near}" for slug in shown]
    if match.phrase >= _LEAST_PHRASE and cue.problem:
        why.append(f"same problem: {cue.problem}")
    return why


def _explain_effect(effect: ObservedEffect | None) -> list[str]:
    if effect is None:
        return []
    chance = round(100 * effect.p_better)
    uses = "1 use" if effect.uses == 1 else f"{effect.uses} uses"
    return [f"here: chance {chance} % that it helps more than practice alone ({uses})"]


def _lay_out(hits: list[Hit], limit: int) -> list[Hit]:
    """Return hits in the order shown: rule beside image, further images of a pair stepping back."""
    waiting = list(hits)
    shown: list[Hit] = []
    while waiting and len(shown) < limit:
        best = max(waiting, key=lambda hit: hit.score - _count_cost(hit, shown))
        waiting.remove(best)
        shown.append(best)
        partner = next((hit for hit in waiting if _is_plain_partner(best, hit)), None)
        is_alone = not any(_is_plain_partner(best, hit) for hit in shown)
        if partner is not None and is_alone and len(shown) < limit:
            waiting.remove(partner)
            shown.append(partner)
    return shown


def _count_cost(hit: Hit, shown: list[Hit]) -> float:
    if not hit.cue.is_image:
        return 0.0
    return _AGAIN_COST * sum(_is_pair(hit.cue, other.cue) and other.cue.is_image for other in shown)


def _is_plain_partner(image: Hit, other: Hit) -> bool:
    return image.cue.is_image and not other.cue.is_image and _is_pair(image.cue, other.cue)


def _is_pair(one: Cue, other: Cue) -> bool:
    """Return whether cues answer the same problem; sets may use the same pair name by chance."""
    same = bool(one.pair) and one.pair == other.pair
    return same and (set(one.tasks) & set(other.tasks) == set(one.tasks) or one.tasks == ())
