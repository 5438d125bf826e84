"""Simulation-based calibration: effects drawn from the prior lie anywhere in their posterior."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import chisquare

from cuebook.evidence.crossed_layout import build_layout
from cuebook.evidence.effects import collect_effects
from cuebook.evidence.posterior import VariancePrior, fit_posterior

N_LIBRARIES = 120
N_CUES, N_LEARNERS, N_ROWS = 6, 8, 60
HAS_CUE_SD = 0.5


def draw_places(seed: int) -> tuple[float, float]:
    """Draw everything from the priors and return where two true effects lie in their posterior."""
    rng = np.random.default_rng(seed)
    # A density of t exp(-t^2 / 2A^2) is a Rayleigh distribution.
    cue_sd = rng.rayleigh(0.5)
    residual_sd, learner_sd, pair_sd = np.abs(rng.normal(0, [1.0, 0.5, 0.5]))
    cue, learner = rng.integers(-1, N_CUES, N_ROWS), rng.integers(0, N_LEARNERS, N_ROWS)
    v = rng.uniform(0.1, 0.5, N_ROWS)
    has_cue = rng.normal(0, HAS_CUE_SD)
    of_cue = rng.normal(0, cue_sd, N_CUES)
    pair = rng.normal(0, pair_sd, (N_CUES, N_LEARNERS))
    d = rng.normal(0, learner_sd, N_LEARNERS)[learner] + rng.normal(0, np.sqrt(v + residual_sd**2))
    d += np.where(cue >= 0, has_cue + of_cue[cue] + pair[cue, learner], 0.0)
    columns = np.column_stack([np.ones(N_ROWS), cue >= 0])
    layout = build_layout(
        d,
        columns,
        cue,
        learner,
        v,
        pair=True,
        prior_precision=[0.0, 1 / HAS_CUE_SD**2],
        cue_weights=np.eye(N_CUES),
    )
    posterior = fit_posterior(layout, VariancePrior(spread=1.0))
    rows = np.zeros((2, 2 + N_CUES))
    rows[0, [1, 2]] = 1.0  # the first cue over practice alone
    rows[1, [2, 3]] = 1.0, -1.0  # the first cue against the second
    truth = rows @ np.concatenate([[0.0, has_cue], of_cue])
    first, second = collect_effects(posterior, rows).mixture.compute_below(truth)
    return float(first), float(second)


@pytest.fixture(scope="module")
def places() -> np.ndarray[tuple[int, int], np.dtype[np.float64]]:
    """Return the places of both effects in every library."""
    return np.array([draw_places(seed) for seed in range(N_LIBRARIES)])


@pytest.mark.parametrize("effect", [0, 1])
def test_true_effects_lie_evenly_in_their_posterior(
    places: np.ndarray[tuple[int, int], np.dtype[np.float64]], effect: int
) -> None:
    """Chi-square over ten bins finds nothing uneven (Talts et al. 2018, p > .001)."""
    counts, _ = np.histogram(places[:, effect], bins=10, range=(0, 1))
    assert chisquare(counts).pvalue > 0.001


def test_intervals_cover_as_often_as_they_say(
    places: np.ndarray[tuple[int, int], np.dtype[np.float64]],
) -> None:
    """Central 80 % and 95 % intervals hold the truth within three standard errors."""
    for level in (0.80, 0.95):
        covered = (np.abs(places - 0.5) < level / 2).mean(axis=0)
        error = 3 * np.sqrt(level * (1 - level) / N_LIBRARIES)
        np.testing.assert_allclose(covered, level, atol=error)
