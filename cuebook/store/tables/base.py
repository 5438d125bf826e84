"""What all tables share: names of constraints, keys, and who entered a row when."""

from datetime import datetime

from sqlalchemy import CheckConstraint
from sqlmodel import Field, SQLModel

from cuebook.store.column_types import Key, Moment, Whole, Words

# Set before any table: constraints must have names, or later revisions cannot change them.
SQLModel.metadata.naming_convention = {
    "ix": "ix_%(table_name)s_%(column_0_N_name)s",
    "uq": "uq_%(table_name)s_%(column_0_N_name)s",
    "ck": "ck_%(table_name)s_%(constraint_name)s",
    "fk": "fk_%(table_name)s_%(column_0_N_name)s_%(referred_table_name)s",
    "pk": "pk_%(table_name)s",
}

STRICT = {"sqlite_strict": True}


def one_of(column: str, words: tuple[str, ...]) -> CheckConstraint:
    """Return a named constraint that a column holds one of some words, or nothing."""
    listed = ", ".join(f"'{word}'" for word in words)
    return CheckConstraint(f"{column} IN ({listed})", name=column)


def flag(column: str) -> CheckConstraint:
    """Return a named constraint that a column holds 0 or 1."""
    return CheckConstraint(f"{column} IN (0, 1)", name=column)


class Stamped(SQLModel):
    """Who entered a row, when it happened and when it was entered."""

    entered_by: str = Field(sa_type=Words)
    entered_at: datetime = Field(sa_type=Moment)
    occurred_at: datetime = Field(sa_type=Moment)
    occurred_zone: str = Field(sa_type=Words)
    revision: int = Field(default=1, sa_type=Whole)


class Entered(Stamped):
    """A row a user enters, under a key made by the client."""

    id: str = Field(primary_key=True, sa_type=Key)
