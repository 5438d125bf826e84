"""A learner's blocks in the order they happened, sorted into cued, practice alone and clean."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from datetime import datetime

from cuebook.practice.changes import UseRecord
from cuebook.practice.log import (
    ACQUISITION,
    AttemptValue,
    LoggedBlock,
    LoggedParticipation,
    LoggedSession,
    PracticeLog,
)
from cuebook.practice.sets import is_usable

Facts = tuple[tuple[str, str], ...]
TaskKey = tuple[str, Facts]
"""Task with side and aid: the reach of "before", "between" and "next"."""
TASK_FACTS = frozenset({"side", "walking_aid"})
"""Other facts (footwear, seat height, place …) make another key, yet the same task: a cue given
at another seat height was given all the same."""

CUED, ALONE, UNKNOWN, CLEAN = "cued", "alone", "unknown", "clean"
TEMPO_TOLERANCE = 0.10
_OTHERS = ("none", "unknown", "some", "many")
"""Other cues in a block, from best to worst."""


@dataclass(frozen=True, slots=True)
class Step:
    """One block as one learner went through it."""

    kind: str
    """cued, alone (practice without a cue), unknown (a cue was given, not known which), clean."""
    block: LoggedBlock
    part: LoggedParticipation

    @property
    def conditions(self) -> Facts:
        """Return the facts that make a key differ, sorted."""
        return tuple(sorted(self.block.conditions))

    def is_comparable_to(self, other: Step) -> bool:
        """Return whether attempts of both steps may be compared: same key but for the metric."""
        return (
            self.block.task == other.block.task
            and self.conditions == other.conditions
            and is_same_tempo(self.block.tempo, other.block.tempo)
        )

    def has_usable(self, metric: str | None = None) -> bool:
        """Return whether a metric (any, if None) has a usable value here."""
        listed = self.part.values.values() if metric is None else [self.part.values.get(metric, ())]
        return any(is_usable(value) for values in listed for value in values)

    @property
    def bars_cue_free(self) -> bool:
        """Return whether whatever follows is no longer 'before any cue'."""
        return self.kind in {CUED, UNKNOWN}

    @property
    def is_use(self) -> bool:
        """Return whether it is a use: with a lead cue, or practice alone."""
        return self.kind in {CUED, ALONE}


@dataclass(frozen=True, slots=True)
class Use:
    """Adjacent steps with the same cue and no clean set between them."""

    record: UseRecord
    steps: tuple[Step, ...]
    first: int
    """Index of its first step in the visit."""
    last: int

    def list_values(self, metric: str) -> tuple[AttemptValue, ...]:
        """Return the attempts made under the cue, of one metric and the key of its first step."""
        return tuple(
            value
            for step in self.steps
            if step.is_comparable_to(self.steps[0])
            for value in step.part.values.get(metric, ())
        )


@dataclass(frozen=True, slots=True)
class Visit:
    """One learner's part of one session on one task."""

    session: LoggedSession
    task: TaskKey
    steps: tuple[Step, ...]
    uses: tuple[Use, ...]
    t: int
    """Place among this learner's sessions on the task, from 0."""

    @property
    def started_at(self) -> datetime:
        """Return when the session started."""
        return self.session.started_at

    @property
    def has_cue(self) -> bool:
        """Return whether any cue was given on the task."""
        return any(step.bars_cue_free for step in self.steps)


def make_task_key(block: LoggedBlock) -> TaskKey:
    """Return what must be equal for two blocks to be of the same task."""
    return block.task, tuple(sorted(fact for fact in block.conditions if fact[0] in TASK_FACTS))


def is_same_tempo(one: float | None, other: float | None) -> bool:
    """Return whether two tempos count as one: both unset, or within 10 %."""
    if one is None or other is None:
        return one is other
    return abs(one - other) <= TEMPO_TOLERANCE * max(abs(one), abs(other))


def classify(block: LoggedBlock) -> str:
    """Return what a block is for those in it."""
    if block.phase == ACQUISITION:
        if block.cue is not None:
            return CUED
        return ALONE if block.others == "none" else UNKNOWN
    # A measure during which cues were given is not clean, and what follows is not cue-free.
    return CLEAN if block.others == "none" and block.cue is None else UNKNOWN


def list_steps(session: LoggedSession, learner: str) -> Iterator[Step]:
    """Yield a learner's blocks of a session in order; only those they were present in."""
    for block in sorted(session.blocks, key=lambda block: block.number):
        for part in block.participations:
            if part.learner == learner and part.presence == "present" and not has_declined(part):
                yield Step(classify(block), block, part)


def has_declined(part: LoggedParticipation) -> bool:
    """Return whether the learner declined before starting, which is not a use."""
    return (
        part.reaction == "declined"
        and not part.attempts
        and not part.is_stopped
        and not any(part.values.values())
    )


def list_sessions(log: PracticeLog) -> list[LoggedSession]:
    """Return the sessions by the time they started, never by time of entry."""
    return sorted(log.sessions, key=lambda session: (session.started_at, session.session))


def build_visits(log: PracticeLog, learner: str) -> dict[TaskKey, list[Visit]]:
    """Return a learner's visits per task, in order of time."""
    visits: dict[TaskKey, list[Visit]] = {}
    for session in list_sessions(log):
        steps_by_task: dict[TaskKey, list[Step]] = {}
        for step in list_steps(session, learner):
            steps_by_task.setdefault(make_task_key(step.block), []).append(step)
        cued_tasks = {
            task
            for task, steps in steps_by_task.items()
            if any(step.bars_cue_free for step in steps)
        }
        for task, steps in steps_by_task.items():
            before = visits.setdefault(task, [])
            is_other_cued = bool(cued_tasks - {task})
            uses = _build_uses(session, learner, steps, len(before), is_other_cued=is_other_cued)
            before.append(Visit(session, task, tuple(steps), uses, len(before)))
    return visits


def _build_uses(
    session: LoggedSession, learner: str, steps: list[Step], t: int, *, is_other_cued: bool
) -> tuple[Use, ...]:
    uses: list[Use] = []
    is_after_stop = False
    for index, step in enumerate(steps):
        if not step.is_use:
            is_after_stop = is_after_stop or step.part.is_stopped
            continue
        last = uses[-1] if uses else None
        if last is not None and _is_continued(last, step, steps[last.last + 1 : index]):
            uses[-1] = _make_use(
                session, learner, (*last.steps, step), last.first, index, last.record, t
            )
        else:
            flags = []
            if is_after_stop:
                flags.append("after_stop")
            if is_other_cued:
                flags.append("other_task_cued")
            seed = UseRecord(
                use=f"{step.block.block}:{learner}",
                learner=learner,
                cue=step.block.cue,
                task=step.block.task,
                session=session.session,
                k=len(uses) + 1,
                t=t,
                flags=tuple(flags),
            )
            uses.append(_make_use(session, learner, (step,), index, index, seed, t))
        is_after_stop = is_after_stop or step.part.is_stopped
    return tuple(uses)


def _is_continued(last: Use, step: Step, between: list[Step]) -> bool:
    """Return whether a step goes on with the cue of the use before it."""
    is_measured = any(other.kind == CLEAN and other.has_usable() for other in between)
    return (
        last.record.cue == step.block.cue
        and not is_measured
        and not any(other.kind == UNKNOWN for other in between)
        and last.record.stop_reason is None
    )


def _make_use(
    session: LoggedSession,
    learner: str,
    steps: tuple[Step, ...],
    first: int,
    last: int,
    seed: UseRecord,
    t: int,
) -> Use:
    """Make the use of some steps: of several, what was done adds up and the worst mark stays."""
    block = steps[0].block
    flags = list(seed.flags)
    if any(step.block.others in {"some", "unknown"} for step in steps):
        flags.append("others")
    if any(step.block.is_changed_after_result for step in steps):
        flags.append("changed_after_result")
    if any(step.block.delivery == "assistant" for step in steps):
        flags.append("assistant")
    record = UseRecord(
        use=seed.use,
        learner=learner,
        cue=block.cue,
        task=block.task,
        session=session.session,
        k=seed.k,
        t=t,
        wording=block.wording,
        kind=block.kind,
        attempts=_add(step.part.attempts for step in steps),
        times_said=_add(step.part.times_said for step in steps),
        minutes=_add(step.part.minutes for step in steps),
        event=block.event,
        assigned=block.assigned,
        randomised=all(step.block.is_randomised for step in steps),
        chosen=block.chosen,
        others=max((step.block.others for step in steps), key=_OTHERS.index),
        stop_reason=next((s.part.stop_reason for s in steps if s.part.is_stopped), None),
        flags=tuple(dict.fromkeys(flags)),
    )
    return Use(record, steps, first, last)


def _add(numbers: Iterator[int | None] | Iterator[float | None]) -> int | None:
    known = [number for number in numbers if number is not None]
    return sum(known) if known else None  # type: ignore[return-value]  # floats stay floats
