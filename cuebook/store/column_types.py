"""Column types that mean the same on every engine, and are plain on SQLite's STRICT tables.

Each one converts at the boundary: numpy scalars become plain numbers, and what one of the
engines would keep differently (NaN, NUL in a text, a time without a zone) is refused.
"""

from __future__ import annotations

import json
import math
import operator
from datetime import UTC, datetime
from typing import Any

from sqlalchemy import BigInteger, Boolean, Dialect, Float, Text
from sqlalchemy.dialects import postgresql
from sqlalchemy.ext.compiler import compiles
from sqlalchemy.types import TypeDecorator, TypeEngine

from cuebook.errors import InputError
from cuebook.store.canonical import check_text, make_canonical
from cuebook.store.moments import format_moment, parse_moment

_LARGEST_WHOLE = 2**63 - 1


@compiles(Boolean, "sqlite")
def _name_boolean(_type: Boolean, _compiler: Any, **_given: Any) -> str:
    return "INTEGER"


@compiles(BigInteger, "sqlite")
def _name_whole(_type: BigInteger, _compiler: Any, **_given: Any) -> str:
    return "INTEGER"


@compiles(Float, "sqlite")
def _name_float(_type: Float[Any], _compiler: Any, **_given: Any) -> str:
    return "REAL"


class Key(TypeDecorator[str]):
    """A UUID: native on PostgreSQL, text on SQLite."""

    impl = Text
    cache_ok = True

    def load_dialect_impl(self, dialect: Dialect) -> TypeEngine[Any]:
        """Return the engine's own type."""
        if dialect.name == "postgresql":
            return dialect.type_descriptor(postgresql.UUID(as_uuid=False))
        return dialect.type_descriptor(Text())


class Words(TypeDecorator[str]):
    """Text a user may have typed: NUL and lone surrogates are refused on every engine."""

    impl = Text
    cache_ok = True

    def process_bind_param(self, value: str | None, dialect: Dialect) -> str | None:
        """Refuse what one of the engines could not keep."""
        del dialect
        return None if value is None else check_text(value)


class Whole(TypeDecorator[int]):
    """A whole number of 64 bits."""

    impl = BigInteger
    cache_ok = True

    def process_bind_param(self, value: Any, dialect: Dialect) -> int | None:
        """Unpack numpy's whole numbers, which SQLite would keep as raw bytes."""
        del dialect
        if value is None:
            return None
        try:
            number = operator.index(value)
        except TypeError as error:
            raise InputError(f"{value!r} is not a whole number.", "Give one, such as 3.") from error
        if abs(number) > _LARGEST_WHOLE:
            raise InputError(f"{number} is too large to be stored.", "Give a smaller number.")
        return number


class Flag(TypeDecorator[bool]):
    """Yes or no."""

    impl = Boolean
    cache_ok = True

    def process_bind_param(self, value: Any, dialect: Dialect) -> bool | None:
        """Unpack numpy's truth values; refuse anything but yes and no."""
        del dialect
        if value is None:
            return None
        if value not in {True, False}:
            raise InputError(f"{value!r} is neither yes nor no.", "Give true or false.")
        return bool(value)


class Number(TypeDecorator[float]):
    """A finite number; numpy scalars are unpacked, NaN and infinity are refused."""

    impl = Float
    cache_ok = True

    def process_bind_param(self, value: Any, dialect: Dialect) -> float | None:
        """Refuse what the engines would store differently."""
        del dialect
        if value is None:
            return None
        try:
            number = float(value)
        except (TypeError, ValueError) as error:
            raise InputError(f"{value!r} is not a number.", "Give one, such as 1.5.") from error
        if not math.isfinite(number):
            raise InputError(f"{number} cannot be stored as a number.", "Leave it empty.")
        return number


class Moment(TypeDecorator[datetime]):
    """A moment in UTC; a time without a zone is refused."""

    impl = Text
    cache_ok = True

    def load_dialect_impl(self, dialect: Dialect) -> TypeEngine[Any]:
        """Return the engine's own type."""
        if dialect.name == "postgresql":
            return dialect.type_descriptor(postgresql.TIMESTAMP(timezone=True))
        return dialect.type_descriptor(Text())

    def process_bind_param(self, value: datetime | None, dialect: Dialect) -> Any:
        """Refuse a time without a zone; store UTC."""
        if value is None:
            return None
        text = format_moment(value)
        return value.astimezone(UTC) if dialect.name == "postgresql" else text

    def process_result_value(self, value: Any, dialect: Dialect) -> datetime | None:
        """Return an aware time in UTC."""
        del dialect
        if value is None or isinstance(value, datetime):
            return value
        return parse_moment(value)


class Document(TypeDecorator[Any]):
    """Plain lists and mappings as canonical JSON; NaN is refused."""

    impl = Text
    cache_ok = True

    def load_dialect_impl(self, dialect: Dialect) -> TypeEngine[Any]:
        """Return the engine's own type."""
        if dialect.name == "postgresql":
            return dialect.type_descriptor(postgresql.JSONB())
        return dialect.type_descriptor(Text())

    def process_bind_param(self, value: Any, dialect: Dialect) -> Any:
        """Write sorted keys, so that equal documents are equal texts."""
        if value is None:
            return None
        text = make_canonical(value)
        return json.loads(text) if dialect.name == "postgresql" else text

    def process_result_value(self, value: Any, dialect: Dialect) -> Any:
        """Return lists and mappings."""
        return json.loads(value) if dialect.name != "postgresql" and value is not None else value
