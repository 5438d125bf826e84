"""Speed profiles of one movement: onset, peaks, the part that counts."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]


def compute_speed(position: FloatArray, rate_hz: float) -> FloatArray:
    """Return the speed of a point: the norm of its central-difference velocity.

    Parameters
    ----------
    position : shape (n_samples, n_axes), any unit of length; n_samples >= 2, no NaN.
    rate_hz : samples per second, > 0.

    Returns
    -------
    Shape (n_samples,), the unit of length per second.
    """
    velocity = np.gradient(position, 1.0 / rate_hz, axis=0)
    return np.asarray(np.linalg.norm(velocity, axis=1), dtype=np.float64)


@dataclass(frozen=True, slots=True)
class MovementWindow:
    """Where one movement starts and ends, in fractional samples."""

    onset: float
    offset: float
    starts_at_rest: bool
    ends_at_rest: bool

    @property
    def is_whole(self) -> bool:
        """Return whether the record holds rest on both sides."""
        return self.starts_at_rest and self.ends_at_rest


def detect_movement(speed: FloatArray, fraction: float) -> MovementWindow | None:
    """Return the first and last crossing of ``fraction`` of the peak speed.

    Parameters
    ----------
    speed : shape (n_samples,), no NaN.
    fraction : share of the peak, such as 0.05.

    Returns
    -------
    The window with crossings interpolated between samples; None if nothing moves.

    Notes
    -----
    For a minimum-jerk movement the detected time is sqrt(1 - sqrt(p)) of the true one.
    Edges: a record that begins or ends above the threshold has no rest on that side.
    """
    if speed.size < 2 or not np.max(speed) > 0:
        return None
    threshold = fraction * float(np.max(speed))
    above = np.flatnonzero(speed >= threshold)
    first, last = int(above[0]), int(above[-1])
    onset = float(first)
    if first > 0:
        onset -= (speed[first] - threshold) / (speed[first] - speed[first - 1])
    offset = float(last)
    if last < speed.size - 1:
        offset += (speed[last] - threshold) / (speed[last] - speed[last + 1])
    return MovementWindow(onset, offset, first > 0, last < speed.size - 1)


def cut_path(position: FloatArray, window: MovementWindow) -> FloatArray:
    """Return the path between onset and offset, its two ends interpolated.

    Parameters
    ----------
    position : shape (n_samples, n_axes).
    """
    inner = np.arange(int(np.ceil(window.onset)), int(np.floor(window.offset)) + 1)
    at = np.unique(np.concatenate([[window.onset], inner, [window.offset]]))
    samples = np.arange(position.shape[0])
    return np.column_stack([np.interp(at, samples, axis) for axis in position.T])


def cut_speed(speed: FloatArray, window: MovementWindow) -> FloatArray:
    """Return the whole samples of a speed profile from onset to offset."""
    return speed[int(np.floor(window.onset)) : int(np.ceil(window.offset)) + 1]


def find_speed_peaks(speed: FloatArray, *, floor: float, valley: float) -> list[int]:
    """Return the samples of the speed peaks that stand apart.

    Parameters
    ----------
    speed : shape (n_samples,), no NaN.
    floor : a peak reaches at least this share of the largest.
    valley : two neighbours stay apart only if the valley between them lies more than this
        share below the lower of the two.

    Notes
    -----
    Depth is measured against the lower neighbour: with plain prominence two exactly equal
    peaks count as two however shallow the dip.
    """
    if speed.size < 3 or not np.max(speed) > 0:
        return []
    rises = np.diff(speed)
    candidates = [
        index
        for index in range(1, speed.size - 1)
        if rises[index - 1] > 0 and _falls_after(rises, index)
    ]
    peaks = [index for index in candidates if speed[index] >= floor * np.max(speed)]
    while len(peaks) > 1:
        depths = [_measure_valley(speed, left, right) for left, right in pairwise(peaks)]
        shallowest = int(np.argmin(depths))
        if depths[shallowest] > valley:
            break
        left, right = peaks[shallowest], peaks[shallowest + 1]
        peaks.remove(left if speed[left] < speed[right] else right)
    return peaks


def _falls_after(rises: FloatArray, index: int) -> bool:
    """Return whether a plateau that begins at ``index`` ends downwards."""
    rest = rises[index:]
    moving = np.flatnonzero(rest)
    return bool(moving.size) and rest[moving[0]] < 0


def _measure_valley(speed: FloatArray, left: int, right: int) -> float:
    lower = min(speed[left], speed[right])
    return float(1.0 - np.min(speed[left : right + 1]) / lower)
