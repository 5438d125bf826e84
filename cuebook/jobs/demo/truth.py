"""The planted truths, read from ``data/truth.toml``; only the simulator and its tests read them."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import date
from functools import cache
from importlib import resources
from typing import Any

Effects = Mapping[str, float]


@dataclass(frozen=True, slots=True)
class LatentTruth:
    """How one latent behaves without any cue; the unit is named in the file."""

    name: str
    task: str
    base: Effects
    """Where each learner starts; who is not here does not do the task."""
    attempt_sd: float
    set_sd: float
    """Shared by the attempts of one set."""
    response_sd: float
    """Each use's own answer to practice, in its after-set only."""
    day_sd: float
    practice_gain: float
    """Shift by one block of practice, cue or no cue."""
    practice_sd: float
    """Spread of that gain between learners."""
    fatigue: float
    """Added to the gain of the second, twice to that of the third block of a visit."""
    learning: float
    """Times ln(1 + visits so far), added to every visit."""
    kept_after_rest: float
    """Share of a block's shift that is left when the learner has rested in the visit."""


@dataclass(frozen=True, slots=True)
class CueTruth:
    """What one cue does to the latents of one task, over practice alone."""

    code: str
    task: str
    role: str
    """Why it was planted, in one word."""
    effects: Effects
    kept_share: float
    """Share of the effect that is still there at the next visit; 0: gone."""
    learner_effects: Mapping[str, Effects] = field(default_factory=dict)
    """Learners for whom the effect is another one."""
    own_words: Mapping[str, str] = field(default_factory=dict)
    pain_stops: tuple[int, ...] = ()
    """Uses of the cue, counted from 1 over the setting, that end with pain."""

    def get_effect(self, learner: str, latent: str) -> float:
        """Return the effect on a learner, before their own answer to the cue is added."""
        effects = self.learner_effects.get(learner, self.effects)
        return float(effects.get(latent, 0.0))


@dataclass(frozen=True, slots=True)
class Truth:
    """All of it."""

    first_day: date
    weeks: int
    zone: str
    cue_learner_share: float
    """SD of a learner's own answer to a cue, as a share of the latent's attempt SD."""
    kept_decay: float
    """Share of what was kept that is left one visit later."""
    latents: Mapping[str, LatentTruth]
    cues: Mapping[str, CueTruth]
    settings: Mapping[str, Mapping[str, Any]]
    """The tables ``quillgate``, ``larkspur`` and ``tern_weir`` as they stand in the file."""

    def list_latents(self, task: str) -> tuple[LatentTruth, ...]:
        """Return what moves in one task, in the order of the file."""
        return tuple(latent for latent in self.latents.values() if latent.task == task)

    def get_cue(self, code: str | None) -> CueTruth | None:
        """Return the truth of a cue; None for practice without one."""
        return self.cues[code] if code else None


def _make_cue(table: Mapping[str, Any]) -> CueTruth:
    return CueTruth(**{**table, "pain_stops": tuple(table.get("pain_stops", ()))})


@cache
def read_truth() -> Truth:
    """Return the planted truths; read once a process."""
    place = resources.files("cuebook.jobs.demo").joinpath("data", "truth.toml")
    tables = tomllib.loads(place.read_text(encoding="utf-8"))
    scenario = tables["scenario"]
    latents = [LatentTruth(**table) for table in tables["latent"]]
    cues = [_make_cue(table) for table in tables["cue"]]
    return Truth(
        first_day=scenario["first_day"],
        weeks=scenario["weeks"],
        zone=scenario["zone"],
        cue_learner_share=scenario["cue_learner_share"],
        kept_decay=scenario["kept_decay"],
        latents={latent.name: latent for latent in latents},
        cues={cue.code: cue for cue in cues},
        settings={name: tables[name] for name in ("quillgate", "larkspur", "tern_weir")},
    )
