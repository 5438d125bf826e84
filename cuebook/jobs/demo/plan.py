"""What happened in the invented settings, in the order of practice, as frozen values.

A plan holds no measurement of a recorded movement and no ranking: where a movement was
recorded it names a file, and the ordinary importer reads that file. Only what a teacher
would write down by hand (a stopwatch value, an angle read from a screen) is a value here.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from datetime import datetime

from cuebook.jobs.demo.people import DemoLearner


@dataclass(frozen=True, slots=True)
class DemoStaff:
    """Somebody who teaches and enters what happened; never a real name."""

    code: str
    setting: str
    role: str


@dataclass(frozen=True, slots=True)
class DemoGroup:
    """Learners who meet together."""

    code: str
    label: str
    setting: str
    members: tuple[str, ...]
    joined_at: datetime


@dataclass(frozen=True, slots=True)
class DemoSchedule:
    """A random order drawn before the first measure of the comparison was taken."""

    code: str
    learner: str
    task: str
    arms: tuple[str | None, ...]
    """The conditions; None is practice without a cue."""
    slots: tuple[str | None, ...]
    """The condition of each slot, in the order of use."""
    rule: str
    seed: int
    drawn_at: datetime


@dataclass(frozen=True, slots=True)
class DemoTrial:
    """One attempt: a recording, or values somebody wrote down; never both."""

    file: str | None = None
    """Path of the recording below the plan's folder, with forward slashes; None: typed."""
    values: Mapping[str, float] = field(default_factory=dict)
    """Typed numbers per metric; empty where there is a recording."""


@dataclass(frozen=True, slots=True)
class DemoParticipation:
    """One learner in one block."""

    learner: str
    presence: str = "present"
    """present, absent or not_observed."""
    trials: tuple[DemoTrial, ...] = ()
    """In the order they were made; empty where nothing was measured."""
    attempts: int | None = None
    """Attempts practised in an acquisition block; None: not counted, or another phase."""
    times_said: int | None = None
    """None: no cue, or not counted."""
    minutes: float | None = None
    pain_today: int | None = None
    """0-10, asked when the visit begins; None: not asked."""
    observed: str | None = None
    """A slug of list observed_change: the teacher's tick, never an outcome."""
    reaction: str | None = None
    events: tuple[str, ...] = ()
    """Slugs of list event, such as near_fall."""
    words: str | None = None
    """The learner's own words for it."""
    stop_reason: str | None = None
    """A slug of list reason_for_stopping: ended this learner's use, not the block."""


@dataclass(frozen=True, slots=True)
class DemoBlock:
    """One block of a session."""

    number: int
    """Counted from 1 within the session."""
    occurred_at: datetime
    phase: str
    task: str
    participations: tuple[DemoParticipation, ...]
    side: str | None = None
    protocol: Mapping[str, str] = field(default_factory=dict)
    """The set-up in plain pairs, such as distance_cm: 30."""
    cue: str | None = None
    """Code of the lead cue; None in an acquisition block: practice without a cue."""
    others: str = "none"
    """Other cues given: none, some, many or unknown."""
    chosen: str | None = None
    """Who chose and why; None outside acquisition blocks."""
    event: str | None = None
    """Set where one cue was said to several learners at once; else None."""
    schedule: str | None = None
    """Code of the DemoSchedule the block was taken from; None: the teacher chose."""
    slot: int | None = None
    """Index into the schedule's slots, from 0."""
    assigned: str | None = None
    """The cue the slot holds; None with a slot: practice without a cue."""


@dataclass(frozen=True, slots=True)
class DemoSession:
    """One meeting of a learner or of a group."""

    number: int
    """Counted from 1 over the whole plan, in order of time."""
    setting: str
    group: str | None
    """Code of the group that met; None: one learner alone."""
    learners: tuple[str, ...]
    """Who was expected: one learner, or the members of the group."""
    started_at: datetime
    """With its zone."""
    ended_at: datetime
    entered_at: datetime
    entered_by: str
    """Code of a DemoStaff."""
    blocks: tuple[DemoBlock, ...]


@dataclass(frozen=True, slots=True)
class DemoReading:
    """How the files of one task are read: the answers the importer would ask for."""

    task: str
    columns: Mapping[str, str]
    """Channel to header name, as in ``--columns time=time_s,x=hand_x_m``."""
    units: Mapping[str, str]
    """Channel to unit, as in ``--units x=m``; the headers say the same."""
    rate_hz: float | None
    """None: a list of events."""


@dataclass(frozen=True, slots=True)
class DemoPlan:
    """Everything that happened; the recordings lie below the folder it was written to."""

    seed: int
    zone: str
    staff: tuple[DemoStaff, ...]
    learners: tuple[DemoLearner, ...]
    groups: tuple[DemoGroup, ...]
    schedules: tuple[DemoSchedule, ...]
    readings: tuple[DemoReading, ...]
    sessions: tuple[DemoSession, ...]
    """In order of time."""

    def iterate_blocks(self) -> Iterator[tuple[DemoSession, DemoBlock]]:
        """Yield every block with its session, in order of time."""
        for session in self.sessions:
            for block in session.blocks:
                yield session, block

    def iterate_uses(
        self, task: str | None = None, setting: str | None = None
    ) -> Iterator[tuple[DemoSession, DemoBlock, DemoParticipation]]:
        """Yield every use: a present learner in an acquisition block."""
        for session, block in self.iterate_blocks():
            if block.phase != "acquisition" or task not in {None, block.task}:
                continue
            if setting not in {None, session.setting}:
                continue
            for part in block.participations:
                if part.presence == "present":
                    yield session, block, part

    def list_files(self) -> tuple[str, ...]:
        """Return the path of every recording, in the order it was made."""
        return tuple(
            trial.file
            for _, block in self.iterate_blocks()
            for part in block.participations
            for trial in part.trials
            if trial.file is not None
        )

    def get_reading(self, task: str) -> DemoReading | None:
        """Return how the files of a task are read; None where nothing was recorded."""
        return next((reading for reading in self.readings if reading.task == task), None)
