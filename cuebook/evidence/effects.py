"""Effects of cues from the posterior of the model: over practice alone, or cue against cue."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from cuebook.evidence.arrays import FloatArray, IntArray
from cuebook.evidence.eliminated import compute_joint
from cuebook.evidence.mixture import NormalMixture
from cuebook.evidence.posterior import VariancePosterior


@dataclass(frozen=True, slots=True, eq=False)
class EffectPosterior:
    """Linear combinations of (fixed columns, cues): one a cue."""

    posterior: VariancePosterior
    rows: FloatArray
    """shape (k, p + n_cues): the combination behind each effect."""
    mixture: NormalMixture

    def iterate_joint(self, chosen: IntArray) -> Iterator[tuple[FloatArray, FloatArray]]:
        """Yield mean and covariance of some effects at each point of the posterior."""
        rows = self.rows[chosen]
        for _, solution in self.posterior.iterate_solutions():
            mean, covariance = compute_joint(self.posterior.layout, solution)
            yield rows @ mean, rows @ covariance @ rows.T


def collect_effects(posterior: VariancePosterior, rows: FloatArray) -> EffectPosterior:
    """Return the mixture of each combination of fixed columns and cues.

    Parameters
    ----------
    rows : shape (k, p + n_cues).
    """
    means, variances = [], []
    for _, solution in posterior.iterate_solutions():
        mean, covariance = compute_joint(posterior.layout, solution)
        means.append(rows @ mean)
        variances.append(((rows @ covariance) * rows).sum(axis=1))
    # A combination without any uncertainty (one cue against itself) still needs a spread above 0.
    tiny = np.finfo(float).tiny
    mixture = NormalMixture(
        weights=posterior.weights,
        means=np.array(means),
        variances=np.maximum(np.array(variances), tiny),
    )
    return EffectPosterior(posterior, rows, mixture)
