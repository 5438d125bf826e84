"""Mixtures of normals: the shape of every effect once the variances are uncertain."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from scipy.special import ndtr, ndtri

from cuebook.evidence.arrays import FloatArray

_BISECTIONS = 80


@dataclass(frozen=True, slots=True, eq=False)
class NormalMixture:
    """One mixture for each of k quantities, over the same weighted points."""

    weights: FloatArray
    """shape (m,), sum 1."""
    means: FloatArray
    """shape (m, k)."""
    variances: FloatArray
    """shape (m, k), > 0."""

    def compute_mean(self) -> FloatArray:
        """Return the means, shape (k,)."""
        return np.asarray(self.weights @ self.means)

    def compute_sd(self) -> FloatArray:
        """Return the standard deviations, shape (k,)."""
        spread = (self.means - self.compute_mean()) ** 2
        return np.sqrt(self.weights @ (self.variances + spread))

    def compute_above(self, threshold: float | FloatArray) -> FloatArray:
        """Return P(quantity > threshold), shape (k,)."""
        return np.asarray(self.weights @ ndtr((self.means - threshold) / np.sqrt(self.variances)))

    def compute_below(self, threshold: float | FloatArray) -> FloatArray:
        """Return P(quantity < threshold), shape (k,)."""
        return np.asarray(self.weights @ ndtr((threshold - self.means) / np.sqrt(self.variances)))

    def compute_quantile(self, level: float) -> FloatArray:
        """Return quantiles by bisection, shape (k,)."""
        single = self.means + ndtri(level) * np.sqrt(self.variances)
        low, high = single.min(axis=0), single.max(axis=0)
        for _ in range(_BISECTIONS):
            middle = (low + high) / 2
            is_short = self.compute_below(middle) < level
            low, high = np.where(is_short, middle, low), np.where(is_short, high, middle)
        return np.asarray((low + high) / 2)

    def pick(self, chosen: slice) -> NormalMixture:
        """Return some of the quantities."""
        return replace(self, means=self.means[:, chosen], variances=self.variances[:, chosen])

    def widen(self, variance: FloatArray | float) -> NormalMixture:
        """Return the mixture of the quantities plus independent normal errors."""
        return replace(self, variances=self.variances + variance)

    def widen_by_point(self, variance: FloatArray) -> NormalMixture:
        """Return the mixture with a variance of its own added at each point, shape (m,)."""
        return replace(self, variances=self.variances + variance[:, None])
