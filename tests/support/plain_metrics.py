"""Metrics written a second time, short and plain, to check the simulator and nothing else.

They do without filters and without reading rules: the program's own live in cuebook/metrics.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    FloatArray = NDArray[np.float64]


def compute_spectral_arc_length(speed: FloatArray, rate_hz: float) -> float:
    """Return the spectral arc length of one movement; nearer 0 is smoother.

    Balasubramanian et al. (2012, 2015): zero-padded spectrum of the speed over its maximum, up
    to 10 Hz and to the last bin of at least 0.05, its length with frequency scaled to 0..1.
    """
    padded = 2 ** (math.ceil(math.log2(len(speed))) + 4)
    magnitude = np.abs(np.fft.rfft(speed, padded))
    magnitude /= magnitude.max()
    frequency_hz = np.fft.rfftfreq(padded, 1.0 / rate_hz)
    magnitude = magnitude[frequency_hz <= 10.0]
    magnitude = magnitude[: np.flatnonzero(magnitude >= 0.05)[-1] + 1]
    steps = np.diff(magnitude)
    return -float(np.hypot(1.0 / len(steps), steps).sum())


def compute_speed(position: FloatArray, rate_hz: float) -> FloatArray:
    """Return the speed of a path of shape (n, axes), in its unit a second."""
    return np.asarray(np.linalg.norm(np.gradient(position, 1.0 / rate_hz, axis=0), axis=1))


def compute_time_above(speed: FloatArray, rate_hz: float, share: float = 0.05) -> float:
    """Return the seconds from the first to the last sample above a share of peak speed."""
    above = np.flatnonzero(speed >= share * speed.max())
    return float(above[-1] - above[0]) / rate_hz
