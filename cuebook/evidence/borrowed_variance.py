"""How much single attempts vary: each learner's own spread, steadied by everybody's."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from cuebook.practice.changes import AttemptSet

FEWEST_LEARNERS = 3
"""Learners with a spread of their own below which all share one."""


@dataclass(frozen=True, slots=True)
class BorrowedVariance:
    """Attempt variance per learner, between their own and the shared one."""

    shared: float
    """s0^2; NaN where no set has two attempts."""
    prior_df: float
    """d0: how many degrees of freedom the shared variance is worth; may be infinite."""
    by_learner: Mapping[str, float]
    df_by_learner: Mapping[str, float]

    @property
    def sum_df(self) -> float:
        """Return the degrees of freedom of all learners together."""
        return float(sum(self.df_by_learner.values()))

    @property
    def is_known(self) -> bool:
        """Return whether any set has two attempts."""
        return self.sum_df > 0


def borrow_variance(
    sets_by_learner: Mapping[str, Sequence[AttemptSet]], resolution: float | None = None
) -> BorrowedVariance:
    """Return each learner's attempt variance, moderated over learners.

    Parameters
    ----------
    sets_by_learner : every set of each learner, on the transformed scale.
    resolution : smallest difference of the measure on that scale; variances are not believed
        to be smaller than its rounding, resolution^2 / 12. None: unknown.

    References
    ----------
    Smyth (2004), Stat Appl Genet Mol Biol 3(1):3.
    """
    squares = {
        learner: sum(one.sum_of_squares for one in sets)
        for learner, sets in sets_by_learner.items()
    }
    df = {
        learner: float(sum(one.n - 1 for one in sets)) for learner, sets in sets_by_learner.items()
    }
    floor = resolution**2 / 12.0 if resolution else 0.0
    total_df = sum(df.values())
    if total_df == 0:
        return BorrowedVariance(math.nan, math.inf, dict.fromkeys(df, math.nan), df)
    shared, prior_df = _estimate_prior(squares, df)
    shared = max(shared, floor)
    by_learner = {
        learner: max(_moderate(shared, prior_df, squares[learner], df[learner]), floor)
        for learner in df
    }
    return BorrowedVariance(shared, prior_df, by_learner, df)


def _moderate(shared: float, prior_df: float, squares: float, df: float) -> float:
    if math.isinf(prior_df):
        return shared
    return (prior_df * shared + squares) / (prior_df + df)


def _estimate_prior(squares: Mapping[str, float], df: Mapping[str, float]) -> tuple[float, float]:
    """Return the shared variance and its degrees of freedom by matching log variances."""
    from scipy.special import polygamma, psi  # noqa: PLC0415

    pooled = sum(squares.values()) / sum(df.values())
    usable = [learner for learner in df if df[learner] > 0 and squares[learner] > 0]
    if len(usable) < FEWEST_LEARNERS:
        return pooled, math.inf
    logs = [
        math.log(squares[one] / df[one]) - float(psi(df[one] / 2)) + math.log(df[one] / 2)
        for one in usable
    ]
    mean = sum(logs) / len(logs)
    spread = sum((log - mean) ** 2 for log in logs) / (len(logs) - 1)
    spread -= sum(float(polygamma(1, df[one] / 2)) for one in usable) / len(usable)
    if spread <= 0:
        return pooled, math.inf
    prior_df = 2.0 * invert_trigamma(spread)
    shared = math.exp(mean + float(psi(prior_df / 2)) - math.log(prior_df / 2))
    return shared, prior_df


def invert_trigamma(value: float) -> float:
    """Return y with trigamma(y) = value > 0, by Newton (Smyth 2004, appendix)."""
    from scipy.special import polygamma  # noqa: PLC0415

    if value > 1e7:
        return 1.0 / math.sqrt(value)
    if value < 1e-6:
        return 1.0 / value
    y = 0.5 + 1.0 / value
    for _ in range(50):
        trigamma = float(polygamma(1, y))
        step = trigamma * (1.0 - trigamma / value) / float(polygamma(2, y))
        y += step
        if abs(step) < 1e-12 * y:
            break
    return y
