"""Finds the few cues of a library that can answer a problem, without reading all of them."""

from __future__ import annotations

import math
import tomllib
from collections import Counter
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import cache
from importlib import resources

from cuebook.library.cues import Cue
from cuebook.library.understand import Scored, Understanding, build_speller
from cuebook.vocabulary import load_vocabulary
from cuebook.vocabulary.lay_words import load_lay_words
from cuebook.vocabulary.text import tokenise

KIN_SHARE = 0.6
"""Share of a task's or region's score that a cue for a near one earns."""
_DISTANT_KIN_SHARE = 0.25
_FEWEST_STEMS = 2
"""A phrase of one word that carries meaning says too little to match by."""


@dataclass(frozen=True, slots=True)
class Match:
    """How far a cue speaks to a problem; each part from 0 to 1."""

    features: float
    task: float
    """0.5 if the problem names no task, or the cue is bound to none."""
    region: float
    """0.5 if the problem names no region, or the cue is bound to none."""
    phrase: float
    """Share of one of the cue's own problem phrases that the sentence says."""


class CueIndex:
    """Cues by feature and by the words of their problem phrases."""

    def __init__(self, cues: Iterable[Cue]) -> None:
        self.cues: tuple[Cue, ...] = tuple(cues)
        self._by_feature: dict[str, list[int]] = {}
        self._by_stem: dict[str, list[int]] = {}
        self._phrases: list[tuple[int, frozenset[str]]] = []
        for number, cue in enumerate(self.cues):
            for feature in cue.features:
                self._by_feature.setdefault(feature, []).append(number)
            self._phrases += [(number, stems) for stems in _list_phrase_stems(cue)]
        counts = Counter(stem for _, stems in self._phrases for stem in stems)
        n_phrases = max(1, len(self._phrases))
        self._rarity = {stem: math.log(1 + n_phrases / count) for stem, count in counts.items()}
        self._phrase_weights = [sum(self._rarity[s] for s in stems) for _, stems in self._phrases]
        for number, (_, stems) in enumerate(self._phrases):
            for stem in stems:
                self._by_stem.setdefault(stem, []).append(number)

    def match(self, understanding: Understanding) -> dict[int, Match]:
        """Return the match of every cue that shares a feature or a phrase with a problem."""
        features = self._match_features(understanding.features)
        phrases = self._match_phrases(understanding.stems)
        tasks = spread_to_kin(understanding.tasks, "task")
        regions = spread_to_kin(understanding.regions, "region")
        return {
            number: Match(
                features=features.get(number, 0.0),
                task=_get_best(self.cues[number].tasks, tasks),
                region=_get_best(self.cues[number].regions, regions),
                phrase=phrases.get(number, 0.0),
            )
            for number in features.keys() | phrases.keys()
        }

    def _match_features(self, scored: tuple[Scored, ...]) -> dict[int, float]:
        """Return 1 - product(1 - score) over the features a cue improves, less what it worsens."""
        doubt: dict[int, float] = {}
        for feature in scored:
            for number in self._by_feature.get(feature.slug, ()):
                doubt[number] = doubt.get(number, 1.0) * (1 - feature.score)
        wanted = {feature.slug: feature.score for feature in scored}
        return {
            number: (1 - left) * (1 - 0.5 * self._get_harm(number, wanted))
            for number, left in doubt.items()
        }

    def _get_harm(self, number: int, wanted: Mapping[str, float]) -> float:
        return max((wanted.get(slug, 0.0) for slug in self.cues[number].may_worsen), default=0.0)

    def _match_phrases(self, stems: frozenset[str]) -> dict[int, float]:
        """Return the best share of a cue's phrases that the stems say, rare words counting more."""
        said: dict[int, float] = {}
        for stem in stems:
            for phrase in self._by_stem.get(stem, ()):
                said[phrase] = said.get(phrase, 0.0) + self._rarity[stem]
        best: dict[int, float] = {}
        for phrase, weight in said.items():
            number = self._phrases[phrase][0]
            share = weight / self._phrase_weights[phrase]
            best[number] = max(best.get(number, 0.0), share)
        return best


def _list_phrase_stems(cue: Cue) -> list[frozenset[str]]:
    """Return the stems of each problem phrase of a cue that says enough to match by."""
    language = cue.wordings[0].language
    words = load_lay_words(language)
    speller = build_speller(language)
    found = []
    for text in (cue.problem, *cue.phrases):
        tokens = speller.mend(tokenise(text, words.rules))
        stems = frozenset(t.stem for t in tokens if t.word not in words.rules.light_words)
        if len(stems) >= _FEWEST_STEMS:
            found.append(stems)
    return found


def _get_best(slugs: tuple[str, ...], scores: Mapping[str, float]) -> float:
    """Return the best score of some slugs; halfway if either side leaves it open."""
    if not scores or not slugs:
        return 0.5
    return max(scores.get(slug, 0.0) for slug in slugs)


def spread_to_kin(scored: tuple[Scored, ...], list_name: str) -> dict[str, float]:
    """Return the scores of slugs and, at a share, of the slugs near to them."""
    spread: dict[str, float] = {}
    for item in scored:
        for slug, share in load_kin(list_name).get(item.slug, {}).items():
            spread[slug] = max(spread.get(slug, 0.0), share * item.score)
        spread[item.slug] = max(spread.get(item.slug, 0.0), item.score)
    return spread


@cache
def load_kin(list_name: str) -> Mapping[str, Mapping[str, float]]:
    """Return, for each slug of "task" or "region", the slugs near to it and how near they are."""
    file = resources.files("cuebook.library").joinpath("data", "kinship.toml")
    pairs: list[list[str]] = tomllib.loads(file.read_text(encoding="utf-8"))[f"{list_name}s"]
    kin: dict[str, dict[str, float]] = {}
    if list_name == "task":
        for one in load_vocabulary().tasks:
            for other in load_vocabulary().tasks:
                if one.slug != other.slug and one.discipline == other.discipline:
                    is_near = one.family == other.family
                    share = KIN_SHARE if is_near else _DISTANT_KIN_SHARE
                    kin.setdefault(one.slug, {})[other.slug] = share
    for one_slug, other_slug in pairs:
        kin.setdefault(one_slug, {})[other_slug] = KIN_SHARE
        kin.setdefault(other_slug, {})[one_slug] = KIN_SHARE
    return kin
