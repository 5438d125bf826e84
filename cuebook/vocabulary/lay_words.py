"""Lay words: how teachers and therapists say the features, regions and tasks of the vocabulary."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from enum import Enum
from functools import cache
from importlib import resources
from typing import Any

from cuebook.vocabulary.entries import Entry
from cuebook.vocabulary.loading import load_vocabulary
from cuebook.vocabulary.phrases import Phrase, PhraseIndex, parse_phrase
from cuebook.vocabulary.text import LanguageRules

_WORD = re.compile(r"[^\W_]+")
_BRACKETS = re.compile(r"\(([^)]*)\)")


class Sense(Enum):
    """How a phrase speaks of the thing it names."""

    FAULT = "faults"
    """Something is wrong when this is said."""
    GOOD = "goods"
    """A quality that is wanted; wrong when denied."""
    TOPIC = "topics"
    """The plain name."""
    HINT = "hints"
    """Points there, but weakly."""
    WORD = "words"
    """The name of a region or task."""
    TRADE = "trade"
    """A trade term of the vocabulary."""
    IDIOM = "idiom"
    """An everyday turn whose words lead nowhere."""


@dataclass(frozen=True, slots=True)
class Lead:
    """What a phrase leads to: one slug of one list, in one sense."""

    list_name: str
    slug: str
    sense: Sense
    discipline: str = ""
    """Discipline a trade term belongs to ("rowing"); empty if it belongs to all."""


@dataclass(frozen=True)
class LayWords:
    """The lay words of one language, ready to be searched."""

    language: str
    rules: LanguageRules
    index: PhraseIndex
    leads: Mapping[str, tuple[Lead, ...]]
    """Text of a phrase -> what it leads to."""
    sides: Mapping[str, tuple[Phrase, ...]]
    rates: Mapping[str, tuple[Phrase, ...]]
    negators: frozenset[str]
    unable: frozenset[str]
    undone: frozenset[str]
    past: tuple[Phrase, ...]
    gone: tuple[Phrase, ...]
    praise: tuple[Phrase, ...]
    need: tuple[Phrase, ...]
    known_words: frozenset[str]
    """Every whole word of the lists: what a mistyped word may have been meant to be."""


def load_language_rules(document: Mapping[str, Any]) -> LanguageRules:
    """Return the cutting and stemming rules of a word-list document."""
    rules = document["rules"]
    return LanguageRules(
        contractions=rules.get("contractions", {}),
        irregular=rules.get("irregular", {}),
        contrast_words=frozenset(rules.get("contrast_words", ())),
        joining_words=frozenset(rules.get("joining_words", ())),
        light_words=frozenset(rules.get("light_words", ())),
        has_english_endings=rules.get("english_endings", False),
    )


@cache
def read_lay_words(language: str = "en") -> dict[str, Any]:
    """Return the word-list document of a language; falls back to English if there is none."""
    folder = resources.files("cuebook.vocabulary").joinpath("data")
    file = folder.joinpath(f"lay_words.{language.split('-', maxsplit=1)[0].lower()}.toml")
    if not file.is_file():
        file = folder.joinpath("lay_words.en.toml")
    return tomllib.loads(file.read_text(encoding="utf-8"))


def _collect_written(document: Mapping[str, Any]) -> dict[str, list[Lead]]:
    """Return each phrase as written, with all it leads to."""
    written: dict[str, list[Lead]] = {}
    for list_name in ("feature", "region", "task"):
        for slug, by_sense in document[list_name].items():
            for sense, phrases in by_sense.items():
                for text in dict.fromkeys(phrases):
                    written.setdefault(text, []).append(Lead(list_name, slug, Sense(sense)))
    for text in document["idioms"]["words"]:
        written.setdefault(text, []).append(Lead("idiom", text, Sense.IDIOM))
    skipped = document["trade"]["skip"]
    for entry in load_vocabulary().entries("trade_term"):
        if entry.slug in skipped:
            continue
        discipline = next(iter(_BRACKETS.findall(entry.label)), "")
        discipline = discipline if discipline in _DISCIPLINES else ""
        for text in _list_trade_names(entry):
            leads = written.setdefault(text, [])
            leads += [Lead("feature", slug, Sense.TRADE, discipline) for slug in entry.related]
            leads += [Lead("region", slug, Sense.TRADE, discipline) for slug in entry.region]
    return written


_DISCIPLINES: Mapping[str, tuple[str, ...]] = {
    "rowing": ("rowing and swimming",),
    "swimming": ("rowing and swimming",),
    "dance": ("dance",),
    "golf": ("racket, bat and club",),
    "combat": ("martial arts",),
}
"""Word in brackets behind a trade term -> disciplines of tasks it is at home in."""


def get_home_disciplines(word: str) -> tuple[str, ...]:
    """Return the task disciplines in which a trade term of this bracket word is at home."""
    return _DISCIPLINES.get(word, ())


def _list_trade_names(entry: Entry) -> list[str]:
    """Return the ways a trade term is written: its label, cut at a slash, without brackets."""
    plain = _BRACKETS.sub(" ", entry.label)
    names = [" ".join(_WORD.findall(part.lower())) for part in plain.split("/")]
    return [">" + name if " " in name else name for name in names if name]


@cache
def load_lay_words(language: str = "en") -> LayWords:
    """Return the lay words of a language; read and compiled once a process."""
    document = read_lay_words(language)
    rules = load_language_rules(document)
    groups = document["groups"]

    def parse_all(phrases: list[str]) -> tuple[Phrase, ...]:
        return tuple(parse_phrase(text, rules, groups) for text in phrases)

    written = _collect_written(document)
    compiled = parse_all(list(written))
    negation = document["negation"]
    return LayWords(
        language=document["language"],
        rules=rules,
        index=PhraseIndex(compiled),
        leads={text: tuple(leads) for text, leads in written.items()},
        sides={side: parse_all(phrases) for side, phrases in document["side"].items()},
        rates={rate: parse_all(phrases) for rate, phrases in document["rate"].items()},
        negators=frozenset(negation["before"]),
        unable=frozenset(negation["unable"]),
        undone=frozenset(negation["undone"]),
        past=parse_all([">" + text for text in negation["past"]]),
        gone=parse_all([">" + text for text in negation["after"]]),
        praise=parse_all(document["praise"]["words"]),
        need=parse_all(document["need"]["words"]),
        known_words=_list_known_words(written, groups, rules),
    )


def _list_known_words(
    written: Mapping[str, object], groups: Mapping[str, list[str]], rules: LanguageRules
) -> frozenset[str]:
    texts = [*written, *(word for group in groups.values() for word in group)]
    words = {word for text in texts for word in _WORD.findall(text)}
    return frozenset(words | set(rules.irregular) | set(rules.contractions))
