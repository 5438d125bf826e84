"""The reach clinic: eight adults, two therapists, a drawn order, three attempts a set."""

from __future__ import annotations

import math
from collections import Counter, deque
from dataclasses import dataclass, field, replace
from datetime import timedelta
from typing import TYPE_CHECKING, Any

from cuebook.jobs.demo.course import Course, State
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
    DemoSchedule,
    DemoStaff,
    DemoTrial,
)
from cuebook.jobs.demo.reach import RATE_HZ, ReachState
from cuebook.jobs.demo.streams import open_stream
from cuebook.jobs.demo.therapist import Choice, Therapist, draw_schedule, make_agenda
from cuebook.jobs.demo.truth import Truth

if TYPE_CHECKING:
    import numpy as np

SETTING = "Quillgate"
TASK = "reaching"
RELEASE_TASK = "grasp_place"
STAFF = ("quillgate-therapist-1", "quillgate-therapist-2")
READING = DemoReading(
    task=TASK,
    columns={"time": "time_s", "x": "hand_x_m", "y": "hand_y_m"},
    units={"time": "s", "x": "m", "y": "m"},
    rate_hz=RATE_HZ,
)
PROTOCOL = {"distance_cm": "30", "target": "mark on the table", "seat": "chair with a back"}
RELEASE_PROTOCOL = {"object": "empty cup", "instrument": "video at 50 pictures a second"}
PRACTICE_MINUTES = 4


@dataclass(slots=True)
class _Patient:
    """One learner with everything that runs along over the weeks."""

    learner: DemoLearner
    course: Course
    therapist: Therapist
    schedule: DemoSchedule
    stream: np.random.Generator
    release: Course | None = None
    release_cues: deque[dict[str, Any]] = field(default_factory=deque)


@dataclass(slots=True)
class _Clinic:
    truth: Truth
    seed: int
    recorder: Recorder = field(default_factory=lambda: Recorder("quillgate"))
    uses_of_cue: Counter[str] = field(default_factory=Counter)

    @property
    def facts(self) -> dict[str, Any]:
        return dict(self.truth.settings["quillgate"])

    def admit(self, learner: DemoLearner) -> _Patient:
        """Draw the learner's order before anything is measured."""
        facts, code = self.facts, learner.code
        one_round = facts["schedule"].get(code, facts["schedule"]["default"])
        own_seed = int(open_stream(self.seed, "order", code).integers(2**31))
        drawn_at = place_in_time(self.truth, 0, 0, 8, 30)
        schedule = draw_schedule(code, one_round, facts["random_slots"], own_seed, drawn_at)
        stream = open_stream(self.seed, "therapist", code)
        trap = next(c.code for c in self.truth.cues.values() if c.role == "regression_trap")
        therapist = Therapist(
            agenda=make_agenda(schedule, facts["teacher"], facts["asked"], stream),
            trap_cue=trap if suits(learner, trap) else None,
            badly_below=facts["going_badly_below"],
            badly_share=facts["going_badly_share"],
            stream=stream,
        )
        course = Course(self.truth, TASK, code, self.seed)
        patient = _Patient(learner, course, therapist, schedule, stream)
        if code == facts["release"]["learner"]:
            patient.release = Course(self.truth, RELEASE_TASK, code, self.seed)
            patient.release_cues = deque(facts["release"]["visits"])
        return patient

    def shape_reaches(self, learner: str, states: tuple[State, ...]) -> list[ReachState]:
        """Return what shapes the attempts of one set."""
        return [
            ReachState(
                smoothness=state["smoothness"],
                duration_s=math.exp(state["log_time"]),
                bow_m=state["bow_cm"] / 100.0,
                submovements=self.facts["submovements"][learner],
            )
            for state in states
        ]

    def measure(
        self, draft: SessionDraft, patient: _Patient, phase: str, pain: int | None = None
    ) -> tuple[State, ...]:
        """Record one set of reaches."""
        code = patient.learner.code
        states = patient.course.measure(self.facts["attempts_per_set"])
        trials = self.recorder.record(
            code, draft.started_at, draft.next_number, self.shape_reaches(code, states)
        )
        part = DemoParticipation(code, trials=trials, pain_today=pain)
        draft.add(phase, TASK, [part], 2, side=self.facts["side"][code], protocol=PROTOCOL)
        return states

    def practise(self, draft: SessionDraft, patient: _Patient, choice: Choice) -> bool:
        """Practise one block; return False where it ended the visit."""
        learner, cue = patient.learner, self.truth.get_cue(choice.cue)
        part = note_practice(learner, cue, patient.stream, PRACTICE_MINUTES)
        self.uses_of_cue[choice.cue or ""] += 1
        stopped = cue is not None and self.uses_of_cue[cue.code] in cue.pain_stops
        if stopped:
            part = replace(part, events=("pain",), stop_reason="pain", observed="worse", minutes=1)
        patient.course.practise(cue)
        draft.add(
            "acquisition",
            TASK,
            [part],
            PRACTICE_MINUTES,
            side=self.facts["side"][learner.code],
            protocol=PROTOCOL,
            cue=choice.cue,
            chosen=choice.chosen,
            schedule=None if choice.slot is None else patient.schedule.code,
            slot=choice.slot,
            assigned=None if choice.slot is None else patient.schedule.slots[choice.slot],
        )
        return not stopped

    def visit(self, patient: _Patient, draft: SessionDraft) -> None:
        """Fill one visit: before, practice, straight after, rest; two or three times."""
        patient.course.open_visit()
        uses = 3 if patient.stream.random() < self.facts["third_use_share"] else 2
        hurts = patient.learner.safety_note == "shoulder_support"
        pain: int | None = int(patient.stream.integers(2, 4)) if hurts else 0
        for number in range(uses):
            if number and not patient.therapist.agenda:
                break
            states = self.measure(draft, patient, "baseline", pain)
            pain = None
            choice = patient.therapist.choose([state["smoothness"] for state in states])
            if not self.practise(draft, patient, choice):
                return
            self.measure(draft, patient, "immediate_post")
            patient.course.rest()
            draft.minute += 1
        self.let_go(draft, patient)

    def let_go(self, draft: SessionDraft, patient: _Patient) -> None:
        """Let go of a cup, where that is the learner's goal and its turn has come."""
        waiting, course = patient.release_cues, patient.release
        if course is None or not waiting or patient.course.visits + 1 < waiting[0]["visit"]:
            return
        cue = waiting.popleft()["cue"] or None
        course.open_visit()
        self._type_release(draft, course, "baseline")
        part = note_practice(patient.learner, self.truth.get_cue(cue), patient.stream, 3)
        course.practise(self.truth.get_cue(cue))
        draft.add(
            "acquisition",
            RELEASE_TASK,
            [part],
            3,
            protocol=RELEASE_PROTOCOL,
            cue=cue,
            chosen="planned",
        )
        self._type_release(draft, course, "immediate_post")

    def _type_release(self, draft: SessionDraft, course: Course, phase: str) -> None:
        states = course.measure(self.facts["attempts_per_set"])
        times_s = [round(math.exp(state["log_release"]), 2) for state in states]
        trials = tuple(DemoTrial(values={"release_time_s": time_s}) for time_s in times_s)
        part = DemoParticipation(course.learner, trials=trials)
        draft.add(phase, RELEASE_TASK, [part], 2, protocol=RELEASE_PROTOCOL)


def build_quillgate(truth: Truth, seed: int) -> SettingPlan:
    """Return six weeks of the clinic, visit by visit in order of time."""
    clinic = _Clinic(truth, seed)
    members = list_members(SETTING)
    patients = [clinic.admit(learner) for learner in members]
    attendance = open_stream(seed, "attendance", SETTING)
    sessions = []
    for week in range(truth.weeks):
        for visit in range(clinic.facts["visits_per_week"]):
            for place, patient in enumerate(patients):
                if attendance.random() < clinic.facts["absent_share"]:
                    continue
                weekday = place % 2 + 3 * visit
                start = place_in_time(truth, week, weekday, 9) + timedelta(
                    minutes=40 * (place // 2)
                )
                draft = SessionDraft(SETTING, (patient.learner.code,), start, STAFF[place % 2])
                clinic.visit(patient, draft)
                sessions.append(draft.close())
    return SettingPlan(
        staff=tuple(DemoStaff(code, SETTING, "therapist") for code in STAFF),
        groups=(
            DemoGroup(
                code="quillgate",
                label="Quillgate reach clinic",
                setting=SETTING,
                members=tuple(learner.code for learner in members),
                joined_at=place_in_time(truth, 0, 0, 8),
            ),
        ),
        readings=(READING,),
        sessions=tuple(sessions),
        movements=clinic.recorder.movements,
        schedules=tuple(patient.schedule for patient in patients),
    )
