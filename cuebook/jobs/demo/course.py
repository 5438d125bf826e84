"""How one learner's latents run over the weeks: day, practice, cue, rest, and what is kept."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from cuebook.jobs.demo.streams import open_stream
from cuebook.jobs.demo.truth import CueTruth, LatentTruth, Truth

if TYPE_CHECKING:
    import numpy as np

State = dict[str, float]
"""Latent to value, for one attempt."""


@dataclass(slots=True)
class _Latent:
    truth: LatentTruth
    base: float
    gain: float
    """What one block of practice alone gives this learner."""
    day: float = 0.0
    kept: float = 0.0
    """What earlier visits left behind, beside learning."""
    newly_kept: float = 0.0
    carry: float = 0.0
    """Shift within the visit, by practice and cues."""

    def level(self, visits: int) -> float:
        learned = self.truth.learning * math.log1p(visits)
        return self.base + learned + self.kept + self.day + self.carry


@dataclass(slots=True)
class Course:
    """One learner on one task.

    The order of calls is the order of practice: ``open_visit``, then ``measure``,
    ``practise``, ``measure``, ``rest`` as they happen.
    """

    truth: Truth
    task: str
    learner: str
    seed: int
    visits: int = -1
    """Visits before the running one; -1: none has begun."""
    blocks: int = 0
    """Acquisition blocks of the running visit."""
    _latents: dict[str, _Latent] = field(default_factory=dict)
    _stream: np.random.Generator = field(init=False)

    def __post_init__(self) -> None:
        self._stream = open_stream(self.seed, "course", self.task, self.learner)
        for truth in self.truth.list_latents(self.task):
            own = open_stream(self.seed, "practice", truth.name, self.learner)
            gain = truth.practice_gain + truth.practice_sd * own.standard_normal()
            self._latents[truth.name] = _Latent(truth, truth.base[self.learner], gain)

    def open_visit(self) -> None:
        """Begin a visit: a new day, the carry of the last one gone but for what was kept."""
        self.visits += 1
        self.blocks = 0
        for latent in self._latents.values():
            latent.kept = latent.kept * self.truth.kept_decay + latent.newly_kept
            latent.newly_kept = latent.carry = 0.0
            latent.day = latent.truth.day_sd * self._stream.standard_normal()

    def measure(self, attempts: int) -> tuple[State, ...]:
        """Return the latents of each attempt of one set."""
        columns = {}
        for name, latent in self._latents.items():
            centre = (
                latent.level(self.visits) + latent.truth.set_sd * self._stream.standard_normal()
            )
            spread = latent.truth.attempt_sd * self._stream.standard_normal(attempts)
            columns[name] = (centre + spread).tolist()
        return tuple({name: values[i] for name, values in columns.items()} for i in range(attempts))

    def practise(self, cue: CueTruth | None, shared: float = 0.0) -> None:
        """Practise one block, with a cue or without.

        ``shared`` is what everybody in the room gets alike, in attempt SDs of the latent.
        """
        for latent in self._latents.values():
            truth = latent.truth
            shift = latent.gain + truth.fatigue * self.blocks + shared * truth.attempt_sd
            shift += truth.response_sd * self._stream.standard_normal()
            effect = self._answer_to(cue, truth)
            latent.carry += shift + effect
            latent.newly_kept += effect * cue.kept_share if cue else 0.0
        self.blocks += 1

    def rest(self) -> None:
        """Sit down for a moment: part of the shift goes."""
        for latent in self._latents.values():
            latent.carry *= latent.truth.kept_after_rest

    def _answer_to(self, cue: CueTruth | None, truth: LatentTruth) -> float:
        """Return what the cue does to this learner, always the same for the pair."""
        if cue is None:
            return 0.0
        own = open_stream(self.seed, "answer", truth.name, cue.code, self.learner)
        spread = self.truth.cue_learner_share * truth.attempt_sd
        return cue.get_effect(self.learner, truth.name) + spread * own.standard_normal()
