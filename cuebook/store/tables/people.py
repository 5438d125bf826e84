"""Tables of people: staff, learners, what must be known of them, groups, goals."""

from datetime import datetime
from typing import ClassVar

from sqlalchemy import CheckConstraint, UniqueConstraint
from sqlmodel import Field

from cuebook.store.column_types import Document, Flag, Key, Moment, Number, Words
from cuebook.store.tables.base import STRICT, Entered, flag, one_of
from cuebook.store.words import (
    AGE_BANDS,
    ANSWERS,
    ASSENTS,
    CONSENT_GIVERS,
    CONSENT_ITEMS,
    CONSENT_WAYS,
    DIRECTIONS,
    EXPERIENCES,
    GOAL_STATUSES,
    SAFETY_ACTIONS,
)


class Staff(Entered, table=True):
    """Somebody who teaches or enters."""

    __tablename__: ClassVar[str] = "staff"
    __table_args__ = (UniqueConstraint("code"), STRICT)
    code: str = Field(sa_type=Words)
    role: str = Field(default="", sa_type=Words)


class Learner(Entered, table=True):
    """A learner under a code of two plain words."""

    __tablename__: ClassVar[str] = "learner"
    __table_args__ = (
        UniqueConstraint("code"),
        one_of("age_band", AGE_BANDS),
        one_of("experience", EXPERIENCES),
        flag("is_returning"),
        flag("is_demo"),
        STRICT,
    )
    code: str = Field(sa_type=Words)
    age_band: str | None = Field(default=None, sa_type=Words)
    experience: str | None = Field(default=None, sa_type=Words)
    is_returning: bool = Field(default=False, sa_type=Flag)
    language: str = Field(default="en", sa_type=Words)
    is_demo: bool = Field(default=False, sa_type=Flag)


class LearnerBackground(Entered, table=True):
    """Work or leisure a learner knows."""

    __tablename__: ClassVar[str] = "learner_background"
    __table_args__ = (UniqueConstraint("learner_id", "background"), STRICT)
    learner_id: str = Field(sa_type=Key, foreign_key="learner.id", ondelete="CASCADE")
    background: str = Field(sa_type=Words)


class LearnerNeed(Entered, table=True):
    """An access need of a learner."""

    __tablename__: ClassVar[str] = "learner_need"
    __table_args__ = (UniqueConstraint("learner_id", "access_need"), STRICT)
    learner_id: str = Field(sa_type=Key, foreign_key="learner.id", ondelete="CASCADE")
    access_need: str = Field(sa_type=Words)


class LocalName(Entered, table=True):
    """A name on this machine only: never exported, reported or shown in a shared view."""

    __tablename__: ClassVar[str] = "local_name"
    __table_args__ = (UniqueConstraint("learner_id"), STRICT)
    learner_id: str = Field(sa_type=Key, foreign_key="learner.id", ondelete="CASCADE")
    name: str = Field(sa_type=Words)


class Consent(Entered, table=True):
    """One answer to one consent item; the newest counts."""

    __tablename__: ClassVar[str] = "consent"
    __table_args__ = (
        one_of("item", CONSENT_ITEMS),
        one_of("answer", ANSWERS),
        one_of("given_by", CONSENT_GIVERS),
        one_of("how", CONSENT_WAYS),
        one_of("assent", ASSENTS),
        STRICT,
    )
    learner_id: str = Field(sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True)
    item: str = Field(sa_type=Words)
    answer: str = Field(sa_type=Words)
    given_by: str = Field(sa_type=Words)
    how: str = Field(sa_type=Words)
    assent: str = Field(default="not_applicable", sa_type=Words)


class SafetyNote(Entered, table=True):
    """A note on safety: hard ones bar cues, soft ones are shown; an action is shown once."""

    __tablename__: ClassVar[str] = "safety_note"
    __table_args__ = (flag("is_hard"), one_of("show_once", SAFETY_ACTIONS), STRICT)
    learner_id: str = Field(sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True)
    slug: str | None = Field(default=None, sa_type=Words)
    words: str = Field(default="", sa_type=Words)
    is_hard: bool = Field(default=False, sa_type=Flag)
    tasks: list[str] = Field(default_factory=list, sa_type=Document)
    features: list[str] = Field(default_factory=list, sa_type=Document)
    show_once: str | None = Field(default=None, sa_type=Words)
    shown_at: datetime | None = Field(default=None, sa_type=Moment)


class Hold(Entered, table=True):
    """A hard stop for tasks until somebody clears it; who cleared is recorded."""

    __tablename__: ClassVar[str] = "hold"
    __table_args__ = (STRICT,)
    learner_id: str = Field(sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True)
    task: str = Field(sa_type=Words)
    until: str = Field(sa_type=Words)
    by_role: str = Field(sa_type=Words)
    cleared_at: datetime | None = Field(default=None, sa_type=Moment)
    cleared_by: str | None = Field(default=None, sa_type=Words)


class LearnerGroup(Entered, table=True):
    """Learners who meet together."""

    __tablename__: ClassVar[str] = "learner_group"
    __table_args__ = (UniqueConstraint("code"), STRICT)
    code: str = Field(sa_type=Words)
    label: str = Field(default="", sa_type=Words)


class Membership(Entered, table=True):
    """Who belongs to a group, from when to when."""

    __tablename__: ClassVar[str] = "membership"
    __table_args__ = (STRICT,)
    group_id: str = Field(
        sa_type=Key, foreign_key="learner_group.id", ondelete="CASCADE", index=True
    )
    learner_id: str = Field(sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True)
    joined_at: datetime = Field(sa_type=Moment)
    left_at: datetime | None = Field(default=None, sa_type=Moment)


class Goal(Entered, table=True):
    """What a learner or a group works towards."""

    __tablename__: ClassVar[str] = "goal"
    __table_args__ = (
        CheckConstraint("(learner_id IS NULL) != (group_id IS NULL)", name="whose"),
        one_of("status", GOAL_STATUSES),
        one_of("direction", DIRECTIONS),
        STRICT,
    )
    learner_id: str | None = Field(
        default=None, sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True
    )
    group_id: str | None = Field(
        default=None, sa_type=Key, foreign_key="learner_group.id", ondelete="CASCADE"
    )
    words: str = Field(default="", sa_type=Words)
    status: str = Field(default="active", sa_type=Words)
    icf: str | None = Field(default=None, sa_type=Words)
    task: str = Field(sa_type=Words)
    feature: str | None = Field(default=None, sa_type=Words)
    metric: str | None = Field(default=None, sa_type=Words)
    direction: str | None = Field(default=None, sa_type=Words)
    target: float | None = Field(default=None, sa_type=Number)
    tempo: float | None = Field(default=None, sa_type=Number)
    worthwhile: float | None = Field(default=None, sa_type=Number)
    worthwhile_set_at: datetime | None = Field(default=None, sa_type=Moment)
