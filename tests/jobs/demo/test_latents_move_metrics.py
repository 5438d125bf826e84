from __future__ import annotations

import math
from itertools import pairwise
from statistics import fmean, stdev

import numpy as np
import pytest

from cuebook.jobs.demo.reach import RATE_HZ, ReachState, simulate_reach
from cuebook.jobs.demo.streams import open_stream
from cuebook.jobs.demo.strokes import StrokeState, simulate_strokes
from cuebook.jobs.demo.sway import RATE_HZ as PLATE_RATE_HZ
from cuebook.jobs.demo.sway import SwayState, simulate_sway
from cuebook.metrics.discrete import compute_movement_time, compute_path_length, compute_sparc
from cuebook.metrics.events import compute_interval_cv_pct
from cuebook.metrics.profiles import compute_speed, cut_speed, detect_movement
from cuebook.metrics.still import compute_sway_velocity

REPEATS = 60
SMOOTHNESS = [float(level) for level in range(-5, 6)]


def measure_reaches(state: ReachState, purpose: str) -> tuple[list[float], list[float]]:
    """Return spectral arc length and time of repeated reaches, sensor noise smoothed a little."""
    arc_lengths, times_s = [], []
    for repeat in range(REPEATS):
        _, position_m = simulate_reach(state, open_stream(repeat, purpose))
        kernel = np.hanning(13) / np.hanning(13).sum()
        smooth_m = np.apply_along_axis(np.convolve, 0, position_m, kernel, "valid")
        speed = compute_speed(smooth_m, RATE_HZ)
        window = detect_movement(speed, 0.05)
        assert window is not None
        assert window.is_whole
        arc_lengths.append(compute_sparc(cut_speed(speed, window), RATE_HZ))
        times_s.append(compute_movement_time(window, RATE_HZ))
    return arc_lengths, times_s


@pytest.mark.parametrize("submovements", [3, 4])
def test_smoothness_moves_spectral_arc_length_one_way(submovements: int) -> None:
    """Over the whole range that learners reach, a smoother state is measured as smoother."""
    means = [
        fmean(measure_reaches(ReachState(level, 1.3, 0.03, submovements), f"at {level}")[0])
        for level in SMOOTHNESS
    ]
    assert all(after - before > 0.04 for before, after in pairwise(means))


def test_one_unit_of_smoothness_is_about_an_eighth_of_arc_length() -> None:
    """The size written in the truths holds where most reaches are: 0.12, give or take a third."""
    low, high = (
        fmean(measure_reaches(ReachState(level, 1.3, 0.03), "unit")[0]) for level in (-2.0, 2.0)
    )
    assert (high - low) / 4.0 == pytest.approx(0.12, rel=0.33)


def test_chance_within_the_simulator_is_small_beside_a_unit() -> None:
    """Reaches of one state differ by less than half of what attempts of one day do."""
    arc_lengths, _ = measure_reaches(ReachState(0.0, 1.3, 0.03), "chance")
    assert stdev(arc_lengths) < 0.06


def test_a_slower_reach_takes_longer_and_is_no_less_smooth() -> None:
    """Duration scales the measured time and leaves spectral arc length where it was."""
    quick = measure_reaches(ReachState(0.0, 1.2, 0.03), "quick")
    slow = measure_reaches(ReachState(0.0, 1.2 * math.exp(0.2), 0.03), "slow")
    assert fmean(slow[1]) / fmean(quick[1]) == pytest.approx(math.exp(0.2), rel=0.02)
    assert fmean(slow[0]) == pytest.approx(fmean(quick[0]), abs=0.03)


def test_a_smoother_reach_takes_as_long() -> None:
    """Smoothness does not leak into time: half the range changes it by less than 4 %."""
    rough = measure_reaches(ReachState(-2.5, 1.3, 0.03), "rough")[1]
    smooth = measure_reaches(ReachState(2.5, 1.3, 0.03), "smooth")[1]
    assert fmean(smooth) / fmean(rough) == pytest.approx(1.0, abs=0.04)


def test_a_wider_bow_makes_a_longer_path() -> None:
    """The more a reach bows, the longer its path."""
    lengths_m = []
    for bow_m in (0.0, 0.02, 0.04, 0.06):
        _, position_m = simulate_reach(ReachState(0.0, 1.3, bow_m), open_stream(1, "bow"))
        lengths_m.append(compute_path_length(position_m))
    assert all(before < after for before, after in pairwise(lengths_m))


def test_sway_state_moves_sway_velocity_one_way() -> None:
    """Without the first five seconds too, more sway is measured as more."""
    means = []
    for velocity_mm_s in (8.0, 10.0, 12.5, 15.6, 19.5):
        state = SwayState(velocity_mm_s, 30.0)
        paths = [simulate_sway(state, open_stream(i, "sway"))[1][500:] for i in range(REPEATS)]
        means.append(fmean(compute_sway_velocity(one, PLATE_RATE_HZ, "intervals") for one in paths))
    assert all(before < after for before, after in pairwise(means))
    assert 10.0 * means[2] == pytest.approx(12.5, rel=0.05)


def test_rhythm_state_moves_the_spread_of_intervals_one_way() -> None:
    """A less even state is measured as less even, and attempts differ by about 14 %."""
    means, spreads = [], []
    for cv in (0.03, 0.04, 0.05, 0.065, 0.085):
        state = StrokeState(22.0, cv, 27)
        onsets = [simulate_strokes(state, open_stream(i, f"{cv}")) for i in range(200)]
        found = [compute_interval_cv_pct(one).value for one in onsets]
        means.append(fmean(found))
        spreads.append(stdev([math.log(one) for one in found]))
    assert all(before < after for before, after in pairwise(means))
    assert fmean(spreads) == pytest.approx(0.14, abs=0.03)
