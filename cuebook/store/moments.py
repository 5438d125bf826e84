"""Moments as fixed-width UTC text, which sorts by time; light to load."""

from __future__ import annotations

from datetime import UTC, datetime

from cuebook.errors import InputError

MOMENT_FORMAT = "%Y-%m-%dT%H:%M:%S.%fZ"


def require_zone(moment: datetime) -> datetime:
    """Return a moment that knows its offset from UTC.

    Raises
    ------
    InputError : a time without a zone.
    """
    if moment.utcoffset() is None:
        raise InputError(f"The time {moment} has no zone.", "Give one, such as +02:00.")
    return moment


def format_moment(moment: datetime) -> str:
    """Return a moment as text.

    Raises
    ------
    InputError : a time without a zone, or beyond the calendar.
    """
    try:
        utc = require_zone(moment).astimezone(UTC)
    except OverflowError as error:
        raise InputError(f"The year {moment.year} is out of range.", "Check the time.") from error
    # Not strftime alone: it writes years before 1000 with fewer than four digits here.
    return f"{utc.year:04d}{utc.strftime(MOMENT_FORMAT[2:])}"


def parse_moment(text: str) -> datetime:
    """Return the moment of a stored text."""
    return datetime.strptime(text, MOMENT_FORMAT).replace(tzinfo=UTC)
