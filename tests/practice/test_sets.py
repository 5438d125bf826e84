"""Sets: all usable attempts of one learner in one block for one key."""

from __future__ import annotations

import statistics

import pytest
from hypothesis import given
from hypothesis import strategies as st
from support.practice_logs import RECIPE, SCALE, attempt

from cuebook.practice.log import AttemptValue
from cuebook.practice.sets import FlaggedSet, build_set

NUMBERS = st.lists(st.floats(-1e3, 1e3), min_size=1, max_size=12)


def make(*values: float | AttemptValue, drop_first: bool = False) -> FlaggedSet | None:
    """Return the set of some attempts."""
    attempts = [value if isinstance(value, AttemptValue) else attempt(value) for value in values]
    return build_set(attempts, RECIPE, SCALE, drop_first=drop_first)


def list_kept(made: FlaggedSet | None) -> tuple[float, int]:
    """Return mean and number of a set that must be there."""
    assert made is not None
    return made.attempts.mean, made.attempts.n


@given(NUMBERS)
def test_mean_and_squares_are_those_of_the_statistics_module(values: list[float]) -> None:
    """Mean and (n - 1) SD^2 agree with the standard library's."""
    made = make(*values)
    assert made is not None
    assert made.attempts.mean == pytest.approx(statistics.fmean(values), abs=1e-9)
    spread = (len(values) - 1) * statistics.variance(values) if len(values) > 1 else 0.0
    assert made.attempts.sum_of_squares == pytest.approx(spread, abs=1e-6)


@pytest.mark.parametrize(
    "dropped",
    [
        attempt(99.0, is_valid=False),
        attempt(99.0, is_after_stop=True),
        attempt(99.0, recipe="other"),
        attempt(None),
        attempt(float("nan")),
    ],
)
def test_what_is_not_usable_is_dropped(dropped: AttemptValue) -> None:
    """Invalid, after a stop, other settings and no value do not enter; alone they are no set."""
    assert list_kept(make(1.0, dropped, 3.0)) == (2.0, 2)
    assert make(dropped) is None


def test_an_outlier_is_flagged_and_kept() -> None:
    """Beyond five robust SDs a value is marked, from five values on, and never dropped."""
    made = make(1.0, 1.1, 0.9, 1.05, 50.0)
    assert made is not None
    assert (made.attempts.n, made.flags) == (5, ("outlier",))
    few = make(1.0, 1.1, 0.9, 50.0)
    assert few is not None
    assert (few.attempts.n, few.flags) == (4, ())


def test_ties_are_kept() -> None:
    """Equal attempts are attempts."""
    assert list_kept(make(2.0, 2.0, 2.0)) == (2.0, 3)


def test_the_first_attempt_is_dropped_only_if_two_remain() -> None:
    """Kept by default; left out on request where the set keeps two values."""
    assert list_kept(make(9.0, 1.0, 3.0)) == (13 / 3, 3)
    assert list_kept(make(9.0, 1.0, 3.0, drop_first=True)) == (2.0, 2)
    assert list_kept(make(9.0, 1.0, drop_first=True)) == (5.0, 2)


def test_a_first_attempt_that_is_out_already_takes_no_other_with_it() -> None:
    """Where the first attempt was invalid, the second is not dropped in its place."""
    spoiled = attempt(99.0, is_valid=False)
    assert list_kept(make(spoiled, 1.0, 3.0, 5.0, drop_first=True)) == (3.0, 3)


def test_a_late_value_is_used_and_marked() -> None:
    """A value typed later than a day after its session counts, with a flag."""
    made = make(1.0, attempt(3.0, is_late=True))
    assert made is not None
    assert (made.attempts.mean, made.flags) == (2.0, ("late",))
