"""Ranks with their uncertainty, from seeded draws of all effects together."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cuebook.evidence.arrays import FloatArray, IntArray
from cuebook.evidence.effects import EffectPosterior

N_DRAWS = 4000
SEED = 20_240_229
MOST_RANKED = 1000
SHORT_LIST = 200
"""Of more than ``MOST_RANKED`` cues, only these with the largest mean + 2 SD are ranked."""


@dataclass(frozen=True, slots=True, eq=False)
class Ranks:
    """Ranks within one connected part; arrays follow ``cues``."""

    cues: IntArray
    """Positions of the ranked cues among all effects."""
    expected: FloatArray
    low90: IntArray
    high90: IntArray
    p_best: FloatArray
    expected_loss: FloatArray
    """Mean distance from the best effect of the part."""
    p_above_first: FloatArray
    """P(effect > effect of the cue with the largest mean)."""


def draw_ranks(effects: EffectPosterior, bias_variance: FloatArray, cues: IntArray) -> Ranks:
    """Rank the cues of one part.

    Parameters
    ----------
    effects : joint posterior of all cues.
    bias_variance : shape (n_cues,), allowance of each cue by itself; a bias shared by all cues
        cancels between them.
    cues : positions of the cues to rank.
    """
    mixture = effects.mixture.widen(bias_variance)
    mean, sd = mixture.compute_mean(), mixture.compute_sd()
    if len(cues) > MOST_RANKED:
        promise = (mean + 2 * sd)[cues]
        cues = np.sort(cues[np.argsort(-promise, kind="stable")[:SHORT_LIST]])
    drawn = _draw(effects, bias_variance[cues], cues)
    order = np.argsort(-drawn, axis=1, kind="stable")
    rank = np.empty_like(order)
    np.put_along_axis(rank, order, np.arange(1, len(cues) + 1)[None, :], axis=1)
    low, high = np.quantile(rank, [0.05, 0.95], axis=0, method="inverted_cdf")
    first = drawn[:, [int(np.argmax(mean[cues]))]]
    return Ranks(
        cues=cues,
        expected=rank.mean(axis=0),
        low90=low.astype(np.intp),
        high90=high.astype(np.intp),
        p_best=(rank == 1).mean(axis=0),
        expected_loss=(drawn.max(axis=1, keepdims=True) - drawn).mean(axis=0),
        p_above_first=(drawn > first).mean(axis=0),
    )


def _draw(effects: EffectPosterior, bias_variance: FloatArray, cues: IntArray) -> FloatArray:
    """Return joint draws, shape (N_DRAWS, n_ranked)."""
    rng = np.random.default_rng(SEED)
    # Each point of the posterior gets its share of the draws, rounded so that the sum is exact.
    ends = np.rint(np.cumsum(effects.mixture.weights) * N_DRAWS).astype(int)
    starts = np.concatenate([[0], ends[:-1]])
    drawn = np.empty((N_DRAWS, len(cues)))
    for start, end, (mean, covariance) in zip(
        starts, ends, effects.iterate_joint(cues), strict=True
    ):
        if end > start:
            values, vectors = np.linalg.eigh(covariance)
            root = vectors * np.sqrt(np.maximum(values, 0.0))
            drawn[start:end] = mean + rng.standard_normal((end - start, len(cues))) @ root.T
    return drawn + rng.standard_normal(drawn.shape) * np.sqrt(bias_variance)
