"""Seeded libraries of uses with known effects: hard on purpose, in the ways that mislead.

Teachers here give some cues on bad days and some to weak pupils, pupils who are weak gain more, and
everybody changes with practice and tires. Everything is in units of one attempt's typical SD.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from cuebook.evidence.arrays import FloatArray
from cuebook.practice.changes import AttemptSet, Change, ChangeKey, UseRecord

KEY = ChangeKey(metric="simulated", recipe="simulated", task="simulated")


@dataclass(frozen=True, slots=True, kw_only=True)
class Scenario:
    """Every parameter of a library."""

    n_learners: int = 30
    n_cues: int = 40
    n_uses: int = 600
    uses_a_session: int = 4
    share_practice: float = 0.25
    most_attempts: int = 3
    """Attempts of a set are drawn evenly from 1 to this."""
    kind_means: tuple[float, ...] = (0.05, 0.15)
    cue_sd: float = 0.3
    share_null: float = 0.0
    """Share of cues whose effect is ``null_effect`` instead."""
    null_effect: float = 0.0
    cue_by_learner_sd: float = 0.2
    learner_sd: float = 0.2
    use_sd: float = 0.5
    session_sd: float = 0.7
    level_sd: float = 1.0
    attempt_sd_spread: float = 0.25
    """SD of the log of each learner's attempt SD."""
    practice: float = 0.3
    fatigue: float = 0.05
    """Lost in each further use of a session."""
    weak_gain: float = 0.15
    """Extra gain of a pupil whose level is one below the mean."""
    popularity: float = 0.8
    """SD of the log popularity of cues."""
    by_bad_day: float = 0.8
    """How strongly a low before-score steers the choice of cue; 0: random order."""
    by_level: float = 0.5
    """How strongly the pupil's level steers it."""
    hidden: float = 0.0
    """Correlation of an unrecorded reason for the choice with the use's own gain."""
    is_random: bool = False
    """True: uses are marked as drawn from a schedule, and nothing steers the choice."""


@dataclass(frozen=True, slots=True, eq=False)
class Library:
    """Changes as the log would give them, with the truth behind them."""

    changes: tuple[Change, ...]
    truth: Mapping[str, float]
    """Effect of each cue over practice alone."""
    kinds: Mapping[str, str]


CONFOUNDED = Scenario()
RANDOM_ORDER = Scenario(by_bad_day=0.0, by_level=0.0, popularity=0.8, is_random=True)
NULL = Scenario(kind_means=(0.0, 0.0), cue_sd=0.0)
MOSTLY_NULL = Scenario(share_null=0.75, null_effect=-0.02, kind_means=(0.3,), cue_sd=0.2)
HIDDEN_CHOICE = Scenario(hidden=0.6, n_uses=3000, n_learners=60)
SCENARIOS = {
    "confounded": CONFOUNDED,
    "random order": RANDOM_ORDER,
    "null": NULL,
    "mostly null": MOSTLY_NULL,
    "hidden choice": HIDDEN_CHOICE,
}


def simulate_library(seed: int, scenario: Scenario = CONFOUNDED) -> Library:
    """Draw one library; the same seed gives the same library."""
    rng = np.random.default_rng(seed)
    s = scenario
    kind = np.arange(s.n_cues) % len(s.kind_means)
    effect = rng.normal(np.array(s.kind_means)[kind], s.cue_sd)
    effect[rng.permutation(s.n_cues)[: round(s.share_null * s.n_cues)]] = s.null_effect
    pair = rng.normal(0, s.cue_by_learner_sd, (s.n_cues, s.n_learners))
    pair *= s.cue_sd > 0
    level = rng.normal(0, s.level_sd, s.n_learners)
    gain = rng.normal(0, s.learner_sd, s.n_learners) - s.weak_gain * level
    attempt_sd = np.exp(rng.normal(0, s.attempt_sd_spread, s.n_learners))
    teacher = _Teacher(rng, s)
    changes = []
    activity = rng.lognormal(0, 0.5, s.n_learners)
    n_of = np.maximum(2, np.rint(s.n_uses * activity / activity.sum())).astype(int)
    for learner in range(s.n_learners):
        for use in range(n_of[learner]):
            t, k = divmod(use, s.uses_a_session)
            if k == 0:
                state = level[learner] + rng.normal(0, s.session_sd)
            before = draw_set(rng, state, attempt_sd[learner], s.most_attempts)
            hidden = rng.normal()
            cue = teacher.choose(before.mean - level[learner], level[learner], hidden)
            own = s.hidden * hidden + np.sqrt(1 - s.hidden**2) * rng.normal()
            change = s.practice - s.fatigue * k + gain[learner] + s.use_sd * own
            if cue is not None:
                change += effect[cue] + pair[cue, learner]
            after = draw_set(rng, state + change, attempt_sd[learner], s.most_attempts)
            record = UseRecord(
                use=f"l{learner:03d}-u{use:04d}",
                learner=f"l{learner:03d}",
                cue=None if cue is None else name_cue(cue),
                task=KEY.task,
                session=f"l{learner:03d}-s{t:03d}",
                k=k + 1,
                t=t,
                kind=None if cue is None else f"kind{kind[cue]}",
                attempts=10,
                randomised=s.is_random,
                assigned=None if cue is None or not s.is_random else name_cue(cue),
                chosen="random" if s.is_random else "planned",
            )
            changes.append(Change(record, "immediate", KEY, before, after))
    return Library(
        changes=tuple(changes),
        truth={name_cue(cue): float(effect[cue]) for cue in range(s.n_cues)},
        kinds={name_cue(cue): f"kind{kind[cue]}" for cue in range(s.n_cues)},
    )


class _Teacher:
    """Chooses cues by habit, by how the day goes and by whom they teach."""

    def __init__(self, rng: np.random.Generator, scenario: Scenario) -> None:
        self.rng, self.scenario = rng, scenario
        n = scenario.n_cues
        self.habit = rng.normal(0, scenario.popularity, n)
        self.for_bad_days = rng.normal(0, scenario.by_bad_day, n)
        self.for_the_weak = rng.normal(0, scenario.by_level, n)
        self.for_hidden = rng.normal(0, 1.0 if scenario.hidden else 0.0, n)

    def choose(self, above_own_mean: float, level: float, hidden: float) -> int | None:
        """Return a cue, or None for practice alone."""
        if self.rng.random() < self.scenario.share_practice:
            return None
        liking = (
            self.habit
            - self.for_bad_days * above_own_mean
            - self.for_the_weak * level
            + self.for_hidden * hidden
        )
        weight = np.exp(liking - liking.max())
        return int(self.rng.choice(len(weight), p=weight / weight.sum()))


def draw_set(rng: np.random.Generator, state: float, sd: float, most: int) -> AttemptSet:
    """Draw a set of 1 to ``most`` attempts."""
    values: FloatArray = rng.normal(state, sd, int(rng.integers(1, most + 1)))
    mean = float(values.mean())
    return AttemptSet(mean=mean, n=len(values), sum_of_squares=float(((values - mean) ** 2).sum()))


def name_cue(cue: int) -> str:
    """Return the code of a cue."""
    return f"cue-{cue:03d}"
