"""How the therapists of the reach clinic choose: a drawn order, habits, and bad days."""

from __future__ import annotations

from collections import deque
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from datetime import datetime

import numpy as np

from cuebook.jobs.demo.plan import DemoSchedule

SLOTS_PER_ROUND = 6
FEWEST_SEEN = 3
"""So many sets a therapist has seen before calling one a bad day."""
SETS_IN_MIND = 6
"""The learner's usual is what these last sets were like."""


@dataclass(frozen=True, slots=True)
class Choice:
    """What the next block of practice will be, and why."""

    cue: str | None
    chosen: str
    slot: int | None = None
    """Index into the learner's schedule; None: the therapist chose."""


def draw_schedule(
    learner: str, one_round: Sequence[str], slots: int, seed: int, drawn_at: datetime
) -> DemoSchedule:
    """Return a random order in permuted rounds, drawn before anything is measured."""
    stream = np.random.default_rng(seed)
    order: list[str | None] = []
    for _ in range(slots // SLOTS_PER_ROUND):
        order += [one_round[int(i)] or None for i in stream.permutation(SLOTS_PER_ROUND)]
    return DemoSchedule(
        code=f"order-{learner}",
        learner=learner,
        task="reaching",
        arms=tuple(dict.fromkeys(cue or None for cue in one_round)),
        slots=tuple(order),
        rule=f"each {SLOTS_PER_ROUND} slots are a shuffle of the same {SLOTS_PER_ROUND}",
        seed=seed,
        drawn_at=drawn_at,
    )


def make_agenda(
    schedule: DemoSchedule,
    own_choices: Mapping[str, Mapping[str, int]],
    asked: Mapping[str, Sequence[str]],
    stream: np.random.Generator,
) -> deque[Choice]:
    """Return the drawn order with the therapist's own choices strewn in between."""
    learner = schedule.learner
    own = [
        Choice(cue or None, "learner_asked" if learner in asked.get(cue, ()) else "planned")
        for cue, counts in own_choices.items()
        for _ in range(counts.get(learner, 0))
    ]
    own = [own[int(i)] for i in stream.permutation(len(own))]
    drawn = [Choice(cue, "random", slot) for slot, cue in enumerate(schedule.slots)]
    is_own = stream.permutation([True] * len(own) + [False] * len(drawn))
    left, right = iter(own), iter(drawn)
    return deque(next(left) if mine else next(right) for mine in is_own.tolist())


@dataclass(slots=True)
class Therapist:
    """Decides one learner's next block from the attempts just seen."""

    agenda: deque[Choice]
    trap_cue: str | None
    """What is reached for when it goes badly; None: this learner does not get it."""
    badly_below: float
    badly_share: float
    stream: np.random.Generator
    seen: list[float] = field(default_factory=list)

    def choose(self, smoothness: Sequence[float]) -> Choice:
        """Return the next block; a slot of the drawn order that is put off stays next in line."""
        now = float(np.mean(smoothness))
        usual = self.seen[-SETS_IN_MIND:]
        is_bad = len(usual) >= FEWEST_SEEN and now - np.mean(usual) < self.badly_below
        self.seen.append(now)
        if is_bad and self.trap_cue and self.stream.random() < self.badly_share:
            return Choice(self.trap_cue, "going_badly")
        return self.agenda.popleft() if self.agenda else Choice(None, "planned")
