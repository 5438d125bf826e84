"""Units of recordings: an own short table; what is not in it is refused, never guessed."""

from __future__ import annotations

import math

from cuebook.errors import UsageError
from cuebook.recordings.recording import FloatArray

_LENGTH = {"m": 1.0, "dm": 0.1, "cm": 0.01, "mm": 0.001, "um": 1e-6, "in": 0.0254, "ft": 0.3048}
_TIME = {"s": 1.0, "sec": 1.0, "ms": 1e-3, "us": 1e-6, "ns": 1e-9, "min": 60.0}
_FACTORS: dict[str, dict[str, float]] = {
    "length": _LENGTH,
    "time": _TIME,
    "speed": {f"{unit}/s": factor for unit, factor in _LENGTH.items()} | {"km/h": 1 / 3.6},
    "acceleration": (
        {f"{unit}/s2": factor for unit, factor in _LENGTH.items()}
        | {"g": 9.80665, "mg": 9.80665e-3}
    ),
    "angle": {"rad": 1.0, "deg": math.pi / 180.0},
    "angular_speed": {"rad/s": 1.0, "deg/s": math.pi / 180.0, "dps": math.pi / 180.0},
    "force": {"n": 1.0, "kn": 1000.0},
    "moment": {"nm": 1.0, "nmm": 1e-3, "ncm": 1e-2},
}
_SPELLINGS = {
    "seconds": "s",
    "second": "s",
    "secs": "s",
    "milliseconds": "ms",
    "µs": "us",
    "μs": "us",
    "microseconds": "us",
    "metres": "m",
    "meters": "m",
    "metre": "m",
    "meter": "m",
    "millimetres": "mm",
    "millimeters": "mm",
    "centimetres": "cm",
    "centimeters": "cm",
    "µm": "um",
    "m/s/s": "m/s2",
    "m/s^2": "m/s2",
    "m/s²": "m/s2",
    "m.s-2": "m/s2",
    "m s-2": "m/s2",
    "m.s-1": "m/s",
    "°": "deg",
    "degrees": "deg",
    "°/s": "deg/s",
    "n.m": "nm",
    "n*m": "nm",
    "n·m": "nm",
}
KIND_OF_QUANTITY = {
    "position": "length",
    "centre_of_pressure": "length",
    "speed": "speed",
    "acceleration": "acceleration",
    "angle": "angle",
    "angular_speed": "angular_speed",
    "force": "force",
    "moment": "moment",
}


def tidy_unit(text: str) -> str:
    """Return a unit in the table's spelling."""
    plain = text.strip().lower()
    return _SPELLINGS.get(plain, plain)


def get_factor(kind: str, unit: str) -> float | None:
    """Return what turns a unit into SI, or None if the table does not know it."""
    return _FACTORS[kind].get(tidy_unit(unit))


def require_factor(kind: str, unit: str, channel: str) -> float:
    """Return what turns a unit into SI.

    Raises
    ------
    UsageError : the unit is none of this kind.
    """
    factor = get_factor(kind, unit)
    if factor is None:
        known = ", ".join(_FACTORS[kind])
        raise UsageError(
            f"The unit '{unit}' of {channel} is no unit of {kind.replace('_', ' ')} known here.",
            f"Known: {known}.",
        )
    return factor


def scale_to_si(values: FloatArray, factor: float) -> FloatArray:
    """Return values in SI, without the rounding that can be avoided.

    Dividing by a whole number is exact where multiplying by its inverse is not.
    """
    return values * factor if factor >= 1.0 else values / round(1.0 / factor, 9)


def is_unit(text: str) -> bool:
    """Return whether a word is a unit of any kind."""
    return any(tidy_unit(text) in table for table in _FACTORS.values())
