"""Simulated quiet standing: a centre of pressure that wanders slowly and trembles a little."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

RATE_HZ = 100.0
DRIFT_HZ = 0.15
"""Below this the spectrum is flat: the slow shift of weight."""
RIPPLE_HZ = 1.0
"""Above this it falls steeply."""
HIGHEST_HZ = 5.0
SIDE_TO_FRONT = 0.65
"""Sideways sway over forward sway, feet side by side."""


@dataclass(frozen=True, slots=True)
class SwayState:
    """What shapes one stand."""

    velocity_mm_s: float
    """Mean speed of the centre of pressure over the recording."""
    duration_s: float


def _draw_wander(samples: int, stream: np.random.Generator) -> FloatArray:
    """Return white noise shaped by a low-pass spectrum, shape (n,), no unit."""
    frequency_hz = np.fft.rfftfreq(samples, 1.0 / RATE_HZ)
    gain = 1.0 / np.sqrt(1.0 + (frequency_hz / DRIFT_HZ) ** 2)
    gain /= np.sqrt(1.0 + (frequency_hz / RIPPLE_HZ) ** 4)
    gain[(frequency_hz == 0.0) | (frequency_hz > HIGHEST_HZ)] = 0.0
    spectrum = gain * np.fft.rfft(stream.standard_normal(samples))
    return np.asarray(np.fft.irfft(spectrum, samples), dtype=np.float64)


def simulate_sway(state: SwayState, stream: np.random.Generator) -> tuple[FloatArray, FloatArray]:
    """Return time and centre of pressure of one stand.

    Parameters
    ----------
    state : what shapes it.
    stream : the generator of this attempt.

    Returns
    -------
    Time, shape (n,), seconds; centre of pressure, shape (n, 2), centimetres: sideways and
    forward.

    Notes
    -----
    Filtered noise, scaled so that the mean speed of the whole record is the state's. That
    of a part, such as without the first seconds, differs by chance as in a person.
    """
    samples = round(state.duration_s * RATE_HZ) + 1
    shape = np.column_stack(
        [SIDE_TO_FRONT * _draw_wander(samples, stream), _draw_wander(samples, stream)]
    )
    steps = np.hypot(*np.diff(shape, axis=0).T)
    scale_cm = state.velocity_mm_s / 10.0 / (steps.mean() * RATE_HZ)
    return np.arange(samples) / RATE_HZ, shape * scale_cm
