"""Rhythm, standing balance and filters against worked examples and closed forms."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import signal

from cuebook.metrics.events import (
    compute_asynchrony_sd_ms,
    compute_interval_cv_pct,
    compute_mean_asynchrony_ms,
    match_beats,
)
from cuebook.metrics.still import (
    compute_prediction_ellipse_area,
    compute_sway_duration,
    compute_sway_velocity,
)
from cuebook.recordings.cleaning import compute_design_cutoff, filter_zero_phase

INTERVALS_MS = (500, 520, 490, 510, 480, 515, 495, 505)
ASYNCHRONIES_MS = (-30, -20, -50, -10, -40, -20, -30, -40)


def test_interval_cv_of_the_worked_example() -> None:
    """SD (n - 1) over mean of eight intervals: 2.659297 %, by hand."""
    onsets = np.concatenate([[0.0], np.cumsum(INTERVALS_MS)]) / 1000.0
    found = compute_interval_cv_pct(onsets, min_intervals=8)
    assert found.value == pytest.approx(2.659297, abs=1e-6)
    assert found.n_used == 8


def test_asynchrony_of_the_worked_example() -> None:
    """Beats each 0.6 s with eight known asynchronies: mean -30 ms, SD 13.0931 ms, by hand."""
    beats = np.arange(8, dtype=np.float64) * 0.6 + 1.0
    match = match_beats(beats + np.array(ASYNCHRONIES_MS) / 1000.0, beats)
    assert compute_mean_asynchrony_ms(match).value == pytest.approx(-30.0, abs=1e-9)
    assert compute_asynchrony_sd_ms(match).value == pytest.approx(13.0931, abs=1e-4)


def test_missed_and_extra_taps_are_counted_apart() -> None:
    """A tap far from any beat is extra, a beat without a tap is missed."""
    beats = np.arange(6, dtype=np.float64) * 0.6
    match = match_beats(np.array([0.01, 0.59, 0.62, 1.8, 2.4, 3.0]), beats)
    assert (match.missed_beats, match.extra_events) == (1, 1)


def test_sway_of_a_circle_equals_its_closed_form() -> None:
    """Unit circle, 0.5 Hz, 100 Hz, 30 s: velocity 2 fs sin(pi f / fs) = 3.141463."""
    time_s = np.arange(3001) / 100.0
    circle = np.column_stack([np.cos(math.pi * time_s), np.sin(math.pi * time_s)])
    expected = 200 * math.sin(math.pi * 0.5 / 100)
    assert compute_sway_velocity(circle, 100.0, "intervals") == pytest.approx(expected, rel=1e-9)
    assert expected == pytest.approx(3.141463, abs=1e-6)


def test_the_two_durations_differ_by_one_interval() -> None:
    """``intervals`` is (n - 1) / rate, ``samples`` n / rate."""
    assert compute_sway_duration(101, 100.0, "intervals") == pytest.approx(1.0)
    assert compute_sway_duration(101, 100.0, "samples") == pytest.approx(1.01)


# Factors of sqrt(det S) for three definitions: Prieto et al. 1996 uses F taken as 3 here, Duarte
# 2015 the exact F, Schubert & Kirchner 2014 chi-square; recomputed from the formulas.
@pytest.mark.parametrize(
    ("n", "exact"), [(50, 20.875), (300, 19.141), (600, 18.981), (3000, 18.854)]
)
def test_ellipse_factors_equal_the_published_forms(n: int, exact: float) -> None:
    """The factor before sqrt(det S) is that of each definition."""
    rng = np.random.default_rng(7)
    position = rng.normal(size=(n, 2)) @ np.array([[2.0, 0.3], [0.0, 0.7]])
    root = math.sqrt(np.linalg.det(np.cov(position.T)))
    areas = {
        form: compute_prediction_ellipse_area(position, form) / root
        for form in ("chi2", "f", "prieto")
    }
    assert areas["chi2"] == pytest.approx(18.822741, abs=1e-6)
    assert areas["f"] == pytest.approx(exact, abs=5e-4)
    assert areas["prieto"] == pytest.approx(18.849556, abs=1e-6)


def test_ellipse_of_the_circle_equals_its_closed_form() -> None:
    """The circle above with n = 3000: 9.4145087 (chi-square form, divisor n - 1)."""
    time_s = np.arange(3000) / 100.0
    circle = np.column_stack([np.cos(math.pi * time_s), np.sin(math.pi * time_s)])
    assert compute_prediction_ellipse_area(circle, "chi2") == pytest.approx(9.4145087, abs=1e-6)


@pytest.mark.parametrize(
    ("rate_hz", "cutoff_hz", "design_hz"),
    [
        (100, 6, 7.430885),
        (30, 6, 7.027534),
        (60, 8, 9.676461),
        (200, 10, 12.409009),
        (100, 20, 23.425114),
    ],
)
def test_the_design_cutoff_is_corrected_on_the_warped_axis(
    rate_hz: float, cutoff_hz: float, design_hz: float
) -> None:
    """Winter (2009), p. 69, with the pre-warped frequency corrected; and scipy's own response."""
    assert compute_design_cutoff(rate_hz, cutoff_hz) == pytest.approx(design_hz, abs=1e-6)
    b, a = signal.butter(2, compute_design_cutoff(rate_hz, cutoff_hz), fs=rate_hz)
    _, response = signal.freqz(b, a, worN=[cutoff_hz], fs=rate_hz)
    assert abs(response[0]) ** 2 == pytest.approx(1 / math.sqrt(2), abs=1e-9)


def test_the_filter_keeps_slow_movement_and_halves_power_at_the_cutoff() -> None:
    """1 Hz through 6 Hz at 100 Hz keeps .99969499; 6 Hz keeps .70711 with no lag."""
    time_s = np.arange(4000) / 100.0
    middle = slice(1000, 3000)
    for frequency, gain in ((1.0, 0.99969499), (6.0, 1 / math.sqrt(2))):
        wave = np.sin(2 * math.pi * frequency * time_s)
        passed = filter_zero_phase(wave, 100.0, 6.0)[middle]
        assert np.max(np.abs(passed - gain * wave[middle])) < 1e-6


def test_a_straight_ramp_comes_back_unchanged() -> None:
    """Odd reflection at the ends leaves a ramp as it is."""
    ramp = np.linspace(0.0, 3.0, 300)
    assert np.max(np.abs(filter_zero_phase(ramp, 100.0, 6.0) - ramp)) < 1e-9
