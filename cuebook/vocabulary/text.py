"""Typed sentences as tokens: folded, contractions opened, cut into clauses, stemmed.

Only what the look-up and the safety check both need. Every rule of a language that is a list
(contractions, irregular forms, joining words) lives in that language's data file.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Mapping
from dataclasses import dataclass, field

_WORD_OR_MARK = re.compile(r"[^\W_]+(?:'[^\W_]+)*|[,;:.!?()\n\u2013\u2014]")
_STRONG_MARKS = frozenset(";.!?\n()")
_CVC = re.compile(r"[^aeiou][aeiou][^aeiouwxy]")
_VOWEL = re.compile(r"[aeiouy]")
_LONGEST_LIGHT_RUN = 3
"""After so many light words in a row the next takes room all the same."""
_DECIMAL_POINT = re.compile(r"(?<=\d)[.,](?=\d)")


@dataclass(frozen=True)
class LanguageRules:
    """The word lists by which sentences of one language are cut and stemmed."""

    contractions: Mapping[str, str] = field(default_factory=dict)
    """Whole words to replace by other words: "dont" -> "do not"."""
    irregular: Mapping[str, str] = field(default_factory=dict)
    """Word -> stem, for forms the suffix rules cannot reach: "fell" -> "fall"."""
    contrast_words: frozenset[str] = frozenset()
    """Words that open a new clause: "but"."""
    joining_words: frozenset[str] = frozenset()
    """Words that open a new part of the same clause: "and"."""
    light_words: frozenset[str] = frozenset()
    """Words that take no room in the distance between two others: "the"."""
    has_english_endings: bool = False
    stems: dict[str, str] = field(default_factory=dict, compare=False, repr=False)
    """Stems already worked out; the lists ask for the same few thousand words again and again."""


@dataclass(frozen=True, slots=True)
class Token:
    """One word of a sentence and where it stands."""

    word: str
    stem: str
    clause: int
    """Number of the clause; a "but" or a full stop opens the next."""
    part: int
    """Number of the part; commas and joining words open the next, too."""
    at: int
    """Position counted in words that carry meaning; light words share that of the last one."""


def fold(text: str) -> str:
    """Return text in lower case, without accents, with plain apostrophes and hyphens opened."""
    spread = unicodedata.normalize("NFKD", text).casefold()
    plain = "".join(letter for letter in spread if not unicodedata.combining(letter))
    plain = plain.replace("\u2019", "'").replace("\u2018", "'").replace("`", "'")
    plain = _DECIMAL_POINT.sub(" ", plain)
    return re.sub(r"[-/\u2010\u2011_]", " ", plain)


def stem(word: str, rules: LanguageRules) -> str:
    """Return the stem that stands for a word's forms; only equal stems are compared."""
    if word in rules.irregular:
        return rules.irregular[word]
    if not rules.has_english_endings or len(word) <= 3 or not word.isascii():
        return word
    if word not in rules.stems:
        rules.stems[word] = _stem_english(word)
    return rules.stems[word]


def _stem_english(word: str) -> str:
    base = _strip_plural(word)
    for ending in ("ing", "ed"):
        rest = base[: -len(ending)]
        if base.endswith(ending) and len(rest) >= 3 and _VOWEL.search(rest):
            if ending == "ed" and base.endswith("eed"):
                break
            base = _restore_base(rest)
            break
    for ending in ("ly", "ness"):
        if base.endswith(ending) and len(base) - len(ending) >= 4:
            base = base[: -len(ending)]
    # Four letters keep their e: "note" must not meet "not", nor "hope" meet "hop".
    if len(base) >= 5 and base.endswith("e") and not base.endswith("ee"):
        base = base[:-1]
    if len(base) >= 4 and base.endswith("y") and base[-2] not in "aeiou":
        base = base[:-1] + "i"
    return base


def _restore_base(rest: str) -> str:
    """Return the base form of what is left when -ing or -ed is cut off."""
    if rest[-1] == rest[-2] and rest[-1] not in "lsz":
        return rest[:-1]
    if rest.endswith("i"):
        return rest[:-1] + "y"
    return rest + "e" if _CVC.fullmatch(rest) else rest


def _strip_plural(word: str) -> str:
    if word.endswith("ies") and len(word) > 4:
        return word[:-3] + "y"
    if word.endswith(("sses", "ches", "shes", "xes", "zzes")):
        return word[:-2]
    if word.endswith("s") and not word.endswith(("ss", "us", "is")):
        return word[:-1]
    return word


def _open_word(raw: str, rules: LanguageRules) -> list[str]:
    """Return the words a raw word stands for: "doesn't" is "does not", "she's" is "she"."""
    bare = raw.replace("'", "")
    if raw in rules.contractions or bare in rules.contractions:
        return rules.contractions.get(raw, rules.contractions.get(bare, "")).split()
    if raw.endswith("n't"):
        return [raw[:-3], "not"]
    return [raw.split("'", maxsplit=1)[0]]


def tokenise(text: str, rules: LanguageRules) -> tuple[Token, ...]:
    """Cut a sentence into tokens; never raises, whatever the text holds."""
    tokens: list[Token] = []
    clause = part = at = n_light = 0
    for raw in _WORD_OR_MARK.findall(fold(text)):
        if not raw[0].isalnum():
            part += 1
            at += 1
            clause += raw in _STRONG_MARKS
            continue
        for word in _open_word(raw, rules):
            if word in rules.contrast_words:
                clause += 1
                part += 1
            elif word in rules.joining_words:
                part += 1
            is_light = word in rules.light_words and n_light < _LONGEST_LIGHT_RUN
            n_light = n_light + 1 if is_light else 0
            at += not is_light
            tokens.append(Token(word, stem(word, rules), clause, part, at))
    return tuple(tokens)
