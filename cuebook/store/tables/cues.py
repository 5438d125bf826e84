"""Tables of cues: the idea, its wordings, claims, tags and problem phrases."""

from typing import ClassVar

from sqlalchemy import UniqueConstraint
from sqlmodel import Field, SQLModel

from cuebook.store.column_types import Key, Number, Whole, Words
from cuebook.store.tables.base import STRICT, Entered, one_of
from cuebook.store.words import CLAIM_WORDS, CYCLES, FOCUSES, KINDS, STATUSES

TAG_KINDS = (
    "task",
    "region",
    "experience",
    "background_good",
    "background_avoid",
    "access_avoid",
    "note_avoid",
)


class Cue(Entered, table=True):
    """One idea that is said."""

    __tablename__: ClassVar[str] = "cue"
    __table_args__ = (
        UniqueConstraint("code"),
        one_of("kind", KINDS),
        one_of("focus", FOCUSES),
        one_of("status", STATUSES),
        one_of("cycle", CYCLES),
        STRICT,
    )
    code: str = Field(sa_type=Words)
    set_code: str = Field(default="", sa_type=Words)
    kind: str = Field(sa_type=Words)
    focus: str = Field(sa_type=Words)
    pair: str = Field(default="", sa_type=Words)
    sister_of: str | None = Field(default=None, sa_type=Words)
    status: str = Field(default="ready", sa_type=Words)
    problem: str = Field(default="", sa_type=Words)
    cycle: str | None = Field(default=None, sa_type=Words)
    rate_low: float | None = Field(default=None, sa_type=Number)
    rate_high: float | None = Field(default=None, sa_type=Number)
    age_low: int | None = Field(default=None, sa_type=Whole)
    age_high: int | None = Field(default=None, sa_type=Whole)
    captures: str = Field(default="", sa_type=Words)
    leaves_out: str = Field(default="", sa_type=Words)
    caution: str = Field(default="", sa_type=Words)
    target_metric: str | None = Field(default=None, sa_type=Words)
    watch_metric: str | None = Field(default=None, sa_type=Words)


class Wording(Entered, table=True):
    """The exact words of a cue in one language; ``revision`` counts within the language."""

    __tablename__: ClassVar[str] = "wording"
    __table_args__ = (UniqueConstraint("cue_id", "language", "revision"), STRICT)
    cue_id: str = Field(sa_type=Key, foreign_key="cue.id", ondelete="CASCADE")
    text: str = Field(sa_type=Words)
    language: str = Field(default="en", sa_type=Words)
    replaces: int | None = Field(default=None, sa_type=Whole)


class Claim(SQLModel, table=True):
    """What a cue is said to do to one feature."""

    __tablename__: ClassVar[str] = "claim"
    __table_args__ = (one_of("says", CLAIM_WORDS), STRICT)
    cue_id: str = Field(primary_key=True, sa_type=Key, foreign_key="cue.id", ondelete="CASCADE")
    feature: str = Field(primary_key=True, sa_type=Words)
    says: str = Field(sa_type=Words)
    place: int = Field(default=0, sa_type=Whole)


class CueTag(SQLModel, table=True):
    """A word by which a cue is found or kept away."""

    __tablename__: ClassVar[str] = "cue_tag"
    __table_args__ = (one_of("kind", TAG_KINDS), STRICT)
    cue_id: str = Field(primary_key=True, sa_type=Key, foreign_key="cue.id", ondelete="CASCADE")
    kind: str = Field(primary_key=True, sa_type=Words)
    word: str = Field(primary_key=True, sa_type=Words)
    place: int = Field(default=0, sa_type=Whole)


class ProblemPhrase(Entered, table=True):
    """A way in which people have put the problem."""

    __tablename__: ClassVar[str] = "problem_phrase"
    __table_args__ = (UniqueConstraint("cue_id", "place"), STRICT)
    cue_id: str = Field(sa_type=Key, foreign_key="cue.id", ondelete="CASCADE")
    phrase: str = Field(sa_type=Words)
    place: int = Field(default=0, sa_type=Whole)
