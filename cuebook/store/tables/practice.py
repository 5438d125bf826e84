"""Tables of practice: sessions, blocks, participations, uses, trials, schedules."""

from datetime import datetime
from typing import ClassVar

from sqlalchemy import CheckConstraint, UniqueConstraint
from sqlmodel import Field, SQLModel

from cuebook.store.column_types import Document, Flag, Key, Moment, Number, Whole, Words
from cuebook.store.tables.base import STRICT, Entered, Stamped, flag, one_of
from cuebook.store.words import (
    CHOSEN,
    CYCLES,
    DELIVERERS,
    DELIVERIES,
    EVENTS,
    OBSERVED,
    OTHERS,
    PHASES,
    PRESENCE,
    REACTIONS,
    SIDES,
    STOPS,
)


class Protocol(Entered, table=True):
    """A set-up: points, target, beat, surface, seat height, aid, footwear, help given."""

    __tablename__: ClassVar[str] = "protocol"
    __table_args__ = (UniqueConstraint("digest"), STRICT)
    facts: dict[str, str] = Field(default_factory=dict, sa_type=Document)
    digest: str = Field(sa_type=Words)


class Session(Entered, table=True):
    """One meeting of a learner or a group; ``occurred_at`` is its start."""

    __tablename__: ClassVar[str] = "session"
    __table_args__ = (
        CheckConstraint("(learner_id IS NULL) != (group_id IS NULL)", name="whose"),
        flag("is_date_only"),
        flag("do_not_use"),
        STRICT,
    )
    learner_id: str | None = Field(
        default=None, sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True
    )
    group_id: str | None = Field(
        default=None, sa_type=Key, foreign_key="learner_group.id", ondelete="CASCADE", index=True
    )
    ended_at: datetime | None = Field(default=None, sa_type=Moment)
    is_date_only: bool = Field(default=False, sa_type=Flag)
    do_not_use: bool = Field(default=False, sa_type=Flag)


class Block(Entered, table=True):
    """One block of a session: a phase, a task, at most one lead cue."""

    __tablename__: ClassVar[str] = "block"
    __table_args__ = (
        UniqueConstraint("session_id", "number"),
        one_of("phase", PHASES),
        one_of("side", SIDES),
        one_of("others", OTHERS),
        one_of("chosen", CHOSEN),
        one_of("cycle", CYCLES),
        one_of("delivery", DELIVERIES),
        one_of("delivered_by", DELIVERERS),
        CheckConstraint("wording_id IS NULL OR phase = 'acquisition'", name="cue_in_practice"),
        CheckConstraint("number >= 1", name="number"),
        STRICT,
    )
    session_id: str = Field(sa_type=Key, foreign_key="session.id", ondelete="CASCADE")
    number: int = Field(sa_type=Whole)
    phase: str = Field(sa_type=Words)
    task: str = Field(sa_type=Words)
    side: str | None = Field(default=None, sa_type=Words)
    tempo: float | None = Field(default=None, sa_type=Number)
    cycle: str | None = Field(default=None, sa_type=Words)
    protocol_id: str | None = Field(default=None, sa_type=Key, foreign_key="protocol.id")
    wording_id: str | None = Field(default=None, sa_type=Key, foreign_key="wording.id", index=True)
    others: str = Field(default="none", sa_type=Words)
    chosen: str | None = Field(default=None, sa_type=Words)
    delivery: str | None = Field(default=None, sa_type=Words)
    delivered_by: str | None = Field(default=None, sa_type=Words)
    event_id: str | None = Field(default=None, sa_type=Key)
    slot_id: str | None = Field(
        default=None, sa_type=Key, foreign_key="slot.id", ondelete="SET NULL", index=True
    )
    cue_entered_at: datetime = Field(sa_type=Moment)


class Participation(Entered, table=True):
    """One learner in one block, with a snapshot of what may change later."""

    __tablename__: ClassVar[str] = "participation"
    __table_args__ = (
        UniqueConstraint("block_id", "learner_id"),
        one_of("presence", PRESENCE),
        STRICT,
    )
    block_id: str = Field(sa_type=Key, foreign_key="block.id", ondelete="CASCADE")
    learner_id: str = Field(sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True)
    presence: str = Field(default="present", sa_type=Words)
    age_band: str | None = Field(default=None, sa_type=Words)
    experience: str | None = Field(default=None, sa_type=Words)
    backgrounds: list[str] = Field(default_factory=list, sa_type=Document)
    checks: dict[str, str] = Field(default_factory=dict, sa_type=Document)


class Use(Stamped, table=True):
    """A participation in practice: what was said to whom, and what followed."""

    __tablename__: ClassVar[str] = "use"
    __table_args__ = (
        one_of("observed", OBSERVED),
        one_of("reaction", REACTIONS),
        one_of("stop_reason", STOPS),
        CheckConstraint("times_said >= 0", name="times_said"),
        CheckConstraint("attempts >= 0", name="attempts"),
        CheckConstraint("minutes >= 0", name="minutes"),
        STRICT,
    )
    participation_id: str = Field(
        primary_key=True, sa_type=Key, foreign_key="participation.id", ondelete="CASCADE"
    )
    learner_id: str = Field(sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True)
    times_said: int | None = Field(default=None, sa_type=Whole)
    attempts: int | None = Field(default=None, sa_type=Whole)
    minutes: float | None = Field(default=None, sa_type=Number)
    observed: str | None = Field(default=None, sa_type=Words)
    reaction: str | None = Field(default=None, sa_type=Words)
    words: str | None = Field(default=None, sa_type=Words)
    stop_reason: str | None = Field(default=None, sa_type=Words)
    stopped_at: datetime | None = Field(default=None, sa_type=Moment)


class Happening(Entered, table=True):
    """Pain, a near-fall, a fall: one learner, with or without a cue."""

    __tablename__: ClassVar[str] = "happening"
    __table_args__ = (one_of("event", EVENTS), STRICT)
    participation_id: str = Field(
        sa_type=Key, foreign_key="participation.id", ondelete="CASCADE", index=True
    )
    learner_id: str = Field(sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True)
    event: str = Field(sa_type=Words)


class Trial(Entered, table=True):
    """One attempt."""

    __tablename__: ClassVar[str] = "trial"
    __table_args__ = (
        UniqueConstraint("participation_id", "number"),
        flag("is_valid"),
        CheckConstraint("number >= 1", name="number"),
        STRICT,
    )
    participation_id: str = Field(sa_type=Key, foreign_key="participation.id", ondelete="CASCADE")
    learner_id: str = Field(sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True)
    number: int = Field(sa_type=Whole)
    is_valid: bool = Field(default=True, sa_type=Flag)


class Schedule(Entered, table=True):
    """An order drawn by the program before the first measure, with its rule and seed."""

    __tablename__: ClassVar[str] = "schedule"
    __table_args__ = (
        CheckConstraint("(learner_id IS NULL) != (group_id IS NULL)", name="whose"),
        STRICT,
    )
    learner_id: str | None = Field(
        default=None, sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True
    )
    group_id: str | None = Field(
        default=None, sa_type=Key, foreign_key="learner_group.id", ondelete="CASCADE"
    )
    task: str = Field(sa_type=Words)
    rule: str = Field(sa_type=Words)
    seed: int = Field(sa_type=Whole)
    arms: list[str | None] = Field(default_factory=list, sa_type=Document)


class Slot(SQLModel, table=True):
    """One place in a schedule; no cue is practice alone."""

    __tablename__: ClassVar[str] = "slot"
    __table_args__ = (UniqueConstraint("schedule_id", "place"), STRICT)
    id: str = Field(primary_key=True, sa_type=Key)
    schedule_id: str = Field(sa_type=Key, foreign_key="schedule.id", ondelete="CASCADE")
    learner_id: str | None = Field(
        default=None, sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True
    )
    place: int = Field(sa_type=Whole)
    cue: str | None = Field(default=None, sa_type=Words)
