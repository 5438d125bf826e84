"""Attempt variance borrowed over learners, against a direct computation and its limits."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.optimize import brentq
from scipy.special import digamma, polygamma

from cuebook.evidence.borrowed_variance import borrow_variance, invert_trigamma
from cuebook.practice.changes import AttemptSet


def make_set(*values: float) -> AttemptSet:
    """Return attempts as a set."""
    array = np.array(values)
    return AttemptSet(float(array.mean()), len(values), float(((array - array.mean()) ** 2).sum()))


@given(st.floats(min_value=1e-8, max_value=1e9))
def test_the_inverse_of_trigamma_comes_back_to_its_argument(value: float) -> None:
    """Trigamma of the inverse is the value, over seventeen powers of ten."""
    assert float(polygamma(1, invert_trigamma(value))) == pytest.approx(value, rel=1e-5)


def test_the_inverse_of_trigamma_at_a_known_point() -> None:
    """trigamma(1) is pi^2/6 and trigamma(1/2) is pi^2/2 (Euler's closed forms)."""
    assert invert_trigamma(math.pi**2 / 6) == pytest.approx(1.0, rel=1e-10)
    assert invert_trigamma(math.pi**2 / 2) == pytest.approx(0.5, rel=1e-10)


def test_moderated_variances_equal_a_direct_computation() -> None:
    """Smyth's moment equations, solved by bisection over arrays, give the same numbers."""
    rng = np.random.default_rng(5)
    sets = {
        f"l{at}": [make_set(*rng.normal(0, sd, 3 + at % 3)) for _ in range(4)]
        for at, sd in enumerate([0.2, 0.5, 1.0, 2.0, 4.0, 1.5])
    }
    found = borrow_variance(sets)

    ss = np.array([sum(one.sum_of_squares for one in own) for own in sets.values()])
    df = np.array([sum(one.n - 1 for one in own) for own in sets.values()], dtype=float)
    e = np.log(ss / df) - digamma(df / 2) + np.log(df / 2)
    excess = e.var(ddof=1) - polygamma(1, df / 2).mean()
    d0 = 2 * brentq(lambda y: float(polygamma(1, y)) - excess, 1e-6, 1e6, xtol=1e-14)
    s0 = math.exp(e.mean() + digamma(d0 / 2) - math.log(d0 / 2))
    assert excess > 0
    assert found.prior_df == pytest.approx(d0, rel=1e-9)
    assert found.shared == pytest.approx(s0, rel=1e-9)
    expected = (d0 * s0 + ss) / (d0 + df)
    assert list(found.by_learner.values()) == pytest.approx(expected, rel=1e-9)


def test_learners_no_more_different_than_chance_share_one_variance() -> None:
    """With T <= 0 the prior is worth infinitely much and everybody gets the pooled variance."""
    sets = {f"l{at}": [make_set(1.0, 2.0, 3.0, 4.0)] for at in range(5)}
    found = borrow_variance(sets)
    assert math.isinf(found.prior_df)
    assert found.shared == pytest.approx(5.0 / 3.0)
    assert set(found.by_learner.values()) == {found.shared}


def test_fewer_than_three_learners_share_one_variance() -> None:
    """Two learners, however different, say nothing of how learners differ."""
    found = borrow_variance({"a": [make_set(0.0, 2.0)], "b": [make_set(0.0, 20.0)]})
    assert math.isinf(found.prior_df)
    assert found.by_learner == {"a": pytest.approx(101.0), "b": pytest.approx(101.0)}


def test_variances_are_not_believed_below_the_rounding() -> None:
    """Identical attempts of a measure read to 0.6 get the variance of rounding, 0.6^2/12."""
    sets = {f"l{at}": [make_set(5.0, 5.0)] for at in range(4)}
    found = borrow_variance(sets, resolution=0.6)
    assert found.shared == pytest.approx(0.03)
    assert all(value == pytest.approx(0.03) for value in found.by_learner.values())
    assert found.is_known


def test_a_learner_with_single_attempts_gets_the_shared_variance() -> None:
    """Without attempts of their own to compare, a learner is taken to be like the others."""
    sets = {
        f"l{at}": [make_set(0.0, spread), make_set(0.0, 2 * spread)]
        for at, spread in enumerate([0.1, 1.0, 5.0, 30.0])
    }
    found = borrow_variance({**sets, "single": [make_set(3.0), make_set(4.0)]})
    assert math.isfinite(found.prior_df)
    assert found.by_learner["single"] == pytest.approx(found.shared)
    assert found.df_by_learner["single"] == 0


def test_single_attempts_everywhere_leave_the_variance_unknown() -> None:
    """No set of two: nothing is invented."""
    found = borrow_variance({"a": [make_set(1.0)], "b": [make_set(2.0)]})
    assert not found.is_known
    assert math.isnan(found.shared)


@given(st.floats(min_value=1e-3, max_value=1e3))
def test_a_change_of_unit_scales_every_variance_by_its_square(factor: float) -> None:
    """Variances are in squared units; the prior's degrees of freedom have none."""
    rng = np.random.default_rng(2)
    values = [rng.normal(0, sd, 4) for sd in (0.3, 1.0, 3.0, 8.0)]
    one = borrow_variance({f"l{at}": [make_set(*own)] for at, own in enumerate(values)})
    other = borrow_variance(
        {f"l{at}": [make_set(*(factor * own))] for at, own in enumerate(values)}
    )
    assert other.prior_df == pytest.approx(one.prior_df, rel=1e-7)
    for learner, variance in one.by_learner.items():
        assert other.by_learner[learner] == pytest.approx(factor**2 * variance, rel=1e-7)
