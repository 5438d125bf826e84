from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.jobs.demo.streams import open_stream
from cuebook.jobs.demo.strokes import CLOCK_SHARE, StrokeState, simulate_strokes
from cuebook.jobs.demo.sway import HIGHEST_HZ, RATE_HZ, SwayState, simulate_sway


@given(velocity_mm_s=st.floats(5.0, 40.0), seed=st.integers(0, 500))
def test_sway_has_the_speed_it_was_given(velocity_mm_s: float, seed: int) -> None:
    """Over the whole record the centre of pressure moves at the planned mean speed."""
    _, position_cm = simulate_sway(SwayState(velocity_mm_s, 30.0), open_stream(seed, "sway"))
    path_mm = 10.0 * np.hypot(*np.diff(position_cm, axis=0).T).sum()
    assert path_mm / 30.0 == pytest.approx(velocity_mm_s, rel=1e-9)


def test_sway_is_slow_and_stays_on_the_plate() -> None:
    """Nothing above 5 Hz, and a wander of millimetres, as adults stand."""
    state = SwayState(15.0, 30.0)
    spreads_mm = []
    for seed in range(40):
        _, position_cm = simulate_sway(state, open_stream(seed, "plate"))
        spreads_mm.append(10.0 * position_cm.std(axis=0))
        power = np.abs(np.fft.rfft(position_cm[:, 1])) ** 2
        frequency_hz = np.fft.rfftfreq(len(position_cm), 1.0 / RATE_HZ)
        assert power[frequency_hz > HIGHEST_HZ].sum() < 1e-12 * power.sum()
    sideways_mm, forward_mm = np.mean(spreads_mm, axis=0)
    assert 1.0 < sideways_mm < forward_mm < 12.0


def test_stroke_intervals_have_the_planned_spread() -> None:
    """Mean and coefficient of variation of very many intervals are the state's."""
    state = StrokeState(rate_per_min=22.0, interval_cv=0.05, strokes=200_001)
    intervals_s = np.diff(simulate_strokes(state, open_stream(3, "long")))
    assert intervals_s.mean() == pytest.approx(60.0 / 22.0, rel=1e-3)
    assert intervals_s.std() / intervals_s.mean() == pytest.approx(0.05, rel=0.02)


def test_stroke_intervals_alternate_as_the_two_level_timer_says() -> None:
    """Neighbouring intervals correlate by minus the share of one start delay.

    Wing and Kristofferson (1973): the covariance of neighbours is minus the variance of the
    start delays, of which an interval holds two.
    """
    state = StrokeState(rate_per_min=22.0, interval_cv=0.05, strokes=200_001)
    intervals_s = np.diff(simulate_strokes(state, open_stream(4, "long")))
    correlation = np.corrcoef(intervals_s[:-1], intervals_s[1:])[0, 1]
    assert correlation == pytest.approx(-(1.0 - CLOCK_SHARE) / 2.0, abs=0.01)


@given(cv=st.floats(0.0, 0.12), seed=st.integers(0, 500))
def test_strokes_never_run_backwards(cv: float, seed: int) -> None:
    """However uneven, each stroke comes after the one before."""
    onsets_s = simulate_strokes(StrokeState(22.0, cv, 27), open_stream(seed, "piece"))
    assert onsets_s[0] > 0.0
    assert np.diff(onsets_s).min() > 0.0
