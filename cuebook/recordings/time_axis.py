"""Time stamps: order, unit, rate and gaps, as they are, never guessed."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cuebook.errors import InputError, NeedsAnswerError, Place
from cuebook.recordings.recording import FloatArray, Gap
from cuebook.recordings.units import require_factor

SLOWEST_HZ, FASTEST_HZ = 5.0, 2000.0
HOLE = 1.5
"""Steps longer than this many median steps are holes, not sampling."""
_UNITS = (("s", 1.0), ("ms", 1e-3), ("us", 1e-6), ("ns", 1e-9))


@dataclass(frozen=True, eq=False)
class TimeAxis:
    """Time as it was understood."""

    time_s: FloatArray
    """Seconds from the first kept sample."""
    kept: np.ndarray
    """Indices of the rows that were kept: repeated stamps are dropped."""
    rate_hz: float
    rate_source: str
    gaps: tuple[Gap, ...]
    is_resampling_needed: bool
    notes: tuple[str, ...]


def build_uniform(n_samples: int, rate_hz: float) -> TimeAxis:
    """Return the time of samples that have a rate and no stamps."""
    time_s = np.arange(n_samples) / rate_hz
    notes = (f"time: counted from the rate you gave, {rate_hz:g} Hz",)
    return TimeAxis(time_s, np.arange(n_samples), rate_hz, "user", (), False, notes)


def read_stamps(
    stamps: FloatArray, rows: list[int], unit: str | None, column: str, file: str
) -> TimeAxis:
    """Return the time of stamped samples.

    Parameters
    ----------
    stamps : shape (n_rows,), as in the file.
    rows : line of the file for each stamp, counted from 1.
    unit : unit of time if known; None: found from the step, if only one unit is possible.

    Raises
    ------
    InputError : missing stamps, time going back, fewer than 2 different stamps.
    NeedsAnswerError : a bare counter, or a step that fits no unit.
    """
    place = Place(file=file, column=column)
    if np.isnan(stamps).any():
        row = rows[int(np.flatnonzero(np.isnan(stamps))[0])]
        raise InputError(
            f"Line {row} of {file} has no time in column '{column}'.",
            "Fill or remove the line.",
            Place(file, row, column),
        )
    steps = np.diff(stamps)
    if (steps < 0).any():
        row = rows[int(np.flatnonzero(steps < 0)[0]) + 1]
        raise InputError(
            f"Time goes back at line {row} of {file}, column '{column}'.",
            "Check the export; two recordings may stand in one file.",
            Place(file, row, column),
        )
    kept = np.flatnonzero(np.append(True, steps > 0))
    notes = []
    if kept.size < stamps.size:
        notes.append(f"time: {stamps.size - kept.size} repeated stamps dropped")
    if kept.size < 2:
        raise InputError(f"{file} holds a single moment in time.", "Record longer.", place)
    stamps = stamps[kept]
    steps = np.diff(stamps)
    factor, note = _find_unit(steps, unit, column, place)
    notes.append(note)
    time_s = (stamps - stamps[0]) * factor
    steps_s = steps * factor
    median = float(np.median(steps_s))
    is_hole = steps_s > HOLE * median
    gaps = tuple(
        Gap(float(time_s[index]), float(time_s[index + 1])) for index in np.flatnonzero(is_hole)
    )
    rate_hz = 1.0 / float(np.mean(steps_s[~is_hole]))
    if gaps:
        longest = max(gap.duration_s for gap in gaps)
        notes.append(f"time: {len(gaps)} gaps, the longest {longest:.3g} s")
    needs = _needs_resampling(stamps * factor, steps_s, rate_hz, bool(gaps))
    if needs:
        notes.append("time: the stamps jitter, so samples are put on an even grid")
    return TimeAxis(time_s, kept, rate_hz, "file", gaps, needs, tuple(notes))


def _find_unit(steps: FloatArray, unit: str | None, column: str, place: Place) -> tuple[float, str]:
    if unit is not None:
        return require_factor("time", unit, "time"), f"time: column '{column}' in {unit}"
    median = float(np.median(steps))
    if np.all(steps == 1.0):
        raise NeedsAnswerError(
            f"Column '{column}' counts samples by ones; it does not say how fast they came.",
            "Give the rate with --rate HZ, or the unit with --units time=ms.",
            place,
        )
    fitting = [
        (name, factor)
        for name, factor in _UNITS
        if SLOWEST_HZ <= 1.0 / (median * factor) <= FASTEST_HZ
    ]
    if len(fitting) != 1:
        raise NeedsAnswerError(
            f"Column '{column}' steps by {median:g}, which fits no usual rate.",
            "Give its unit with --units time=ms, or the rate with --rate HZ.",
            place,
        )
    name, factor = fitting[0]
    rate = 1.0 / (median * factor)
    return (
        factor,
        f"time: column '{column}' taken in {name}, as steps of {median:g} mean {rate:.4g} Hz",
    )


def _needs_resampling(
    stamps_s: FloatArray,
    steps_s: FloatArray,
    rate_hz: float,
    has_gaps: bool,  # noqa: FBT001
) -> bool:
    """Return whether stamps leave the even grid by more than their own rounding."""
    if has_gaps:
        return True
    grid = stamps_s[0] + np.arange(stamps_s.size) / rate_hz
    # The last printed digit of a stamp: the smallest difference between steps that occurs.
    ordered = np.unique(np.round(steps_s, 12))
    tick = float(np.min(np.diff(ordered))) if ordered.size > 1 else 0.0
    return float(np.max(np.abs(stamps_s - grid))) > max(tick, 1e-9 * stamps_s.size / rate_hz)
