"""The posterior of the variances and the mixtures that come of it."""

from __future__ import annotations

import subprocess
import sys

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.stats import norm, qmc
from support.crossed_tables import draw_crossed_table

from cuebook.errors import InputError
from cuebook.evidence import posterior as posterior_module
from cuebook.evidence.crossed_layout import CrossedLayout, build_layout
from cuebook.evidence.effects import collect_effects
from cuebook.evidence.eliminated import solve_crossed
from cuebook.evidence.mixture import NormalMixture
from cuebook.evidence.posterior import VariancePrior, fit_posterior
from cuebook.evidence.sobol import compute_sobol_points


def lay_out(seed: int, n: int = 200) -> CrossedLayout:
    """Index a seeded table."""
    table = draw_crossed_table(seed, n=n)
    return build_layout(table.d, table.X, table.cue, table.learner, table.v, pair=True)


def test_sobol_points_are_those_of_scipy() -> None:
    """The sequence agrees with scipy.stats.qmc in every dimension, moved by half a cell."""
    points = compute_sobol_points(256, 7)
    theirs = qmc.Sobol(7, scramble=False).random(256)
    np.testing.assert_array_equal(points, theirs + 0.5 / 256)


def test_too_many_dimensions_are_refused() -> None:
    """Asking for more dimensions than there are direction numbers is an error in words."""
    with pytest.raises(InputError, match="1 to 7 dimensions"):
        compute_sobol_points(8, 8)


def test_ranking_does_not_load_scipy_stats() -> None:
    """The evidence modules keep clear of scipy.stats, which costs a second at start-up."""
    script = (
        "import sys\n"
        "import cuebook.evidence.reml, cuebook.evidence.effects, cuebook.evidence.ranks\n"
        "print('scipy.stats' in sys.modules)\n"
    )
    shown = subprocess.run(
        [sys.executable, "-P", "-c", script], check=True, capture_output=True, text=True
    )
    assert shown.stdout.strip() == "False"


def test_mean_variance_agrees_with_a_fine_grid() -> None:
    """Importance points give the posterior mean of a two-variance model that a grid gives."""
    table = draw_crossed_table(11, n=120)
    layout = build_layout(table.d, table.X, table.cue, None, table.v)
    prior = VariancePrior(spread=1.0)
    found = fit_posterior(layout, prior).compute_mean_variances()
    residual, cue = np.meshgrid(np.linspace(-7, 2, 90), np.linspace(-9, 3, 90))
    log_density = np.array(
        [
            -solve_crossed(layout, {"residual": np.exp(a), "cue": np.exp(b)}).criterion / 2
            + prior.evaluate("residual", a)[0]
            + prior.evaluate("cue", b)[0]
            for a, b in zip(residual.ravel(), cue.ravel(), strict=True)
        ]
    )
    weight = np.exp(log_density - log_density.max())
    weight /= weight.sum()
    assert found["residual"] == pytest.approx(weight @ np.exp(residual.ravel()), rel=0.02)
    assert found["cue"] == pytest.approx(weight @ np.exp(cue.ravel()), rel=0.04)


def test_mode_has_no_slope_left() -> None:
    """At the mode the criterion and the prior balance for every variance."""
    layout, prior = lay_out(5), VariancePrior(spread=1.2)
    target = posterior_module._Target(layout, prior, layout.get_names(), {})
    np.testing.assert_allclose(target.differentiate(target.find_mode())[1], 0.0, atol=2e-3)


def test_points_always_cover_or_the_mode_is_used_and_said() -> None:
    """A system too large for points falls back to the mode and says so."""
    layout = lay_out(7)
    full = fit_posterior(layout, VariancePrior(1.0))
    assert not full.is_plug_in
    assert full.effective_points >= posterior_module.ENOUGH_EFFECTIVE_POINTS
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(posterior_module, "LARGEST_SYSTEM", 3)
        plug_in = fit_posterior(layout, VariancePrior(1.0))
    assert plug_in.is_plug_in
    assert dict(plug_in.mode) == pytest.approx(dict(full.mode))
    np.testing.assert_allclose(plug_in.points[0], list(full.mode.values()))


def test_same_rows_give_the_same_numbers_to_the_last_digit() -> None:
    """Nothing in the posterior is left to chance."""
    first, second = (fit_posterior(lay_out(9), VariancePrior(1.0)) for _ in range(2))
    np.testing.assert_array_equal(first.points, second.points)
    np.testing.assert_array_equal(first.weights, second.weights)


def test_few_cues_keep_the_cue_variance_off_its_boundary() -> None:
    """With three cues that do not differ the mode is still inside, and the interval is finite."""
    table = draw_crossed_table(2, n=40, n_cues=3, n_learners=5)
    layout = build_layout(np.zeros(40), table.X, table.cue, table.learner, table.v)
    found = fit_posterior(layout, VariancePrior(1.0))
    assert found.mode["cue"] > 1e-3
    effects = collect_effects(found, np.eye(table.X.shape[1] + 3)[3:])
    assert np.isfinite(effects.mixture.compute_quantile(0.975)).all()


@given(mean=st.floats(-50, 50), sd=st.floats(0.01, 20), level=st.floats(0.01, 0.99))
def test_mixture_of_one_is_a_normal(mean: float, sd: float, level: float) -> None:
    """A mixture of a single normal has its quantiles and probabilities."""
    mixture = NormalMixture(np.ones(1), np.array([[mean]]), np.array([[sd**2]]))
    expected = norm.ppf(level, mean, sd)
    assert mixture.compute_quantile(level)[0] == pytest.approx(expected, rel=1e-9, abs=1e-9)
    assert mixture.compute_above(0.0)[0] == pytest.approx(norm.sf(0, mean, sd), abs=1e-12)


@given(seed=st.integers(0, 1000), level=st.floats(0.02, 0.98))
def test_quantile_and_probability_of_a_mixture_agree(seed: int, level: float) -> None:
    """Below a quantile lies the share that was asked for; widening never narrows an interval."""
    rng = np.random.default_rng(seed)
    weights = rng.dirichlet(np.ones(5))
    mixture = NormalMixture(weights, rng.normal(size=(5, 3)), rng.uniform(0.01, 2, (5, 3)))
    at = mixture.compute_quantile(level)
    np.testing.assert_allclose(mixture.compute_below(at), level, atol=1e-10)
    assert (mixture.widen(0.3).compute_sd() > mixture.compute_sd()).all()
