"""Tables of upkeep: corrections, drafts, counters, stored rankings."""

from datetime import datetime
from typing import Any, ClassVar

from sqlmodel import Field, SQLModel

from cuebook.store.column_types import Document, Key, Moment, Whole, Words
from cuebook.store.tables.base import STRICT, Entered, one_of

COUNTED = ("cues", "evidence")


class Correction(Entered, table=True):
    """An altered field: the old value stays, with who, when and why."""

    __tablename__: ClassVar[str] = "correction"
    __table_args__ = (STRICT,)
    learner_id: str | None = Field(
        default=None, sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True
    )
    table_name: str = Field(sa_type=Words)
    row_key: str = Field(sa_type=Words)
    field: str = Field(sa_type=Words)
    old: Any = Field(default=None, sa_type=Document, nullable=True)
    new: Any = Field(default=None, sa_type=Document, nullable=True)
    why: str = Field(default="", sa_type=Words)


class Draft(SQLModel, table=True):
    """What is being typed, so that nothing is lost when the terminal closes."""

    __tablename__: ClassVar[str] = "draft"
    __table_args__ = (STRICT,)
    place: str = Field(primary_key=True, sa_type=Words)
    learner_id: str | None = Field(
        default=None, sa_type=Key, foreign_key="learner.id", ondelete="CASCADE", index=True
    )
    content: Any = Field(default=None, sa_type=Document)
    saved_at: datetime = Field(sa_type=Moment)


class LibraryRevision(SQLModel, table=True):
    """A counter that grows with every change of cues, or of what evidence rests on."""

    __tablename__: ClassVar[str] = "library_revision"
    __table_args__ = (one_of("what", COUNTED), STRICT)
    what: str = Field(primary_key=True, sa_type=Words)
    revision: int = Field(default=0, sa_type=Whole)


class RankingCache(SQLModel, table=True):
    """The last ranking of a question, with the evidence it was made from."""

    __tablename__: ClassVar[str] = "ranking_cache"
    __table_args__ = (STRICT,)
    question: str = Field(primary_key=True, sa_type=Words)
    evidence_revision: int = Field(sa_type=Whole)
    engine: str = Field(sa_type=Words)
    n_uses: int = Field(sa_type=Whole)
    made_at: datetime = Field(sa_type=Moment)
    document: dict[str, Any] = Field(default_factory=dict, sa_type=Document)
