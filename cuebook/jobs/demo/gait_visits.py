"""Walking alone with the visiting therapist, on Fridays."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import datetime, timedelta
from typing import TYPE_CHECKING, Any

from cuebook.jobs.demo.course import Course
from cuebook.jobs.demo.draft import SessionDraft, note_practice
from cuebook.jobs.demo.people import DemoLearner
from cuebook.jobs.demo.plan import DemoParticipation, DemoSession
from cuebook.jobs.demo.streams import open_stream
from cuebook.jobs.demo.truth import Truth
from cuebook.jobs.demo.walks import PROTOCOL, TASK, mark_near_fall, mark_stop, time_walks

if TYPE_CHECKING:
    import numpy as np

MINUTES_EACH = 30
PRACTICE_MINUTES = 8
MARKS = {"goes_on": mark_near_fall, "stops": mark_stop}


@dataclass(slots=True)
class GaitVisits:
    """The therapist's Fridays; the learners' courses are those of the class."""

    truth: Truth
    seed: int
    learners: Mapping[str, DemoLearner]
    courses: Mapping[str, Course]
    entered_by: str
    _stream: np.random.Generator = field(init=False)

    def __post_init__(self) -> None:
        self._stream = open_stream(self.seed, "gait visits")

    def hold(self, week: int, first_start: datetime) -> list[DemoSession]:
        """Return the visits of one week, counted from 0."""
        visits = self.truth.settings["larkspur"]["therapist"]["visits"]
        due = [visit for visit in visits if visit["week"] == week + 1]
        starts = [first_start + timedelta(minutes=MINUTES_EACH * i) for i in range(len(due))]
        return [self._visit(visit, start) for visit, start in zip(due, starts, strict=True)]

    def _visit(self, visit: Mapping[str, Any], start: datetime) -> DemoSession:
        learner = self.learners[visit["learner"]]
        course, cue = self.courses[learner.code], self.truth.get_cue(visit["cue"])
        draft = SessionDraft(learner.setting, (learner.code,), start, self.entered_by)
        course.open_visit()
        self._time(draft, course, "baseline")
        part = note_practice(learner, cue, self._stream, PRACTICE_MINUTES)
        if "near_fall" in visit:
            part = MARKS[visit["near_fall"]](part)
        course.practise(cue)
        draft.add(
            "acquisition",
            TASK,
            [part],
            PRACTICE_MINUTES,
            protocol=PROTOCOL,
            cue=visit["cue"] or None,
            chosen="planned",
        )
        if part.stop_reason is None:
            self._time(draft, course, "immediate_post")
        return draft.close()

    def _time(self, draft: SessionDraft, course: Course, phase: str) -> None:
        part = DemoParticipation(course.learner, trials=time_walks(self.truth, course))
        draft.add(phase, TASK, [part], 5, protocol=PROTOCOL)
