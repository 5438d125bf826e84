"""Read revisions and stored rankings."""

from __future__ import annotations

import json
import sqlite3
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from cuebook.store.moments import parse_moment


@dataclass(frozen=True, slots=True)
class StoredRanking:
    """The last ranking of a question."""

    document: dict[str, Any]
    evidence_revision: int
    n_uses: int
    engine: str
    made_at: datetime


def read_revision(connection: sqlite3.Connection, what: str) -> int:
    """Return a counter: ``cues`` or ``evidence``; 0 if nothing was ever counted."""
    row = connection.execute(
        "SELECT revision FROM library_revision WHERE what = ?", (what,)
    ).fetchone()
    return int(row["revision"]) if row else 0


def read_ranking(connection: sqlite3.Connection, question_key: str) -> StoredRanking | None:
    """Return the stored ranking of a question, if there is one."""
    row = connection.execute(
        "SELECT document, evidence_revision, n_uses, engine, made_at "
        "FROM ranking_cache WHERE question = ?",
        (question_key,),
    ).fetchone()
    if row is None:
        return None
    return StoredRanking(
        json.loads(row["document"]),
        row["evidence_revision"],
        row["n_uses"],
        row["engine"],
        parse_moment(row["made_at"]),
    )


@dataclass(frozen=True, slots=True)
class MeasuredQuestion:
    """A metric on a task for which there are values."""

    metric: str
    task: str
    n_values: int
    n_learners: int


def read_measured_questions(connection: sqlite3.Connection) -> tuple[MeasuredQuestion, ...]:
    """Return which metrics have values on which tasks, those with most first."""
    rows = connection.execute(
        """
        SELECT measurement.metric, block.task, COUNT(measurement.value) AS n_values,
               COUNT(DISTINCT measurement.learner_id) AS n_learners
        FROM measurement
        JOIN trial ON trial.id = measurement.trial_id
        JOIN participation ON participation.id = trial.participation_id
        JOIN block ON block.id = participation.block_id
        LEFT JOIN recording ON recording.id = measurement.recording_id
        WHERE measurement.value IS NOT NULL AND trial.is_valid = 1
          AND (measurement.recording_id = '' OR recording.is_current = 1)
        GROUP BY measurement.metric, block.task
        ORDER BY n_values DESC, measurement.metric, block.task
        """
    )
    return tuple(
        MeasuredQuestion(row["metric"], row["task"], row["n_values"], row["n_learners"])
        for row in rows
    )
