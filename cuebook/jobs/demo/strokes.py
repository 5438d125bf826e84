"""Simulated rhythm: onsets of strokes from an uneven inner clock and a jittery start."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

CLOCK_SHARE = 0.8
"""Share of the variance of intervals that comes from the clock, the rest from the starts."""
FIRST_ONSET_S = 1.5
LARGEST_DEVIATION_SD = 3.0


@dataclass(frozen=True, slots=True)
class StrokeState:
    """What shapes one piece of rowing."""

    rate_per_min: float
    interval_cv: float
    """Standard deviation over mean of the intervals, in the long run; not a percentage."""
    strokes: int


def _draw_bounded(count: int, stream: np.random.Generator) -> FloatArray:
    drawn = stream.standard_normal(count)
    return np.clip(drawn, -LARGEST_DEVIATION_SD, LARGEST_DEVIATION_SD)


def simulate_strokes(state: StrokeState, stream: np.random.Generator) -> FloatArray:
    """Return the onset of each stroke.

    Parameters
    ----------
    state : what shapes the piece.
    stream : the generator of this attempt.

    Returns
    -------
    Shape (strokes,), seconds, rising.

    References
    ----------
    Wing and Kristofferson (1973), Perception and Psychophysics 14:5: an interval is a clock
    interval plus the difference of two start delays, so its variance is that of the clock
    plus twice that of the delays.
    """
    mean_s = 60.0 / state.rate_per_min
    spread_s = state.interval_cv * mean_s
    clock_sd_s = spread_s * np.sqrt(CLOCK_SHARE)
    start_sd_s = spread_s * np.sqrt((1.0 - CLOCK_SHARE) / 2.0)
    clock_s = mean_s + clock_sd_s * _draw_bounded(state.strokes - 1, stream)
    starts_s = start_sd_s * _draw_bounded(state.strokes, stream)
    ticks_s = FIRST_ONSET_S + np.concatenate([[0.0], np.cumsum(clock_s)])
    return np.asarray(ticks_s + starts_s, dtype=np.float64)
