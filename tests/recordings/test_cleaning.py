from __future__ import annotations

import math

import numpy as np
import pytest

from cuebook.recordings.cleaning import (
    estimate_noise_sd,
    fill_gaps,
    filter_zero_phase,
    resample_evenly,
)


def test_a_short_gap_is_filled_and_marked() -> None:
    """A gap of 0.05 s in a slow wave is filled to within a hundredth of its size."""
    time_s = np.arange(200) / 100
    wave = np.sin(2 * math.pi * 0.5 * time_s)
    holed = wave.copy()
    holed[60:65] = np.nan
    filled = fill_gaps(holed, 100.0, 0.1)
    assert np.max(np.abs(filled.values - wave)) < 0.01
    assert filled.filled.sum() == 5
    assert filled.longest_gap_s == pytest.approx(0.05)


def test_a_long_gap_and_the_ends_stay_missing() -> None:
    """Nothing is made up beyond the limit, nor at the ends."""
    values = np.arange(100, dtype=np.float64)
    values[:3] = np.nan
    values[40:60] = np.nan
    values[97:] = np.nan
    filled = fill_gaps(values, 100.0, 0.1)
    assert np.isnan(filled.values[[0, 45, 98]]).all()
    assert not filled.filled.any()


def test_resampling_recovers_a_wave_from_jittered_stamps() -> None:
    """A 1 Hz wave at 60 Hz with 4 ms jitter comes back within 1e-4 (cubic spline)."""
    rng = np.random.default_rng(3)
    time_s = np.sort(np.arange(300) / 60 + rng.uniform(-0.004, 0.004, 300))
    wave = np.sin(2 * math.pi * time_s)[:, None]
    even = resample_evenly(time_s, wave, 60.0)
    grid = time_s[0] + np.arange(even.shape[0]) / 60.0
    assert np.max(np.abs(even[:, 0] - np.sin(2 * math.pi * grid))) < 1e-4


def test_resampling_leaves_wide_holes_missing() -> None:
    """Inside a hole wider than the limit nothing is made up."""
    time_s = np.concatenate([np.arange(50) / 50, 2.0 + np.arange(50) / 50])
    even = resample_evenly(time_s, np.ones((100, 1)), 50.0)
    assert np.isnan(even).any()


def test_noise_is_estimated_on_top_of_movement() -> None:
    """White noise of 1 mm on a slow reach is found within a tenth."""
    rng = np.random.default_rng(5)
    time_s = np.arange(2000) / 100
    reach = 0.2 * np.sin(2 * math.pi * 0.3 * time_s) + rng.normal(0, 0.001, 2000)
    assert estimate_noise_sd(reach) == pytest.approx(0.001, rel=0.1)


def test_the_filter_takes_what_it_is_given_when_the_record_is_short() -> None:
    """A record shorter than the padding is filtered without an error."""
    assert filter_zero_phase(np.arange(12, dtype=np.float64), 100.0, 6.0).shape == (12,)
