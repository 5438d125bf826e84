"""Write originals and recordings by the rule of the import key."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from sqlmodel import Session, col, delete, select

from cuebook.store.canonical import make_digest
from cuebook.store.keys import make_key
from cuebook.store.stamps import Stamp
from cuebook.store.tables import practice, recordings
from cuebook.store.tables.people import Learner
from cuebook.store.writing.revisions import count_evidence


@dataclass(frozen=True, slots=True)
class EarlierReading:
    """Where the same bytes are already in use."""

    learner: str
    learner_id: str
    block_id: str
    session_id: str
    phase: str
    task: str
    is_current: bool
    person: str
    rule_digest: str
    recording_id: str
    trial_id: str


def make_rule_digest(rule: Mapping[str, Any]) -> str:
    """Return the hash of a reading rule."""
    return make_digest(rule)


def find_earlier_readings(tx: Session, sha256: str) -> list[EarlierReading]:
    """Return every place where an original of these bytes is in use."""
    query = (
        select(
            recordings.Recording,
            Learner.code,
            practice.Block,
            recordings.TrialRecording.trial_id,
        )
        .join(recordings.Original, col(recordings.Original.id) == recordings.Recording.original_id)
        .join(Learner, col(Learner.id) == recordings.Recording.learner_id)
        .join(practice.Block, col(practice.Block.id) == recordings.Recording.block_id)
        .join(
            recordings.TrialRecording,
            col(recordings.TrialRecording.recording_id) == recordings.Recording.id,
        )
        .where(recordings.Original.sha256 == sha256)
        .order_by(col(recordings.Recording.id))
    )
    return [
        EarlierReading(
            learner=code,
            learner_id=row.learner_id,
            block_id=row.block_id,
            session_id=block.session_id,
            phase=block.phase,
            task=block.task,
            is_current=row.is_current,
            person=row.person,
            rule_digest=row.rule_digest,
            recording_id=row.id,
            trial_id=trial_id,
        )
        for row, code, block, trial_id in tx.exec(query).all()
    ]


def keep_original(tx: Session, stamp: Stamp, sha256: str, size_bytes: int) -> str:
    """Return the key of an original, storing its row if it is new; the file is there already."""
    known = tx.exec(
        select(recordings.Original.id).where(recordings.Original.sha256 == sha256)
    ).first()
    if known is not None:
        return known
    key = make_key()
    tx.add(recordings.Original(id=key, sha256=sha256, size_bytes=size_bytes, **stamp.as_columns()))
    tx.flush()
    return key


def add_recording(
    tx: Session,
    stamp: Stamp,
    *,
    original_id: str,
    learner_id: str,
    block_id: str,
    trial_id: str,
    rule: Mapping[str, Any],
    person: str = "",
    rate_hz: float | None = None,
    duration_s: float | None = None,
    replaces: str | None = None,
) -> str:
    """Add a reading of an original for a trial; return its key.

    ``replaces`` names the reading it follows: that one stays in history, no longer current.
    """
    if replaces is not None:
        tx.get_one(recordings.Recording, replaces).is_current = False
    digest = make_rule_digest(rule)
    known = tx.exec(
        select(recordings.Recording).where(
            recordings.Recording.original_id == original_id,
            recordings.Recording.learner_id == learner_id,
            recordings.Recording.block_id == block_id,
            recordings.Recording.person == person,
            recordings.Recording.rule_digest == digest,
        )
    ).first()
    if known is not None:
        known.is_current = True  # back to a rule that was used before
        key = known.id
    else:
        key = make_key()
        tx.add(
            recordings.Recording(
                id=key,
                original_id=original_id,
                learner_id=learner_id,
                block_id=block_id,
                person=person,
                rule=dict(rule),
                rule_digest=digest,
                rate_hz=rate_hz,
                duration_s=duration_s,
                **stamp.as_columns(),
            )
        )
    tx.flush()
    tx.merge(recordings.TrialRecording(trial_id=trial_id, recording_id=key, learner_id=learner_id))
    tx.flush()
    count_evidence(tx)
    return key


def drop_unused_originals(tx: Session) -> list[str]:
    """Delete the rows of originals that no recording uses; return their hashes."""
    unused = select(recordings.Original).where(
        ~col(recordings.Original.id).in_(select(recordings.Recording.original_id))
    )
    hashes = [row.sha256 for row in tx.exec(unused).all()]
    tx.exec(delete(recordings.Original).where(col(recordings.Original.sha256).in_(hashes)))
    return hashes
