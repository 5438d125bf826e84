"""What a typed problem is about: features, regions and tasks, each with a score and a reason.

The score of a slug is a noisy-or over the phrases that lead to it: 1 - product(1 - weight). A
phrase weighs more if it has more words, stands together, and names a fault rather than a hint;
it counts for nothing if the sentence denies it ("no longer shuffles") or praises the thing.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from functools import cache

from cuebook.library.polarity import Polarity
from cuebook.library.spelling import Speller, load_plain_words
from cuebook.vocabulary import load_vocabulary
from cuebook.vocabulary.lay_words import (
    LayWords,
    Lead,
    Sense,
    get_home_disciplines,
    load_lay_words,
)
from cuebook.vocabulary.phrases import Phrase, find_phrase
from cuebook.vocabulary.text import Token, tokenise

_LONGEST = 400
"""Words that are read; a problem is a sentence or two, and the rest would only cost time."""
_LEAST_SCORE = 0.12
_WEIGHT_OF_SENSE = {
    Sense.FAULT: 0.7,
    Sense.TRADE: 0.85,
    Sense.WORD: 0.7,
    Sense.TOPIC: 0.45,
    Sense.GOOD: 0.35,
    Sense.HINT: 0.22,
    Sense.IDIOM: 0.0,
}
_WANTING_WEIGHT = 0.7
"""Weight of a quality or plain name that is said to be missing."""
_WORD_BONUS = 0.1
"""Each further word of a phrase takes away this share of the doubt, twice over."""
_GAP_COST = 0.08
_CROSSING_COST = 0.35
"""Share lost when a phrase reaches over a comma or a joining word."""
_SWALLOWED = 0.5
"""Share left to a word that also stands inside a longer phrase for another slug."""
_AWAY_FROM_HOME = 0.35
"""Share left to a trade term when its own discipline is not spoken of."""
_GENERAL_DISCIPLINES = frozenset({"gait", "functional", "upper limb", "running and jumping"})
_SURE_ENOUGH = 0.5
_BESIDE_SPECIAL = 0.6
"""Share left to "walking" beside "waltz"."""


@dataclass(frozen=True, slots=True)
class Scored:
    """One slug, how sure it is (0 to 1), and the words that led there."""

    slug: str
    score: float
    words: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Understanding:
    """What a sentence was understood to say; each tuple has the surest first."""

    features: tuple[Scored, ...] = ()
    regions: tuple[Scored, ...] = ()
    tasks: tuple[Scored, ...] = ()
    side: str | None = None
    """left, right or both; None if no side is named."""
    rate_words: tuple[str, ...] = ()
    """Of slow, medium, brisk, fast: those the sentence uses."""
    resolved: tuple[str, ...] = ()
    """Features that the sentence says are no longer, or not, the trouble."""
    stems: frozenset[str] = field(default=frozenset(), repr=False)
    """Stems of the words that carry meaning, for comparing with problem phrases of cues."""

    @property
    def is_empty(self) -> bool:
        """Return whether nothing was understood."""
        return not (self.features or self.regions or self.tasks)


_Found = tuple[Phrase, tuple[int, ...]]


@dataclass(frozen=True, slots=True)
class _Evidence:
    lead: Lead
    weight: float
    places: frozenset[int]


def understand(problem: str, language: str = "en") -> Understanding:
    """Return what a problem in a teacher's own words is about; never raises on any text."""
    words = load_lay_words(language)
    tokens = build_speller(words.language).mend(tokenise(problem, words.rules)[:_LONGEST])
    polarity = Polarity(tokens, words)
    light = words.rules.light_words
    evidence, resolved = _weigh(tokens, words, polarity)
    tasks = _prefer_special(_score(evidence, "task", tokens, light))
    features = _score(_bring_home(evidence, tasks), "feature", tokens, light)
    return Understanding(
        features=features,
        regions=_score(evidence, "region", tokens, light),
        tasks=tasks,
        side=_find_side(tokens, words),
        rate_words=tuple(rate for rate, phrases in words.rates.items() if _occurs(phrases, tokens)),
        resolved=tuple(
            slug for slug in resolved if slug not in {feature.slug for feature in features}
        ),
        stems=frozenset(t.stem for t in tokens if t.word not in light),
    )


@cache
def build_speller(language: str = "en") -> Speller:
    """Return the speller for the lay words of a language; built once a process."""
    words = load_lay_words(language)
    plain = load_plain_words(words.language)
    return Speller(words.known_words, words.index.prefixes, words.rules, plain)


def _weigh(
    tokens: Sequence[Token], words: LayWords, polarity: Polarity
) -> tuple[list[_Evidence], list[str]]:
    """Return the evidence of every phrase that occurs, and the features that are denied."""
    found = _drop_idioms(words.index.find(tokens), words)
    evidence: list[_Evidence] = []
    taken_back: dict[str, set[int]] = {}
    for phrase, places in found:
        tightness = _get_tightness(places, tokens)
        for lead in words.leads[phrase.text]:
            weight = _get_weight(lead, phrase, places, polarity)
            if weight > 0.0:
                evidence.append(_Evidence(lead, weight * tightness, frozenset(places)))
            elif lead.list_name == "feature":
                taken_back.setdefault(lead.slug, set()).update(places)
    # "No tension": the fault is denied, so its name must not count as a wish either.
    kept = [
        item
        for item in evidence
        if item.lead.sense is Sense.FAULT or not item.places & taken_back.get(item.lead.slug, set())
    ]
    return kept, list(taken_back)


def _drop_idioms(found: Sequence[_Found], words: LayWords) -> list[_Found]:
    """Leave out what stands wholly inside an everyday turn ("runs out of")."""
    idioms = [
        set(places)
        for phrase, places in found
        if any(lead.sense is Sense.IDIOM for lead in words.leads[phrase.text])
    ]
    return [item for item in found if not any(set(item[1]) <= idiom for idiom in idioms)]


def _get_weight(lead: Lead, phrase: Phrase, places: Sequence[int], polarity: Polarity) -> float:
    """Return how much a phrase weighs for one lead; 0 if the sentence takes it back."""
    base = _WEIGHT_OF_SENSE[lead.sense]
    base = 1 - (1 - base) * (1 - _WORD_BONUS * 2) ** (len(phrase.terms) - 1)
    if lead.list_name != "feature":
        return base
    if lead.sense in (Sense.GOOD, Sense.TOPIC):
        if polarity.is_wanting(places):
            return max(base, _WANTING_WEIGHT)
        return 0.0 if polarity.is_praised(places) else base
    return 0.0 if polarity.is_denied(places) else base


def _get_tightness(places: Sequence[int], tokens: Sequence[Token]) -> float:
    """Return the share a phrase keeps when other words stand between its own."""
    positions = [tokens[i].at for i in places]
    gap = max(0, max(positions) - min(positions) - (len(places) - 1))
    crosses = len({tokens[i].part for i in places}) > 1
    return max(0.2, 1 - _GAP_COST * gap) * (1 - _CROSSING_COST * crosses)


def _prefer_special(tasks: tuple[Scored, ...]) -> tuple[Scored, ...]:
    """Put general tasks behind when a special one is spoken of: "lands her grand jete" leaps."""
    discipline = {task.slug: task.discipline for task in load_vocabulary().tasks}
    special = [task for task in tasks if discipline[task.slug] not in _GENERAL_DISCIPLINES]
    if not special or special[0].score < _SURE_ENOUGH:
        return tasks
    weighed = [
        replace(task, score=task.score * _BESIDE_SPECIAL)
        if discipline[task.slug] in _GENERAL_DISCIPLINES
        else task
        for task in tasks
    ]
    return tuple(sorted(weighed, key=lambda task: -task.score))


def _bring_home(evidence: list[_Evidence], tasks: Sequence[Scored]) -> list[_Evidence]:
    """Lower the weight of trade terms whose own discipline is not spoken of."""
    vocabulary = load_vocabulary()
    spoken_of = {vocabulary.task(task.slug).discipline for task in tasks}

    def is_at_home(lead: Lead) -> bool:
        return not lead.discipline or bool(spoken_of & set(get_home_disciplines(lead.discipline)))

    return [
        item
        if is_at_home(item.lead)
        else _Evidence(item.lead, item.weight * _AWAY_FROM_HOME, item.places)
        for item in evidence
    ]


def _score(
    evidence: Sequence[_Evidence], list_name: str, tokens: Sequence[Token], light: frozenset[str]
) -> tuple[Scored, ...]:
    """Combine the evidence for each slug of one list, surest first."""
    mine = [item for item in evidence if item.lead.list_name == list_name]
    by_slug: dict[str, list[_Evidence]] = {}
    for item in mine:
        weight = item.weight * (_SWALLOWED if _is_swallowed(item, mine) else 1.0)
        by_slug.setdefault(item.lead.slug, []).append(_Evidence(item.lead, weight, item.places))
    scored = []
    for slug, items in by_slug.items():
        doubt, used = 1.0, set[int]()
        for item in sorted(items, key=lambda item: -item.weight):
            if not item.places <= used:  # the same words said twice prove nothing more
                doubt *= 1 - item.weight * (0.5 if item.places & used else 1.0)
                used |= item.places
        if 1 - doubt >= _LEAST_SCORE:
            said = tuple(tokens[i].word for i in sorted(used) if tokens[i].word not in light)
            scored.append(Scored(slug, 1 - doubt, said))
    order = {slug: i for i, slug in enumerate(load_vocabulary().slugs(list_name))}
    return tuple(sorted(scored, key=lambda item: (-item.score, order[item.slug])))


def _is_swallowed(item: _Evidence, others: Sequence[_Evidence]) -> bool:
    """Return whether the words also stand inside a longer phrase that means something else."""
    return any(
        item.places < other.places
        and other.lead.slug != item.lead.slug
        and other.weight >= item.weight
        for other in others
    )


def _find_side(tokens: Sequence[Token], words: LayWords) -> str | None:
    sides = {side for side, phrases in words.sides.items() if _occurs(phrases, tokens)}
    if "both" in sides:
        return "both"
    # "Left foot harder than the right one": the side named first is the one in trouble.
    named = [t.word for t in tokens if t.word in sides]
    return named[0] if named else next(iter(sides), None)


def _occurs(phrases: Sequence[Phrase], tokens: Sequence[Token]) -> bool:
    return any(find_phrase(phrase, tokens) is not None for phrase in phrases)
