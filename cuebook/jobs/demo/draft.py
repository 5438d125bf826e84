"""What the three settings share while a plan is written: the clock, the blocks, the files."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from datetime import datetime, time, timedelta
from typing import TYPE_CHECKING, Any
from zoneinfo import ZoneInfo

from cuebook.jobs.demo.people import DemoLearner
from cuebook.jobs.demo.plan import (
    DemoBlock,
    DemoGroup,
    DemoParticipation,
    DemoReading,
    DemoSchedule,
    DemoSession,
    DemoStaff,
    DemoTrial,
)
from cuebook.jobs.demo.reach import ReachState
from cuebook.jobs.demo.strokes import StrokeState
from cuebook.jobs.demo.sway import SwayState
from cuebook.jobs.demo.truth import CueTruth, Truth
from cuebook.library.seed_sets import load_seed_cues

if TYPE_CHECKING:
    import numpy as np

MovementState = ReachState | SwayState | StrokeState
TICKS = ("clear", "some", "none", "not_seen")


@dataclass(frozen=True, slots=True)
class SettingPlan:
    """What happened in one setting, and the movements that were recorded there."""

    staff: tuple[DemoStaff, ...]
    groups: tuple[DemoGroup, ...]
    readings: tuple[DemoReading, ...]
    sessions: tuple[DemoSession, ...]
    """Not yet numbered: the settings run side by side."""
    movements: Mapping[str, MovementState]
    """File to what shapes the movement recorded in it."""
    schedules: tuple[DemoSchedule, ...] = ()


@dataclass(slots=True)
class Recorder:
    """Gives each recorded attempt of a setting its file name."""

    folder: str
    movements: dict[str, MovementState] = field(default_factory=dict)

    def record(
        self, learner: str, started_at: datetime, block: int, states: Sequence[MovementState]
    ) -> tuple[DemoTrial, ...]:
        """Return the trials of one set, and keep what shapes them."""
        trials = []
        for number, state in enumerate(states, start=1):
            name = f"{started_at:%Y-%m-%d}-b{block:02d}-t{number}.csv"
            file = f"{self.folder}/{learner}/{name}"
            self.movements[file] = state
            trials.append(DemoTrial(file=file))
        return tuple(trials)


@dataclass(slots=True)
class SessionDraft:
    """A session while it runs."""

    setting: str
    learners: tuple[str, ...]
    started_at: datetime
    entered_by: str
    group: str | None = None
    entered_after: timedelta = timedelta(minutes=4)
    minute: int = 1
    blocks: list[DemoBlock] = field(default_factory=list)

    @property
    def next_number(self) -> int:
        """The number the next block will have."""
        return len(self.blocks) + 1

    def add(
        self,
        phase: str,
        task: str,
        participations: Sequence[DemoParticipation],
        minutes: int,
        **details: Any,
    ) -> None:
        """Add a block that takes some minutes."""
        block = DemoBlock(
            number=self.next_number,
            occurred_at=self.started_at + timedelta(minutes=self.minute),
            phase=phase,
            task=task,
            participations=tuple(participations),
            **details,
        )
        self.blocks.append(block)
        self.minute += minutes

    def close(self) -> DemoSession:
        """Return the session as it was entered."""
        ended_at = self.started_at + timedelta(minutes=self.minute)
        return DemoSession(
            number=0,
            setting=self.setting,
            group=self.group,
            learners=self.learners,
            started_at=self.started_at,
            ended_at=ended_at,
            entered_at=ended_at + self.entered_after,
            entered_by=self.entered_by,
            blocks=tuple(self.blocks),
        )


def place_in_time(truth: Truth, week: int, weekday: int, hour: int, minute: int = 0) -> datetime:
    """Return a moment of the scenario; weeks and weekdays count from 0, Monday first."""
    day = truth.first_day + timedelta(weeks=week, days=weekday)
    return datetime.combine(day, time(hour, minute), tzinfo=ZoneInfo(truth.zone))


def number_sessions(sessions: Sequence[DemoSession]) -> tuple[DemoSession, ...]:
    """Return the sessions of all settings in order of time, numbered from 1."""
    in_order = sorted(sessions, key=lambda one: (one.started_at, one.setting, one.learners))
    return tuple(replace(one, number=number) for number, one in enumerate(in_order, start=1))


def suits(learner: DemoLearner, cue_code: str) -> bool:
    """Return whether nothing in a learner's profile speaks against a cue."""
    cue = next(cue for cue in load_seed_cues() if cue.code == cue_code)
    is_reached = set(cue.access_avoid).isdisjoint(learner.access_needs)
    return is_reached and learner.safety_note not in cue.note_avoid


def note_practice(
    learner: DemoLearner, cue: CueTruth | None, stream: np.random.Generator, minutes: float
) -> DemoParticipation:
    """Return what a teacher writes down about one learner's block of practice.

    The tick is drawn apart from what the cue does: ticks flatter, and are no outcome.
    """
    attempts = int(stream.integers(8, 13))
    said = int(stream.integers(2, 6))
    tick = str(stream.choice(TICKS, p=(0.25, 0.40, 0.15, 0.20)))
    liked = stream.random() < 0.25
    if cue is None:
        return DemoParticipation(learner.code, attempts=attempts, minutes=minutes, observed=tick)
    words = cue.own_words.get(learner.code)
    return DemoParticipation(
        learner.code,
        attempts=attempts,
        minutes=minutes,
        times_said=said,
        observed=tick,
        reaction="gave_own_words" if words else ("liked" if liked else None),
        words=words,
    )
