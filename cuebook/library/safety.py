"""Sentences that describe a danger get an action, never a cue.

What is typed is only looked at: no answer, message or error of this module holds a word of it.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from importlib import resources
from typing import Any

from cuebook.library.spelling import Speller, load_plain_words
from cuebook.vocabulary import load_vocabulary
from cuebook.vocabulary.lay_words import load_lay_words
from cuebook.vocabulary.phrases import Phrase, find_every, find_phrase, parse_phrase
from cuebook.vocabulary.text import LanguageRules, Token, tokenise

CAUTION_FIRST = "caution_first"
_WORD = re.compile(r"[^\W_]+\*?")
_DENIAL_REACH = 2
"""Words over which a "no" takes a sign back: short, for a missed danger is worse than a stop."""
_UNABLE = frozenset({"can", "could"})


@dataclass(frozen=True, slots=True)
class SafetyAnswer:
    """What to do about a sentence; holds no word of it."""

    action: str
    """Slug of the vocabulary list safety_action."""
    cautions: tuple[str, ...] = ()
    """Lines to show before any cue; only with caution_first."""

    @property
    def stops(self) -> bool:
        """Return whether no cue may be shown for the sentence."""
        return self.action != CAUTION_FIRST


@dataclass(frozen=True)
class _Danger:
    """One kind of danger and how people put it."""

    name: str
    action: str
    past_action: str
    caution: str
    signs: tuple[tuple[Phrase, ...], ...]
    unless: tuple[Phrase, ...]


@dataclass(frozen=True)
class _Guard:
    """All dangers of one language, ready to be looked for."""

    rules: LanguageRules
    speller: Speller
    dangers: tuple[_Danger, ...]
    deniers: frozenset[str]
    history: tuple[Phrase, ...]


def check_safety(text: str, language: str = "en") -> SafetyAnswer | None:
    """Return what to do about a sentence, or None if nothing in it calls for an action.

    Of several signs the most severe decides, in whichever clause it stands: "no chest pain today
    but he fainted" stops.
    """
    guard = _load_guard(language)
    tokens = guard.speller.mend(tokenise(text, guard.rules))
    found: list[tuple[str, str]] = []
    for danger in guard.dangers:
        action = _find_action(danger, tokens, guard)
        if action is not None:
            found.append((action, danger.caution if action == CAUTION_FIRST else ""))
    if not found:
        return None
    order = load_vocabulary().slugs("safety_action")
    worst = min((action for action, _ in found), key=order.index)
    cautions = tuple(dict.fromkeys(line for action, line in found if line and action == worst))
    return SafetyAnswer(worst, cautions)


def _find_action(danger: _Danger, tokens: Sequence[Token], guard: _Guard) -> str | None:
    """Return the action a danger calls for in a text; None if no sign of it counts."""
    actions = []
    excused: dict[int, bool] = {}
    for sign in danger.signs:
        parts = _find_sign(sign, danger, tokens, guard, excused)
        if parts:
            spoken = [[token for token in tokens if token.part == part] for part in parts]
            is_past = all(_occurs(guard.history, part) for part in spoken)
            actions.append(danger.past_action if is_past else danger.action)
    order = load_vocabulary().slugs("safety_action")
    return min(actions, key=order.index, default=None)


def _find_sign(
    sign: tuple[Phrase, ...],
    danger: _Danger,
    tokens: Sequence[Token],
    guard: _Guard,
    excused: dict[int, bool],
) -> set[int]:
    """Return the parts in which the phrases of a sign count; none unless all of them do.

    A phrase counts where it is neither denied nor said in a part that takes the danger back; a
    later part may say it after all.
    """
    parts: set[int] = set()
    for phrase in sign:
        for places in find_every(phrase, tokens):
            first = tokens[places[0]]
            if _is_denied(places, tokens, guard):
                continue
            if first.part not in excused:
                excused[first.part] = _is_excused(danger, first, tokens)
            if not excused[first.part]:
                parts.add(first.part)
                break
        else:
            return set()
    return parts


def _is_excused(danger: _Danger, first: Token, tokens: Sequence[Token]) -> bool:
    """Return whether the words around a sign take the danger back.

    For a caution the whole clause is read; a stop must not be lost to words further off, so there
    only the part with the sign is.
    """
    if danger.action == CAUTION_FIRST:
        return _occurs(danger.unless, [t for t in tokens if t.clause == first.clause])
    return _occurs(danger.unless, [t for t in tokens if t.part == first.part])


def _is_denied(places: Sequence[int], tokens: Sequence[Token], guard: _Guard) -> bool:
    """Return whether a "no" stands shortly before, in the same part and outside the phrase."""
    first = min(places)
    for i in range(first - 1, -1, -1):
        token = tokens[i]
        if token.part != tokens[first].part or tokens[first].at - token.at > _DENIAL_REACH:
            return False
        is_unable = i > 0 and tokens[i - 1].word in _UNABLE
        if token.word in guard.deniers and i not in places and not is_unable:
            return True
    return False


def _occurs(phrases: Sequence[Phrase], tokens: Sequence[Token]) -> bool:
    return any(find_phrase(phrase, tokens) is not None for phrase in phrases)


@cache
def read_dangers(language: str = "en") -> dict[str, Any]:
    """Return the danger signs of a language as written; falls back to English."""
    folder = resources.files("cuebook.library").joinpath("data")
    file = folder.joinpath(f"safety.{language.split('-', maxsplit=1)[0].lower()}.toml")
    if not file.is_file():
        file = folder.joinpath("safety.en.toml")
    return tomllib.loads(file.read_text(encoding="utf-8"))


@cache
def _load_guard(language: str) -> _Guard:
    document = read_dangers(language)
    words = load_lay_words(document["language"])
    groups: Mapping[str, list[str]] = document["groups"]

    def parse(texts: list[str]) -> tuple[Phrase, ...]:
        return tuple(parse_phrase(text, words.rules, groups) for text in texts)

    dangers = tuple(
        _Danger(
            name=entry["name"],
            action=entry["action"],
            past_action=entry.get("past", entry["action"]),
            caution=entry.get("caution", ""),
            signs=tuple(parse(sign.split(" & ")) for sign in entry["signs"]),
            unless=parse(entry.get("unless", [])),
        )
        for entry in document["danger"]
    )
    return _Guard(
        rules=words.rules,
        speller=_build_speller(document, words.known_words, words.rules),
        dangers=dangers,
        deniers=frozenset(document["negation"]["before"]),
        history=parse(document["history"]["phrases"]),
    )


def _build_speller(
    document: Mapping[str, Any], lay_words: frozenset[str], rules: LanguageRules
) -> Speller:
    """Return a speller that knows the danger words besides the lay words."""
    texts = [
        text for entry in document["danger"] for text in entry["signs"] + entry.get("unless", [])
    ]
    texts += [word for group in document["groups"].values() for word in group]
    written = [word for text in texts for word in _WORD.findall(text)]
    whole = {word for word in written if not word.endswith("*")}
    begun = {word[:-1] for word in written if word.endswith("*")}
    plain = load_plain_words(document["language"]) | lay_words
    return Speller(whole, begun, rules, plain)
