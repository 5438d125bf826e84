"""The controlled lists as values: entries, tasks, and the vocabulary that holds them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from cuebook.errors import Place, UnknownCodeError
from cuebook.vocabulary.nearest import find_nearest

TASK_LIST = "task"
"""The name under which tasks are asked for beside the lists of vocabulary.csv."""


@dataclass(frozen=True, slots=True)
class Entry:
    """One row of a controlled list."""

    list_name: str
    slug: str
    label: str
    definition: str = ""
    related: tuple[str, ...] = ()
    """What it leads to: metrics of a feature, features of a trade term, the metric of an alias."""
    region: tuple[str, ...] = ()
    cycle: str | None = None
    """What one cycle is (tempo bands only)."""
    low: float | None = None
    """Lower limit, included; None if open below or not a band."""
    high: float | None = None
    """Upper limit, excluded for tempo bands, included for age bands; None if open above."""
    unit: str = ""
    notes: str = ""


@dataclass(frozen=True, slots=True)
class Task:
    """A task of practice and what its movement family fixes."""

    slug: str
    label: str
    discipline: str
    family: str
    """One of discrete, still, events, gait, cyclic, jump, rise, any."""
    usual_cycle: str | None
    """What one cycle usually is; None where nothing is counted."""
    icf: str
    caution_first: str
    """The caution that stands before every cue of this task; empty if there is none."""


@dataclass(frozen=True)
class Vocabulary:
    """All controlled lists; asking for what is not there names the nearest known words."""

    by_list: Mapping[str, Mapping[str, Entry]]
    by_task: Mapping[str, Task]

    @property
    def lists(self) -> tuple[str, ...]:
        """Return the names of the lists, in file order."""
        return tuple(self.by_list)

    @property
    def tasks(self) -> tuple[Task, ...]:
        """Return all tasks, in file order."""
        return tuple(self.by_task.values())

    def entries(self, list_name: str) -> tuple[Entry, ...]:
        """Return the entries of a list, in file order."""
        return tuple(self._get_list(list_name).values())

    def slugs(self, list_name: str) -> tuple[str, ...]:
        """Return the slugs of a list (also of the list "task"), in file order."""
        if list_name == TASK_LIST:
            return tuple(self.by_task)
        return tuple(self._get_list(list_name))

    def has(self, list_name: str, slug: str) -> bool:
        """Return whether a list holds a slug."""
        return slug in self.slugs(list_name)

    def entry(self, list_name: str, slug: str) -> Entry:
        """Return one entry; an unknown slug is an error that names the nearest."""
        known = self._get_list(list_name)
        if slug not in known:
            raise describe_unknown(slug, list_name.replace("_", " "), known)
        return known[slug]

    def task(self, slug: str) -> Task:
        """Return one task; an unknown slug is an error that names the nearest."""
        if slug not in self.by_task:
            raise describe_unknown(slug, "task", self.by_task)
        return self.by_task[slug]

    def label(self, list_name: str, slug: str) -> str:
        """Return the words a user reads for a slug."""
        if list_name == TASK_LIST:
            return self.task(slug).label
        return self.entry(list_name, slug).label

    def screen_word(self, slug: str) -> str:
        """Return the screen's words for a domain term; its own words where none are set."""
        screen = self.by_list.get("screen_word", {})
        return screen[slug].label if slug in screen else slug.replace("_", " ")

    def _get_list(self, list_name: str) -> Mapping[str, Entry]:
        if list_name not in self.by_list:
            raise describe_unknown(list_name, "vocabulary list", self.by_list)
        return self.by_list[list_name]


def describe_unknown(
    word: str, what: str, known: Mapping[str, object], place: Place | None = None
) -> UnknownCodeError:
    """Return the error for an unknown slug: it names the nearest known ones."""
    nearest = find_nearest(word, known)
    hint = f"Nearest known: {', '.join(nearest)}." if nearest else "See the list of known ones."
    return UnknownCodeError(f"Unknown {what} {word!r}.", hint, place)
