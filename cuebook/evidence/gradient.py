"""Exact gradient and average information of the restricted likelihood, on log variances.

With P the projection of the model and V_i the derivative of the covariance by variance i::

    d(-2 log L) / d theta_i = tr(P V_i) - d'P V_i P d        information_ij ~ d'P V_i P V_j P d

Both are multiplied by the variances here, so that a variance of 0 needs no special case.

References
----------
Gilmour, A. R., Thompson, R. & Cullis, B. R. (1995), Biometrics 51:1440: average information.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cuebook.evidence.arrays import FloatArray
from cuebook.evidence.crossed_layout import CrossedLayout
from cuebook.evidence.eliminated import (
    Blocks,
    Coupling,
    Solution,
    assemble_blocks,
    sum_cells,
    sum_columns,
    sum_eliminated,
    sum_kept,
)


@dataclass(frozen=True, slots=True, eq=False)
class Slope:
    """First and (approximate) second derivative of -2 log L by the log variances."""

    gradient: FloatArray
    """shape (n_names,), in the order of ``layout.get_names()``."""
    information: FloatArray
    """shape (n_names, n_names), average information."""


def compute_gradient(layout: CrossedLayout, solution: Solution) -> FloatArray:
    """Return the derivative of -2 log L by each log variance, shape (n_names,)."""
    parts = _Parts(layout, solution)
    return np.array([parts.differentiate(name) for name in layout.get_names()])


def compute_slope(layout: CrossedLayout, solution: Solution) -> Slope:
    """Return gradient and average information."""
    parts = _Parts(layout, solution)
    names = layout.get_names()
    gradient = np.array([parts.differentiate(name) for name in names])
    moved = np.stack([parts.spread(name) for name in names], axis=1)
    information = moved.T @ _project(layout, solution, moved)
    return Slope(gradient, (information + information.T) / 2)


class _Parts:
    """What the derivatives share."""

    def __init__(self, layout: CrossedLayout, solution: Solution) -> None:
        self.layout, self.solution = layout, solution
        self.pd = _apply_noise_inverse(layout, solution, layout.d - predict_rows(layout, solution))
        """P d by sorted row."""
        self.cell_pd = sum_cells(layout, self.pd)
        self.covariance = solution.compute_covariance()
        """Of (dense, kept)."""
        self.spread_al = _multiply_coupling(self.covariance, solution.blocks.al)
        """Covariance times the coupling, shape (q + K, L)."""
        self.eliminated_leverage = sum_columns(solution.blocks.al, self.spread_al)

    def differentiate(self, name: str) -> float:
        """Return the derivative by the log of one variance."""
        variance = self.solution.variances[name]
        if name == "residual":
            return variance * self._differentiate_residual()
        if name == "cue_by_learner":
            return variance * self._differentiate_pairs()
        if name == "event":
            return self._differentiate_scaled(name, slice(self.layout.n_fixed, self.layout.n_dense))
        if name == self.layout.kept_name:
            return self._differentiate_scaled(name, slice(self.layout.n_dense, None))
        gain, ll = self.solution.learner_gain, self.solution.blocks.ll
        lost = gain / (1.0 + variance * ll) * self.eliminated_leverage
        score = sum_eliminated(self.layout, self.cell_pd)
        return float((gain * ll - lost).sum() - variance * (score @ score))

    def spread(self, name: str) -> FloatArray:
        """Return variance times V_i P d, by sorted row."""
        variance = self.solution.variances[name]
        layout = self.layout
        if name == "residual":
            return variance * self.pd
        if name == "event":
            marks = layout.dense[:, layout.n_fixed :]
            return np.asarray(variance * (marks @ (marks.T @ self.pd)))
        if name == "cue_by_learner":
            of_cell = layout.cell_scale * self.cell_pd
        elif name == layout.kept_name:
            of_cell = spread_kept(layout, sum_kept(layout, self.cell_pd))
        else:
            of_cell = spread_eliminated(layout, sum_eliminated(layout, self.cell_pd))
        return np.asarray(variance * of_cell[layout.cell])

    def _differentiate_scaled(self, name: str, at: slice) -> float:
        """Handle a factor of the dense system, from the inverse of the scaled system."""
        layout, variance = self.layout, self.solution.variances[name]
        kept_inverse = np.diag(self.solution.inverse)[at]
        if name == "event":
            score = layout.dense[:, layout.n_fixed :].T @ self.pd
        else:
            score = sum_kept(layout, self.cell_pd)
        return float(len(kept_inverse) - kept_inverse.sum() - variance * (score @ score))

    def _differentiate_pairs(self) -> float:
        layout, solution = self.layout, self.solution
        cell_weight = sum_cells(layout, solution.weight)
        cell_dense = sum_cells(layout, solution.weight[:, None] * layout.dense)
        shrink, scale = solution.cell_shrink, layout.cell_scale
        inner, level = cell_dense * shrink[:, None], cell_weight * shrink
        blocks = assemble_blocks(
            layout,
            (inner * scale[:, None]).T @ inner,
            inner * (scale * level)[:, None],
            scale * level**2,
        )
        direct = float((scale * level).sum())
        return direct - self._trace(blocks) - float(scale @ self.cell_pd**2)

    def _differentiate_residual(self) -> float:
        layout, solution = self.layout, self.solution
        weight, shrink = solution.weight, solution.cell_shrink
        squares = sum_cells(layout, weight**2)
        moved = _apply_noise_inverse(layout, solution, layout.dense)
        cell_dense = sum_cells(layout, moved * weight[:, None]) * shrink[:, None]
        blocks = assemble_blocks(layout, moved.T @ moved, cell_dense, squares * shrink**2)
        direct = float(weight.sum() - solution.cell_factor @ squares)
        return direct - self._trace(blocks) - float(self.pd @ self.pd)

    def _trace(self, blocks: Blocks) -> float:
        """Return tr(K^-1 G), K the full system with both factors and G given by its blocks."""
        gain = self.solution.learner_gain
        crossed = sum_columns(blocks.al, self.spread_al)
        own = gain + gain**2 * self.eliminated_leverage
        return float((self.covariance * blocks.aa).sum() - 2 * crossed @ gain + own @ blocks.ll)


def predict_rows(layout: CrossedLayout, solution: Solution) -> FloatArray:
    """Return fixed, event, cue and learner effects added up, by sorted row (without pairs)."""
    q = layout.n_dense
    of_cell = spread_kept(layout, solution.coefficient[q:])
    of_cell += spread_eliminated(layout, solution.eliminated)
    return np.asarray(layout.dense @ solution.coefficient[:q] + of_cell[layout.cell])


def spread_kept(layout: CrossedLayout, of_level: FloatArray) -> FloatArray:
    """Return each cell's weighted sum over its kept levels (first axis)."""
    weight = layout.member_weight if of_level.ndim == 1 else layout.member_weight[:, None]
    out = np.zeros((layout.n_cells, *of_level.shape[1:]))
    np.add.at(out, layout.member_cell, weight * of_level[layout.member_kept])
    return out


def spread_eliminated(layout: CrossedLayout, of_level: FloatArray) -> FloatArray:
    """Return each cell's value of its eliminated level, 0 where it has none (first axis)."""
    out = np.zeros((layout.n_cells, *of_level.shape[1:]))
    has = layout.eliminated >= 0
    out[has] = of_level[layout.eliminated[has]]
    return out


def _apply_noise_inverse(
    layout: CrossedLayout, solution: Solution, values: FloatArray
) -> FloatArray:
    """Multiply by the inverse covariance of pairs and noise together (first axis)."""
    weight, factor = solution.weight, solution.cell_factor
    if values.ndim > 1:
        weight, factor = weight[:, None], factor[:, None]
    drawn = factor * sum_cells(layout, weight * values)
    return np.asarray(weight * (values - drawn[layout.cell]))


def _project(layout: CrossedLayout, solution: Solution, values: FloatArray) -> FloatArray:
    """Return P times the columns of ``values``."""
    moved = _apply_noise_inverse(layout, solution, values)
    of_cell = sum_cells(layout, moved)
    right = np.vstack([layout.dense.T @ moved, sum_kept(layout, of_cell)])
    right_l = sum_eliminated(layout, of_cell)
    al, gain = solution.blocks.al, solution.learner_gain[:, None]
    inverse = solution.compute_covariance()
    coefficient = inverse @ (right - al @ (gain * right_l))
    eliminated = gain * (right_l - al.T @ coefficient)
    q = layout.n_dense
    of_cell = spread_kept(layout, coefficient[q:]) + spread_eliminated(layout, eliminated)
    fitted = layout.dense @ coefficient[:q] + of_cell[layout.cell]
    return _apply_noise_inverse(layout, solution, values - fitted)


def _multiply_coupling(square: FloatArray, al: Coupling) -> FloatArray:
    return np.asarray(square @ al)
