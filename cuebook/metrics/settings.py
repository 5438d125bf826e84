"""Settings of metrics: only those of the registry's list, checked before anything runs."""

from __future__ import annotations

import math
from collections.abc import Mapping

from cuebook.errors import UsageError
from cuebook.metrics.registry import MetricEntry, load_registry
from cuebook.vocabulary import find_nearest

_CHOICES: dict[str, tuple[str, ...]] = {
    "duration": ("intervals", "samples"),
    "ellipse": ("chi2", "f", "prieto"),
    "resample": ("auto", "none"),
    "detrend": ("none", "linear"),
    "match": ("half_interval",),
    "window": ("half_segment",),
}
_NONE_ALLOWED = ("lowpass_hz",)
_WHOLE = ("padlevel", "min_intervals")
_SHARES = ("onset", "trim", "amp", "floor", "valley")


def list_setting_names() -> tuple[str, ...]:
    """Return the names that computed metrics know, in alphabetical order."""
    entries = [entry for entry in load_registry().entries if entry.is_computed]
    return tuple(sorted({name for entry in entries for name in entry.default_settings}))


def read_settings(given: Mapping[str, str]) -> dict[str, str]:
    """Check settings given by a user.

    Raises
    ------
    UsageError : an unknown name (the nearest is named) or a value it cannot take.
    """
    known = list_setting_names()
    for name, value in given.items():
        if name not in known:
            nearest = find_nearest(name, known)
            raise UsageError(
                f"Unknown setting '{name}'.",
                f"Nearest known: {', '.join(nearest)}." if nearest else f"Known: {known}.",
            )
        _check_value(name, value)
    return dict(given)


def _check_value(name: str, value: str) -> None:
    if name in _CHOICES:
        if value not in _CHOICES[name]:
            raise UsageError(
                f"Setting {name}={value} is not known.", f"Known: {', '.join(_CHOICES[name])}."
            )
        return
    if name in _NONE_ALLOWED and value == "none":
        return
    try:
        number = float(value)
    except ValueError:
        number = math.nan
    if not math.isfinite(number) or number < 0:
        raise UsageError(f"Setting {name}={value} is not a number of at least 0.", "")
    if name in _WHOLE and number != int(number):
        raise UsageError(f"Setting {name}={value} must be a whole number.", "")
    if name in _SHARES and not 0 <= number < 1:
        raise UsageError(f"Setting {name}={value} is a share between 0 and 1.", "")


def merge_settings(entry: MetricEntry, given: Mapping[str, str]) -> dict[str, float | str]:
    """Return a metric's settings: its own defaults, replaced by what was given.

    Numbers are numbers; ``none`` and named choices stay text.
    """
    merged: dict[str, float | str] = {}
    for name, default in entry.default_settings.items():
        text = given.get(name, default)
        try:
            merged[name] = float(text)
        except ValueError:
            merged[name] = text
    return merged
