"""Metrics of one point-to-point movement."""

from __future__ import annotations

import math

import numpy as np

from cuebook.metrics.profiles import (
    FloatArray,
    MovementWindow,
    compute_speed,
    find_speed_peaks,
)
from cuebook.metrics.values import MetricValue, give_none


def compute_sparc(
    speed: FloatArray, rate_hz: float, *, padlevel: int = 4, cap_hz: float = 10.0, amp: float = 0.05
) -> float:
    """Return the spectral arc length of a speed profile.

    Parameters
    ----------
    speed : shape (n_samples,), one movement, no NaN.
    rate_hz : samples per second, > 2 x cap_hz.
    padlevel : zero padding to 2 ** (ceil(log2(n)) + padlevel).
    cap_hz : highest frequency looked at.
    amp : the spectrum is cut at the last frequency whose amplitude reaches this share.

    Returns
    -------
    Unitless and negative; nearer to 0 is smoother. NaN if the profile is all zero.

    Notes
    -----
    What it cannot tell: whether the smoother way was slower or smaller. It depends on the
    number of movements in the window, so give it one.

    References
    ----------
    Balasubramanian, Melendez-Calderon & Burdet (2012), IEEE Trans Biomed Eng 59:2126;
    Balasubramanian et al. (2015), J NeuroEng Rehabil 12:112.
    """
    n_fft = int(2 ** (math.ceil(math.log2(speed.size)) + padlevel))
    # The one-sided transform holds every frequency up to half the rate, which is above the cap.
    magnitude = np.abs(np.fft.rfft(speed, n_fft))
    largest = float(np.max(magnitude))
    if not largest > 0:
        return math.nan
    magnitude = magnitude / largest
    frequency = np.fft.rfftfreq(n_fft, 1.0 / rate_hz)
    magnitude = magnitude[frequency <= cap_hz]
    frequency = frequency[frequency <= cap_hz]
    loud = np.flatnonzero(magnitude >= amp)
    first, last = int(loud[0]), int(loud[-1]) + 1
    frequency, magnitude = frequency[first:last], magnitude[first:last]
    span = float(frequency[-1] - frequency[0])
    steps = np.hypot(np.diff(frequency) / span, np.diff(magnitude))
    return -float(np.sum(steps))


def compute_path_length(path: FloatArray) -> float:
    """Return the length of a path, shape (n_samples, n_axes), in its own unit."""
    return float(np.sum(np.linalg.norm(np.diff(path, axis=0), axis=1)))


def compute_straightness(path: FloatArray, min_chord: float) -> MetricValue:
    """Return chord / path, 0 to 1 (1 / straightness is the index of curvature).

    Parameters
    ----------
    path : shape (n_samples, n_axes), the movement from onset to offset.
    min_chord : shortest chord for which the ratio means something, in the path's unit;
        0 if the unit is unknown.
    """
    chord = float(np.linalg.norm(path[-1] - path[0]))
    length = compute_path_length(path)
    if length == 0 or chord < min_chord:
        return give_none(
            "start and end lie too close together for a straightness", "chord_too_short"
        )
    return MetricValue(chord / length, path.shape[0])


def compute_movement_time(window: MovementWindow, rate_hz: float) -> float:
    """Return seconds from onset to offset."""
    return (window.offset - window.onset) / rate_hz


def compute_peak_speed(speed: FloatArray) -> float:
    """Return the largest sample of a speed profile."""
    return float(np.max(speed))


def count_speed_peaks(speed: FloatArray, *, floor: float = 0.10, valley: float = 0.10) -> int:
    """Return how many speed peaks stand apart (Rohrer et al. 2002, J Neurosci 22:8297)."""
    return len(find_speed_peaks(speed, floor=floor, valley=valley))


def compute_distance_to_path(path: FloatArray, point: FloatArray) -> tuple[float, float]:
    """Return the smallest distance of a point to the *line*, and where it lies.

    Parameters
    ----------
    path : shape (n_samples, n_axes), n_samples >= 2.
    point : shape (n_axes,), same unit.

    Returns
    -------
    Distance in the path's unit, and its place in fractional samples.
    """
    start, step = path[:-1], np.diff(path, axis=0)
    squared = np.sum(step**2, axis=1)
    with np.errstate(invalid="ignore", divide="ignore"):
        along = np.where(squared > 0, np.sum((point - start) * step, axis=1) / squared, 0.0)
    along = np.clip(along, 0.0, 1.0)
    distance = np.linalg.norm(start + along[:, None] * step - point, axis=1)
    nearest = int(np.argmin(distance))
    return float(distance[nearest]), nearest + float(along[nearest])


def compute_via_speed_ratio(
    position: FloatArray,
    rate_hz: float,
    via: FloatArray,
    *,
    floor: float = 0.10,
    valley: float = 0.10,
) -> MetricValue:
    """Return the lowest speed near a via point over the lower of the peaks beside it.

    Parameters
    ----------
    position : shape (n_samples, n_axes), the movement from onset to offset.
    via : shape (n_axes,), same unit.

    Returns
    -------
    0 (full stop) to 1 (no dip). One single peak: 1 with flag ``single_peak``.

    Notes
    -----
    For two equal collinear minimum-jerk segments overlapping by a share o <= 1 - 1/sqrt(3)
    the ratio is 2 o^2 (2 - o)^2 (superposition of Flash & Henis 1991, J Cogn Neurosci 3:220).
    Peaks nearer to the via point than a tenth of their segment are not counted as beside it.
    """
    distance, at = compute_distance_to_path(position, via)
    reach = min(np.linalg.norm(position[0] - via), np.linalg.norm(position[-1] - via))
    if distance > 0.5 * reach:
        return give_none("the via point was not approached", "via_not_approached")
    speed = compute_speed(position, rate_hz)
    peaks = find_speed_peaks(speed, floor=floor, valley=valley)
    if len(peaks) == 1:
        return MetricValue(1.0, 1, ("single_peak",))
    last = position.shape[0] - 1
    before = [peak for peak in peaks if peak <= at - 0.1 * at]
    after = [peak for peak in peaks if peak >= at + 0.1 * (last - at)]
    if not before or not after:
        return give_none("no speed peak on both sides of the via point", "via_at_the_end")
    left, right = before[-1], after[0]
    lowest = float(np.min(speed[left : right + 1]))
    return MetricValue(lowest / float(min(speed[left], speed[right])), 2)
