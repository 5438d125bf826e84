"""Options that every command takes, and small readers of what a user types."""

from __future__ import annotations

import math
from collections.abc import Callable
from datetime import UTC, datetime
from typing import Any, TypeVar

import click

from cuebook.errors import UsageError

Command = TypeVar("Command", bound=Callable[..., Any])

json_option = click.option("--json", "as_json", is_flag=True, help="Print one JSON document.")
library_option = click.option(
    "--library",
    "location",
    envvar="CUEBOOK_LIBRARY",
    metavar="PATH|URL",
    help="Folder of the library (or the variable CUEBOOK_LIBRARY).",
)


def with_common_options(command: Command) -> Command:
    """Give a command --json and --library."""
    return library_option(json_option(command))


def parse_values(texts: tuple[str, ...], option: str) -> dict[str, tuple[float, ...]]:
    """Read ``METRIC=NUMBER[,NUMBER…]`` texts into numbers per metric, in the order typed.

    Raises
    ------
    UsageError : no ``=``, no number, or something that is not a finite number.
    """
    values: dict[str, tuple[float, ...]] = {}
    for text in texts:
        metric, separator, numbers = text.partition("=")
        if not separator or not metric.strip():
            raise UsageError(
                f"{option} reads '{text}'.", f"Write METRIC=NUMBER, such as {option} sparc=-1.6."
            )
        typed = tuple(_parse_number(number, text, option) for number in numbers.split(","))
        values[metric.strip()] = values.get(metric.strip(), ()) + typed
    return values


def _parse_number(number: str, text: str, option: str) -> float:
    try:
        value = float(number)
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        raise UsageError(
            f"{option} {text}: '{number.strip()}' is not a number.",
            "Separate several numbers by commas and write a decimal point, such as 1.6,1.7.",
        )
    return value


def parse_moment(text: str | None) -> datetime | None:
    """Read an ISO 8601 time; one without a zone is taken in this computer's own zone.

    Raises
    ------
    UsageError : not an ISO 8601 date and time, or a time still to come.
    """
    if text is None:
        return None
    try:
        moment = datetime.fromisoformat(text)
    except ValueError as error:
        raise UsageError(
            f"--at reads '{text}', which is not a date and time.",
            "Write it as in 2026-05-04T10:15 or 2026-05-04T10:15+02:00.",
        ) from error
    aware = moment.astimezone() if moment.tzinfo is None else moment
    if aware > datetime.now(UTC):
        raise UsageError(f"--at {text} is still to come.", "Give a time that has passed.")
    return aware
