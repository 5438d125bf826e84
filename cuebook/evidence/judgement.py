"""Probabilities of each cue's effect against what matters, with the allowance for hidden choice."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from cuebook.evidence.arrays import FloatArray, IntArray
from cuebook.evidence.cue_model import CueModel
from cuebook.evidence.effects import EffectPosterior
from cuebook.evidence.mixture import NormalMixture

if TYPE_CHECKING:
    from cuebook.evidence.prepared import Moments


@dataclass(frozen=True, slots=True, eq=False)
class Allowance:
    """Variance added to each effect because a teacher's reasons are not all recorded."""

    sd: float
    """Of a cue that was never given in random order."""
    own: FloatArray
    """shape (n_cues,): variance of each cue by itself."""
    shared: float
    """Variance that all effects over practice alone have in common; it cancels between cues."""


@dataclass(frozen=True, slots=True, eq=False)
class Judgement:
    """Effects of all cues, ready to be put into words; arrays are shape (n_cues,)."""

    model: CueModel = field(repr=False)
    effects: EffectPosterior = field(repr=False)
    """Without the allowance."""
    widened: NormalMixture = field(repr=False)
    """With the allowance; everything that is shown comes from here."""
    columns: NormalMixture = field(repr=False)
    """Coefficients of the fixed columns."""
    allowance: Allowance
    p_better: FloatArray
    p_worthwhile: FloatArray
    p_worse: FloatArray
    p_no_difference: FloatArray

    def get_column(self, name: str) -> NormalMixture | None:
        """Return the coefficient of one fixed column; None if the model has no such column."""
        names = self.model.rows.columns
        if name not in names:
            return None
        at = names.index(name)
        return self.columns.pick(slice(at, at + 1))

    def compute_next_learner(self, detectable: float) -> FloatArray:
        """Return P(true effect in a further learner like these > the detectable change)."""
        posterior = self.model.posterior
        own = np.zeros(len(posterior.weights))
        if "cue_by_learner" in posterior.names:
            at = posterior.names.index("cue_by_learner")
            own = posterior.points[:, at] * self.model.spread**2
        return self.widened.widen_by_point(own).compute_above(detectable)


def compute_allowance(
    factor: float,
    residual_variance: float,
    moments: Moments,
    share_random: FloatArray,
    *,
    practice_is_random: bool,
) -> Allowance:
    """Return the allowance for reasons of choice that nobody recorded.

    Parameters
    ----------
    factor : assumed size, as a share of the SD between uses that the model cannot explain.
    residual_variance : of the model.
    share_random : shape (n_cues,), share of each cue's uses that came in a random order.
    practice_is_random : True also where no effect over practice alone is shown.
    """
    # Where attempts' noise is not modelled apart, half of the residual is taken for it.
    unexplained = residual_variance if moments.v_is_modelled else residual_variance / 2
    state = 0.0 if math.isnan(moments.sx2) else math.sqrt(max(moments.sx2, 0.0))
    sd = factor * max(math.sqrt(max(unexplained, 0.0)), 0.5 * state)
    own = sd**2 * (1 - share_random) ** 2
    return Allowance(sd, own, 0.0 if practice_is_random else sd**2)


def judge_effects(
    model: CueModel, combination: FloatArray, allowance: Allowance, worthwhile: float
) -> Judgement:
    """Return every probability that a verdict needs."""
    effects, columns = model.collect(combination)
    widened = effects.mixture.widen(allowance.own + allowance.shared)
    above, below = widened.compute_above(worthwhile), widened.compute_below(-worthwhile)
    return Judgement(
        model=model,
        effects=effects,
        widened=widened,
        columns=columns,
        allowance=allowance,
        p_better=widened.compute_above(0.0),
        p_worthwhile=above,
        p_worse=below,
        p_no_difference=np.clip(1 - above - below, 0.0, 1.0),
    )


def compare_with_mean(combination: FloatArray, part: IntArray) -> FloatArray:
    """Return each cue against the mean of the cues of its connected part."""
    centred = combination.copy()
    for number in np.unique(part):
        of_part = part == number
        centred[of_part] -= combination[of_part].mean(axis=0)
    return centred
