"""Options that every command takes, and small readers of what a user types."""

from __future__ import annotations

from collections.abc import Callable
from datetime import UTC, datetime
from typing import Any, TypeVar

import click
from click.core import ParameterSource

from cuebook.errors import UsageError

Command = TypeVar("Command", bound=Callable[..., Any])


def _take_library(
    context: click.Context, _option: click.Parameter, value: str | None
) -> str | None:
    """Return the library named after the command, else the one named before it."""
    if context.get_parameter_source("location") is ParameterSource.COMMANDLINE:
        return value
    named: str | None = context.find_root().params.get("location")
    return named or value


json_option = click.option("--json", "as_json", is_flag=True, help="Print one JSON document.")
library_option = click.option(
    "--library",
    "location",
    envvar="CUEBOOK_LIBRARY",
    metavar="PATH|URL",
    help="Folder of the library (or the variable CUEBOOK_LIBRARY).",
    callback=_take_library,
)


def with_common_options(command: Command) -> Command:
    """Give a command --json and --library."""
    return library_option(json_option(command))


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
