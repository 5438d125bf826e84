"""Ranks from draws: against what normal theory says."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import norm
from support.crossed_tables import draw_crossed_table

from cuebook.evidence import ranks as ranks_module
from cuebook.evidence.crossed_layout import build_layout
from cuebook.evidence.effects import EffectPosterior, collect_effects
from cuebook.evidence.posterior import VariancePrior, fit_posterior
from cuebook.evidence.ranks import draw_ranks


def fit_effects(seed: int = 1, n_cues: int = 9) -> EffectPosterior:
    """Fit a seeded table at held variances: then the posterior is one normal."""
    table = draw_crossed_table(seed, n_cues=n_cues)
    layout = build_layout(table.d, table.X, table.cue, table.learner, table.v)
    held = {"residual": 0.5, "cue": 0.15, "learner": 0.2}
    posterior = fit_posterior(layout, VariancePrior(1.0), held)
    p = table.X.shape[1]
    rows = np.hstack([np.zeros((n_cues, p)), np.eye(n_cues)])
    rows[:, 1] = 1.0
    return collect_effects(posterior, rows)


def test_two_cues_have_the_chance_of_normal_theory() -> None:
    """P(best) of two cues is the normal probability of their difference, within 4 sigma."""
    effects = fit_effects()
    pair = np.array([2, 5])
    (mean, covariance), *_ = effects.iterate_joint(pair)
    bias = np.zeros(9)
    bias[pair] = 0.02, 0.05
    spread = covariance[0, 0] + covariance[1, 1] - 2 * covariance[0, 1] + 0.07
    expected = norm.cdf((mean[0] - mean[1]) / np.sqrt(spread))
    found = draw_ranks(effects, bias, pair)
    assert found.p_best[0] == pytest.approx(expected, abs=4 * 0.5 / np.sqrt(4000))
    assert found.expected[0] == pytest.approx(2 - found.p_best[0])


def test_ranks_are_the_same_every_time() -> None:
    """Draws are seeded: two runs agree to the last digit."""
    first, second = (draw_ranks(fit_effects(), np.zeros(9), np.arange(9)) for _ in range(2))
    np.testing.assert_array_equal(first.expected, second.expected)
    np.testing.assert_array_equal(first.low90, second.low90)
    assert first.p_best.sum() == pytest.approx(1.0)
    assert first.expected.sum() == pytest.approx(45.0)


def test_very_long_lists_rank_the_promising_only(monkeypatch: pytest.MonkeyPatch) -> None:
    """Of more cues than can be drawn, those with the largest mean + 2 SD are ranked."""
    monkeypatch.setattr(ranks_module, "MOST_RANKED", 8)
    monkeypatch.setattr(ranks_module, "SHORT_LIST", 4)
    effects = fit_effects()
    promise = effects.mixture.compute_mean() + 2 * effects.mixture.compute_sd()
    found = draw_ranks(effects, np.zeros(9), np.arange(9))
    assert set(found.cues.tolist()) == set(np.argsort(-promise)[:4].tolist())
