"""Rows of changes, and what is done when several learners share one event."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from cuebook.evidence.prepared import BoolArray, FloatArray, IntArray
from cuebook.practice.changes import Change

LARGEST_SYSTEM = 1000
FEWEST_EVENTS = 8


@dataclass(frozen=True, eq=False)
class Rows:
    """Changes as columns; one row a change, or a shared event once collapsed."""

    change: FloatArray
    variance: FloatArray
    state: FloatArray
    level: FloatArray
    cue: IntArray
    learner: IntArray
    learner_labels: tuple[str, ...]
    cue_weights: FloatArray | None
    events: tuple[str | None, ...]
    n_before: IntArray
    n_after: IntArray
    position: FloatArray
    visit: FloatArray
    first: FloatArray
    days: FloatArray
    attempts: FloatArray
    randomised: BoolArray
    as_assigned: BoolArray
    people: IntArray
    flags: tuple[tuple[str, ...], ...]

    @classmethod
    def from_changes(
        cls,
        changes: Sequence[Change],
        learner_labels: tuple[str, ...],
        cues: tuple[str, ...],
        variance: FloatArray,
        state: FloatArray,
        level: FloatArray,
    ) -> Rows:
        """Return changes as columns, in their order."""
        cue_at = {cue: at for at, cue in enumerate(cues)}
        learner_at = {learner: at for at, learner in enumerate(learner_labels)}
        uses = [change.use for change in changes]
        weights = np.zeros((len(changes), len(cues)))
        for row, change in enumerate(changes):
            for cue, share in change.cue_weights:
                weights[row, cue_at[cue]] = share
        is_shared = bool(((weights > 0) & (weights < 1)).any())
        largest = weights.argmax(axis=1) if cues else np.full(len(changes), -1)
        cue_code = np.where(weights.sum(axis=1) > 0, largest, -1).astype(np.int64)
        return cls(
            change=np.array([change.difference for change in changes], dtype=np.float64),
            variance=variance,
            state=state,
            level=level,
            cue=cue_code,
            learner=np.array([learner_at[use.learner] for use in uses], dtype=np.int64),
            learner_labels=learner_labels,
            cue_weights=weights if is_shared else None,
            events=tuple(use.event for use in uses),
            n_before=np.array([change.before.n for change in changes], dtype=np.int64),
            n_after=np.array([change.after.n for change in changes], dtype=np.int64),
            position=np.array([use.k for use in uses], dtype=np.float64),
            visit=np.array([use.t for use in uses], dtype=np.float64),
            first=np.array([use.is_first for use in uses], dtype=np.float64),
            days=np.array([change.days for change in changes], dtype=np.float64),
            attempts=np.array(
                [math.nan if use.attempts is None else use.attempts for use in uses],
                dtype=np.float64,
            ),
            randomised=np.array([use.randomised for use in uses], dtype=bool),
            as_assigned=np.array(
                [not use.randomised or use.assigned == use.cue for use in uses], dtype=bool
            ),
            people=np.ones(len(changes), dtype=np.int64),
            flags=tuple(
                (*change.flags, "going_badly")
                if change.use.chosen == "going_badly"
                else change.flags
                for change in changes
            ),
        )


def code_events(events: Sequence[str | None]) -> IntArray | None:
    """Return a code per row for events shared by several rows; None if none is shared."""
    counts: dict[str, int] = {}
    for event in events:
        if event is not None:
            counts[event] = counts.get(event, 0) + 1
    shared = sorted(event for event, count in counts.items() if count > 1)
    if not shared:
        return None
    at = {event: code for code, event in enumerate(shared)}
    return np.array(
        [-1 if event is None else at.get(event, -1) for event in events], dtype=np.int64
    )


def name_group(event: str) -> str:
    """Return what stands in place of the learner: the group's code before the colon."""
    return f"group:{event.split(':', 1)[0]}"


def collapse_events(rows: Rows, *, n_fixed: int, n_cues: int) -> tuple[Rows, bool]:
    """Return one row per shared event where events are too few or too many for an effect.

    Notes
    -----
    The change of an event is the mean of its rows, its known variance the mean's; the group
    stands in place of the learner. The residual of the model is then that of whole events, so
    copying a learner's rows inside an event does not narrow an interval.
    """
    codes = code_events(rows.events)
    if codes is None:
        return rows, False
    n_events = int(codes.max()) + 1
    if n_events >= FEWEST_EVENTS and n_fixed + n_cues + n_events <= LARGEST_SYSTEM:
        return rows, False
    members: list[IntArray] = [np.array([row]) for row in np.flatnonzero(codes < 0)]
    members += [np.flatnonzero(codes == code) for code in range(n_events)]
    labels = [_label(rows, group) for group in members]
    names = tuple(sorted(set(labels)))
    return _average(rows, members, labels, names), True


def _label(rows: Rows, members: IntArray) -> str:
    event = rows.events[int(members[0])]
    if len(members) == 1 or event is None:
        return rows.learner_labels[int(rows.learner[members[0]])]
    return name_group(event)


def _average(
    rows: Rows, members: Sequence[IntArray], labels: Sequence[str], names: tuple[str, ...]
) -> Rows:
    def mean(column: FloatArray) -> FloatArray:
        return np.array([float(np.mean(column[group])) for group in members])

    def first(column: IntArray) -> IntArray:
        return np.array([int(column[group[0]]) for group in members], dtype=np.int64)

    def all_of(column: BoolArray) -> BoolArray:
        return np.array([bool(column[group].all()) for group in members])

    at = {name: code for code, name in enumerate(names)}
    return Rows(
        change=mean(rows.change),
        variance=np.array(
            [float(rows.variance[group].sum()) / len(group) ** 2 for group in members]
        ),
        state=mean(rows.state),
        level=mean(rows.level),
        cue=first(rows.cue),
        learner=np.array([at[label] for label in labels], dtype=np.int64),
        learner_labels=names,
        cue_weights=(
            None
            if rows.cue_weights is None
            else np.array([rows.cue_weights[group].mean(axis=0) for group in members])
        ),
        events=tuple(rows.events[int(group[0])] for group in members),
        n_before=first(rows.n_before),
        n_after=first(rows.n_after),
        position=mean(rows.position),
        visit=mean(rows.visit),
        first=mean(rows.first),
        days=mean(rows.days),
        attempts=mean(rows.attempts),
        randomised=all_of(rows.randomised),
        as_assigned=all_of(rows.as_assigned),
        people=np.array([int(rows.people[group].sum()) for group in members], dtype=np.int64),
        flags=tuple(
            tuple(dict.fromkeys(flag for row in group for flag in rows.flags[int(row)]))
            for group in members
        ),
    )
