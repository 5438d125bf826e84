"""What must never be shown to somebody, and what must be read first: holds and safety notes."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from importlib import resources
from typing import Any

from cuebook.library.cues import THERAPIST_ONLY, Cue
from cuebook.library.person import Group, Person, SafetyNote, list_people
from cuebook.vocabulary import load_vocabulary

_WORD = re.compile(r"[^\W_]+")


@dataclass(frozen=True, slots=True)
class Scope:
    """Which cues one rule of a safety note is about."""

    tasks: frozenset[str] = frozenset()
    features: frozenset[str] = frozenset()
    kinds: frozenset[str] = frozenset()
    words: tuple[str, ...] = ()
    images_only: bool = False
    together: bool = False

    def holds(self, cue: Cue) -> bool:
        """Return whether a cue lies within the scope."""
        if self.images_only and not cue.is_image:
            return False
        in_tasks = bool(self.tasks & set(cue.tasks))
        in_features = bool(self.features & set(cue.features))
        if self.together:
            return in_tasks and in_features
        return in_tasks or in_features or cue.kind in self.kinds or self._is_said(cue)

    def _is_said(self, cue: Cue) -> bool:
        if not self.words:
            return False
        said = {word for w in cue.wordings for word in _WORD.findall(w.text.lower())}
        exact = {word for word in self.words if not word.endswith("*")}
        begun = tuple(word[:-1] for word in self.words if word.endswith("*"))
        return bool(said & exact) or any(word.startswith(begun) for word in said if begun)


@dataclass(frozen=True, slots=True)
class NoteRule:
    """What one safety note forbids when hard, and what it warns of."""

    blocks: Scope
    warns: Scope


@dataclass(frozen=True, slots=True)
class Verdict:
    """Whether a cue may be shown, and what is read before it."""

    is_allowed: bool
    cautions: tuple[str, ...] = ()
    out: tuple[str, ...] = ()
    """Codes of group members who sit out."""


def judge_cue(cue: Cue, who: Person | Group | None) -> Verdict:
    """Return whether a cue may be shown for somebody, and the lines to read before it.

    For one person a hold, a hard note, a paused cue and a cue declined before forbid it, and so
    does a need the cue does not speak to. In a group a member on hold sits out, and the others go
    on; a cue anybody declined, or that is paused for anybody, is left out; cues for therapists
    only are for no group.
    """
    people = list_people(who)
    is_group = isinstance(who, Group)
    if is_group and cue.status == THERAPIST_ONLY:
        return Verdict(is_allowed=False)
    cautions: list[str] = []
    out: list[str] = []
    for person in people:
        hold = _find_binding_hold(cue, person)
        if hold is not None and is_group:
            out.append(person.code or "one member")
            cautions.append(f"{person.code or 'One member'} sits out: {hold}.")
            continue
        if hold is not None or _is_forbidden(cue, person, in_group=is_group):
            return Verdict(is_allowed=False)
        lines = [note.line for note in person.notes if warns_of(note, cue)]
        cautions += [f"{person.code}: {line}" if is_group else line for line in lines]
    if people and len(out) == len(people):
        return Verdict(is_allowed=False)
    return Verdict(is_allowed=True, cautions=tuple(dict.fromkeys(cautions)), out=tuple(out))


def _find_binding_hold(cue: Cue, person: Person) -> str | None:
    """Return the line of the hold that leaves a cue no task to be said in; None if free."""
    holds = [person.find_hold(task) for task in cue.tasks]
    if not cue.tasks or any(hold is None for hold in holds):
        return None
    return next(hold.line for hold in holds if hold is not None)


def _is_forbidden(cue: Cue, person: Person, *, in_group: bool) -> bool:
    if cue.code in person.declined | person.paused:
        return True
    if any(note.slug in cue.note_avoid for note in person.notes):
        return True
    if any(note.is_hard and blocks_cue(note, cue) for note in person.notes):
        return True
    if in_group:  # one member's needs are weighed, not enforced: the rule stands beside
        return False
    return bool(
        set(cue.access_avoid) & set(person.access_needs)
        or set(cue.background_avoid) & set(person.backgrounds)
    )


def blocks_cue(note: SafetyNote, cue: Cue) -> bool:
    """Return whether a note, being hard, forbids a cue."""
    if note.tasks or note.features:
        return _is_about(note, cue)
    return note.slug is not None and get_note_rule(note.slug).blocks.holds(cue)


def warns_of(note: SafetyNote, cue: Cue) -> bool:
    """Return whether a note is to be read before a cue."""
    if note.tasks or note.features:
        return _is_about(note, cue)
    if note.slug is None:
        return True
    rule = get_note_rule(note.slug)
    return rule.warns.holds(cue) or rule.blocks.holds(cue)


def _is_about(note: SafetyNote, cue: Cue) -> bool:
    return bool(set(note.tasks) & set(cue.tasks) or set(note.features) & set(cue.features))


def get_note_rule(slug: str) -> NoteRule:
    """Return the rule of a safety note; a note without one neither blocks nor warns."""
    return _load_note_rules().get(slug, NoteRule(Scope(), Scope()))


@cache
def _load_note_rules() -> Mapping[str, NoteRule]:
    file = resources.files("cuebook.library").joinpath("data", "note_rules.toml")
    document = tomllib.loads(file.read_text(encoding="utf-8"))
    return {
        slug: NoteRule(_read_scope(rule["blocks"]), _read_scope(rule["warns"]))
        for slug, rule in document.items()
    }


def _read_scope(written: Mapping[str, Any]) -> Scope:
    families: Sequence[str] = written.get("families", ())
    tasks = {task.slug for task in load_vocabulary().tasks if task.family in families}
    return Scope(
        tasks=frozenset(tasks | set(written.get("tasks", ()))),
        features=frozenset(written.get("features", ())),
        kinds=frozenset(written.get("kinds", ())),
        words=tuple(written.get("words", ())),
        images_only=written.get("images_only", False),
        together=written.get("together", False),
    )
