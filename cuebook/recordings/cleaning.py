"""Cleaning: gaps, even grids, zero-phase filters, noise."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from cuebook.recordings.recording import FloatArray
from cuebook.recordings.time_axis import HOLE

PASSES = 2


@dataclass(frozen=True, eq=False)
class FilledSignal:
    """A signal whose short gaps have been filled."""

    values: FloatArray
    """Shape (n_samples,) or (n_samples, n_axes); NaN where a gap was too long."""
    filled: np.ndarray
    """Shape (n_samples,), True where a value was made up."""
    longest_gap_s: float
    missing_fraction: float


def compute_design_cutoff(rate_hz: float, cutoff_hz: float, passes: int = PASSES) -> float:
    """Return the cut-off a 2nd-order Butterworth is designed with, so that passes do not lower it.

    Parameters
    ----------
    rate_hz : samples per second.
    cutoff_hz : wanted -3 dB frequency after all passes, < rate_hz / 2.

    Notes
    -----
    The *pre-warped* frequency is divided by (2^(1/passes) - 1)^(1/4), 0.802243 for two passes.

    References
    ----------
    Winter (2009), Biomechanics and Motor Control of Human Movement, 4th ed., p. 69.
    """
    correction = (2.0 ** (1.0 / passes) - 1.0) ** 0.25
    warped = math.tan(math.pi * cutoff_hz / rate_hz) / correction
    return rate_hz / math.pi * math.atan(warped)


def filter_zero_phase(values: FloatArray, rate_hz: float, cutoff_hz: float) -> FloatArray:
    """Return values low-passed forward and back (2nd-order Butterworth each way).

    Parameters
    ----------
    values : shape (n_samples,) or (n_samples, n_axes), no NaN.
    rate_hz : samples per second.
    cutoff_hz : -3 dB frequency of both passes together.

    Notes
    -----
    Edges are continued by odd reflection over 3 rate / cut-off samples, so a straight ramp comes
    back unchanged. A record shorter than that is padded by what it has.
    """
    from scipy.signal import butter, sosfiltfilt  # noqa: PLC0415

    sections = butter(2, compute_design_cutoff(rate_hz, cutoff_hz), fs=rate_hz, output="sos")
    pad = min(int(3 * rate_hz / cutoff_hz), values.shape[0] - 1)
    filtered = sosfiltfilt(sections, values, axis=0, padtype="odd", padlen=pad)
    return np.asarray(filtered, dtype=np.float64)


def fill_gaps(values: FloatArray, rate_hz: float, max_gap_s: float) -> FilledSignal:
    """Return a signal with gaps up to ``max_gap_s`` filled (PCHIP), never at its ends.

    Parameters
    ----------
    values : shape (n_samples,) or (n_samples, n_axes); NaN where missing.
    """
    table = values if values.ndim == 2 else values[:, None]
    missing: npt.NDArray[np.bool_] = np.asarray(np.isnan(table).any(axis=1))
    filled = np.zeros(missing.shape, dtype=bool)
    longest = 0.0
    out = table.copy()
    for start, stop in _list_runs(missing):
        length_s = (stop - start) / rate_hz
        longest = max(longest, length_s)
        if start == 0 or stop == missing.size or length_s > max_gap_s + 0.5 / rate_hz:
            out[start:stop] = np.nan
        else:
            filled[start:stop] = True
    if filled.any():
        from scipy.interpolate import PchipInterpolator  # noqa: PLC0415

        known = np.flatnonzero(~missing)
        out[filled] = PchipInterpolator(known, table[known], axis=0)(np.flatnonzero(filled))
    result = out if values.ndim == 2 else out[:, 0]
    return FilledSignal(result, filled, longest, float(np.mean(missing)))


def _list_runs(mask: npt.NDArray[np.bool_]) -> list[tuple[int, int]]:
    edges = np.flatnonzero(np.diff(np.concatenate([[0], mask.astype(np.int8), [0]])))
    return list(zip(edges[::2].tolist(), edges[1::2].tolist(), strict=True))


def resample_evenly(time_s: FloatArray, values: FloatArray, rate_hz: float) -> FloatArray:
    """Return values on an even grid by cubic spline; NaN inside every hole in time.

    Parameters
    ----------
    time_s : shape (n_samples,), strictly increasing.
    values : shape (n_samples, n_axes), no NaN.
    rate_hz : samples per second of the grid.

    Notes
    -----
    A step longer than 1.5 grid steps is a hole; whether a hole may be filled is decided by
    :func:`fill_gaps`, so that a lost sample counts as missing whichever way it was lost.
    """
    from scipy.interpolate import CubicSpline  # noqa: PLC0415

    n_even = math.floor((time_s[-1] - time_s[0]) * rate_hz + 1e-6) + 1
    grid = np.minimum(time_s[0] + np.arange(n_even) / rate_hz, time_s[-1])
    even = np.asarray(CubicSpline(time_s, values, axis=0)(grid), dtype=np.float64)
    # Half a hundredth of a step: a grid point on a sample is not inside the hole.
    slack = 0.005 / rate_hz
    for index in np.flatnonzero(np.diff(time_s) > HOLE / rate_hz):
        even[(grid > time_s[index] + slack) & (grid < time_s[index + 1] - slack)] = np.nan
    return even


def estimate_noise_sd(values: FloatArray) -> float:
    """Return the SD of white noise in a smooth signal, from its second differences.

    Parameters
    ----------
    values : shape (n_samples,) or (n_samples, n_axes), no NaN; axes are averaged.

    Notes
    -----
    Second differences of white noise have 6 times its variance. Movement adds to it, so this
    is an upper bound unless sampling is fast against the movement. NaN below 5 samples.
    """
    table = values if values.ndim == 2 else values[:, None]
    if table.shape[0] < 5:
        return math.nan
    second = np.diff(table, n=2, axis=0)
    # The median resists the few samples where the movement itself bends.
    per_axis = 1.4826 * np.median(np.abs(second), axis=0) / math.sqrt(6.0)
    return float(np.mean(per_axis))


def compute_derivative_noise_sd(
    noise_sd: float, rate_hz: float, cutoff_hz: float | None, order: int
) -> float:
    """Return the SD that white noise leaves in a filtered, differentiated signal.

    Parameters
    ----------
    noise_sd : SD of the noise in one axis of the signal.
    rate_hz : samples per second.
    cutoff_hz : cut-off of :func:`filter_zero_phase`; None: not filtered.
    order : how often central differences are taken: 0 the signal, 1 velocity, 3 jerk.

    Notes
    -----
    The integral over frequency of the squared gain of filter and differences:
    sd^2 (2/fs) int_0^(fs/2) (gain(f) (fs sin(2 pi f / fs))^order)^2 df.
    """
    steps = 4096
    frequency = (np.arange(steps) + 0.5) * rate_hz / (2 * steps)
    gain = (rate_hz * np.sin(2 * math.pi * frequency / rate_hz)) ** order
    if cutoff_hz is not None:
        design_hz = compute_design_cutoff(rate_hz, cutoff_hz)
        ratio = np.tan(math.pi * frequency / rate_hz) / math.tan(math.pi * design_hz / rate_hz)
        gain = gain / (1.0 + ratio**4)
    return noise_sd * float(np.sqrt(np.mean(gain**2)))
