"""Simulated reaches: minimum-jerk sub-movements that overlap more the smoother the mover is."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

RATE_HZ = 100.0
DISTANCE_M = 0.30
REST_S = 0.45
"""Rest at each end: filters and onset rules need some 0.3 s of it."""
OVERLAP_AT_ZERO = 0.10
OVERLAP_PER_UNIT = 0.08
"""Overlap gained for one unit of smoothness, the spread of attempts on one day."""
OVERLAP_RANGE = (-0.35, 0.60)
"""Below 0 the hand pauses between sub-movements; above 0.6 they can no longer be told apart."""
SHARE_RATIO = 0.75
"""Each sub-movement is this much of the one before: a main reach and ever smaller corrections."""
SHARE_JITTER = 0.04
SENSOR_NOISE_M = 0.0001
END_SCATTER_M = 0.004


@dataclass(frozen=True, slots=True)
class ReachState:
    """What shapes one reach."""

    smoothness: float
    """Latent, in SDs of one learner's attempts on one day; plus is smoother."""
    duration_s: float
    bow_m: float
    """How far the path bows sideways."""
    submovements: int = 3


def compute_overlap(smoothness: float) -> float:
    """Return by which share of its duration a sub-movement overlaps the next one.

    Parameters
    ----------
    smoothness : latent, no unit; plus is smoother.

    Returns
    -------
    Share in ``OVERLAP_RANGE``; below 0 there is a pause. Never falls as smoothness rises.
    """
    low, high = OVERLAP_RANGE
    return min(max(OVERLAP_AT_ZERO + OVERLAP_PER_UNIT * smoothness, low), high)


def compute_minimum_jerk_position(time_share: FloatArray) -> FloatArray:
    """Return the share of the way covered in a minimum-jerk movement.

    Parameters
    ----------
    time_share : shape (n,), time since the start over the duration; outside 0..1 the
        movement has not begun or is over.

    Returns
    -------
    Shape (n,), from 0 to 1.

    References
    ----------
    Flash and Hogan (1985), Journal of Neuroscience 5:1688.
    """
    tau = np.clip(time_share, 0.0, 1.0)
    return np.asarray(tau**3 * (10.0 - 15.0 * tau + 6.0 * tau**2), dtype=np.float64)


def compute_reach(
    duration_s: float, overlap: float, steps_m: FloatArray, rate_hz: float = RATE_HZ
) -> tuple[FloatArray, FloatArray]:
    """Return time and path of sub-movements laid over one another, without any noise.

    Parameters
    ----------
    duration_s : from the start of the first sub-movement to the end of the last, > 0.
    overlap : share of a sub-movement that overlaps the next; below 0 is a pause.
    steps_m : shape (n_submovements, 2), the way each one covers, metres.
    rate_hz : samples per second.

    Returns
    -------
    Time, shape (n,), seconds, from 0, with ``REST_S`` of rest at each end; position, shape
    (n, 2), metres, from the origin.

    References
    ----------
    Morasso and Mussa-Ivaldi (1982), Biological Cybernetics 45:131 (superposition of
    strokes); Flash and Henis (1991), Journal of Cognitive Neuroscience 3:220.
    """
    spacing = 1.0 - overlap
    each_s = duration_s / (1.0 + (len(steps_m) - 1) * spacing)
    time_s = np.arange(round((duration_s + 2 * REST_S) * rate_hz) + 1) / rate_hz
    position_m = np.zeros((len(time_s), 2))
    for number, step_m in enumerate(steps_m):
        begin_s = REST_S + number * spacing * each_s
        share = compute_minimum_jerk_position((time_s - begin_s) / each_s)
        position_m += share[:, None] * step_m
    return time_s, position_m


def _draw_steps(state: ReachState, stream: np.random.Generator) -> FloatArray:
    """Return the way of each sub-movement: shares of the reach, and a bow out and back."""
    count = state.submovements
    shares = SHARE_RATIO ** np.arange(count)
    shares = shares * np.exp(SHARE_JITTER * stream.standard_normal(count))
    end_m = np.array([DISTANCE_M, 0.0]) + END_SCATTER_M * stream.standard_normal(2)
    steps_m = np.outer(shares / shares.sum(), end_m)
    steps_m[0, 1] += state.bow_m
    steps_m[-1, 1] -= state.bow_m
    return steps_m


def simulate_reach(state: ReachState, stream: np.random.Generator) -> tuple[FloatArray, FloatArray]:
    """Return time and measured path of one reach.

    Parameters
    ----------
    state : what shapes it.
    stream : the generator of this attempt.

    Returns
    -------
    Time, shape (n,), seconds; position, shape (n, 2), metres: forward and sideways.

    Notes
    -----
    The state sets overlap, number and spacing of the sub-movements; the stream adds unequal
    shares, scatter of the end point and white sensor noise.
    """
    steps_m = _draw_steps(state, stream)
    time_s, position_m = compute_reach(state.duration_s, compute_overlap(state.smoothness), steps_m)
    noise_m = SENSOR_NOISE_M * stream.standard_normal(position_m.shape)
    return time_s, position_m + noise_m
