"""Smoothness, shape and flow against closed forms and published values."""

from __future__ import annotations

import io
import math

import numpy as np
import pandas as pd
import pytest
from support.open_data import SIT2STANDPY, fetch_member

from cuebook.metrics.discrete import (
    compute_distance_to_path,
    compute_path_length,
    compute_sparc,
    compute_straightness,
    compute_via_speed_ratio,
    count_speed_peaks,
)
from cuebook.metrics.profiles import FloatArray, compute_speed, detect_movement


def make_minimum_jerk(rate_hz: float, seconds: float = 1.0, distance: float = 1.0) -> FloatArray:
    """Return the position of a minimum-jerk movement (Flash & Hogan 1985)."""
    tau = np.arange(round(seconds * rate_hz) + 1) / (seconds * rate_hz)
    return np.asarray(distance * (10 * tau**3 - 15 * tau**4 + 6 * tau**5), dtype=np.float64)


def make_pair(overlap: float, rate_hz: float = 1000.0) -> FloatArray:
    """Return two equal collinear segments, the second beginning before the first has ended."""
    segment = make_minimum_jerk(rate_hz)
    shift = round((1 - overlap) * rate_hz)
    time = np.arange(shift + segment.size)
    first = np.interp(time, np.arange(segment.size), segment)
    second = np.interp(time - shift, np.arange(segment.size), segment)
    return np.asarray(first + second, dtype=np.float64)


def test_sparc_of_a_minimum_jerk_movement_equals_its_exact_spectrum() -> None:
    """Closed form from the spherical Bessel spectrum, -1.408178, within the grid's .01."""
    position = make_minimum_jerk(1000.0)
    speed = np.gradient(position, 1e-3)
    assert compute_sparc(speed, 1000.0) == pytest.approx(-1.408178, abs=0.01)
    assert compute_sparc(speed, 1000.0, padlevel=10) == pytest.approx(-1.408178, abs=0.002)


def test_sparc_of_a_gaussian_profile_equals_its_authors_value() -> None:
    """The authors' docstring value (Balasubramanian et al. 2012): -1.41403 at 100 Hz."""
    time_s = np.arange(-1, 1, 0.01)
    speed = np.exp(-5 * time_s**2)
    assert compute_sparc(speed, 100.0) == pytest.approx(-1.41403, abs=1e-5)


# Start (microseconds), duration (s) and SPARC of five rises, as the authors of sit2standpy 1.1.3
# (MIT) ship them in detector_results.h5 beside the recording sample.csv.
RISES = [
    (1568054294283405, 1.413972, -2.0439642560008706),
    (1568054307641925, 1.64052, -2.2331804638826025),
    (1568054352678105, 1.67958, -2.2643435935576197),
    (1568054356068513, 3.296664, -2.4705533448641943),
    (1568054360232309, 1.812384, -2.586085092129626),
]


@pytest.mark.open_data
def test_sparc_of_five_real_rises_equals_the_shipped_results() -> None:
    """Norm of the raw acceleration with gravity, end sample left out, rate from the mean step."""
    content = fetch_member(SIT2STANDPY, "sit2standpy/data/sample.csv")
    table = pd.read_csv(io.BytesIO(content), header=None).to_numpy(dtype=np.float64)
    stamps, acceleration = table[:, 0], np.linalg.norm(table[:, 1:4], axis=1)
    rate_hz = 1e6 / float(np.mean(np.diff(stamps)))
    for start, seconds, expected in RISES:
        first = int(np.searchsorted(stamps, start - 100))
        last = int(np.searchsorted(stamps, start + seconds * 1e6 - 100))
        found = compute_sparc(acceleration[first:last], rate_hz)
        assert found == pytest.approx(expected, abs=1e-4)


@pytest.mark.parametrize("share", [0.02, 0.05, 0.10])
def test_onset_of_a_minimum_jerk_movement_is_exact(share: float) -> None:
    """Closed form: detected over true time is sqrt(1 - sqrt(p))."""
    position = make_minimum_jerk(1000.0)
    speed = np.abs(np.gradient(position, 1e-3))
    window = detect_movement(speed, share)
    assert window is not None
    assert (window.offset - window.onset) / 1000.0 == pytest.approx(
        math.sqrt(1 - math.sqrt(share)), abs=1e-4
    )


@pytest.mark.parametrize(("overlap", "count"), [(0.0, 2), (0.3, 2), (0.42, 2), (0.43, 1), (0.7, 1)])
def test_speed_peaks_merge_where_the_valley_is_shallow(overlap: float, count: int) -> None:
    """Two equal segments count 2 up to 42 % overlap and 1 from 43 % on (valley 10 %)."""
    speed = np.abs(np.gradient(make_pair(overlap), 1e-3))
    assert count_speed_peaks(speed) == count


def test_one_clean_movement_has_one_speed_peak() -> None:
    """A minimum-jerk movement is one unit."""
    assert count_speed_peaks(np.gradient(make_minimum_jerk(100.0), 1e-2)) == 1


@pytest.mark.parametrize(
    ("angle", "straightness"), [(math.pi, 2 / math.pi), (math.pi / 2, 1 / 1.110721)]
)
def test_straightness_of_arcs_equals_geometry(angle: float, straightness: float) -> None:
    """Semicircle: 2 / pi; quarter circle: 1 / 1.110721 (closed forms)."""
    turn = np.linspace(0, angle, 20001)
    path = np.column_stack([np.cos(turn), np.sin(turn)])
    assert compute_straightness(path, 0.0).value == pytest.approx(straightness, abs=1e-6)


def test_path_length_of_a_polygon_is_exact() -> None:
    """A regular 36-gon: 72 sin(pi / 36) = 6.275213."""
    turn = np.arange(37) * 2 * math.pi / 36
    path = np.column_stack([np.cos(turn), np.sin(turn)])
    assert compute_path_length(path) == pytest.approx(72 * math.sin(math.pi / 36), rel=1e-12)


@pytest.mark.parametrize("overlap", [0.05, 0.10, 0.15, 0.20, 0.25, 0.30, 0.35, 0.40, 0.42])
def test_via_speed_ratio_equals_the_exact_curve(overlap: float) -> None:
    """Exact for two equal collinear segments: 2 o^2 (2 - o)^2 (Flash & Henis 1991)."""
    x = make_pair(overlap)
    position = np.column_stack([x, np.zeros_like(x)])
    ratio = compute_via_speed_ratio(position, 1000.0, np.array([1.0, 0.0]))
    assert ratio.value == pytest.approx(2 * overlap**2 * (2 - overlap) ** 2, abs=1e-4)


@pytest.mark.parametrize("overlap", [0.44, 0.46, 0.48, 0.50, 0.70])
def test_via_speed_ratio_of_blended_segments_is_near_one(overlap: float) -> None:
    """Beyond 44 % overlap the dip is shallow or gone."""
    x = make_pair(overlap)
    position = np.column_stack([x, np.zeros_like(x)])
    ratio = compute_via_speed_ratio(position, 1000.0, np.array([1.0, 0.0]))
    assert 0.93 <= ratio.value <= 1.0


def test_via_error_is_measured_to_the_line_not_to_samples() -> None:
    """Point (.55, .02) against a line sampled each .1: .02, where the samples say .0539."""
    path = np.column_stack([np.arange(0, 1.05, 0.1), np.zeros(11)])
    distance, at = compute_distance_to_path(path, np.array([0.55, 0.02]))
    assert distance == pytest.approx(0.02, abs=1e-12)
    assert at == pytest.approx(5.5, abs=1e-9)


def test_peak_over_mean_speed_of_a_minimum_jerk_movement() -> None:
    """Closed form 1.875 (Flash & Hogan 1985)."""
    position = make_minimum_jerk(1000.0)
    speed = compute_speed(np.column_stack([position, 0 * position]), 1000.0)
    assert np.max(speed) / 1.0 == pytest.approx(1.875, abs=1e-4)
