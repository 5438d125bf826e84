"""From a column's name to what it is: quantity, axis, unit, point."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import NoReturn

from cuebook.errors import UsageError
from cuebook.recordings.recording import (
    ACCELERATION,
    ANGLE,
    ANGULAR_SPEED,
    FORCE,
    MOMENT,
    POSITION,
    PRESSURE_CENTRE,
    SPEED,
    UNKNOWN,
)
from cuebook.recordings.units import get_factor, is_unit, tidy_unit
from cuebook.vocabulary import find_nearest

TIME = "time"
_TIME_NAMES = frozenset(
    {"time", "t", "timestamp", "timestamps", "times", "zeit", "tiempo", "temps", "seconds"}
)
EVENT_CHANNELS = ("onset", "tap", "beat", "step")
_SIGNAL_CHANNELS = (
    *(TIME, "x", "y", "z", "cop_x", "cop_y", "speed", "angle", "fx", "fy", "fz"),
    *("acc_x", "acc_y", "acc_z", "gyro_x", "gyro_y", "gyro_z", "hand_x"),
)
"""Examples to suggest from: any point may be named, such as elbow_y."""
_EVENT_NAMES = {
    "onset": "onset",
    "onsets": "onset",
    "tap": "tap",
    "taps": "tap",
    "beat": "beat",
    "beats": "beat",
    "step": "step",
    "steps": "step",
}
_IN_BRACKETS = re.compile(r"^(.*?)\s*[\[(]([^\])]*)[\])]\s*$")
_CAMEL = re.compile(r"(?<=[a-z])(?=[A-Z])")
_WORDS = {
    "cop": PRESSURE_CENTRE,
    "acc": ACCELERATION,
    "accel": ACCELERATION,
    "acceleration": ACCELERATION,
    "accelerometer": ACCELERATION,
    "gyr": ANGULAR_SPEED,
    "gyro": ANGULAR_SPEED,
    "gyroscope": ANGULAR_SPEED,
    "speed": SPEED,
    "vel": SPEED,
    "velocity": SPEED,
    "force": FORCE,
    "grf": FORCE,
    "moment": MOMENT,
    "torque": MOMENT,
    "angle": ANGLE,
}
_DIRECTIONS = {"ml": "x", "ap": "y"}
"""Sideways and forward, as force plates name them."""
_PRESSURE_WORDS = ("centre", "center")
_QUANTITY_OF_UNIT_KIND = (
    ("length", POSITION),
    ("acceleration", ACCELERATION),
    ("angular_speed", ANGULAR_SPEED),
    ("speed", SPEED),
    ("angle", ANGLE),
    ("force", FORCE),
    ("moment", MOMENT),
)


@dataclass(frozen=True, slots=True)
class Channel:
    """What one column is taken for."""

    name: str
    column: int
    """Index from 0."""
    quantity: str
    axis: str | None = None
    unit: str | None = None
    """None: the name does not say."""
    point: str = ""


def split_unit(name: str) -> tuple[str, str | None]:
    """Return a column's name without its unit, and the unit if the name holds one."""
    bracketed = _IN_BRACKETS.match(name)
    if bracketed:
        unit = bracketed.group(2).strip()
        return bracketed.group(1).strip(), unit or None
    stem, separator, last = name.rpartition("_")
    if separator and stem and is_unit(last) and last.lower() not in {"g", "t"}:
        # m_s and mm_s stand for a speed: the slash cannot stand in a plain name.
        rest, again, before = stem.rpartition("_")
        if again and tidy_unit(last) == "s" and get_factor("length", before) is not None:
            return rest, f"{before}/s"
        return stem, last
    return name, None


def describe_column(name: str, column: int) -> Channel:
    """Return what a column's name says it is."""
    base, unit = split_unit(name)
    # CoPx is one word and an axis; handX is two words. What is understood first counts.
    whole = _describe_words(_split_words(base), name, column, unit)
    if whole.quantity != UNKNOWN:
        return whole
    return _describe_words(_split_words(_CAMEL.sub(" ", base)), name, column, unit)


def _split_words(text: str) -> list[str]:
    return [word.lower() for word in re.split(r"[^A-Za-z0-9]+", text) if word]


def _describe_words(words: list[str], name: str, column: int, unit: str | None) -> Channel:
    if "".join(words) in _TIME_NAMES:
        return Channel(name, column, TIME, unit=unit)
    axis, rest = _find_axis(words)
    stem = "".join(rest)
    quantity = next((_WORDS[word] for word in rest if word in _WORDS), None)
    if "pressure" in rest and any(word in rest for word in _PRESSURE_WORDS):
        quantity = PRESSURE_CENTRE
    if quantity is None and axis is not None and stem in {"f", "m"}:
        quantity = FORCE if stem == "f" else MOMENT
    if quantity is None and unit is not None:
        quantity = next(
            (found for kind, found in _QUANTITY_OF_UNIT_KIND if get_factor(kind, unit) is not None),
            None,
        )
    if quantity is None:
        is_place = axis is not None and len(stem) != 1 and unit is None
        quantity = POSITION if is_place else UNKNOWN
    return Channel(name, column, quantity, axis, unit, "_".join(rest))


def describe_event_column(name: str) -> str | None:
    """Return which events a column holds, or None if it holds none."""
    base, _ = split_unit(name)
    return _EVENT_NAMES.get(base.strip().lower())


def name_channel(channel: str, column: int, name: str) -> Channel:
    """Return the channel of a column that a user named, such as ``cop_x`` or ``x``.

    Raises
    ------
    UsageError : a channel that says nothing; the nearest known one is named.
    """
    _, unit = split_unit(name)
    if channel == TIME:
        return Channel(name, column, TIME, unit=unit)
    said = describe_column(channel, column)
    if said.quantity in {UNKNOWN, TIME}:
        refuse_channel(channel, _SIGNAL_CHANNELS)
    return Channel(name, column, said.quantity, said.axis, unit, said.point)


def refuse_channel(channel: str, known: tuple[str, ...]) -> NoReturn:
    """Raise the error of a channel name that ``--columns`` does not know."""
    nearest = find_nearest(channel, known) or known[:6]
    raise UsageError(
        f"--columns names a channel '{channel}', which is not known.",
        f"Nearest known: {', '.join(nearest)}.",
    )


def list_unit_keys(channel: Channel) -> tuple[str, ...]:
    """Return the words by which ``--units`` may mean a channel, the most exact first."""
    whole = "_".join(part for part in (channel.point, channel.axis) if part)
    keys = (channel.name, whole, channel.axis, channel.point, channel.quantity)
    return tuple(key for key in keys if key)


def _find_axis(words: list[str]) -> tuple[str | None, list[str]]:
    """Return the axis a name ends in, and the words before it."""
    if not words:
        return None, words
    last = words[-1]
    if last in {"x", "y", "z"}:
        return last, words[:-1]
    if last in _DIRECTIONS and "cop" in words:
        return _DIRECTIONS[last], words[:-1]
    if len(last) > 1 and last[-1] in "xyz":
        stem = last[:-1]
        if stem in {"cop", "f", "m", "acc", "gyr", "gyro", "pos", "vel", "accel"}:
            return last[-1], [*words[:-1], stem]
    return None, words
