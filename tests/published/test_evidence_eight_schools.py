"""Rubin's eight schools (1981): the whole posterior against values from a fine grid.

The grid values were computed with numpy from the textbook formulas (Gelman et al., Bayesian Data
Analysis, section 5.5), outside this program.
"""

from __future__ import annotations

import numpy as np
import pytest
from support import classic_tables as tables

from cuebook.evidence import posterior as posterior_module
from cuebook.evidence.arrays import FloatArray
from cuebook.evidence.crossed_layout import build_layout
from cuebook.evidence.effects import collect_effects
from cuebook.evidence.eliminated import compute_joint, solve_crossed
from cuebook.evidence.posterior import VariancePrior, fit_posterior
from cuebook.evidence.reml import fit_reml

EFFECT = np.array(tables.EIGHT_SCHOOLS)
KNOWN = np.array(tables.EIGHT_SCHOOLS_SE) ** 2
ROWS = np.vstack([np.eye(9)[:1], np.hstack([np.ones((8, 1)), np.eye(8)])])
"""The mean, then each school."""


def test_schools_do_not_differ_by_restricted_likelihood() -> None:
    """The variance between schools is 0, and the mean is metafor's."""
    fit = fit_reml(EFFECT, np.ones((8, 1)), np.arange(8), v=KNOWN, variances={"residual": 0.0})
    assert fit.variances["cue"] == 0
    assert fit.beta[0] == pytest.approx(7.685616725, rel=1e-8)
    assert fit.beta_se[0] == pytest.approx(4.071919158, rel=1e-8)


def test_flat_prior_on_the_sd_gives_the_grid_values() -> None:
    """Criterion, predictions and their errors, averaged over a grid of the SD from 0 to 200."""
    layout = build_layout(EFFECT, np.ones((8, 1)), np.arange(8), None, KNOWN)
    width = np.concatenate([np.full(3000, 0.02), np.full(700, 0.2)])
    grid = np.cumsum(width) - width / 2
    log_density, means, variances = [], [], []
    for sd in grid:
        solution = solve_crossed(layout, {"residual": 0.0, "cue": sd**2})
        mean, covariance = compute_joint(layout, solution)
        log_density.append(-solution.criterion / 2)
        means.append(ROWS @ mean)
        variances.append(np.diag(ROWS @ covariance @ ROWS.T))
    weight = np.exp(np.array(log_density) - max(log_density)) * width
    weight /= weight.sum()
    mean, sd_of = _mix(weight, np.array(means), np.array(variances))
    assert weight @ grid == pytest.approx(6.572, rel=2e-3)
    median = np.interp(0.5, np.cumsum(weight), np.cumsum(width))
    assert median == pytest.approx(5.24, rel=2e-3)
    assert (mean[0], sd_of[0]) == pytest.approx((7.9322, 5.1778), rel=2e-3)
    np.testing.assert_allclose(
        mean[1:], [11.398, 7.894, 6.132, 7.645, 5.128, 6.139, 10.665, 8.456], rtol=2e-3
    )
    np.testing.assert_allclose(
        sd_of[1:], [8.340, 6.274, 7.764, 6.545, 6.357, 6.709, 6.785, 7.887], rtol=2e-3
    )


@pytest.mark.parametrize(
    ("scale", "mean_sd", "first_mean", "first_sd"),
    [(5.0, 3.3069, 9.0588, 5.7727), (10.0, 4.8409, 10.1782, 7.0442)],
)
def test_half_normal_prior_gives_the_grid_values(
    monkeypatch: pytest.MonkeyPatch,
    scale: float,
    mean_sd: float,
    first_mean: float,
    first_sd: float,
) -> None:
    """Importance points agree with the grid to 2e-3 when there are many of them."""
    monkeypatch.setattr(posterior_module, "FIRST_POINTS", 1024)
    layout = build_layout(EFFECT, np.ones((8, 1)), np.arange(8), None, KNOWN)
    prior = VariancePrior(1.0, {"cue": scale}, boundary_avoiding=frozenset())
    found = fit_posterior(layout, prior, {"residual": 0.0})
    mixture = collect_effects(found, ROWS).mixture
    assert found.weights @ np.sqrt(found.points[:, 0]) == pytest.approx(mean_sd, rel=2e-3)
    assert mixture.compute_mean()[1] == pytest.approx(first_mean, rel=2e-3)
    assert mixture.compute_sd()[1] == pytest.approx(first_sd, rel=2e-3)


def _mix(
    weight: FloatArray, means: FloatArray, variances: FloatArray
) -> tuple[FloatArray, FloatArray]:
    mean = weight @ means
    return mean, np.sqrt(weight @ (variances + (means - mean) ** 2))
