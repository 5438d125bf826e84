"""Seeded libraries of other occasions: classes that share a cue, and changes kept to next time."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from support.simulated_libraries import KEY, Library, draw_set, name_cue

from cuebook.practice.changes import Change, UseRecord


@dataclass(frozen=True, slots=True, kw_only=True)
class ClassScenario:
    """A cue is said to a whole class, whose members then share more than the cue."""

    n_classes: int = 3
    n_members: int = 12
    n_cues: int = 8
    n_sessions: int = 8
    uses_a_session: int = 3
    share_practice: float = 0.25
    cue_sd: float = 0.3
    event_sd: float = 0.4
    """What the members of a class share in one block beside the cue."""
    learner_sd: float = 0.2
    use_sd: float = 0.5
    session_sd: float = 0.7
    practice: float = 0.3


@dataclass(frozen=True, slots=True, kw_only=True)
class RetentionScenario:
    """One cue a session; its change is the next opening measure minus this one."""

    n_learners: int = 30
    n_cues: int = 15
    n_sessions: int = 12
    share_practice: float = 0.25
    cue_sd: float = 0.3
    learner_sd: float = 0.1
    use_sd: float = 0.3
    session_sd: float = 0.7
    """Of the day's state, which is gone by the next session."""
    practice: float = 0.1


def simulate_classes(seed: int, scenario: ClassScenario) -> Library:
    """Draw a library of group sessions; cues are chosen evenly."""
    rng, s = np.random.default_rng(seed), scenario
    effect = rng.normal(0.1, s.cue_sd, s.n_cues)
    n_learners = s.n_classes * s.n_members
    level = rng.normal(0, 1, n_learners)
    gain = rng.normal(0, s.learner_sd, n_learners)
    changes = []
    for group in range(s.n_classes):
        members = range(group * s.n_members, (group + 1) * s.n_members)
        for t in range(s.n_sessions):
            state = {m: level[m] + rng.normal(0, s.session_sd) for m in members}
            for k in range(s.uses_a_session):
                practises = rng.random() < s.share_practice
                cue = None if practises else int(rng.integers(s.n_cues))
                shared = s.practice + rng.normal(0, s.event_sd)
                shared += 0.0 if cue is None else effect[cue]
                event = f"class{group}:s{t:02d}-k{k}"
                for m in members:
                    change = shared + gain[m] + rng.normal(0, s.use_sd)
                    record = _record(m, event, t, k, cue)
                    before = draw_set(rng, state[m], 1.0, 3)
                    after = draw_set(rng, state[m] + change, 1.0, 3)
                    changes.append(
                        Change(replace(record, event=event), "immediate", KEY, before, after)
                    )
    return _bind(changes, effect)


def simulate_retention(seed: int, scenario: RetentionScenario) -> Library:
    """Draw a library in which each opening measure ends one change and begins the next."""
    rng, s = np.random.default_rng(seed), scenario
    effect = rng.normal(0.05, s.cue_sd, s.n_cues)
    changes = []
    for learner in range(s.n_learners):
        learned = rng.normal(0, 1)
        gain = rng.normal(0, s.learner_sd)
        opening = draw_set(rng, learned + rng.normal(0, s.session_sd), 1.0, 3)
        for t in range(s.n_sessions):
            practises = rng.random() < s.share_practice
            cue = None if practises else int(rng.integers(s.n_cues))
            learned += s.practice + gain + rng.normal(0, s.use_sd)
            learned += 0.0 if cue is None else effect[cue]
            after = draw_set(rng, learned + rng.normal(0, s.session_sd), 1.0, 3)
            record = _record(learner, f"l{learner:03d}-s{t:02d}", t, 0, cue)
            days = float(rng.integers(2, 15))
            changes.append(Change(record, "retention", KEY, opening, after, days=days))
            opening = after
    return _bind(changes, effect)


def _record(learner: int, use: str, t: int, k: int, cue: int | None) -> UseRecord:
    return UseRecord(
        use=f"{use}-l{learner:03d}",
        learner=f"l{learner:03d}",
        cue=None if cue is None else name_cue(cue),
        task=KEY.task,
        session=f"l{learner:03d}-s{t:03d}",
        k=k + 1,
        t=t,
        attempts=10,
        chosen="planned",
    )


def _bind(changes: list[Change], effect: np.ndarray[tuple[int], np.dtype[np.float64]]) -> Library:
    return Library(
        changes=tuple(changes),
        truth={name_cue(cue): float(value) for cue, value in enumerate(effect)},
        kinds={},
    )
