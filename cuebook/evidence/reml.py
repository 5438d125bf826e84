"""Restricted maximum likelihood for the crossed model: the fitting function for plain scores."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

from cuebook.errors import InputError
from cuebook.evidence.arrays import FloatArray
from cuebook.evidence.crossed_layout import VARIANCE_NAMES, CrossedLayout, build_layout
from cuebook.evidence.eliminated import Solution, compute_joint, sum_columns
from cuebook.evidence.newton import minimise_criterion


@dataclass(frozen=True, slots=True, eq=False)
class RemlFit:
    """Variances, effects and their uncertainty; arrays are numbered as the codes were."""

    criterion: float
    """-2 log restricted likelihood with the constant of lme4's REMLcrit."""
    variances: Mapping[str, float]
    """Of residual, cue, learner, cue_by_learner, event, as far as the model has them."""
    at_boundary: tuple[str, ...]
    """Variances whose best value is 0; they are reported as 0."""
    converged: bool
    n_steps: int
    gradient: Mapping[str, float]
    """Of the criterion, by the log of each estimated variance."""
    layout: CrossedLayout = field(repr=False)
    solution: Solution = field(repr=False)

    @property
    def beta(self) -> FloatArray:
        """Fixed effects, shape (p,)."""
        return self.solution.coefficient[: self.layout.n_fixed]

    @property
    def event_effect(self) -> FloatArray:
        """Predicted event effects, shape (n_events,)."""
        return self.solution.coefficient[self.layout.n_fixed : self.layout.n_dense]

    @property
    def cue_effect(self) -> FloatArray:
        """Predicted cue effects, shape (n_cues,)."""
        return self._pick_effect("cue")

    @property
    def learner_effect(self) -> FloatArray:
        """Predicted learner effects, shape (n_learners,)."""
        return self._pick_effect("learner")

    def compute_covariance(self) -> FloatArray:
        """Return Cov(b, u - u_hat), shape (p + n_cues, p + n_cues).

        The error of the prediction includes the uncertainty of the fixed effects. Memory grows with
        the square of the number of cues.
        """
        return compute_joint(self.layout, self.solution)[1]

    @property
    def beta_se(self) -> FloatArray:
        """Standard errors of the fixed effects, shape (p,)."""
        return np.sqrt(np.diag(self.solution.compute_covariance())[: self.layout.n_fixed])

    @property
    def cue_pev(self) -> FloatArray:
        """Prediction error variance of the cue effects, shape (n_cues,)."""
        return self._compute_error_variance("cue", 0)

    @property
    def learner_pev(self) -> FloatArray:
        """Prediction error variance of the learner effects, shape (n_learners,)."""
        return self._compute_error_variance("learner", 0)

    @property
    def cue_cond_var(self) -> FloatArray:
        """Variance of the cue effects with the fixed effects held (lme4's condVar)."""
        return self._compute_error_variance("cue", self.layout.n_fixed)

    @property
    def learner_cond_var(self) -> FloatArray:
        """Variance of the learner effects with the fixed effects held (lme4's condVar)."""
        return self._compute_error_variance("learner", self.layout.n_fixed)

    def _pick_effect(self, name: str) -> FloatArray:
        if name == self.layout.kept_name:
            return self.solution.coefficient[self.layout.n_dense :]
        return self.solution.eliminated

    def _compute_error_variance(self, name: str, n_held: int) -> FloatArray:
        """Return error variances with the first ``n_held`` dense columns held."""
        full = self.solution.compute_covariance()
        if n_held:
            free = np.arange(n_held, len(full))
            held = full[:n_held, :n_held]
            crossed = full[np.ix_(free, np.arange(n_held))]
            rest = full[np.ix_(free, free)] - crossed @ np.linalg.solve(held, crossed.T)
            full = np.zeros_like(full)
            full[np.ix_(free, free)] = rest
        if name == self.layout.kept_name:
            return np.diag(full)[self.layout.n_dense :].copy()
        gain, al = self.solution.learner_gain, self.solution.blocks.al
        return np.asarray(gain + gain**2 * sum_columns(al, np.asarray(full @ al)))


def fit_reml(
    d: npt.ArrayLike,
    X: npt.ArrayLike,
    cue: npt.ArrayLike | None = None,
    learner: npt.ArrayLike | None = None,
    v: npt.ArrayLike = 0.0,
    *,
    pair: bool | npt.ArrayLike | None = None,
    variances: Mapping[str, float] | None = None,
    event: npt.ArrayLike | None = None,
    cue_weights: npt.ArrayLike | None = None,
) -> RemlFit:
    """Fit fixed columns, crossed cue and learner effects, and what is nested in their pairs.

    Parameters
    ----------
    d, X, cue, learner, v, pair, event, cue_weights : see ``build_layout``.
    variances : variances to hold, by name (residual, cue, learner, cue_by_learner, event); 0 is
        allowed. Names left out are estimated; with all of them given nothing is.

    Raises
    ------
    InputError : shapes do not agree, values are not finite, columns are collinear, a held variance
        is negative or its name is unknown.

    References
    ----------
    Patterson, H. D. & Thompson, R. (1971), Biometrika 58:545.
    """
    held = dict(variances or {})
    for name, value in held.items():
        if name not in VARIANCE_NAMES or not (np.isfinite(value) and value >= 0):
            raise InputError(
                f"The held variance {name} = {value} cannot be used.",
                f"Hold {', '.join(VARIANCE_NAMES)} at numbers of 0 or more.",
            )
    layout = build_layout(d, X, cue, learner, v, pair=pair, event=event, cue_weights=cue_weights)
    optimum = minimise_criterion(layout, held)
    found = {
        name: 0.0 if name in optimum.at_floor else float(value)
        for name, value in optimum.solution.variances.items()
    }
    return RemlFit(
        criterion=optimum.solution.criterion,
        variances=found,
        at_boundary=optimum.at_floor,
        converged=optimum.converged,
        n_steps=optimum.n_steps,
        gradient=dict(zip(optimum.free, optimum.gradient.tolist(), strict=True)),
        layout=layout,
        solution=optimum.solution,
    )
