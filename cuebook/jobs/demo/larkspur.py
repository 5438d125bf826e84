"""The walking group: one cue to everybody in the room, a stopwatch for a few."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from datetime import timedelta
from typing import TYPE_CHECKING, Any

from cuebook.jobs.demo.course import Course
from cuebook.jobs.demo.draft import SessionDraft, SettingPlan, note_practice, place_in_time
from cuebook.jobs.demo.people import DemoLearner, list_members
from cuebook.jobs.demo.plan import (
    DemoGroup,
    DemoParticipation,
    DemoSession,
    DemoStaff,
    DemoTrial,
)
from cuebook.jobs.demo.standing import READING, StandingCorner
from cuebook.jobs.demo.streams import open_stream
from cuebook.jobs.demo.truth import Truth

if TYPE_CHECKING:
    import numpy as np

SETTING = "Larkspur Lane"
GROUP = "larkspur-lane"
TASK = "walking"
TEACHER, ASSISTANT = "larkspur-teacher", "larkspur-assistant"
PROTOCOL = {"distance_m": "10", "instrument": "stopwatch", "start": "moving, between tape marks"}
CLASS_WEEKDAY = 2
PRACTICE_MINUTES = 12
ENTERED_AFTER = timedelta(minutes=15)
LATE_WEEK, LATE_BY = 3, timedelta(days=2)
"""The notes of this week's class, counted from 0, were typed two days later."""
EVENT_SD = 0.3
"""What everybody in the room gets alike in one block, in attempt SDs."""


@dataclass(slots=True)
class _WalkingClass:
    truth: Truth
    facts: dict[str, Any]
    members: tuple[DemoLearner, ...]
    courses: dict[str, Course]
    stream: np.random.Generator
    left_out: dict[str, set[str]] = field(default_factory=dict)
    """Cue to learners who nearly fell under it."""

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
        for number, code in enumerate(self.facts["events"][week]["cues"], start=1):
            parts = self._practise(here, code, self._find_near_falls(week, number))
            self._add_event(draft, parts + absent, code, f"{GROUP}-w{week + 1}-e{number}")
            stopped = {part.learner for part in parts if part.stop_reason}
            here = [learner for learner in here if learner.code not in stopped]
            walks = self._time(here, focus)
            draft.add("immediate_post", TASK, walks + absent, 6, protocol=PROTOCOL)
        return draft.close()

    def _see_who_came(self, week: int) -> list[DemoLearner]:
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

    def _find_near_falls(self, week: int, number: int) -> dict[str, bool]:
        """Return who nearly falls in this block, and whether that ends their part."""
        return {
            one["learner"]: one["stopped"]
            for one in self.facts["near_falls"]
            if (one["week"], one["event"]) == (week + 1, number)
        }

    def _time(self, here: Sequence[DemoLearner], focus: set[str]) -> list[DemoParticipation]:
        """Time the focus learners over the marks; the others walk along unmeasured."""
        return [
            DemoParticipation(
                learner.code, trials=self._time_one(learner.code) if learner.code in focus else ()
            )
            for learner in here
        ]

    def _time_one(self, code: str) -> tuple[DemoTrial, ...]:
        """Return the speeds a stopwatch gives: hundredths of a second over the marks."""
        distance_m = self.facts["distance_m"]
        states = self.courses[code].measure(self.facts["attempts_per_set"])
        times_s = [round(distance_m / math.exp(state["log_speed"]), 2) for state in states]
        return tuple(
            DemoTrial(values={"gait_speed_m_s": round(distance_m / time_s, 3)})
            for time_s in times_s
        )

    def _practise(
        self, here: Sequence[DemoLearner], code: str, near_falls: dict[str, bool]
    ) -> list[DemoParticipation]:
        """Say one cue to the room, or let everybody walk without one."""
        cue = self.truth.get_cue(code)
        shared = EVENT_SD * float(self.stream.standard_normal())
        left_out = self.left_out.setdefault(code, set()) if code else set()
        parts = []
        for learner in here:
            if learner.code in left_out:
                continue
            part = note_practice(learner, cue, self.stream, PRACTICE_MINUTES)
            self.courses[learner.code].practise(cue, shared)
            if learner.code in near_falls:
                part = _mark_near_fall(part, near_falls[learner.code])
                left_out.add(learner.code)
            parts.append(part)
        return parts

    def _add_event(
        self, draft: SessionDraft, parts: Sequence[DemoParticipation], code: str, event: str
    ) -> None:
        draft.add(
            "acquisition",
            TASK,
            parts,
            PRACTICE_MINUTES,
            protocol=PROTOCOL,
            cue=code or None,
            chosen="planned",
            event=event,
        )


def _mark_near_fall(part: DemoParticipation, stopped: bool) -> DemoParticipation:  # noqa: FBT001
    part = replace(part, events=("near_fall",), observed="worse")
    return replace(part, stop_reason="fall_or_near_fall", minutes=3.0) if stopped else part


def build_larkspur(truth: Truth, seed: int) -> SettingPlan:
    """Return six weekly hours, and the stands before them, week by week."""
    members = list_members(SETTING)
    walking = _WalkingClass(
        truth=truth,
        facts=dict(truth.settings["larkspur"]),
        members=members,
        courses={one.code: Course(truth, TASK, one.code, seed) for one in members},
        stream=open_stream(seed, "class", SETTING),
    )
    standing = StandingCorner(truth, seed, {one.code: one for one in members}, ASSISTANT)
    sessions = []
    for week in range(truth.weeks):
        sessions += standing.stand(week, place_in_time(truth, week, CLASS_WEEKDAY, 9, 50))
        sessions.append(walking.meet(week))
    return SettingPlan(
        staff=(
            DemoStaff(TEACHER, SETTING, "teacher"),
            DemoStaff(ASSISTANT, SETTING, "assistant"),
        ),
        groups=(
            DemoGroup(
                code=GROUP,
                label="Larkspur Lane walking group",
                setting=SETTING,
                members=tuple(learner.code for learner in members),
                joined_at=place_in_time(truth, 0, 0, 8),
            ),
        ),
        readings=(READING,),
        sessions=tuple(sessions),
        movements=standing.recorder.movements,
    )
