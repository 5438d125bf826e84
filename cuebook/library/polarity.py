"""What a sentence says about a thing it names: that it is so, that it is not, or that it is well.

"Wobbles" is a fault; "doesn't wobble any more" is none. "Smooth" is a wish; "not smooth" a fault;
"balance is fine" leaves nothing to work on.
"""

from __future__ import annotations

from collections.abc import Sequence

from cuebook.vocabulary.lay_words import LayWords
from cuebook.vocabulary.phrases import Phrase
from cuebook.vocabulary.text import Token

_REACH = 4
"""Words over which a "not" reaches forward, light words not counted."""


class Polarity:
    """Answers, for one sentence, whether the words at given places are denied or praised."""

    def __init__(self, tokens: Sequence[Token], words: LayWords) -> None:
        self._tokens = tokens
        self._words = words
        self._past = _list_ends(words.past, tokens)
        self._gone = _list_starts(words.gone, tokens)
        self._praised = {tokens[i].part for i in _list_starts(words.praise, tokens)}
        self._needed = _list_starts(words.need, tokens)

    def is_denied(self, places: Sequence[int]) -> bool:
        """Return whether the words there are said not to be so, or no longer so."""
        first, last = min(places), max(places)
        # "Does not swing any more": the "any more" belongs to the trouble's own "not".
        holds_not = any(self._tokens[i].stem in self._words.negators for i in places)
        is_over = not holds_not and self._is_over(first, last)
        return is_over or self._is_negated(first, places) or self._is_stopped(first)

    def is_wanting(self, places: Sequence[int]) -> bool:
        """Return whether a wanted quality there is said to be missing or asked for."""
        first = min(places)
        return self._count_negators(first, places, with_unable=True) > 0 or any(
            self._reaches(i, first) for i in self._needed if i not in places
        )

    def is_praised(self, places: Sequence[int]) -> bool:
        """Return whether the part of the sentence says that all is well there."""
        part = self._tokens[places[0]].part
        if part not in self._praised:
            return False
        return not any(t.part == part and t.stem in self._words.negators for t in self._tokens)

    def _reaches(self, i: int, first: int) -> bool:
        """Return whether the word at i stands before a place, near it, in the same part."""
        near = 0 < self._tokens[first].at - self._tokens[i].at <= _REACH
        return (i < first and near) and self._tokens[i].part == self._tokens[first].part

    def _is_over(self, first: int, last: int) -> bool:
        part = self._tokens[first].part
        if any(i < first and self._tokens[i].part == part for i in self._past):
            return True
        follows = [i for i in self._gone if i > last and self._tokens[i].part == part]
        return any(self._tokens[i].at - self._tokens[last].at <= _REACH for i in follows)

    def _is_stopped(self, first: int) -> bool:
        """Return whether it says "stopped dragging"."""
        before = self._tokens[first - 1].word if first > 0 else ""
        return before == "stopped" and self._tokens[first].word.endswith("ing")

    def _is_negated(self, first: int, places: Sequence[int]) -> bool:
        return self._count_negators(first, places, with_unable=False) % 2 == 1

    def _count_negators(self, first: int, places: Sequence[int], *, with_unable: bool) -> int:
        """Count the negators that reach a place; "cannot ... without" and "not stop" undo it."""
        words, tokens = self._words, self._tokens
        count = 0
        for i, token in enumerate(tokens[:first]):
            if token.stem not in words.negators or i in places or not self._reaches(i, first):
                continue
            follower = tokens[i + 1].word if i + 1 < len(tokens) else ""
            leader = tokens[i - 1].word if i > 0 else ""
            if token.stem == "not" and follower in words.undone:
                continue
            if token.stem == "not" and leader in words.unable and not with_unable:
                # "Cannot wobble less" is no cure; but "cannot stand without wobbling" needs it
                # to turn the "without" round.
                count += any(t.stem == "without" for t in tokens[i:first])
                continue
            count += 1
        return count


def _list_starts(phrases: Sequence[Phrase], tokens: Sequence[Token]) -> list[int]:
    """Return every place at which the first word of one of the phrases stands."""
    return [min(run) for run in _list_runs(phrases, tokens)]


def _list_ends(phrases: Sequence[Phrase], tokens: Sequence[Token]) -> list[int]:
    return [max(run) for run in _list_runs(phrases, tokens)]


def _list_runs(phrases: Sequence[Phrase], tokens: Sequence[Token]) -> list[range]:
    """Return the places where the words of a phrase follow one another directly."""
    runs: list[range] = []
    for phrase in phrases:
        length = len(phrase.terms)
        runs += [
            range(start, start + length)
            for start in range(len(tokens) - length + 1)
            if all(term.fits(tokens[start + k]) for k, term in enumerate(phrase.terms))
        ]
    return runs
