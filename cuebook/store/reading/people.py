"""Read learners and groups: facts for the look-up, lists, consents, holds."""

from __future__ import annotations

import json
import sqlite3
from dataclasses import dataclass
from datetime import datetime

from cuebook.library.person import Group, Hold, Person, SafetyNote
from cuebook.store.moments import parse_moment
from cuebook.store.unknown import describe_unknown


@dataclass(frozen=True, slots=True)
class LearnerLine:
    """A learner in a list."""

    code: str
    age_band: str | None
    experience: str | None
    n_sessions: int
    may_be_ranked: bool
    held_tasks: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class GroupLine:
    """A group in a list."""

    code: str
    label: str
    members: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class ConsentLine:
    """The newest answer to one consent item."""

    item: str
    answer: str
    given_by: str
    how: str
    given_at: datetime


_RANKABLE = """
SELECT learner_id FROM (
    SELECT learner_id, answer, assent,
           ROW_NUMBER() OVER (PARTITION BY learner_id ORDER BY occurred_at DESC, id DESC) AS place
    FROM consent WHERE item = 'use_for_ranking')
WHERE place = 1 AND answer = 'yes' AND assent IN ('yes', 'not_applicable')
"""


def read_rankable(connection: sqlite3.Connection) -> frozenset[str]:
    """Return the keys of learners whose current answer lets them into rankings."""
    return frozenset(row["learner_id"] for row in connection.execute(_RANKABLE))


def read_learner_lines(connection: sqlite3.Connection) -> tuple[LearnerLine, ...]:
    """Return all learners by code."""
    rankable = read_rankable(connection)
    held: dict[str, list[str]] = {}
    for row in connection.execute(
        "SELECT learner_id, task FROM hold WHERE cleared_at IS NULL ORDER BY id"
    ):
        held.setdefault(row["learner_id"], []).append(row["task"])
    rows = connection.execute(
        """
        SELECT learner.id, code, age_band, experience,
               (SELECT COUNT(DISTINCT block.session_id) FROM participation
                JOIN block ON block.id = participation.block_id
                WHERE participation.learner_id = learner.id) AS n_sessions
        FROM learner ORDER BY code
        """
    )
    return tuple(
        LearnerLine(
            row["code"],
            row["age_band"],
            row["experience"],
            row["n_sessions"],
            row["id"] in rankable,
            tuple(held.get(row["id"], ())),
        )
        for row in rows
    )


def read_group_lines(connection: sqlite3.Connection) -> tuple[GroupLine, ...]:
    """Return all groups by code with the codes of their present members."""
    members: dict[str, list[str]] = {}
    for row in connection.execute(
        """
        SELECT membership.group_id, learner.code FROM membership
        JOIN learner ON learner.id = membership.learner_id
        WHERE membership.left_at IS NULL ORDER BY membership.id
        """
    ):
        members.setdefault(row["group_id"], []).append(row["code"])
    rows = connection.execute("SELECT id, code, label FROM learner_group ORDER BY code")
    return tuple(
        GroupLine(row["code"], row["label"], tuple(members.get(row["id"], ()))) for row in rows
    )


def require_learner_key(connection: sqlite3.Connection, code: str) -> str:
    """Return the key of a learner.

    Raises
    ------
    UnknownCodeError : no such learner; names the nearest.
    """
    row = connection.execute("SELECT id FROM learner WHERE code = ?", (code,)).fetchone()
    if row is None:
        known = [line["code"] for line in connection.execute("SELECT code FROM learner")]
        raise describe_unknown("learner", code, known)
    return str(row["id"])


def require_group_key(connection: sqlite3.Connection, code: str) -> str:
    """Return the key of a group; an unknown code names the nearest."""
    row = connection.execute("SELECT id FROM learner_group WHERE code = ?", (code,)).fetchone()
    if row is None:
        known = [line["code"] for line in connection.execute("SELECT code FROM learner_group")]
        raise describe_unknown("group", code, known)
    return str(row["id"])


def read_person(connection: sqlite3.Connection, code: str) -> Person:
    """Return what the look-up needs to know of a learner."""
    key = require_learner_key(connection, code)
    row = connection.execute(
        "SELECT age_band, experience, language FROM learner WHERE id = ?", (key,)
    ).fetchone()
    return Person(
        code=code,
        age_band=row["age_band"],
        experience=row["experience"],
        backgrounds=_list(
            connection,
            "SELECT background FROM learner_background WHERE learner_id = ? ORDER BY background",
            key,
        ),
        access_needs=_list(
            connection,
            "SELECT access_need FROM learner_need WHERE learner_id = ? ORDER BY access_need",
            key,
        ),
        notes=_read_notes(connection, key),
        holds=_read_holds(connection, key),
        language=row["language"],
        declined=frozenset(_list(connection, _DECLINED, key)),
        paused=frozenset(_list(connection, _PAUSED, key)),
    )


_DECLINED = """
SELECT DISTINCT cue.code FROM use
JOIN participation ON participation.id = use.participation_id
JOIN block ON block.id = participation.block_id
JOIN wording ON wording.id = block.wording_id
JOIN cue ON cue.id = wording.cue_id
WHERE use.learner_id = ? AND use.reaction IN ('declined', 'disliked')
"""
_PAUSED = """
SELECT DISTINCT cue.code FROM happening
JOIN participation ON participation.id = happening.participation_id
JOIN block ON block.id = participation.block_id
JOIN wording ON wording.id = block.wording_id
JOIN cue ON cue.id = wording.cue_id
WHERE happening.learner_id = ? AND happening.event = 'fall'
"""


def read_group(connection: sqlite3.Connection, code: str) -> Group:
    """Return what the look-up needs to know of a group: each present member."""
    require_group_key(connection, code)
    line = next(line for line in read_group_lines(connection) if line.code == code)
    return Group(code, tuple(read_person(connection, member) for member in line.members))


def read_consents(connection: sqlite3.Connection, code: str) -> tuple[ConsentLine, ...]:
    """Return the newest answer to each consent item of a learner."""
    key = require_learner_key(connection, code)
    rows = connection.execute(
        """
        SELECT item, answer, given_by, how, occurred_at FROM (
            SELECT *, ROW_NUMBER() OVER (
                PARTITION BY item ORDER BY occurred_at DESC, id DESC) AS place
            FROM consent WHERE learner_id = ?)
        WHERE place = 1 ORDER BY item
        """,
        (key,),
    )
    return tuple(
        ConsentLine(
            row["item"],
            row["answer"],
            row["given_by"],
            row["how"],
            parse_moment(row["occurred_at"]),
        )
        for row in rows
    )


def _list(connection: sqlite3.Connection, query: str, key: str) -> tuple[str, ...]:
    return tuple(row[0] for row in connection.execute(query, (key,)))


def _read_notes(connection: sqlite3.Connection, key: str) -> tuple[SafetyNote, ...]:
    rows = connection.execute(
        "SELECT slug, words, is_hard, tasks, features FROM safety_note "
        "WHERE learner_id = ? ORDER BY id",
        (key,),
    )
    return tuple(
        SafetyNote(
            row["slug"],
            row["words"],
            bool(row["is_hard"]),
            tuple(json.loads(row["tasks"])),
            tuple(json.loads(row["features"])),
        )
        for row in rows
    )


def _read_holds(connection: sqlite3.Connection, key: str) -> tuple[Hold, ...]:
    rows = connection.execute(
        "SELECT task, until, by_role FROM hold WHERE learner_id = ? AND cleared_at IS NULL "
        "ORDER BY id",
        (key,),
    ).fetchall()
    return tuple(Hold((row["task"],), row["until"], row["by_role"]) for row in rows)
