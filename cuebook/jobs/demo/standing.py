"""Quiet standing beside the rail, one learner at a time, before the walking group begins."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import datetime, timedelta
from typing import TYPE_CHECKING, Any

from cuebook.jobs.demo.course import Course
from cuebook.jobs.demo.draft import Recorder, SessionDraft, note_practice
from cuebook.jobs.demo.people import DemoLearner
from cuebook.jobs.demo.plan import DemoParticipation, DemoReading, DemoSession
from cuebook.jobs.demo.streams import open_stream
from cuebook.jobs.demo.sway import RATE_HZ, SwayState
from cuebook.jobs.demo.truth import Truth

if TYPE_CHECKING:
    import numpy as np

TASK = "standing_balance"
READING = DemoReading(
    task=TASK,
    columns={"time": "time_s", "cop_x": "cop_x_cm", "cop_y": "cop_y_cm"},
    units={"time": "s", "cop_x": "cm", "cop_y": "cm"},
    rate_hz=RATE_HZ,
)
PROTOCOL = {"stance": "feet side by side", "eyes": "open", "support": "rail in reach"}
MINUTES_EACH = 15


@dataclass(slots=True)
class StandingCorner:
    """The corner with the plate, and who has stood there so far."""

    truth: Truth
    seed: int
    learners: Mapping[str, DemoLearner]
    entered_by: str
    recorder: Recorder = field(default_factory=lambda: Recorder("larkspur-lane"))
    courses: dict[str, Course] = field(default_factory=dict)
    _stream: np.random.Generator = field(init=False)

    def __post_init__(self) -> None:
        self._stream = open_stream(self.seed, "standing")

    @property
    def facts(self) -> dict[str, Any]:
        """What the truth says about this corner."""
        return dict(self.truth.settings["larkspur"]["standing"])

    def stand(self, week: int, first_start: datetime) -> list[DemoSession]:
        """Return the stands of one week, counted from 0."""
        coming = [code for code, weeks in self.facts["visits"].items() if week + 1 in weeks]
        starts = [first_start + timedelta(minutes=MINUTES_EACH * i) for i in range(len(coming))]
        return [self._visit(code, start) for code, start in zip(coming, starts, strict=True)]

    def _visit(self, code: str, start: datetime) -> DemoSession:
        draft = SessionDraft(self.learners[code].setting, (code,), start, self.entered_by)
        course = self.courses.setdefault(code, Course(self.truth, TASK, code, self.seed))
        course.open_visit()
        cue_code = self.facts["cues"][course.visits]
        cue = self.truth.get_cue(cue_code)
        self._measure(draft, course, "baseline")
        course.practise(cue)
        draft.add(
            "acquisition",
            TASK,
            [note_practice(self.learners[code], cue, self._stream, 2)],
            2,
            protocol=PROTOCOL,
            cue=cue_code or None,
            chosen="planned",
        )
        self._measure(draft, course, "immediate_post")
        return draft.close()

    def _measure(self, draft: SessionDraft, course: Course, phase: str) -> None:
        states = course.measure(self.facts["attempts_per_set"])
        shapes = [SwayState(math.exp(one["log_sway"]), self.facts["seconds"]) for one in states]
        trials = self.recorder.record(course.learner, draft.started_at, draft.next_number, shapes)
        part = DemoParticipation(course.learner, trials=trials)
        draft.add(phase, TASK, [part], 3, protocol=PROTOCOL)
