"""Phrases of a word list, and where they occur in a sentence.

How a phrase is written: words with spaces between them, all of which must occur in one clause,
near each other, in any order. ``a|b`` is one or the other; ``jerk*`` is any word that begins so;
``@small`` is any word of the list's group "small"; a leading ``>`` asks for the written order, as
does the word "not" in it; a leading ``=`` also lets hardly a word stand between. Words are compared
by their stems, so "step" also finds "steps".
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass

from cuebook.vocabulary.text import LanguageRules, Token, stem

_ROOM = 4
"""Words that may stand between those of a phrase, light words not counted."""
_TIGHT_ROOM = 1
_SHORTEST_PREFIX = 2


@dataclass(frozen=True, slots=True)
class Term:
    """One place of a phrase: any of these stems, or a word that begins with any of these."""

    stems: frozenset[str]
    prefixes: tuple[str, ...]

    def fits(self, token: Token) -> bool:
        """Return whether a token can stand at this place."""
        return token.stem in self.stems or (
            bool(self.prefixes) and token.word.startswith(self.prefixes)
        )


@dataclass(frozen=True, slots=True)
class Phrase:
    """One phrase of a word list."""

    text: str
    terms: tuple[Term, ...]
    is_ordered: bool
    room: int = _ROOM
    """Words that may stand between its own, light words not counted."""


def parse_phrase(
    text: str, rules: LanguageRules, groups: Mapping[str, Sequence[str]] | None = None
) -> Phrase:
    """Compile one written phrase; an unknown group raises KeyError (our own lists, tested)."""
    terms = []
    for written in text.lstrip(">=").split():
        alternatives: list[str] = []
        for choice in written.split("|"):
            alternatives += groups[choice[1:]] if groups and choice.startswith("@") else [choice]
        terms.append(
            Term(
                frozenset(stem(word, rules) for word in alternatives if not word.endswith("*")),
                tuple(word[:-1] for word in alternatives if word.endswith("*")),
            )
        )
    is_ordered = text.startswith((">", "=")) or any("not" in term.stems for term in terms)
    room = _TIGHT_ROOM if text.startswith("=") else _ROOM
    return Phrase(text, tuple(terms), is_ordered, room)


def find_phrase(phrase: Phrase, tokens: Sequence[Token]) -> tuple[int, ...] | None:
    """Return the places of the tokens that make up the phrase, or None.

    The first narrow enough occurrence within one clause is taken.
    """
    return next(find_every(phrase, tokens), None)


def find_every(phrase: Phrase, tokens: Sequence[Token]) -> Iterator[tuple[int, ...]]:
    """Yield the places of each occurrence of a phrase, one for each token it may begin from."""
    room = len(phrase.terms) - 1 + phrase.room
    for start, token in enumerate(tokens):
        if phrase.terms[0].fits(token):
            found = _complete(phrase, tokens, start, room)
            if found is not None:
                yield found


def _complete(
    phrase: Phrase, tokens: Sequence[Token], start: int, room: int
) -> tuple[int, ...] | None:
    """Fill the other places of a phrase as near as possible to its first word."""
    first = tokens[start]
    found = [start]
    for term in phrase.terms[1:]:
        lowest = found[-1] + 1 if phrase.is_ordered else 0
        near = [
            i
            for i in _list_near(tokens, start, room)
            if i >= lowest and i not in found and term.fits(tokens[i])
        ]
        if not near:
            return None
        found.append(near[0] if phrase.is_ordered else min(near, key=lambda i: abs(i - start)))
    positions = [tokens[i].at for i in found]
    if max(positions) - min(positions) > room:
        return None
    return tuple(found) if all(tokens[i].clause == first.clause for i in found) else None


def _list_near(tokens: Sequence[Token], start: int, room: int) -> list[int]:
    """Return the places of one clause within reach of a start, in order."""
    first = tokens[start]

    def is_near(i: int) -> bool:
        return tokens[i].clause == first.clause and abs(tokens[i].at - first.at) <= room

    low = start
    while low > 0 and is_near(low - 1):
        low -= 1
    high = start
    while high + 1 < len(tokens) and is_near(high + 1):
        high += 1
    return list(range(low, high + 1))


def _count_ways(term: Term) -> int:
    """Return how many list entries a place needs; "not" is everywhere and finds nothing."""
    return len(term.stems) + len(term.prefixes) + (100 if "not" in term.stems else 0)


class PhraseIndex:
    """Finds which of many phrases may occur in a sentence, without trying each."""

    def __init__(self, phrases: Iterable[Phrase]) -> None:
        self._by_stem: dict[str, list[Phrase]] = {}
        self._by_prefix: dict[str, list[Phrase]] = {}
        self.prefixes: set[str] = set()
        """Every beginning that some ``word*`` of the phrases asks for."""
        for phrase in phrases:
            self.prefixes.update(prefix for term in phrase.terms for prefix in term.prefixes)
            rarest = min(phrase.terms, key=_count_ways)
            for word in rarest.stems:
                self._by_stem.setdefault(word, []).append(phrase)
            for prefix in rarest.prefixes:
                self._by_prefix.setdefault(prefix, []).append(phrase)

    def find(self, tokens: Sequence[Token]) -> list[tuple[Phrase, tuple[int, ...]]]:
        """Return each phrase that occurs, with the places of its words."""
        candidates: dict[int, Phrase] = {}
        for token in tokens:
            for phrase in self._by_stem.get(token.stem, ()):
                candidates[id(phrase)] = phrase
            for length in range(_SHORTEST_PREFIX, len(token.word) + 1):
                for phrase in self._by_prefix.get(token.word[:length], ()):
                    candidates[id(phrase)] = phrase
        found = []
        for phrase in candidates.values():
            places = find_phrase(phrase, tokens)
            if places is not None:
                found.append((phrase, places))
        return found
