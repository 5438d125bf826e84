"""Which visit and which place in it a row of a table belongs to."""

from __future__ import annotations

import math
from collections import Counter, defaultdict
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date


@dataclass(frozen=True, slots=True)
class RowPlace:
    """What a row says of its place in time."""

    row: int
    learner: str
    session: str
    """Empty: not said."""
    order: str
    """Empty: not said."""


class Visits:
    """Sessions and places in them, from what the table says or from the order of its rows.

    Notes
    -----
    Numbers and ISO dates sort by value where every session of the table is one; any other words
    stand in the order in which a learner's rows first name them.
    """

    def __init__(self, places: Sequence[RowPlace]) -> None:
        self._session: dict[int, str] = {}
        self._visit: dict[int, int] = {}
        self._order: dict[int, int] = {}
        named = [place.session for place in places if place.session]
        self._understood = _understand(named) if named else "rows"
        self._has_order = any(place.order for place in places)
        by_learner: dict[str, list[RowPlace]] = defaultdict(list)
        for place in places:
            by_learner[place.learner].append(place)
        for learner, own in by_learner.items():
            self._read_learner(learner, own)

    def list_notes(self) -> list[str]:
        """Return how sessions and places were understood, in words."""
        notes = [
            {
                "rows": "sessions: one a row, in row order",
                "number": "sessions: ordered by number",
                "date": "sessions: ordered by date",
                "text": "sessions: in order of first appearance of each learner",
            }[self._understood]
        ]
        if not self._has_order:
            notes.append("place in the session: row order")
        return notes

    def _read_learner(self, learner: str, own: Sequence[RowPlace]) -> None:
        names = [
            str(at) if self._understood == "rows" else place.session for at, place in enumerate(own)
        ]
        distinct = list(dict.fromkeys(names))
        if self._understood == "number":
            distinct.sort(key=lambda name: float(name) if name else -math.inf)
        elif self._understood == "date":
            distinct.sort(key=lambda name: name[:10])
        visit_of = {name: at for at, name in enumerate(distinct)}
        count: Counter[str] = Counter()
        for place, name in zip(own, names, strict=True):
            count[name] += 1
            given = read_finite(place.order)
            self._session[place.row] = f"{learner}/{name}"
            self._visit[place.row] = visit_of[name]
            self._order[place.row] = count[name] if given is None else int(given)

    def session_of(self, row: int) -> str:
        """Return the session of a row."""
        return self._session[row]

    def visit_of(self, row: int) -> int:
        """Return which visit of the learner a row belongs to, from 0."""
        return self._visit[row]

    def order_of(self, row: int) -> int:
        """Return the place of a row in its session, from 1."""
        return self._order[row]


def read_finite(text: str) -> float | None:
    """Return a text as a finite number; None if it is none."""
    try:
        value = float(text)
    except ValueError:
        return None
    return value if math.isfinite(value) else None


def _understand(names: Sequence[str]) -> str:
    if all(read_finite(name) is not None for name in names):
        return "number"
    return "date" if all(_is_date(name) for name in names) else "text"


def _is_date(name: str) -> bool:
    try:
        date.fromisoformat(name[:10])
    except ValueError:
        return False
    return True
