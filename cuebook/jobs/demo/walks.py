"""Walking over the tape marks: what the stopwatch gives, and what is noted about a near-fall."""

from __future__ import annotations

import math
from dataclasses import replace

from cuebook.jobs.demo.course import Course
from cuebook.jobs.demo.plan import DemoParticipation, DemoTrial
from cuebook.jobs.demo.truth import Truth

TASK = "walking"
PROTOCOL = {"distance_m": "10", "instrument": "stopwatch", "start": "moving, between tape marks"}


def time_walks(truth: Truth, course: Course) -> tuple[DemoTrial, ...]:
    """Return the speeds of one set, from hundredths of a second over the marks."""
    facts = truth.settings["larkspur"]
    distance_m = facts["distance_m"]
    states = course.measure(facts["attempts_per_set"])
    times_s = [round(distance_m / math.exp(state["log_speed"]), 2) for state in states]
    return tuple(
        DemoTrial(values={"gait_speed_m_s": round(distance_m / time_s, 3)}) for time_s in times_s
    )


def mark_near_fall(part: DemoParticipation) -> DemoParticipation:
    """Note a near-fall of a learner who goes on."""
    return replace(part, events=("near_fall",), observed="worse")


def mark_stop(part: DemoParticipation) -> DemoParticipation:
    """Note a near-fall that ended the learner's part."""
    return replace(mark_near_fall(part), stop_reason="fall_or_near_fall", minutes=3.0)
