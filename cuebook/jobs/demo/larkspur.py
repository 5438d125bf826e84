"""The walking group: one cue to everybody in the room, a stopwatch for a few."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import timedelta
from typing import TYPE_CHECKING, Any

from cuebook.jobs.demo.course import Course
from cuebook.jobs.demo.draft import SessionDraft, SettingPlan, note_practice, place_in_time
from cuebook.jobs.demo.gait_visits import GaitVisits
from cuebook.jobs.demo.people import DemoLearner, list_members
from cuebook.jobs.demo.plan import DemoGroup, DemoParticipation, DemoSession, DemoStaff
from cuebook.jobs.demo.standing import READING, StandingCorner
from cuebook.jobs.demo.streams import open_stream
from cuebook.jobs.demo.truth import Truth
from cuebook.jobs.demo.walks import PROTOCOL, TASK, mark_near_fall, time_walks

if TYPE_CHECKING:
    import numpy as np

SETTING = "Larkspur Lane"
GROUP = "larkspur-lane"
TEACHER, ASSISTANT, THERAPIST = "larkspur-teacher", "larkspur-assistant", "larkspur-therapist"
CLASS_WEEKDAY, THERAPIST_WEEKDAY = 2, 4
PRACTICE_MINUTES = 12
ENTERED_AFTER = timedelta(minutes=15)
LATE_WEEK, LATE_BY = 3, timedelta(days=2)
"""The notes of this week's class, counted from 0, were typed two days later."""
EVENT_SD = 0.3
"""What everybody in the room gets alike in one block, in attempt SDs."""


@dataclass(slots=True)
class _WalkingClass:
    truth: Truth
    members: tuple[DemoLearner, ...]
    courses: Mapping[str, Course]
    stream: np.random.Generator

    @property
    def facts(self) -> dict[str, Any]:
        return dict(self.truth.settings["larkspur"])

    def meet(self, week: int) -> DemoSession:
        """Hold one weekly hour."""
        start = place_in_time(self.truth, week, CLASS_WEEKDAY, 10, 30)
        codes = tuple(learner.code for learner in self.members)
        late = LATE_BY if week == LATE_WEEK else ENTERED_AFTER
        draft = SessionDraft(SETTING, codes, start, TEACHER, GROUP, late)
        here = self._see_who_came(week)
        absent = [
            DemoParticipation(learner.code, presence="absent")
            for learner in self.members
            if learner not in here
        ]
        focus = self._pick_focus(week, here)
        draft.add("baseline", TASK, self._time(here, focus) + absent, 6, protocol=PROTOCOL)
        for number, code in enumerate(self.facts["events"][week], start=1):
            parts = self._practise(here, code, self._find_near_falls(week, number))
            draft.add(
                "acquisition",
                TASK,
                parts + absent,
                PRACTICE_MINUTES,
                protocol=PROTOCOL,
                cue=code or None,
                chosen="planned",
                event=f"{GROUP}-w{week + 1}-e{number}",
            )
            walks = self._time(here, focus)
            draft.add("immediate_post", TASK, walks + absent, 6, protocol=PROTOCOL)
        return draft.close()

    def _see_who_came(self, week: int) -> list[DemoLearner]:
        """Return who is there; whoever nearly falls this week is."""
        planned = {one["learner"] for one in self.facts["near_falls"] if one["week"] == week + 1}
        here = [
            learner
            for learner in self.members
            if self.stream.random() >= self.facts["absent_share"] or learner.code in planned
        ]
        for learner in here:
            self.courses[learner.code].open_visit()
        return here

    def _pick_focus(self, week: int, here: Sequence[DemoLearner]) -> set[str]:
        """Return who is timed this week, in rotation over the group."""
        count = self.facts["focus_per_week"]
        first = week * count % len(self.members)
        in_turn = self.members[first:] + self.members[:first]
        return {learner.code for learner in [one for one in in_turn if one in here][:count]}

    def _find_near_falls(self, week: int, number: int) -> set[str]:
        return {
            one["learner"]
            for one in self.facts["near_falls"]
            if (one["week"], one["event"]) == (week + 1, number)
        }

    def _time(self, here: Sequence[DemoLearner], focus: set[str]) -> list[DemoParticipation]:
        """Time the focus learners over the marks; the others walk along unmeasured."""
        return [
            DemoParticipation(
                learner.code,
                trials=time_walks(self.truth, self.courses[learner.code])
                if learner.code in focus
                else (),
            )
            for learner in here
        ]

    def _practise(
        self, here: Sequence[DemoLearner], code: str, near_falls: set[str]
    ) -> list[DemoParticipation]:
        """Say one cue to the room, or let everybody walk without one."""
        cue = self.truth.get_cue(code)
        shared = EVENT_SD * float(self.stream.standard_normal())
        parts = []
        for learner in here:
            part = note_practice(learner, cue, self.stream, PRACTICE_MINUTES)
            self.courses[learner.code].practise(cue, shared)
            parts.append(mark_near_fall(part) if learner.code in near_falls else part)
        return parts


def build_larkspur(truth: Truth, seed: int) -> SettingPlan:
    """Return six weeks: the stands before the class, the class, the therapist's visits."""
    members = list_members(SETTING)
    learners = {one.code: one for one in members}
    courses = {code: Course(truth, TASK, code, seed) for code in learners}
    walking = _WalkingClass(truth, members, courses, open_stream(seed, "class", SETTING))
    standing = StandingCorner(truth, seed, learners, ASSISTANT)
    alone = GaitVisits(truth, seed, learners, courses, THERAPIST)
    sessions = []
    for week in range(truth.weeks):
        sessions += standing.stand(week, place_in_time(truth, week, CLASS_WEEKDAY, 9, 50))
        sessions.append(walking.meet(week))
        sessions += alone.hold(week, place_in_time(truth, week, THERAPIST_WEEKDAY, 11))
    return SettingPlan(
        staff=(
            DemoStaff(TEACHER, SETTING, "teacher"),
            DemoStaff(ASSISTANT, SETTING, "assistant"),
            DemoStaff(THERAPIST, SETTING, "therapist"),
        ),
        groups=(
            DemoGroup(
                code=GROUP,
                label="Larkspur Lane walking group",
                setting=SETTING,
                members=tuple(learners),
                joined_at=place_in_time(truth, 0, 0, 8),
            ),
        ),
        readings=(READING,),
        sessions=tuple(sessions),
        movements=standing.recorder.movements,
    )
