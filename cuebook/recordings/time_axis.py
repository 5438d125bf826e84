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
NO_JITTER = 1e-4
"""Stamps within this share of a step of the even grid cannot matter."""
SAME_RATE = 0.01
"""Two rates this share apart are still the same rate."""
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


def is_counter(stamps: FloatArray) -> bool:
    """Return whether a column only counts samples: whole numbers, nearly all one apart."""
    steps = np.diff(stamps)
    return bool(
        steps.size
        and np.isfinite(steps).all()
        and (steps >= 0).all()
        and np.median(steps) == 1.0
        and (steps == np.round(steps)).all()
    )


def read_counter(
    counts: FloatArray, rows: list[int], rate_hz: float, column: str, file: str
) -> TimeAxis:
    """Return the time of samples that were counted, at a rate the user gave.

    Counts that are left out are holes: they are seen, which a bare rate could not do.

    Raises
    ------
    InputError : a count that goes back.
    """
    kept = _keep_forward(counts, rows, column, file)
    time_s = (counts[kept] - counts[kept[0]]) / rate_hz
    gaps = _find_gaps(time_s, np.diff(time_s) * rate_hz > HOLE)
    notes = [f"time: column '{column}' counts samples, at the rate you gave, {rate_hz:g} Hz"]
    notes += _describe_losses(counts.size - kept.size, gaps)
    return TimeAxis(time_s, kept, rate_hz, "user", gaps, bool(gaps), tuple(notes))


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
    kept = _keep_forward(stamps, rows, column, file)
    n_repeated = stamps.size - kept.size
    stamps = stamps[kept]
    steps = np.diff(stamps)
    found, factor = _find_unit(steps, unit, column, file)
    time_s = (stamps - stamps[0]) * factor
    steps_s = steps * factor
    is_hole = steps_s > HOLE * float(np.median(steps_s))
    gaps = _find_gaps(time_s, is_hole)
    rate_hz = 1.0 / float(np.mean(steps_s[~is_hole]))
    how = f"in {found}" if unit else f"taken in {found}: {rate_hz:.4g} Hz"
    notes = [f"time: column '{column}' {how}", *_describe_losses(n_repeated, gaps)]
    grain_s = 4.0 * float(np.spacing(np.max(np.abs(stamps)))) * factor
    needs = bool(gaps) or _leaves_grid(time_s, steps_s, rate_hz, grain_s)
    if needs:
        why = "jitter" if not gaps else "have gaps"
        notes.append(f"time: the stamps {why}, so samples are put on an even grid")
    return TimeAxis(time_s, kept, rate_hz, "file", gaps, needs, tuple(notes))


def _keep_forward(stamps: FloatArray, rows: list[int], column: str, file: str) -> np.ndarray:
    """Return the indices of the stamps that move on; repeated ones are dropped."""
    known = np.isfinite(stamps)
    if not known.all():
        row = rows[int(np.flatnonzero(~known)[0])]
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
    if kept.size < 2:
        raise InputError(
            f"{file} holds a single moment in time.", "Record longer.", Place(file, None, column)
        )
    return kept


def _find_gaps(time_s: FloatArray, is_hole: np.ndarray) -> tuple[Gap, ...]:
    return tuple(
        Gap(float(time_s[index]), float(time_s[index + 1])) for index in np.flatnonzero(is_hole)
    )


def _describe_losses(n_repeated: int, gaps: tuple[Gap, ...]) -> list[str]:
    notes = []
    if n_repeated:
        notes.append(f"time: {n_repeated} repeated stamps dropped")
    if gaps:
        longest = max(gap.duration_s for gap in gaps)
        notes.append(f"time: {len(gaps)} gaps, the longest {longest:.3g} s")
    return notes


def _find_unit(steps: FloatArray, unit: str | None, column: str, file: str) -> tuple[str, float]:
    """Return the unit of time and what turns it into seconds."""
    if unit is not None:
        return unit, require_factor("time", unit, "time")
    place = Place(file=file, column=column)
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
    return fitting[0]


def _leaves_grid(time_s: FloatArray, steps_s: FloatArray, rate_hz: float, grain_s: float) -> bool:
    """Return whether stamps leave the even grid by more than their own rounding.

    Parameters
    ----------
    grain_s : how finely a stamp of this size can be stored at all; large for an epoch.
    """
    off_grid_s = float(np.max(np.abs(time_s - np.arange(time_s.size) / rate_hz)))
    # The last printed digit of a stamp: the smallest difference between steps that occurs.
    apart = np.diff(np.unique(np.round(steps_s / grain_s)))
    apart = apart[apart > 1]
    tick_s = float(np.min(apart)) * grain_s if apart.size else 0.0
    return off_grid_s > max(1.001 * tick_s + grain_s, NO_JITTER / rate_hz)
