"""Find a cue with the people and cues of a library; reading path only."""

from __future__ import annotations

from pathlib import Path

from cuebook.jobs.find_cue import FoundCues, find_cue
from cuebook.library.lookup import ObservedEffect, Request
from cuebook.library.person import Group, Person
from cuebook.store.places import has_library
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.cues import read_cues
from cuebook.store.reading.people import read_group, read_person

Location = str | Path | None


def find_in_library(
    location: Location,
    text: str,
    *,
    learner: str | None = None,
    group: str | None = None,
    who: Person | None = None,
    request: Request | None = None,
) -> FoundCues:
    """Return cues for a problem: the library's own, or the seed sets where there is none.

    Raises
    ------
    UnknownCodeError : unknown learner or group.
    StoreUnavailableError : a learner or group was named, and there is no library.
    """
    asked = request or Request()
    if learner is None and group is None and not has_library(location):
        return find_cue(text, who=who, request=asked)
    with open_for_reading(location) as connection:
        cues = read_cues(connection) or None
        person: Person | Group | None = who
        if learner is not None:
            person = read_person(connection, learner)
        elif group is not None:
            person = read_group(connection, group)
    effects: dict[str, ObservedEffect] = {}
    return find_cue(text, cues, who=person, request=asked, effects=effects)
