"""Read sessions as a teacher looks back at them."""

from __future__ import annotations

import sqlite3
from dataclasses import dataclass
from datetime import datetime

from cuebook.store.moments import parse_moment


@dataclass(frozen=True, slots=True)
class MeetingLine:
    """A session in a list."""

    session_id: str
    started_at: datetime
    zone: str
    is_open: bool
    who: str
    n_blocks: int


@dataclass(frozen=True, slots=True)
class PastBlock:
    """One block as one learner (or one group) went through it."""

    block_id: str
    session_id: str
    occurred_at: datetime
    phase: str
    task: str
    side: str | None
    cue: str | None
    words: str | None
    learner: str
    presence: str
    times_said: int | None
    observed: str | None
    reaction: str | None
    own_words: str | None
    stop_reason: str | None
    events: tuple[str, ...]


_MEETINGS = """
SELECT session.id, session.occurred_at, session.occurred_zone, session.ended_at,
       COALESCE(learner.code, learner_group.code) AS who,
       (SELECT COUNT(*) FROM block WHERE block.session_id = session.id) AS n_blocks
FROM session
LEFT JOIN learner ON learner.id = session.learner_id
LEFT JOIN learner_group ON learner_group.id = session.group_id
{where}
ORDER BY session.occurred_at DESC, session.id DESC
"""
_BLOCKS = """
SELECT block.id, block.session_id, block.occurred_at, block.phase, block.task, block.side,
       cue.code AS cue, wording.text AS words, learner.code AS learner,
       participation.presence, use.times_said, use.observed, use.reaction,
       use.words AS own_words, use.stop_reason,
       (SELECT GROUP_CONCAT(event, ' ') FROM happening
        WHERE happening.participation_id = participation.id) AS events
FROM participation
JOIN block ON block.id = participation.block_id
JOIN session ON session.id = block.session_id
JOIN learner ON learner.id = participation.learner_id
LEFT JOIN wording ON wording.id = block.wording_id
LEFT JOIN cue ON cue.id = wording.cue_id
LEFT JOIN use ON use.participation_id = participation.id
{where}
ORDER BY session.occurred_at, session.id, block.number, participation.id
"""


def read_meetings(
    connection: sqlite3.Connection,
    *,
    learner_key: str | None = None,
    group_key: str | None = None,
    limit: int = 200,
) -> tuple[MeetingLine, ...]:
    """Return sessions, the newest first; of a learner also those of their groups."""
    where, arguments = "", []
    if learner_key is not None:
        where = (
            "WHERE session.learner_id = ? OR session.id IN (SELECT block.session_id FROM block "
            "JOIN participation ON participation.block_id = block.id "
            "WHERE participation.learner_id = ?)"
        )
        arguments = [learner_key, learner_key]
    elif group_key is not None:
        where, arguments = "WHERE session.group_id = ?", [group_key]
    rows = connection.execute(_MEETINGS.format(where=where), arguments).fetchmany(limit)
    return tuple(
        MeetingLine(
            row["id"],
            parse_moment(row["occurred_at"]),
            row["occurred_zone"],
            row["ended_at"] is None,
            row["who"],
            row["n_blocks"],
        )
        for row in rows
    )


def read_past_blocks(
    connection: sqlite3.Connection,
    *,
    learner_key: str | None = None,
    group_key: str | None = None,
    session_id: str | None = None,
) -> tuple[PastBlock, ...]:
    """Return blocks in order of time, one entry a learner: of a learner, group or session."""
    if session_id is not None:
        where, argument = "WHERE session.id = ?", session_id
    elif learner_key is not None:
        where, argument = "WHERE participation.learner_id = ?", learner_key
    else:
        where, argument = "WHERE session.group_id = ?", group_key or ""
    rows = connection.execute(_BLOCKS.format(where=where), (argument,))
    return tuple(
        PastBlock(
            block_id=row["id"],
            session_id=row["session_id"],
            occurred_at=parse_moment(row["occurred_at"]),
            phase=row["phase"],
            task=row["task"],
            side=row["side"],
            cue=row["cue"],
            words=row["words"],
            learner=row["learner"],
            presence=row["presence"],
            times_said=row["times_said"],
            observed=row["observed"],
            reaction=row["reaction"],
            own_words=row["own_words"],
            stop_reason=row["stop_reason"],
            events=tuple((row["events"] or "").split()),
        )
        for row in rows
    )


@dataclass(frozen=True, slots=True)
class PastValue:
    """One stored value of a learner."""

    block_id: str
    phase: str
    task: str
    occurred_at: datetime
    metric: str
    value: float


def read_past_values(connection: sqlite3.Connection, learner_key: str) -> tuple[PastValue, ...]:
    """Return a learner's values in order of time."""
    rows = connection.execute(
        """
        SELECT block.id, block.phase, block.task, block.occurred_at, measurement.metric,
               measurement.value
        FROM measurement
        JOIN trial ON trial.id = measurement.trial_id
        JOIN participation ON participation.id = trial.participation_id
        JOIN block ON block.id = participation.block_id
        LEFT JOIN recording ON recording.id = measurement.recording_id
        WHERE measurement.learner_id = ? AND measurement.value IS NOT NULL
          AND trial.is_valid = 1
          AND (measurement.recording_id = '' OR recording.is_current = 1)
        ORDER BY block.occurred_at, block.number, trial.number, measurement.metric
        """,
        (learner_key,),
    )
    return tuple(
        PastValue(
            row["id"],
            row["phase"],
            row["task"],
            parse_moment(row["occurred_at"]),
            row["metric"],
            row["value"],
        )
        for row in rows
    )
