"""The fitting function against textbook tables and other programs.

Values of lme4 1.1-31 and metafor 3.8-1 (R 4.2.2) are asked for to 1e-6 at stated variances and to
1e-4 where each program's own optimiser stopped; closed forms to 1e-6.
"""

from __future__ import annotations

import numpy as np
import pytest
from support import classic_tables as tables

from cuebook.evidence.arrays import FloatArray
from cuebook.evidence.reml import fit_reml


def list_bcg_log_ratios() -> tuple[FloatArray, FloatArray]:
    """Return log relative risk and sampling variance of the BCG trials."""
    treated_ill, treated_well, control_ill, control_well = np.array(tables.BCG_COUNTS, float).T
    treated, control = treated_ill + treated_well, control_ill + control_well
    ratio = np.log(treated_ill / treated) - np.log(control_ill / control)
    return ratio, 1 / treated_ill - 1 / treated + 1 / control_ill - 1 / control


def test_robinson_sires_have_the_published_predictions() -> None:
    """Robinson (1991): herds, sires and their error variance at a variance ratio of .1."""
    herd = np.array(tables.COW_HERD) - 1
    sire = np.array([ord(letter) - ord("A") for letter in tables.COW_SIRE])
    fit = fit_reml(tables.COW_YIELD, np.eye(3)[herd], sire, variances={"residual": 1.0, "cue": 0.1})
    np.testing.assert_allclose(fit.beta, [105.64, 104.28, 105.46], atol=0.005)
    np.testing.assert_allclose(fit.cue_effect, [0.40, 0.52, 0.76, -1.67], atol=0.005)
    # To more digits by solving Henderson's equations directly.
    np.testing.assert_allclose(
        fit.cue_effect, [0.39648569, 0.52038747, 0.75692724, -1.67380041], atol=1e-8
    )
    np.testing.assert_allclose(
        np.diag(fit.compute_covariance()),
        [0.54665465, 0.3831043, 0.29749944, 0.0954269, 0.09407524, 0.09159721, 0.083262],
        atol=1e-8,
    )


def test_sleep_study_agrees_with_lme4() -> None:
    """Random intercepts of the sleep study: criterion, variances, predictions, their SE."""
    scores = np.array(tables.SLEEP_REACTION_MS)
    n_subjects, n_days = scores.shape
    subject = np.repeat(np.arange(n_subjects), n_days)
    days = np.tile(np.arange(n_days), n_subjects)
    columns = np.column_stack([np.ones(subject.size), days])
    fit = fit_reml(scores.ravel(), columns, learner=subject)
    assert fit.converged
    assert fit.criterion == pytest.approx(1786.465085, rel=1e-9)
    assert fit.variances["learner"] == pytest.approx(1378.1785138, rel=1e-4)
    assert fit.variances["residual"] == pytest.approx(960.4565786, rel=1e-4)
    stated = {"learner": 1378.1785138, "residual": 960.4565786}
    held = fit_reml(scores.ravel(), columns, learner=subject, variances=stated)
    np.testing.assert_allclose(
        held.learner_effect[:3], [40.78370983, -77.84955351, -63.10856733], rtol=1e-6
    )
    np.testing.assert_allclose(np.sqrt(held.learner_cond_var), 9.475668, rtol=1e-6)


@pytest.mark.parametrize("samples_are", ["cue", "learner"])
def test_penicillin_agrees_with_its_closed_form(samples_are: str) -> None:
    """Crossed plates and samples, balanced: the variances have a closed form by ANOVA."""
    scores = np.array(tables.PENICILLIN_MM, float)
    plate, sample = (codes.ravel() for codes in np.indices(scores.shape))
    ones = np.ones((scores.size, 1))
    factors = {"cue": sample, "learner": plate}
    if samples_are == "learner":
        factors = {"cue": plate, "learner": sample}
    plates_are = "learner" if samples_are == "cue" else "cue"
    fit = fit_reml(scores.ravel(), ones, factors["cue"], factors["learner"])
    assert fit.criterion == pytest.approx(330.860588991, rel=1e-10)
    assert fit.variances[plates_are] == pytest.approx(0.716908212560, rel=1e-6)
    assert fit.variances[samples_are] == pytest.approx(3.730917874396, rel=1e-6)
    assert fit.variances["residual"] == pytest.approx(0.302415458937, rel=1e-6)
    effect = fit.cue_effect if samples_are == "cue" else fit.learner_effect
    spread = fit.cue_cond_var if samples_are == "cue" else fit.learner_cond_var
    np.testing.assert_allclose(
        effect,
        [2.18705797, -1.01047615, 1.93789946, -0.09689497, -0.01384214, -3.00374417],
        rtol=1e-6,
    )
    np.testing.assert_allclose(np.sqrt(spread), 0.2021706851, rtol=1e-6)
    assert fit.beta[0] == pytest.approx(22.97222222, rel=1e-8)
    # lme4's standard error of the mean, at the variances where its optimiser stopped.
    stopped = {plates_are: 0.7169051, samples_are: 3.7311318, "residual": 0.3024150}
    held = fit_reml(scores.ravel(), ones, factors["cue"], factors["learner"], variances=stopped)
    assert held.beta_se[0] == pytest.approx(0.80859536, rel=1e-6)


def test_pastes_nested_casks_agree_with_their_closed_form() -> None:
    """Casks within batches, balanced: the variances have a closed form by ANOVA."""
    scores = np.array(tables.PASTES_STRENGTH)
    batch, test = (codes.ravel() for codes in np.indices(scores.shape))
    cask = batch * 3 + test // 2
    fit = fit_reml(scores.ravel(), np.ones((scores.size, 1)), learner=batch, pair=cask)
    assert fit.criterion == pytest.approx(246.9907459, rel=1e-9)
    assert fit.variances["cue_by_learner"] == pytest.approx(8.433666667, rel=1e-6)
    assert fit.variances["learner"] == pytest.approx(1.657308642, rel=1e-6)
    assert fit.variances["residual"] == pytest.approx(0.678, rel=1e-6)
    # lme4 at the variances where its optimiser stopped.
    stopped = {"cue_by_learner": 8.43366593, "learner": 1.65731091, "residual": 0.67799995}
    held = fit_reml(
        scores.ravel(), np.ones((scores.size, 1)), learner=batch, pair=cask, variances=stopped
    )
    assert held.beta[0] == pytest.approx(60.05333333, rel=1e-8)
    assert held.beta_se[0] == pytest.approx(0.67687022, rel=1e-6)
    np.testing.assert_allclose(held.learner_effect[[0, 4]], [0.80064502, -1.50241520], rtol=1e-6)


def test_dyestuff_agrees_with_its_closed_form() -> None:
    """One random factor, balanced: variances by ANOVA and the predictions of six batches."""
    scores = np.array(tables.DYESTUFF_YIELD, float)
    batch = np.indices(scores.shape)[0].ravel()
    fit = fit_reml(scores.ravel(), np.ones((30, 1)), learner=batch)
    assert fit.variances["learner"] == pytest.approx(1764.05, rel=1e-6)
    assert fit.variances["residual"] == pytest.approx(2451.25, rel=1e-6)
    assert fit.criterion == pytest.approx(319.6542768, rel=1e-9)
    np.testing.assert_allclose(
        fit.learner_effect,
        [
            -17.6068513669,
            0.3912633637,
            28.5622255507,
            -23.0845384588,
            56.7331877377,
            -44.9952868265,
        ],
        rtol=1e-6,
    )


@pytest.mark.parametrize("factor", ["cue", "learner"])
def test_dyestuff2_has_no_variance_between_batches(factor: str) -> None:
    """Batches closer together than chance: the variance is 0, and said to be at its boundary."""
    scores = np.array(tables.DYESTUFF2_YIELD)
    batch = np.indices(scores.shape)[0].ravel()
    fit = fit_reml(scores.ravel(), np.ones((30, 1)), **{factor: batch})
    assert fit.variances[factor] == 0
    assert fit.at_boundary == (factor,)
    assert fit.converged
    assert fit.variances["residual"] == pytest.approx(13.80630963, rel=1e-6)
    assert fit.criterion == pytest.approx(161.8282778, rel=1e-9)
    effect = fit.cue_effect if factor == "cue" else fit.learner_effect
    np.testing.assert_array_equal(effect, 0.0)


def test_bcg_trials_agree_with_metafor() -> None:
    """A meta-analysis is the same model with known variances and no residual."""
    ratio, variance = list_bcg_log_ratios()
    trial = np.arange(13)
    fit = fit_reml(ratio, np.ones((13, 1)), trial, v=variance, variances={"residual": 0.0})
    assert fit.variances["cue"] == pytest.approx(0.3132432581, rel=1e-6)
    assert fit.beta[0] == pytest.approx(-0.7145323484, rel=1e-6)
    assert fit.beta_se[0] == pytest.approx(0.1797815318, rel=1e-6)
    blup = fit.beta[0] + fit.cue_effect[:3]
    np.testing.assert_allclose(blup, [-0.8002, -1.2517, -0.9869], atol=5e-5)
    # The error of mean + trial effect, from the joint covariance.
    rows = np.hstack([np.ones((13, 1)), np.eye(13)])
    se = np.sqrt(np.diag(rows @ fit.compute_covariance() @ rows.T))
    np.testing.assert_allclose(se[:3], [0.4099, 0.3532, 0.4348], atol=5e-5)
    # metafor leaves (1/2) ln det X'X in its log likelihood.
    assert -fit.criterion / 2 + np.log(13) / 2 == pytest.approx(-12.20237142, rel=1e-8)


def test_bcg_trials_with_latitude_agree_with_metafor() -> None:
    """Latitude explains most of the spread between the BCG trials."""
    ratio, variance = list_bcg_log_ratios()
    columns = np.column_stack([np.ones(13), tables.BCG_LATITUDE])
    as_residual = fit_reml(ratio, columns, v=variance)
    assert as_residual.variances["residual"] == pytest.approx(0.07635469471, rel=1e-4)
    np.testing.assert_allclose(as_residual.beta, [0.2514642944, -0.02910166093], rtol=1e-4)


@pytest.mark.parametrize("school_is", ["pair", "residual"])
def test_schools_within_districts_agree_with_metafor(school_is: str) -> None:
    """Konstantopoulos (2011): schools within districts with known sampling variances."""
    district_code, effect, variance = (np.array(x) for x in zip(*tables.SCHOOL_ROWS, strict=True))
    names, district = np.unique(district_code, return_inverse=True)
    pair = np.arange(56) if school_is == "pair" else None
    held = {"residual": 0.0} if school_is == "pair" else None
    fit = fit_reml(effect, np.ones((56, 1)), None, district, variance, pair=pair, variances=held)
    school = "cue_by_learner" if school_is == "pair" else "residual"
    assert fit.variances["learner"] == pytest.approx(0.06506194428, rel=1e-4)
    assert fit.variances[school] == pytest.approx(0.03273651703, rel=1e-4)
    assert fit.beta[0] == pytest.approx(0.18471316367, rel=1e-4)
    assert fit.beta_se[0] == pytest.approx(0.08455591874, rel=1e-4)
    log_likelihood = -fit.criterion / 2 + np.log(56) / 2
    assert log_likelihood == pytest.approx(-7.958724034, rel=1e-8)
    assert names[:3].tolist() == [11, 12, 18]
    np.testing.assert_allclose(
        fit.learner_effect[:3], [-0.18998596, -0.08467077, 0.14072730], rtol=1e-4
    )


def test_batting_averages_shrink_as_published() -> None:
    """Efron & Morris (1975): James-Stein is the prediction at the variance it implies."""
    average = np.array(tables.BATTING_HITS) / 45
    mean = average.mean()
    noise = mean * (1 - mean) / 45
    kept = 1 - 15 * noise / ((average - mean) ** 2).sum()
    assert kept == pytest.approx(0.21165342, rel=1e-6)
    between = noise * kept / (1 - kept)
    fit = fit_reml(
        average,
        np.ones((18, 1)),
        np.arange(18),
        v=noise,
        variances={"cue": between, "residual": 0.0},
    )
    shrunken = fit.beta[0] + fit.cue_effect
    published = (0.294, 0.289, 0.285, 0.280, 0.275, 0.275, 0.270, 0.266, 0.261, 0.261)
    np.testing.assert_allclose(shrunken[:10], published, atol=0.0005)
    np.testing.assert_allclose(shrunken[10:], [*[0.256] * 5, 0.252, 0.247, 0.242], atol=0.0005)
    rest = np.array(tables.BATTING_REST)
    raw_loss, shrunken_loss = ((average - rest) ** 2).sum(), ((shrunken - rest) ** 2).sum()
    assert raw_loss == pytest.approx(0.0753170, abs=5e-8)
    assert shrunken_loss == pytest.approx(0.0213069, abs=5e-8)
