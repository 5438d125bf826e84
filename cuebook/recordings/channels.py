"""From a column's name to what it is: quantity, axis, unit, point."""

from __future__ import annotations

import re
from dataclasses import dataclass

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

TIME = "time"
_TIME_NAMES = frozenset(
    {"time", "t", "timestamp", "timestamps", "times", "zeit", "tiempo", "temps", "seconds"}
)
EVENT_CHANNELS = ("onset", "tap", "beat", "step")
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
    words = [word.lower() for word in re.split(r"[^A-Za-z0-9]+", _CAMEL.sub(" ", base)) if word]
    joined = "".join(words)
    if joined in _TIME_NAMES:
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
    """Return the channel of a column that a user named, such as ``cop_x`` or ``x``."""
    _, unit = split_unit(name)
    if channel == TIME:
        return Channel(name, column, TIME, unit=unit)
    said = describe_column(channel, column)
    return Channel(name, column, said.quantity, said.axis, unit, said.point)


def _find_axis(words: list[str]) -> tuple[str | None, list[str]]:
    """Return the axis a name ends in, and the words before it."""
    if not words:
        return None, words
    last = words[-1]
    if last in {"x", "y", "z"}:
        return last, words[:-1]
    if len(last) > 1 and last[-1] in "xyz":
        stem = last[:-1]
        if stem in {"cop", "f", "m", "acc", "gyr", "gyro", "pos", "vel", "accel"}:
            return last[-1], [*words[:-1], stem]
    return None, words
