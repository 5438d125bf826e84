"""Cleaning against closed forms: noise after filter and differences, interpolation, gaps."""

from __future__ import annotations

import math

import numpy as np
import pytest

from cuebook.recordings.cleaning import (
    compute_derivative_noise_sd,
    fill_gaps,
    filter_zero_phase,
    resample_evenly,
)


@pytest.mark.parametrize(
    ("cutoff_hz", "speed_m_s", "jerk_m_s3"),
    [
        (None, 0.07071, 559.0),
        (3.0, 0.003334, 2.317),
        (6.0, 0.009055, 18.63),
        (10.0, 0.01802, 71.20),
    ],
)
def test_noise_left_in_speed_and_jerk_equals_theory_and_simulation(
    cutoff_hz: float | None, speed_m_s: float, jerk_m_s3: float
) -> None:
    """1 mm at 100 Hz: unfiltered sigma fs / sqrt(2) and sigma fs^3 sqrt(5 / 16), else simulated."""
    assert compute_derivative_noise_sd(1e-3, 100.0, cutoff_hz, 1) == pytest.approx(
        speed_m_s, rel=2e-4
    )
    assert compute_derivative_noise_sd(1e-3, 100.0, cutoff_hz, 3) == pytest.approx(
        jerk_m_s3, rel=2e-4
    )
    noise = np.random.default_rng(11).normal(0, 1e-3, 200_000)
    if cutoff_hz is not None:
        noise = filter_zero_phase(noise, 100.0, cutoff_hz)
    speed = np.gradient(noise, 0.01)[1000:-1000]
    assert np.std(speed) == pytest.approx(speed_m_s, rel=0.03)


def test_cubic_resampling_keeps_to_its_error_bound() -> None:
    """1 Hz at 30 Hz: at most 5/384 h^4 (2 pi f)^4 = 2.505e-5; on even samples a fifth of it."""
    bound = 5 / 384 * (2 * math.pi / 30) ** 4
    assert bound == pytest.approx(2.505e-5, rel=1e-3)
    time_s = np.append(0.0, (np.arange(300) + 0.49) / 30)
    even = resample_evenly(time_s, np.sin(2 * math.pi * time_s)[:, None], 30.0)[:, 0]
    grid = np.arange(even.size) / 30.0
    off = np.abs(even - np.sin(2 * math.pi * grid))[20:-20]
    assert np.max(off) < bound
    assert np.max(off) == pytest.approx(bound / 5, rel=0.02)


def test_jitter_that_is_ignored_costs_more_than_jitter_that_is_resampled() -> None:
    """4 ms at 60 Hz on a 1 Hz wave: up to 2 pi f dt = .0251 ignored, below 1e-5 resampled."""
    rng = np.random.default_rng(2)
    time_s = np.arange(600) / 60 + rng.choice([-0.004, 0.004], 600)
    wave = np.sin(2 * math.pi * time_s)
    ignored = np.max(np.abs(wave - np.sin(2 * math.pi * np.arange(600) / 60)))
    assert ignored == pytest.approx(2 * math.pi * 0.004, rel=0.02)
    even = resample_evenly(time_s, wave[:, None], 60.0)[:, 0]
    grid = time_s[0] + np.arange(even.size) / 60.0
    known = ~np.isnan(even)
    off = np.abs(even - np.sin(2 * math.pi * grid))[known][20:-20]
    assert np.max(off) < 1e-5


@pytest.mark.parametrize(("share", "error"), [(0.05, 0.012), (0.10, 0.049)])
def test_a_gap_over_a_crest_costs_what_geometry_says(share: float, error: float) -> None:
    """A bridge over the crest of a wave errs by A (1 - cos(pi f g)), g between known samples."""
    rate_hz, gap_s = 1000.0, 0.1
    frequency = share / gap_s
    time_s = np.arange(-1000, 1001) / rate_hz
    wave = np.cos(2 * math.pi * frequency * time_s)
    holed = wave.copy()
    holed[np.abs(time_s) < gap_s / 2 - 1e-9] = np.nan
    filled = fill_gaps(holed, rate_hz, 0.1).values
    assert np.max(np.abs(filled - wave)) == pytest.approx(1 - math.cos(math.pi * share), rel=1e-6)
    assert 1 - math.cos(math.pi * share) == pytest.approx(error, rel=0.03)
