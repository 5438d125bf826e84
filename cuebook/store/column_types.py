"""Column types that mean the same on every engine, and are plain on SQLite's STRICT tables."""

from __future__ import annotations

import json
import math
from datetime import UTC, datetime
from typing import Any

from sqlalchemy import Boolean, Dialect, Float, Text
from sqlalchemy.dialects import postgresql
from sqlalchemy.ext.compiler import compiles
from sqlalchemy.types import TypeDecorator, TypeEngine

from cuebook.errors import InputError
from cuebook.store.moments import format_moment, parse_moment


@compiles(Boolean, "sqlite")
def _name_boolean(_type: Boolean, _compiler: Any, **_given: Any) -> str:
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
        if value is None:
            return None
        if "\x00" in value:
            raise InputError("A text holds a NUL character.", "Remove it.")
        try:
            value.encode("utf-8")
        except UnicodeEncodeError as error:
            raise InputError("A text is not valid Unicode.", "Type it again.") from error
        return value


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
        text = json.dumps(
            value, sort_keys=True, separators=(",", ":"), ensure_ascii=False, allow_nan=False
        )
        return json.loads(text) if dialect.name == "postgresql" else text

    def process_result_value(self, value: Any, dialect: Dialect) -> Any:
        """Return lists and mappings."""
        return json.loads(value) if dialect.name != "postgresql" and value is not None else value


class Number(TypeDecorator[float]):
    """A finite number; numpy scalars are unpacked, NaN and infinity are refused."""

    impl = Float
    cache_ok = True

    def process_bind_param(self, value: Any, dialect: Dialect) -> float | None:
        """Refuse what the engines would store differently."""
        del dialect
        if value is None:
            return None
        number = float(value)
        if not math.isfinite(number):
            raise InputError(f"{number} cannot be stored as a number.", "Leave it empty.")
        return number
