"""Tables of recordings and of what was measured from them."""

from typing import Any, ClassVar

from sqlalchemy import CheckConstraint, UniqueConstraint
from sqlmodel import Field, SQLModel

from cuebook.store.column_types import Document, Flag, Key, Number, Whole, Words
from cuebook.store.tables.base import STRICT, Entered, flag


class Original(Entered, table=True):
    """The unchanged bytes of an imported file; they lie in the folder beside the database.

    ``unblanked_sha256`` is the hash of the file as it came, if header fields that seemed to name
    somebody were blanked before it was kept.
    """

    __tablename__: ClassVar[str] = "original"
    __table_args__ = (
        UniqueConstraint("sha256"),
        CheckConstraint("size_bytes >= 0", name="size_bytes"),
        STRICT,
    )
    sha256: str = Field(sa_type=Words)
    size_bytes: int = Field(sa_type=Whole)
    unblanked_sha256: str | None = Field(default=None, sa_type=Words)


class Recording(Entered, table=True):
    """One original read under one rule; the newest reading of a trial counts."""

    __tablename__: ClassVar[str] = "recording"
    __table_args__ = (
        UniqueConstraint("original_id", "learner_id", "block_id", "person", "rule_digest"),
        flag("is_current"),
        STRICT,
    )
    original_id: str = Field(sa_type=Key, foreign_key="original.id")
    learner_id: str = Field(sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True)
    block_id: str = Field(sa_type=Key, foreign_key="block.id", ondelete="CASCADE", index=True)
    person: str = Field(default="", sa_type=Words)
    rule: dict[str, Any] = Field(default_factory=dict, sa_type=Document)
    rule_digest: str = Field(sa_type=Words)
    rate_hz: float | None = Field(default=None, sa_type=Number)
    duration_s: float | None = Field(default=None, sa_type=Number)
    is_current: bool = Field(default=True, sa_type=Flag)


class TrialRecording(SQLModel, table=True):
    """Which recording, or which part of it, shows a trial."""

    __tablename__: ClassVar[str] = "trial_recording"
    __table_args__ = (STRICT,)
    trial_id: str = Field(primary_key=True, sa_type=Key, foreign_key="trial.id", ondelete="CASCADE")
    recording_id: str = Field(
        primary_key=True, sa_type=Key, foreign_key="recording.id", ondelete="CASCADE", index=True
    )
    learner_id: str = Field(sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True)
    segment: str = Field(default="", sa_type=Words)


class Recipe(SQLModel, table=True):
    """The choices behind values, as canonical JSON and its hash."""

    __tablename__: ClassVar[str] = "recipe"
    __table_args__ = (UniqueConstraint("digest"), STRICT)
    id: int | None = Field(default=None, primary_key=True)
    digest: str = Field(sa_type=Words)
    choices: dict[str, Any] = Field(default_factory=dict, sa_type=Document)


class Measurement(SQLModel, table=True):
    """One value of one trial: never changed, only followed by a newer reading."""

    __tablename__: ClassVar[str] = "measurement"
    __table_args__ = (
        CheckConstraint("(value IS NULL) = (reason IS NOT NULL)", name="value_or_reason"),
        CheckConstraint("n_used >= 0", name="n_used"),
        {"sqlite_strict": True, "sqlite_with_rowid": False},
    )
    trial_id: str = Field(primary_key=True, sa_type=Key, foreign_key="trial.id", ondelete="CASCADE")
    metric: str = Field(primary_key=True, sa_type=Words, index=True)
    recipe_id: int = Field(primary_key=True, foreign_key="recipe.id")
    segment: str = Field(default="", primary_key=True, sa_type=Words)
    recording_id: str = Field(default="", primary_key=True, sa_type=Words)
    learner_id: str = Field(sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True)
    value: float | None = Field(default=None, sa_type=Number)
    reason: str | None = Field(default=None, sa_type=Words)
    n_used: int = Field(default=1, sa_type=Whole)
    flags: list[str] = Field(default_factory=list, sa_type=Document)
    quality: dict[str, Any] = Field(default_factory=dict, sa_type=Document)
