"""Options that say how a recording is read; shared by measure and import."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any, TypeVar

import click

from cuebook.errors import UsageError

if TYPE_CHECKING:
    from cuebook.recordings.recording import ReadingOptions

Command = TypeVar("Command", bound=Callable[..., Any])

_OPTIONS = (
    click.option("--columns", help="What the columns are: time=t,x=hand_x,y=hand_y or numbers."),
    click.option("--rate", "rate_hz", type=float, help="Samples a second, if the file is silent."),
    click.option("--units", help="One unit for all, or by channel: x=cm,time=ms."),
    click.option("--point", "points", multiple=True, help="A place in the task: via=X,Y[,Z]."),
    click.option("--beats", help="A file of beats, or beats a minute."),
    click.option("--set", "settings", multiple=True, help="A setting: NAME=VALUE."),
)


def with_reading_options(command: Command) -> Command:
    """Give a command the reading options."""
    for option in reversed(_OPTIONS):
        command = option(command)
    return command


def take_reading_options(given: dict[str, Any]) -> tuple[ReadingOptions, dict[str, str]]:
    """Take the reading options out of a command's arguments: how to read, which settings.

    Raises
    ------
    UsageError : something that is not written as NAME=VALUE.
    """
    from cuebook.recordings.recording import ReadingOptions  # noqa: PLC0415

    columns = given.pop("columns")
    units = given.pop("units")
    rate_hz = given.pop("rate_hz")
    points = given.pop("points")
    if rate_hz is not None and not 0 < rate_hz < 1e6:
        raise UsageError(f"--rate {rate_hz:g} is no rate.", "Give samples a second, such as 100.")
    options = ReadingOptions(
        columns=_read_pairs(columns.split(","), "--columns") if columns else {},
        rate_hz=rate_hz,
        units=_read_units(units) if units else {},
        points={name: _read_point(at) for name, at in _read_pairs(points, "--point").items()},
        beats=given.pop("beats"),
    )
    return options, _read_pairs(given.pop("settings"), "--set")


def _read_pairs(texts: Any, option: str) -> dict[str, str]:
    pairs: dict[str, str] = {}
    for text in texts:
        name, separator, value = text.partition("=")
        if not separator or not name.strip() or not value.strip():
            raise UsageError(f"{option} reads '{text}'.", "Write NAME=VALUE.")
        pairs[name.strip()] = value.strip()
    return pairs


def _read_units(text: str) -> dict[str, str]:
    if "=" not in text:
        return {"*": text.strip()}
    return _read_pairs(text.split(","), "--units")


def _read_point(text: str) -> tuple[float, ...]:
    try:
        at = tuple(float(part) for part in text.split(","))
    except ValueError as error:
        raise UsageError(f"--point reads '{text}'.", "Write via=X,Y or via=X,Y,Z.") from error
    if len(at) not in {2, 3}:
        raise UsageError(f"--point has {len(at)} coordinates.", "Give two or three.")
    return at
