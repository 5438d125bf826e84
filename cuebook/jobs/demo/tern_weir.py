"""The juniors' land training: steady pieces on the machine, landings from a low box."""

from __future__ import annotations

import math
from dataclasses import dataclass, field, replace
from datetime import timedelta
from typing import TYPE_CHECKING, Any

from cuebook.jobs.demo.course import Course
from cuebook.jobs.demo.draft import (
    Recorder,
    SessionDraft,
    SettingPlan,
    note_practice,
    place_in_time,
    suits,
)
from cuebook.jobs.demo.people import DemoLearner, list_members
from cuebook.jobs.demo.plan import (
    DemoGroup,
    DemoParticipation,
    DemoReading,
    DemoSession,
    DemoStaff,
    DemoTrial,
)
from cuebook.jobs.demo.streams import open_stream
from cuebook.jobs.demo.strokes import StrokeState
from cuebook.jobs.demo.truth import Truth

if TYPE_CHECKING:
    import numpy as np

SETTING = "Tern Weir"
GROUP = "tern-weir"
TASK = "rowing_stroke"
LANDING_TASK = "jumping_landing"
COACHES = ("tern-weir-coach-1", "tern-weir-coach-2")
READING = DemoReading(task=TASK, columns={"onset": "onset"}, units={"onset": "s"}, rate_hz=None)
PROTOCOL = {"instrument": "rowing machine with handle switch", "rate_per_min": "22"}
LANDING_PROTOCOL = {"box_height_cm": "20", "instrument": "front video", "footwear": "trainers"}
WEEKDAYS = (1, 3)
MINUTES_EACH = 40
PRACTICE_MINUTES = 8


@dataclass(slots=True)
class _Rower:
    learner: DemoLearner
    rowing: Course
    landing: Course | None
    """None: this learner does not jump."""
    stream: np.random.Generator


@dataclass(slots=True)
class _Shed:
    truth: Truth
    recorder: Recorder = field(default_factory=lambda: Recorder(GROUP))

    @property
    def facts(self) -> dict[str, Any]:
        return dict(self.truth.settings["tern_weir"])

    def train(self, rower: _Rower, week: int, draft: SessionDraft) -> DemoSession:
        """Row, and land where that is trained."""
        code = rower.learner.code
        rower.rowing.open_visit()
        self._row(draft, rower, "baseline")
        self._practise(draft, rower, rower.rowing, self.facts["weeks"][code][week])
        self._row(draft, rower, "immediate_post")
        if rower.landing is not None:
            rower.landing.open_visit()
            self._land(draft, rower.landing, "baseline")
            cue_code = self.facts["landing"]["weeks"][code][week]
            self._practise(draft, rower, rower.landing, cue_code)
            self._land(draft, rower.landing, "immediate_post")
        return draft.close()

    def _row(self, draft: SessionDraft, rower: _Rower, phase: str) -> None:
        facts, code = self.facts, rower.learner.code
        shapes = [
            StrokeState(
                rate_per_min=facts["rate_per_min"],
                interval_cv=math.exp(state["log_cv"]) / 100.0,
                strokes=facts["strokes_per_piece"],
            )
            for state in rower.rowing.measure(facts["attempts_per_set"])
        ]
        trials = self.recorder.record(code, draft.started_at, draft.next_number, shapes)
        part = DemoParticipation(code, trials=trials)
        draft.add(phase, TASK, [part], 3, protocol=PROTOCOL)

    def _land(self, draft: SessionDraft, course: Course, phase: str) -> None:
        states = course.measure(self.facts["landing"]["attempts_per_set"])
        trials = tuple(
            DemoTrial(values={"knee_frontal_angle_deg": round(state["knee_deg"], 1)})
            for state in states
        )
        part = DemoParticipation(course.learner, trials=trials)
        draft.add(phase, LANDING_TASK, [part], 2, protocol=LANDING_PROTOCOL)

    def _practise(self, draft: SessionDraft, rower: _Rower, course: Course, cue_code: str) -> None:
        cue = self.truth.get_cue(cue_code)
        part = note_practice(rower.learner, cue, rower.stream, PRACTICE_MINUTES)
        if cue and not suits(rower.learner, cue.code):
            part = replace(part, reaction="confused", observed="none")
        course.practise(cue)
        draft.add(
            "acquisition",
            course.task,
            [part],
            PRACTICE_MINUTES,
            protocol=PROTOCOL if course.task == TASK else LANDING_PROTOCOL,
            cue=cue_code or None,
            chosen="planned",
        )


def _enrol(truth: Truth, seed: int, learner: DemoLearner) -> _Rower:
    code = learner.code
    jumps = code in truth.settings["tern_weir"]["landing"]["weeks"]
    return _Rower(
        learner=learner,
        rowing=Course(truth, TASK, code, seed),
        landing=Course(truth, LANDING_TASK, code, seed) if jumps else None,
        stream=open_stream(seed, "coach", code),
    )


def build_tern_weir(truth: Truth, seed: int) -> SettingPlan:
    """Return six weeks of land training, session by session in order of time."""
    shed = _Shed(truth)
    members = list_members(SETTING)
    rowers = [_enrol(truth, seed, learner) for learner in members]
    attendance = open_stream(seed, "attendance", SETTING)
    sessions = []
    for week in range(truth.weeks):
        for place, rower in enumerate(rowers):
            if attendance.random() < shed.facts["absent_share"]:
                continue
            start = place_in_time(truth, week, WEEKDAYS[place % 2], 16)
            start += timedelta(minutes=MINUTES_EACH * (place // 2))
            draft = SessionDraft(SETTING, (rower.learner.code,), start, COACHES[place % 2])
            sessions.append(shed.train(rower, week, draft))
    return SettingPlan(
        staff=tuple(DemoStaff(code, SETTING, "coach") for code in COACHES),
        groups=(
            DemoGroup(
                code=GROUP,
                label="Tern Weir juniors",
                setting=SETTING,
                members=tuple(learner.code for learner in members),
                joined_at=place_in_time(truth, 0, 0, 8),
            ),
        ),
        readings=(READING,),
        sessions=tuple(sessions),
        movements=shed.recorder.movements,
    )
