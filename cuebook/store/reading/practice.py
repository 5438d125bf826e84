"""Read the log of practice as the values from which changes are derived."""

from __future__ import annotations

import json
import sqlite3
from collections import defaultdict
from collections.abc import Iterable
from datetime import datetime, timedelta

from cuebook.practice.log import (
    ACQUISITION,
    AttemptValue,
    LoggedBlock,
    LoggedLearner,
    LoggedParticipation,
    LoggedSession,
    PracticeLog,
)
from cuebook.store.moments import parse_moment
from cuebook.store.reading.people import read_rankable
from cuebook.store.zones import find_zone

LATE = timedelta(hours=24)
KEY_FACTS = (
    *("walking_aid", "splint", "footwear", "help_given", "seat_height", "seat_height_cm"),
    *("box_height_cm", "instrument", "place", "load"),
)
"""Facts of a protocol that make two comparisons different ones."""

_SESSIONS = """
SELECT session.id, session.occurred_at, session.occurred_zone, is_date_only, do_not_use,
       learner_group.code AS group_code
FROM session LEFT JOIN learner_group ON learner_group.id = session.group_id
ORDER BY session.occurred_at, session.id
"""
_BLOCKS = """
SELECT block.id, block.session_id, block.number, block.phase, block.task, block.side,
       block.tempo, block.others, block.chosen, block.delivered_by, block.event_id,
       block.cue_entered_at, protocol.facts, cue.code AS cue, cue.kind AS kind,
       wording.revision AS wording, slot.id AS slot_id, slot.cue AS assigned,
       MAX(schedule.occurred_at, schedule.entered_at) AS drawn_at, block.occurred_at
FROM block
LEFT JOIN protocol ON protocol.id = block.protocol_id
LEFT JOIN wording ON wording.id = block.wording_id
LEFT JOIN cue ON cue.id = wording.cue_id
LEFT JOIN slot ON slot.id = block.slot_id
LEFT JOIN schedule ON schedule.id = slot.schedule_id
ORDER BY block.session_id, block.number
"""
_PARTS = """
SELECT participation.id, participation.block_id, learner.code AS learner,
       participation.presence, use.times_said, use.attempts, use.minutes, use.reaction,
       use.stop_reason, use.stopped_at
FROM participation
JOIN learner ON learner.id = participation.learner_id
LEFT JOIN use ON use.participation_id = participation.id
ORDER BY participation.block_id, participation.id
"""
_VALUES = """
SELECT trial.participation_id, trial.id AS trial_id, trial.number, trial.is_valid,
       trial.occurred_at, trial.entered_at, measurement.metric, measurement.value,
       measurement.reason, measurement.recording_id, recipe.digest
FROM measurement
JOIN trial ON trial.id = measurement.trial_id
JOIN recipe ON recipe.id = measurement.recipe_id
LEFT JOIN recording ON recording.id = measurement.recording_id
WHERE measurement.segment = '' AND (measurement.recording_id = '' OR recording.is_current = 1)
  AND measurement.metric IN ({marks})
ORDER BY trial.participation_id, trial.number, measurement.recording_id
"""


_MEASURED_PARTS = """
SELECT block.id, block.phase, block.task, block.cue_entered_at, participation.learner_id,
       (SELECT MIN(trial.entered_at) FROM trial
        WHERE trial.participation_id = participation.id) AS entered_at
FROM participation
JOIN block ON block.id = participation.block_id
JOIN session ON session.id = block.session_id
ORDER BY session.occurred_at DESC, session.id DESC, block.number DESC
"""
_CORRECTED = """
SELECT row_key, field, MAX(entered_at) AS entered_at FROM correction
WHERE table_name = 'measurement' GROUP BY row_key, field
"""


def read_practice_log(connection: sqlite3.Connection, metrics: Iterable[str]) -> PracticeLog:
    """Return the whole log with the attempt values of some metrics."""
    values = _read_values(connection, tuple(metrics))
    events: dict[str, list[str]] = defaultdict(list)
    for row in connection.execute("SELECT participation_id, event FROM happening ORDER BY id"):
        events[row["participation_id"]].append(row["event"])
    parts: dict[str, list[LoggedParticipation]] = defaultdict(list)
    for row in connection.execute(_PARTS):
        parts[row["block_id"]].append(
            LoggedParticipation(
                learner=row["learner"],
                presence=row["presence"],
                values={metric: tuple(listed) for metric, listed in values[row["id"]].items()},
                times_said=row["times_said"],
                attempts=row["attempts"],
                minutes=row["minutes"],
                reaction=row["reaction"],
                events=tuple(events[row["id"]]),
                stop_reason=row["stop_reason"],
            )
        )
    meetings = connection.execute(_SESSIONS).fetchall()
    rows: dict[str, list[sqlite3.Row]] = defaultdict(list)
    for row in connection.execute(_BLOCKS):
        rows[row["session_id"]].append(row)
    altered = _find_altered_after_result(connection)
    sessions = []
    for meeting in meetings:
        in_gap = _find_gap_starts(rows[meeting["id"]])
        sessions.append(
            LoggedSession(
                session=meeting["id"],
                started_at=_localise(meeting["occurred_at"], meeting["occurred_zone"]),
                blocks=tuple(
                    _make_block(
                        row,
                        tuple(parts[row["id"]]),
                        meeting["group_code"],
                        gap_start=in_gap[row["id"]],
                        is_changed_after_result=row["id"] in altered,
                    )
                    for row in rows[meeting["id"]]
                ),
                is_date_only=bool(meeting["is_date_only"]),
                do_not_use=bool(meeting["do_not_use"]),
            )
        )
    return PracticeLog(_read_learners(connection), tuple(sessions))


def _find_gap_starts(blocks: Iterable[sqlite3.Row]) -> dict[str, str]:
    """Return for each block when the gap before it began: the first block after practice.

    An order drawn after that may have been drawn with the before-measure already known.
    """
    starts: dict[str, str] = {}
    open_since: dict[str, str] = {}
    for row in blocks:
        since = open_since.setdefault(row["task"], row["occurred_at"])
        starts[row["id"]] = min(since, row["occurred_at"])
        if row["phase"] == ACQUISITION:
            del open_since[row["task"]]
    return starts


def _find_altered_after_result(connection: sqlite3.Connection) -> frozenset[str]:
    """Return the practice blocks whose cue was entered after what followed was measured."""
    found = set()
    next_measured: dict[tuple[str, str], str] = {}
    for row in connection.execute(_MEASURED_PARTS):
        place = (row["learner_id"], row["task"])
        if row["phase"] == ACQUISITION:
            known = [row["entered_at"], next_measured.get(place)]
            if any(moment is not None and moment < row["cue_entered_at"] for moment in known):
                found.add(row["id"])
        elif row["entered_at"] is not None:
            next_measured[place] = row["entered_at"]
    return frozenset(found)


def _read_values(
    connection: sqlite3.Connection, metrics: tuple[str, ...]
) -> dict[str, dict[str, list[AttemptValue]]]:
    found: dict[str, dict[str, list[AttemptValue]]] = defaultdict(lambda: defaultdict(list))
    if not metrics:
        return found
    stopped = {
        row["id"]: row["stopped_at"] for row in connection.execute(_PARTS) if row["stopped_at"]
    }
    corrected = {
        (row["row_key"], row["field"]): row["entered_at"] for row in connection.execute(_CORRECTED)
    }
    query = _VALUES.format(marks=", ".join("?" * len(metrics)))
    for row in connection.execute(query, metrics):
        typed_at = corrected.get((row["trial_id"], row["metric"]), row["entered_at"])
        occurred, entered = parse_moment(row["occurred_at"]), parse_moment(typed_at)
        stopped_at = stopped.get(row["participation_id"])
        found[row["participation_id"]][row["metric"]].append(
            AttemptValue(
                value=row["value"],
                recipe=row["digest"],
                is_valid=bool(row["is_valid"]),
                is_after_stop=stopped_at is not None and row["occurred_at"] > stopped_at,
                is_late=not row["recording_id"] and entered - occurred > LATE,
                reason=row["reason"],
            )
        )
    return found


def _make_block(
    row: sqlite3.Row,
    parts: tuple[LoggedParticipation, ...],
    group: str | None,
    *,
    gap_start: str,
    is_changed_after_result: bool,
) -> LoggedBlock:
    facts = json.loads(row["facts"]) if row["facts"] else {}
    conditions = [(name, str(facts[name])) for name in KEY_FACTS if name in facts]
    if row["side"]:
        conditions.append(("side", row["side"]))
    event = row["event_id"]
    if event is not None and group is not None:
        event = f"{group}:{event}"
    is_randomised = row["slot_id"] is not None and row["drawn_at"] <= gap_start
    return LoggedBlock(
        block=row["id"],
        number=row["number"],
        phase=row["phase"],
        task=row["task"],
        participations=parts,
        conditions=tuple(conditions),
        tempo=row["tempo"],
        cue=row["cue"],
        wording=row["wording"],
        kind=row["kind"],
        others=row["others"],
        chosen=row["chosen"] or "unknown",
        assigned=row["assigned"],
        is_randomised=is_randomised,
        event=event,
        delivery=row["delivered_by"],
        is_changed_after_result=is_changed_after_result,
    )


def _read_learners(connection: sqlite3.Connection) -> dict[str, LoggedLearner]:
    rankable = read_rankable(connection)
    backgrounds: dict[str, list[str]] = defaultdict(list)
    for row in connection.execute(
        "SELECT learner_id, background FROM learner_background ORDER BY background"
    ):
        backgrounds[row["learner_id"]].append(row["background"])
    return {
        row["code"]: LoggedLearner(
            learner=row["code"],
            may_be_ranked=row["id"] in rankable and not row["is_demo"],
            age_band=row["age_band"],
            backgrounds=tuple(backgrounds[row["id"]]),
        )
        for row in connection.execute("SELECT id, code, age_band, is_demo FROM learner")
    }


def _localise(moment: str, zone: str) -> datetime:
    """Return a moment in the zone it was entered in, so that calendar days are local ones."""
    return parse_moment(moment).astimezone(find_zone(zone))
