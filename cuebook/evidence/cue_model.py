"""From prepared uses to the posterior of every cue's effect, in the unit of the changes."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from cuebook.evidence.arrays import FloatArray, IntArray
from cuebook.evidence.crossed_layout import build_layout
from cuebook.evidence.effects import EffectPosterior, collect_effects
from cuebook.evidence.eliminated import compute_joint
from cuebook.evidence.gradient import predict_rows
from cuebook.evidence.mixture import NormalMixture
from cuebook.evidence.posterior import VariancePosterior, VariancePrior, fit_posterior

if TYPE_CHECKING:
    from cuebook.evidence.prepared import PreparedUses

HAS_CUE = "has_cue"
KIND = "kind:"
STATE = "state"
HAS_CUE_PRIOR_SD = 0.5
KIND_PRIOR_SD = 0.3
"""Of the spread of the changes after the fixed columns."""
SPARE_ROWS = 3
"""Rows that must be left over once every fixed column has taken one."""


@dataclass(frozen=True, slots=True, eq=False)
class ModelRows:
    """The arrays the model is fitted to; changes, variances and their covariates in units."""

    change: FloatArray
    variance: FloatArray
    design: FloatArray
    columns: tuple[str, ...]
    cue: IntArray
    """shape (n,), codes into ``cue_sets``; -1 is practice alone."""
    cue_sets: FloatArray
    """shape (n_codes, n_cues): weights of the cues behind each code."""
    learner: IntArray
    event: IntArray | None


@dataclass(frozen=True, slots=True, eq=False)
class CueModel:
    """A fitted model; effects are in the unit of the changes."""

    rows: ModelRows = field(repr=False)
    spread: float
    """SD of the changes after the fixed columns; the model is fitted to changes divided by it."""
    column_size: FloatArray
    """shape (p,): what each fixed column was divided by."""
    posterior: VariancePosterior
    combination: FloatArray
    """shape (n_cues, p + n_cues): what of (fixed, cues) makes each effect over practice alone."""

    @property
    def n_cues(self) -> int:
        """Number of cues."""
        return int(self.rows.cue_sets.shape[1])

    def collect(self, combination: FloatArray) -> tuple[EffectPosterior, NormalMixture]:
        """Return the effects of each cue, and the coefficient of each fixed column, in units.

        Parameters
        ----------
        combination : shape (n_cues, p + n_cues), what of (fixed, cues) makes each effect.
        """
        p = len(self.rows.columns)
        fixed = np.hstack([np.eye(p), np.zeros((p, self.n_cues))])
        scale = self.spread / self.column_size
        together = np.vstack([combination * self.spread, fixed * scale[:, None]])
        effects = collect_effects(self.posterior, together)
        return (
            EffectPosterior(
                self.posterior, together[: self.n_cues], effects.mixture.pick(slice(self.n_cues))
            ),
            effects.mixture.pick(slice(self.n_cues, None)),
        )

    def compute_variances(self) -> dict[str, float]:
        """Return the posterior mean of each variance, in squared units."""
        means = self.posterior.compute_mean_variances()
        return {name: value * self.spread**2 for name, value in means.items()}


def list_model_rows(prepared: PreparedUses) -> tuple[ModelRows, tuple[str, ...]]:
    """Return the rows of the model in an order of their own, and notes on dropped columns."""
    n_cues = len(prepared.cue_labels)
    cue_sets, cue = _code_cue_sets(prepared, n_cues)
    kept = _choose_columns(prepared)
    left_out = [prepared.columns[at] for at in range(len(prepared.columns)) if at not in kept]
    design = prepared.design[:, kept]
    # Ties are left in the order given; equal rows are equal whatever their order.
    keys = (*design.T[::-1], prepared.variance, prepared.change, prepared.learner, cue)
    order = np.lexsort(keys)
    rows = ModelRows(
        change=prepared.change[order],
        variance=prepared.variance[order],
        design=design[order],
        columns=tuple(prepared.columns[at] for at in kept),
        cue=cue[order],
        cue_sets=cue_sets,
        learner=prepared.learner.astype(np.intp)[order],
        event=None if prepared.event is None else prepared.event.astype(np.intp)[order],
    )
    if not left_out:
        return rows, ()
    return rows, (f"too few changes to adjust for {', '.join(left_out)}",)


def fit_cue_model(rows: ModelRows) -> CueModel:
    """Fit the crossed model to prepared rows.

    Notes
    -----
    Changes are divided by their spread first and covariates by their size, so that the unit of a
    metric changes nothing but the unit of the answer.
    """
    spread = _compute_spread(rows)
    precision = np.array([_get_prior_precision(name) for name in rows.columns])
    size = np.where(precision > 0, 1.0, np.sqrt((rows.design**2).mean(axis=0)))
    n_codes, n_cues = rows.cue_sets.shape
    one_cue_each = n_codes == n_cues == int(rows.cue.max(initial=-1)) + 1
    layout = build_layout(
        rows.change / spread,
        rows.design / size,
        rows.cue,
        rows.learner,
        rows.variance / spread**2,
        pair=True,
        event=rows.event,
        cue_weights=None if one_cue_each else rows.cue_sets,
        prior_precision=precision,
    )
    posterior = fit_posterior(layout, VariancePrior(spread=1.0))
    return CueModel(rows, spread, size, posterior, _combine(rows))


def predict_at_mode(
    model: CueModel, design: FloatArray, cue: IntArray, learner: IntArray
) -> FloatArray:
    """Return predicted changes of other uses, with the variances at their mode, in units."""
    solution = model.posterior.solve_at(model.posterior.points[_find_heaviest(model)])
    layout, rows = model.posterior.layout, model.rows
    mean, _ = compute_joint(layout, solution)
    p = len(rows.columns)
    fixed = (design / model.column_size) @ mean[:p]
    effects = np.append(rows.cue_sets @ mean[p:], 0.0)[cue]
    if layout.kept_name == "learner":
        of_learner = solution.coefficient[layout.n_dense :]
    else:
        of_learner = solution.eliminated
    known = np.append(of_learner, 0.0)
    at = np.where(learner < len(of_learner), learner, -1)
    return np.asarray((fixed + effects + known[at]) * model.spread)


def compute_residuals(model: CueModel) -> FloatArray:
    """Return change minus prediction by row, in units."""
    solution = model.posterior.solve_at(model.posterior.points[_find_heaviest(model)])
    layout = model.posterior.layout
    residual = np.empty(layout.n_rows)
    residual[layout.order] = layout.d - predict_rows(layout, solution)
    return residual * model.spread


def _find_heaviest(model: CueModel) -> int:
    return int(np.argmax(model.posterior.weights))


def _code_cue_sets(prepared: PreparedUses, n_cues: int) -> tuple[FloatArray, IntArray]:
    """Return sets of cues with their weights, the single cues first, and each row's set."""
    cue = prepared.cue.astype(np.intp)
    if prepared.cue_weights is None:
        return np.eye(n_cues), cue
    shared = (prepared.cue_weights > 0).sum(axis=1) > 1
    if not shared.any():
        return np.eye(n_cues), cue
    sets, code = np.unique(prepared.cue_weights[shared], axis=0, return_inverse=True)
    coded = cue.copy()
    coded[shared] = n_cues + code.ravel()
    return np.vstack([np.eye(n_cues), sets]), coded


def _choose_columns(prepared: PreparedUses) -> list[int]:
    """Return the columns a small table can carry: the first ones, by their order of need."""
    need = {"intercept": 0, HAS_CUE: 1, STATE: 2, "level": 3}
    by_need = sorted(
        range(len(prepared.columns)), key=lambda at: (need.get(prepared.columns[at], 4), at)
    )
    room = max(1, len(prepared.change) - SPARE_ROWS)
    return sorted(by_need[:room])


def _compute_spread(rows: ModelRows) -> float:
    coefficient, *_ = np.linalg.lstsq(rows.design, rows.change, rcond=None)
    free = max(1, len(rows.change) - rows.design.shape[1])
    spread = float(np.sqrt(((rows.change - rows.design @ coefficient) ** 2).sum() / free))
    # Changes that are all alike leave nothing to scale by; the attempts' own noise still does.
    noise = float(np.sqrt(rows.variance.mean()))
    smallest = max(1e-6 * float(np.abs(rows.change).max(initial=0.0)), noise)
    return max(spread, 1e-3 * smallest) or 1.0


def _get_prior_precision(column: str) -> float:
    if column == HAS_CUE:
        return 1 / HAS_CUE_PRIOR_SD**2
    return 1 / KIND_PRIOR_SD**2 if column.startswith(KIND) else 0.0


def _combine(rows: ModelRows) -> FloatArray:
    """Return the row of each cue: has_cue, its kind contrasts, its own effect."""
    n_cues, p = rows.cue_sets.shape[1], len(rows.columns)
    combination = np.hstack([np.zeros((n_cues, p)), np.eye(n_cues)])
    for at, name in enumerate(rows.columns):
        if name == HAS_CUE:
            combination[:, at] = 1.0
        elif name.startswith(KIND):
            for cue in range(n_cues):
                of_cue = rows.design[rows.cue == cue, at]
                combination[cue, at] = of_cue.mean() if len(of_cue) else 0.0
    return combination
