"""Attempts on the common scale: transformed by a fixed rule, oriented so that plus is better."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.errors import InputError, NeedsAnswerError
from cuebook.practice.scales import AttemptScale, transform_hits

POSITIVE = st.floats(1e-3, 1e6)


def scale(
    transform: str,
    better: str = "higher",
    target: float | None = None,
    resolution: float | None = None,
) -> AttemptScale:
    """Return a scale of a made-up metric."""
    return AttemptScale("made_up", transform, better, target, resolution)


def test_zero_in_a_log_metric_is_half_the_resolution() -> None:
    """A 0 becomes half the smallest difference the measure can show, and that is flagged once."""
    done = scale("log", resolution=0.1).apply([0.0, 0.0, math.e])
    assert done.values == pytest.approx((math.log(0.05), math.log(0.05), 1.0))
    assert done.flags == ("zero_as_half_resolution",)


def test_zero_without_a_resolution_is_refused() -> None:
    """Nothing is invented for a 0 whose resolution is not known."""
    with pytest.raises(InputError, match="resolution is not known"):
        scale("log").apply([0.0])


@pytest.mark.parametrize("transform", ["log", "sqrt", "logit"])
def test_a_negative_value_is_refused(transform: str) -> None:
    """A value the measure cannot take is an error, never quietly dropped."""
    with pytest.raises(InputError, match="-1"):
        scale(transform, resolution=1.0).apply([0.5, -1.0])


def test_none_takes_negative_values_as_they_are() -> None:
    """Scores and signed errors need no transform."""
    assert scale("none").apply([-3.0, 0.0, 2.5]).values == (-3.0, 0.0, 2.5)


@given(st.lists(POSITIVE, min_size=1), st.sampled_from(["none", "log", "sqrt"]))
def test_lower_turns_the_sign(values: list[float], transform: str) -> None:
    """The same attempts read as lower-is-better are the negatives of higher-is-better."""
    higher = scale(transform).apply(values).values
    lower = scale(transform, "lower").apply(values).values
    assert lower == tuple(-value for value in higher)


@given(POSITIVE, POSITIVE, st.sampled_from(["none", "log", "sqrt"]))
def test_order_is_kept(one: float, other: float, transform: str) -> None:
    """No transform turns a better attempt into a worse one."""
    first, second = scale(transform).apply([one, other]).values
    assert (one < other) <= (first <= second)


def test_a_target_is_folded_attempt_by_attempt() -> None:
    """Missing by 2 on either side is as bad, although the mean of both is the target."""
    done = scale("none", "target", target=10.0).apply([8.0, 12.0, 10.0])
    assert done.values == (-2.0, -2.0, 0.0)


def test_a_log_target_is_folded_on_the_log_scale() -> None:
    """Half and double the target are equally far from it."""
    done = scale("log", "target", target=10.0).apply([5.0, 20.0])
    assert done.values == pytest.approx((-math.log(2), -math.log(2)))


def test_counts_go_through_the_root_of_count_plus_three_eighths() -> None:
    """Anscombe (1948): the root of y + 3/8 steadies the variance of counts."""
    assert scale("sqrt").apply([0.0, 1.0]).values == pytest.approx(
        (math.sqrt(0.375), math.sqrt(1.375))
    )


def test_the_root_steadies_poisson_counts() -> None:
    """Its variance is near the 1/4 that Anscombe (1948) gives, at quite different means."""
    for mean in (6.0, 30.0):
        weights = [
            math.exp(count * math.log(mean) - mean - math.lgamma(count + 1)) for count in range(200)
        ]
        roots = scale("sqrt").apply([float(count) for count in range(200)]).values
        middle = sum(w * root for w, root in zip(weights, roots, strict=True))
        spread = sum(w * (root - middle) ** 2 for w, root in zip(weights, roots, strict=True))
        assert spread == pytest.approx(0.25, abs=0.01)


def test_hits_out_of_tries_are_the_empirical_logit() -> None:
    """7 of 10: ln(7.5 / 3.5), variance 1/7.5 + 1/3.5 (Haldane 1956; Gart and Zweifel 1967)."""
    logit, variance = transform_hits(7, 10)
    assert logit == pytest.approx(0.762140)
    assert variance == pytest.approx(0.419048, abs=1e-6)


@given(st.integers(0, 50), st.integers(1, 50))
def test_hits_and_misses_mirror_each_other(hits: int, tries: int) -> None:
    """Counting the misses turns the sign and leaves the variance; all and none stay finite."""
    hits = min(hits, tries)
    one, other = transform_hits(hits, tries), transform_hits(tries - hits, tries)
    assert one[0] == pytest.approx(-other[0])
    assert one[1] == pytest.approx(other[1])


def test_a_share_goes_through_the_logit() -> None:
    """A share of 0.8 has the odds 4 to 1; what is no share is refused."""
    assert scale("logit").apply([0.8, 0.5]).values == pytest.approx((math.log(4), 0.0))
    for value in (0.0, 1.0, 80.0):
        with pytest.raises(InputError, match="share"):
            scale("logit").apply([value])


@pytest.mark.parametrize(
    ("transform", "better"), [("none", "either"), ("none", "target"), ("cube", "higher")]
)
def test_a_scale_that_says_too_little_is_refused(transform: str, better: str) -> None:
    """Without direction, target value or a known transform there is nothing to compare."""
    with pytest.raises(NeedsAnswerError):
        scale(transform, better)
