"""Moments as fixed-width UTC text, which sorts by time; light to load."""

from __future__ import annotations

from datetime import UTC, datetime

from cuebook.errors import InputError

MOMENT_FORMAT = "%Y-%m-%dT%H:%M:%S.%fZ"


def format_moment(moment: datetime) -> str:
    """Return a moment as text.

    Raises
    ------
    InputError : a time without a zone.
    """
    if moment.tzinfo is None:
        raise InputError(f"The time {moment} has no zone.", "Give one, such as +02:00.")
    return moment.astimezone(UTC).strftime(MOMENT_FORMAT)


def parse_moment(text: str) -> datetime:
    """Return the moment of a stored text."""
    return datetime.strptime(text, MOMENT_FORMAT).replace(tzinfo=UTC)
