"""Harms of each cue over all its uses, measured or not."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator

from cuebook.practice.changes import HarmTally
from cuebook.practice.log import PracticeLog
from cuebook.practice.timeline import Use, has_declined


class HarmCounter:
    """Stops, events and refusals per cue; practice alone is counted the same way."""

    def __init__(self) -> None:
        self._uses: Counter[str | None] = Counter()
        self._said: Counter[str | None] = Counter()
        self._stops: dict[str | None, Counter[str]] = {}
        self._events: dict[str | None, Counter[str]] = {}
        self._declined: Counter[str | None] = Counter()

    def count_use(self, use: Use) -> None:
        """Count one use with its stop and its events."""
        cue = use.record.cue
        self._uses[cue] += 1
        self._said[cue] += use.record.times_said or 0
        if use.record.stop_reason is not None:
            self._stops.setdefault(cue, Counter())[use.record.stop_reason] += 1
        for step in use.steps:
            for event in step.part.events:
                self._events.setdefault(cue, Counter())[event] += 1

    def count_declined(self, log: PracticeLog, learner: str) -> None:
        """Count cues that a learner declined before starting: no uses."""
        for cue in _list_declined(log, learner):
            self._declined[cue] += 1

    def tally(self) -> dict[str | None, HarmTally]:
        """Return the counts per cue; None is practice alone."""
        cues = {*self._uses, *self._declined}
        return {
            cue: HarmTally(
                self._uses[cue],
                self._said[cue],
                dict(self._stops.get(cue, {})),
                dict(self._events.get(cue, {})),
                self._declined[cue],
            )
            for cue in sorted(cues, key=lambda cue: cue or "")
        }


def _list_declined(log: PracticeLog, learner: str) -> Iterator[str]:
    for session in log.sessions:
        for block in session.blocks:
            for part in block.participations:
                if part.learner == learner and block.cue is not None and has_declined(part):
                    yield block.cue
