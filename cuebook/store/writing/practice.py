"""Write sessions, blocks, participations, uses, trials and typed values."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from datetime import datetime, timedelta

from sqlmodel import Session, col, func, select

from cuebook.errors import UnknownCodeError
from cuebook.store.canonical import make_digest
from cuebook.store.keys import make_key
from cuebook.store.stamps import Stamp
from cuebook.store.tables import practice as tables
from cuebook.store.tables.people import Learner, LearnerBackground
from cuebook.store.writing.measurements import TYPED_CHOICES, Measured, add_measurements
from cuebook.store.writing.revisions import count_evidence


@dataclass(frozen=True, slots=True)
class NewBlock:
    """A block as it is written."""

    phase: str
    task: str
    side: str | None = None
    wording_id: str | None = None
    others: str = "none"
    chosen: str | None = None
    event_id: str | None = None
    slot_id: str | None = None
    tempo: float | None = None
    cycle: str | None = None
    protocol: Mapping[str, str] = field(default_factory=dict)
    delivery: str | None = None
    """Spoken, shown …; None: not noted."""
    delivered_by: str | None = None
    """teacher or assistant; None: not noted."""


@dataclass(frozen=True, slots=True)
class NewUse:
    """What was said to one learner in practice, and what followed."""

    times_said: int | None = None
    attempts: int | None = None
    minutes: float | None = None
    observed: str | None = None
    reaction: str | None = None
    words: str | None = None
    stop_reason: str | None = None


def start_session(
    tx: Session,
    stamp: Stamp,
    *,
    learner_id: str | None = None,
    group_id: str | None = None,
) -> str:
    """Start a session of a learner or of a group; return its key."""
    key = make_key()
    tx.add(tables.Session(id=key, learner_id=learner_id, group_id=group_id, **stamp.as_columns()))
    tx.flush()
    return key


def end_session(tx: Session, session_id: str, ended_at: datetime) -> None:
    """Note when a session ended."""
    get_session(tx, session_id).ended_at = ended_at


def get_session(tx: Session, session_id: str) -> tables.Session:
    """Return a session's row, for use inside the transaction only."""
    found = tx.get(tables.Session, session_id)
    if found is None:
        raise UnknownCodeError(
            f"Unknown session '{session_id}'.", "List them with: cuebook session list"
        )
    return found


def get_block(tx: Session, block_id: str) -> tables.Block:
    """Return a block's row, for use inside the transaction only."""
    found = tx.get(tables.Block, block_id)
    if found is None:
        raise UnknownCodeError(f"Unknown block '{block_id}'.", "See: cuebook session show.")
    return found


def find_open_session(
    tx: Session,
    day_start: datetime,
    day_end: datetime,
    *,
    learner_id: str | None = None,
    group_id: str | None = None,
) -> str | None:
    """Return the newest session of a day that has not ended, if there is one."""
    query = (
        select(tables.Session.id)
        .where(
            tables.Session.learner_id == learner_id,
            tables.Session.group_id == group_id,
            col(tables.Session.ended_at).is_(None),
            col(tables.Session.occurred_at) >= day_start,
            col(tables.Session.occurred_at) < day_end,
        )
        .order_by(col(tables.Session.occurred_at).desc(), col(tables.Session.id).desc())
    )
    return tx.exec(query).first()


def add_block(tx: Session, stamp: Stamp, session_id: str, new: NewBlock) -> str:
    """Add a block to a session at its place in time; return its key.

    Blocks of the same minute keep the order in which they were entered.
    """
    key = make_key()
    tx.add(
        tables.Block(
            id=key,
            session_id=session_id,
            number=_make_room(tx, session_id, stamp.occurred_at),
            phase=new.phase,
            task=new.task,
            side=new.side,
            tempo=new.tempo,
            cycle=new.cycle,
            protocol_id=keep_protocol(tx, stamp, new.protocol),
            wording_id=new.wording_id,
            others=new.others,
            chosen=new.chosen,
            event_id=new.event_id,
            slot_id=new.slot_id,
            delivery=new.delivery,
            delivered_by=new.delivered_by,
            cue_entered_at=stamp.entered_at,
            **stamp.as_columns(),
        )
    )
    tx.flush()
    count_evidence(tx)
    return key


def _make_room(tx: Session, session_id: str, occurred_at: datetime) -> int:
    """Return the number of a block that happened then; later ones move back by one."""
    next_minute = occurred_at.replace(second=0, microsecond=0) + timedelta(minutes=1)
    rows = tx.exec(
        select(tables.Block)
        .where(tables.Block.session_id == session_id)
        .order_by(col(tables.Block.number).desc())
    ).all()
    number = (rows[0].number if rows else 0) + 1
    for row in rows:
        if row.occurred_at < next_minute:
            break
        number = row.number
        row.number += 1
        tx.flush()  # one at a time from the back: no two blocks share a number
    return number


def keep_protocol(tx: Session, stamp: Stamp, facts: Mapping[str, str]) -> str | None:
    """Return the key of a set-up, storing it if it is new; None if nothing is said of it."""
    if not facts:
        return None
    digest = make_digest(facts)
    known = tx.exec(select(tables.Protocol.id).where(tables.Protocol.digest == digest)).first()
    if known is not None:
        return known
    key = make_key()
    tx.add(tables.Protocol(id=key, facts=dict(facts), digest=digest, **stamp.as_columns()))
    tx.flush()
    return key


def add_participation(
    tx: Session,
    stamp: Stamp,
    block_id: str,
    learner_id: str,
    *,
    presence: str = "present",
    checks: Mapping[str, str] | None = None,
) -> str:
    """Put a learner into a block with a snapshot of what may change later; return the key."""
    known = tx.exec(
        select(tables.Participation.id).where(
            tables.Participation.block_id == block_id,
            tables.Participation.learner_id == learner_id,
        )
    ).first()
    if known is not None:
        return known
    learner = tx.get_one(Learner, learner_id)
    backgrounds = tx.exec(
        select(LearnerBackground.background).where(LearnerBackground.learner_id == learner_id)
    ).all()
    key = make_key()
    tx.add(
        tables.Participation(
            id=key,
            block_id=block_id,
            learner_id=learner_id,
            presence=presence,
            age_band=learner.age_band,
            experience=learner.experience,
            backgrounds=sorted(backgrounds),
            checks=dict(checks or {}),
            **stamp.as_columns(),
        )
    )
    tx.flush()
    return key


def add_use(tx: Session, stamp: Stamp, participation_id: str, learner_id: str, new: NewUse) -> None:
    """Note what was said to one learner in practice, and what followed."""
    tx.add(
        tables.Use(
            participation_id=participation_id,
            learner_id=learner_id,
            times_said=new.times_said,
            attempts=new.attempts,
            minutes=new.minutes,
            observed=new.observed,
            reaction=new.reaction,
            words=new.words,
            stop_reason=new.stop_reason,
            stopped_at=stamp.occurred_at if new.stop_reason else None,
            **stamp.as_columns(),
        )
    )
    tx.flush()
    count_evidence(tx)


def keep_use(tx: Session, participation_id: str, learner_id: str) -> None:
    """Note that a participation is a use, if that is not noted yet."""
    if tx.get(tables.Use, participation_id) is not None:
        return
    part = tx.get_one(tables.Participation, participation_id)
    stamp = Stamp(part.occurred_at, part.occurred_zone, part.entered_at, part.entered_by)
    add_use(tx, stamp, participation_id, learner_id, NewUse())


def add_happenings(
    tx: Session,
    stamp: Stamp,
    participation_id: str,
    learner_id: str,
    events: Sequence[str],
) -> None:
    """Note pain, near-falls and the like, with or without a cue."""
    for event in events:
        tx.add(
            tables.Happening(
                id=make_key(),
                participation_id=participation_id,
                learner_id=learner_id,
                event=event,
                **stamp.as_columns(),
            )
        )
    if events:
        tx.flush()
        count_evidence(tx)


def add_trial(tx: Session, stamp: Stamp, participation_id: str, learner_id: str) -> str:
    """Add one attempt at the end of a participation; return its key."""
    last = tx.exec(
        select(func.max(tables.Trial.number)).where(
            tables.Trial.participation_id == participation_id
        )
    ).one()
    key = make_key()
    tx.add(
        tables.Trial(
            id=key,
            participation_id=participation_id,
            learner_id=learner_id,
            number=(last or 0) + 1,
            **stamp.as_columns(),
        )
    )
    tx.flush()
    return key


def add_typed_values(
    tx: Session,
    stamp: Stamp,
    participation_id: str,
    learner_id: str,
    values: Mapping[str, Sequence[float]],
) -> int:
    """Add typed numbers, one trial each in the order made; return how many trials.

    Numbers of several metrics at the same place belong to the same trial.
    """
    n_trials = max((len(numbers) for numbers in values.values()), default=0)
    for place in range(n_trials):
        trial_id = add_trial(tx, stamp, participation_id, learner_id)
        measured = [
            Measured(metric, float(numbers[place]), TYPED_CHOICES)
            for metric, numbers in values.items()
            if place < len(numbers)
        ]
        add_measurements(tx, trial_id, learner_id, measured)
    if n_trials:
        count_evidence(tx)
    return n_trials


def add_schedule(
    tx: Session,
    stamp: Stamp,
    learner_id: str,
    *,
    task: str,
    rule: str,
    seed: int,
    arms: Sequence[str | None],
    slots: Sequence[str | None],
) -> tuple[str, ...]:
    """Store an order drawn by the program; return the keys of its slots in order."""
    key = make_key()
    tx.add(
        tables.Schedule(
            id=key,
            learner_id=learner_id,
            task=task,
            rule=rule,
            seed=seed,
            arms=list(arms),
            **stamp.as_columns(),
        )
    )
    tx.flush()
    made = []
    for place, cue in enumerate(slots):
        slot_id = make_key()
        tx.add(
            tables.Slot(id=slot_id, schedule_id=key, learner_id=learner_id, place=place, cue=cue)
        )
        made.append(slot_id)
    tx.flush()
    return tuple(made)
