from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.jobs.demo.reach import (
    DISTANCE_M,
    OVERLAP_RANGE,
    RATE_HZ,
    REST_S,
    ReachState,
    compute_minimum_jerk_position,
    compute_overlap,
    compute_reach,
    simulate_reach,
)
from cuebook.jobs.demo.streams import open_stream

FINE_HZ = 10_000.0


def compute_speed(overlap: float, steps: int = 2) -> np.ndarray:
    """Return the speed of equal collinear sub-movements of 1 s and 0.1 m, finely sampled."""
    duration_s = 1.0 + (steps - 1) * (1.0 - overlap)
    _, position_m = compute_reach(duration_s, overlap, np.array([[0.1, 0.0]] * steps), FINE_HZ)
    return np.asarray(np.gradient(position_m[:, 0], 1.0 / FINE_HZ))


def test_one_sub_movement_has_the_minimum_jerk_shape() -> None:
    """Peak speed is 1.875 times the mean speed (Flash and Hogan 1985, closed form)."""
    speed = compute_speed(0.0, steps=1)
    assert speed.max() == pytest.approx(1.875 * 0.1, rel=1e-6)


@pytest.mark.parametrize(
    ("overlap", "ratio"),
    [(0.10, 0.0722), (0.20, 0.2592), (0.30, 0.5202), (0.40, 0.8192)],
)
def test_the_dip_between_two_sub_movements_is_the_closed_form(overlap: float, ratio: float) -> None:
    """The lowest speed between the peaks over the peak is 2 o^2 (2 - o)^2 for two equal ones.

    Follows from the minimum-jerk speed of Flash and Hogan (1985) at the middle of the overlap.
    """
    speed = compute_speed(overlap)
    middle = len(speed) // 2
    assert 2 * overlap**2 * (2 - overlap) ** 2 == pytest.approx(ratio)
    assert speed[middle] / speed.max() == pytest.approx(ratio, abs=1e-4)


def test_negative_overlap_is_a_pause() -> None:
    """Between sub-movements that do not touch, the hand stands still."""
    speed = compute_speed(-0.2)
    middle = len(speed) // 2
    assert speed[middle - 900 : middle + 900].max() == pytest.approx(0.0, abs=1e-9)


@given(share=st.floats(-1.0, 2.0))
def test_the_way_covered_never_leaves_the_way(share: float) -> None:
    """Before the start nothing is covered, after the end all of it, in between a part."""
    covered = float(compute_minimum_jerk_position(np.array([share]))[0])
    assert 0.0 <= covered <= 1.0
    if share <= 0.0:
        assert covered == 0.0
    if share >= 1.0:
        assert covered == 1.0


@given(first=st.floats(-20.0, 20.0), more=st.floats(0.0, 20.0))
def test_smoother_never_overlaps_less(first: float, more: float) -> None:
    """Overlap does not fall as smoothness rises, and stays where it can be told apart."""
    low, high = compute_overlap(first), compute_overlap(first + more)
    assert OVERLAP_RANGE[0] <= low <= high <= OVERLAP_RANGE[1]


@given(
    smoothness=st.floats(-6.0, 6.0),
    duration_s=st.floats(0.8, 2.5),
    bow_m=st.floats(0.0, 0.06),
    submovements=st.integers(1, 5),
    seed=st.integers(0, 1000),
)
def test_every_reach_rests_at_both_ends_and_arrives(
    smoothness: float, duration_s: float, bow_m: float, submovements: int, seed: int
) -> None:
    """A reach begins at the start mark and ends near the target, still before and after."""
    state = ReachState(smoothness, duration_s, bow_m, submovements)
    time_s, position_m = simulate_reach(state, open_stream(seed, "test"))
    still = round((REST_S - 0.05) * RATE_HZ)
    assert len(time_s) == len(position_m)
    assert np.diff(time_s) == pytest.approx(1.0 / RATE_HZ)
    assert np.abs(position_m[:still]).max() < 0.001
    assert np.ptp(position_m[-still:], axis=0).max() < 0.001
    assert position_m[-1] == pytest.approx([DISTANCE_M, 0.0], abs=0.03)
