"""Mends typing slips, looking only at the words of a word list, never at cue texts."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from dataclasses import replace
from functools import cache
from importlib import resources

from cuebook.vocabulary.text import LanguageRules, Token, stem

_SHORTEST = 4
"""Shorter words have too many neighbours to guess at; of four letters, two may be swapped."""
_LONG = 9
"""From this length on, two slips may be mended."""
_ENDINGS = ("", "e", "es", "ed", "ing", "y")
"""What may follow where a list has only the beginning of a word ("stumbl*")."""
_COMMON_ENDING = re.compile(r"(s|ed|ing|ly|er|est)$")


@cache
def load_plain_words(language: str = "en") -> frozenset[str]:
    """Return common words that look like ours but are not meant as them ("choir", "chair")."""
    folder = resources.files("cuebook.vocabulary").joinpath("data")
    file = folder.joinpath(f"plain_words.{language}.txt")
    if not file.is_file():
        return frozenset()
    lines = file.read_text(encoding="utf-8").splitlines()
    return frozenset(word for line in lines if not line.startswith("#") for word in line.split())


class Speller:
    """Knows the words of a list, and which of them a mistyped word was meant to be."""

    def __init__(
        self,
        known: Iterable[str],
        prefixes: Iterable[str],
        rules: LanguageRules,
        plain: frozenset[str],
    ) -> None:
        self._known = frozenset(known) | rules.light_words
        self._prefixes = frozenset(prefixes)
        self._rules = rules
        self._plain = plain
        self._stems = frozenset(stem(word, rules) for word in self._known)
        self._candidates = sorted(
            word
            for word in self._known | {p + e for p in self._prefixes for e in _ENDINGS}
            if len(word) >= _SHORTEST and word.isalpha()
        )

    def mend(self, tokens: Sequence[Token]) -> tuple[Token, ...]:
        """Return the tokens with mistyped words put right."""
        mended = []
        for token in tokens:
            word = self.mend_word(token.word)
            is_same = word == token.word
            mended.append(
                token if is_same else replace(token, word=word, stem=stem(word, self._rules))
            )
        return tuple(mended)

    def mend_word(self, word: str) -> str:
        """Return the word a mistyped word was meant to be, or the word itself."""
        if len(word) < _SHORTEST or not word.isalpha() or self._is_right(word):
            return word
        return self._find_meant(word)

    def _is_right(self, word: str) -> bool:
        return (
            word in self._known
            or word in self._plain
            or stem(word, self._rules) in self._stems
            or any(word[:length] in self._prefixes for length in range(2, len(word) + 1))
            or _COMMON_ENDING.sub("", word) in self._plain
        )

    def _find_meant(self, word: str) -> str:
        from rapidfuzz.distance import OSA  # noqa: PLC0415 - only when a word is not known

        limit = 2 if len(word) >= _LONG else 1
        room = 0 if len(word) == _SHORTEST else limit
        best, best_cost = word, limit + 1.0
        for candidate in self._candidates:
            if abs(len(candidate) - len(word)) > room or not _begins_alike(word, candidate):
                continue
            slips = OSA.distance(word, candidate, score_cutoff=limit)
            # Of equally near words the one of the same length: letters are swapped oftener
            # than lost.
            cost = slips + 0.01 * abs(len(candidate) - len(word))
            is_swap = sorted(word) == sorted(candidate)
            if slips <= limit and cost < best_cost and (is_swap or len(word) > _SHORTEST):
                best, best_cost = candidate, cost
        return best


def _begins_alike(word: str, candidate: str) -> bool:
    """Return whether the first letters agree or are swapped: they are seldom mistyped."""
    return word[0] == candidate[0] or word[:2] == candidate[1::-1]
