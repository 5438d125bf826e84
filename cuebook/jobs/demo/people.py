"""The invented learners of the three settings, as frozen values."""

from __future__ import annotations

import csv
import io
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib import resources
from types import MappingProxyType

CONSENT_ITEMS = (
    "take_part",
    "record_motion",
    "record_video",
    "touch",
    "share_team",
    "use_for_ranking",
    "contact",
)
SETTINGS = ("Larkspur Lane", "Tern Weir", "Quillgate")


@dataclass(frozen=True, slots=True)
class DemoGoal:
    """What a learner works towards."""

    words: str
    status: str
    """active or on_hold."""
    icf: str
    task: str
    feature: str
    metric: str | None
    """None while the goal is on hold: nothing is measured for it."""


@dataclass(frozen=True, slots=True)
class DemoHold:
    """A hard stop for some tasks."""

    tasks: tuple[str, ...]
    until: str
    by_role: str


@dataclass(frozen=True, slots=True)
class DemoLearner:
    """One invented learner."""

    code: str
    setting: str
    age_band: str
    experience: str
    returning: bool
    backgrounds: tuple[str, ...]
    access_needs: tuple[str, ...]
    safety_note: str | None
    """A slug of list safety_note; None: none."""
    safety_words: str
    """The note in the teacher's words; empty: none. It may stand without a slug."""
    goal: DemoGoal
    hold: DemoHold | None
    show_once: str | None
    """A safety_action to show once; None: none."""
    consents: Mapping[str, str]
    """Answer (yes, no, not_asked) for each item of CONSENT_ITEMS."""
    consent_given_by: str
    consent_how: str
    assent: str

    @property
    def may_be_ranked(self) -> bool:
        """Only a yes counts: no answer is a no."""
        return self.consents["use_for_ranking"] == "yes"

    def is_held(self, task: str) -> bool:
        """Return whether the task is stopped for this learner until somebody clears it."""
        return self.hold is not None and task in self.hold.tasks


def _split(cell: str) -> tuple[str, ...]:
    return tuple(part.strip() for part in cell.split(";") if part.strip())


def _make_goal(row: Mapping[str, str]) -> DemoGoal:
    return DemoGoal(
        words=row["goal"],
        status=row["goal_status"],
        icf=row["icf"],
        task=row["task"],
        feature=row["feature"],
        metric=row["primary_metric"] or None,
    )


def _make_hold(row: Mapping[str, str]) -> DemoHold | None:
    tasks = _split(row["hold_scope"])
    return DemoHold(tasks, row["hold_until"], row["hold_by_role"]) if tasks else None


def _make_learner(row: Mapping[str, str]) -> DemoLearner:
    return DemoLearner(
        code=row["code"],
        setting=row["setting"],
        age_band=row["age_band"],
        experience=row["experience"],
        returning=row["returning"] == "yes",
        backgrounds=_split(row["background"]),
        access_needs=_split(row["access_need"]),
        safety_note=row["safety_note"] or None,
        safety_words=row["safety_words"],
        goal=_make_goal(row),
        hold=_make_hold(row),
        show_once=row["show_once"] or None,
        consents=MappingProxyType({item: row[f"consent_{item}"] for item in CONSENT_ITEMS}),
        consent_given_by=row["consent_given_by"],
        consent_how=row["consent_how"],
        assent=row["assent"],
    )


@cache
def read_learners() -> tuple[DemoLearner, ...]:
    """Return the invented learners in the order of the file; read once a process."""
    text = (
        resources.files("cuebook.jobs.demo")
        .joinpath("data", "learners.csv")
        .read_text(encoding="utf-8")
    )
    return tuple(_make_learner(row) for row in csv.DictReader(io.StringIO(text, newline="")))


def list_members(setting: str) -> tuple[DemoLearner, ...]:
    """Return the learners of one setting."""
    return tuple(learner for learner in read_learners() if learner.setting == setting)
