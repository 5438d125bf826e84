"""Mends typing slips, looking only at the words of the vocabulary, never at cue texts."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import replace
from functools import cache
from importlib import resources

from cuebook.vocabulary.lay_words import LayWords, load_lay_words
from cuebook.vocabulary.text import Token, stem

_SHORTEST = 4
"""Shorter words have too many neighbours to guess at; of four letters, two may be swapped."""
_ENDINGS = ("", "e", "es", "ed", "ing", "y")
"""What may follow where a list has only the beginning of a word ("stumbl*")."""
_LONG = 9
"""From this length on, two slips may be mended."""


@cache
def load_plain_words(language: str = "en") -> frozenset[str]:
    """Return common words that look like ours but are not meant as them ("stairs", "stars")."""
    folder = resources.files("cuebook.vocabulary").joinpath("data")
    file = folder.joinpath(f"plain_words.{language}.txt")
    if not file.is_file():
        return frozenset()
    lines = file.read_text(encoding="utf-8").splitlines()
    return frozenset(word for line in lines if not line.startswith("#") for word in line.split())


@cache
def _list_candidates(language: str) -> tuple[str, ...]:
    words = load_lay_words(language)
    begun = {begin + ending for begin in words.index.prefixes for ending in _ENDINGS}
    return tuple(
        sorted(w for w in words.known_words | begun if len(w) >= _SHORTEST and w.isalpha())
    )


@cache
def _list_inflected(language: str) -> frozenset[str]:
    rules = load_lay_words(language).rules
    return frozenset(stem(word, rules) for word in load_lay_words(language).known_words)


def mend_word(word: str, words: LayWords) -> str:
    """Return the vocabulary word a mistyped word was meant to be, or the word itself."""
    if len(word) < _SHORTEST or not word.isalpha() or _is_known(word, words):
        return word
    from rapidfuzz.distance import OSA  # noqa: PLC0415 - only when a word is not known

    limit = 2 if len(word) >= _LONG else 1
    room = 0 if len(word) == _SHORTEST else limit
    best, best_cost = word, limit + 1.0
    for candidate in _list_candidates(words.language):
        if abs(len(candidate) - len(word)) > room or not _begins_alike(word, candidate):
            continue
        slips = OSA.distance(word, candidate, score_cutoff=limit)
        # Of equally near words the one of the same length: letters are swapped oftener than lost.
        cost = slips + 0.01 * abs(len(candidate) - len(word))
        is_swap = sorted(word) == sorted(candidate)
        if slips <= limit and cost < best_cost and (is_swap or len(word) > _SHORTEST):
            best, best_cost = candidate, cost
    return best


def _begins_alike(word: str, candidate: str) -> bool:
    """Return whether the first letters agree or are swapped: they are seldom mistyped."""
    return word[0] == candidate[0] or word[:2] == candidate[1::-1]


def _is_known(word: str, words: LayWords) -> bool:
    return (
        word in words.known_words
        or word in words.rules.light_words
        or stem(word, words.rules) in _list_inflected(words.language)
        or word in load_plain_words(words.language)
        or words.index.begins(word)
        or re.sub(r"(s|ed|ing|ly|er|est)$", "", word) in load_plain_words(words.language)
    )


def mend_slips(tokens: Sequence[Token], words: LayWords) -> tuple[Token, ...]:
    """Return the tokens with mistyped vocabulary words put right."""
    mended = []
    for token in tokens:
        word = mend_word(token.word, words)
        if word != token.word:
            token = replace(token, word=word, stem=stem(word, words.rules))  # noqa: PLW2901
        mended.append(token)
    return tuple(mended)
