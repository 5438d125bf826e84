"""The crossed model at given variances: cells and one factor eliminated exactly.

Model of row u of cue c and learner l::

    d_u = x_u'b + (cue effect) + (cue x learner effect) + (learner effect) + (event effect) + e_u

with e_u ~ N(0, v_u + residual). Two steps of block elimination leave a dense system in the fixed
columns, the events and the kept factor. Random columns of that system are scaled by their standard
deviation, so that a variance may be 0 without a special case.

References
----------
Henderson, C. R. (1975), Biometrics 31:423: the mixed model equations.
Bates, D. et al. (2015), J. Stat. Softw. 67(1): the constant of the REML criterion.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
from scipy.linalg import LinAlgError, cholesky
from scipy.linalg.lapack import dpotri
from scipy.sparse import coo_array, csr_array, diags_array, vstack

from cuebook.errors import InputError
from cuebook.evidence.arrays import FloatArray, IntArray
from cuebook.evidence.crossed_layout import CrossedLayout

Coupling: TypeAlias = "FloatArray | csr_array[np.float64]"

# Above this many cells in the coupling of the two factors, only those that occur are stored.
LARGEST_DENSE_COUPLING = 1_000_000


@dataclass(frozen=True, slots=True, eq=False)
class Blocks:
    """A symmetric matrix over (dense columns + kept, eliminated), whose last block is diagonal."""

    aa: FloatArray
    """shape (q + K, q + K)."""
    al: Coupling
    """shape (q + K, L)."""
    ll: FloatArray
    """shape (L,)."""


@dataclass(frozen=True, slots=True, eq=False)
class Solution:
    """Best prediction and criterion at given variances; arrays follow the sorted rows."""

    variances: Mapping[str, float]
    criterion: float
    """-2 log restricted likelihood, with lme4's constant."""
    weight: FloatArray
    """shape (n,): 1 / (v + residual)."""
    cell_shrink: FloatArray
    """shape (n_cells,): h, 1 where a cell has no effect of its own."""
    cell_factor: FloatArray
    """shape (n_cells,): f, what a cell takes away from its own sums."""
    blocks: Blocks
    scale: FloatArray
    """shape (q + K,): 1 for fixed columns, the standard deviation for random ones."""
    inverse: FloatArray
    """shape (q + K, q + K): inverse of the scaled system."""
    learner_gain: FloatArray
    """shape (L,): prior variance over 1 + prior variance x information, of the eliminated."""
    coefficient: FloatArray
    """shape (q + K,): fixed, events, kept."""
    eliminated: FloatArray
    """shape (L,)."""

    def compute_covariance(self) -> FloatArray:
        """Return the prediction error variance of (fixed, events, kept)."""
        return self.inverse * self.scale[:, None] * self.scale


def solve_crossed(layout: CrossedLayout, variances: Mapping[str, float]) -> Solution:
    """Return the best linear unbiased prediction and the criterion at stated variances.

    Parameters
    ----------
    layout : the rows.
    variances : a variance >= 0 for each name of ``layout.get_names()``.

    Raises
    ------
    InputError : fixed columns are collinear, or a row has no noise at all.
    """
    weight, shrink, factor = weigh_rows(layout, variances)
    cell_weight = sum_cells(layout, weight)
    cell_dense = sum_cells(layout, weight[:, None] * layout.dense)
    cell_d = sum_cells(layout, weight * layout.d)
    gg = (layout.dense * weight[:, None]).T @ layout.dense
    gg -= (cell_dense * factor[:, None]).T @ cell_dense
    blocks = assemble_blocks(layout, gg, cell_dense * shrink[:, None], cell_weight * shrink)
    gain = _compute_gain(variances.get(layout.eliminated_name, 0.0), blocks.ll)
    scale = _list_scales(layout, variances)

    system = blocks.aa - multiply_through(blocks.al, gain)
    system *= scale[:, None] * scale
    precision = np.ones(len(scale))
    precision[: layout.n_fixed] = layout.prior_precision
    system[np.diag_indices_from(system)] += precision
    try:
        root = cholesky(system, lower=True)
    except LinAlgError as error:
        raise InputError(
            "The fixed columns are collinear.", "Leave out a column that others add up to."
        ) from error
    inverse = _invert_from_root(root)

    right = layout.dense.T @ (weight * layout.d) - cell_dense.T @ (factor * cell_d)
    right = np.concatenate([right, sum_kept(layout, shrink * cell_d)])
    right_l = sum_eliminated(layout, shrink * cell_d)
    reduced = scale * (right - blocks.al @ (gain * right_l))
    coefficient = scale * (inverse @ reduced)
    total = float(layout.d @ (weight * layout.d) - cell_d @ (factor * cell_d))
    prior = layout.prior_precision[layout.prior_precision > 0]
    n_free = layout.n_rows - int((layout.prior_precision == 0).sum())
    criterion = (
        n_free * np.log(2 * np.pi)
        - float(np.log(weight).sum())
        - float(np.log(shrink).sum())
        + float(np.log1p(variances.get(layout.eliminated_name, 0.0) * blocks.ll).sum())
        + 2 * float(np.log(np.diag(root)).sum())
        - float(np.log(prior).sum())
        + total
        - float(gain @ right_l**2)
        - float(reduced @ (inverse @ reduced))
    )
    return Solution(
        variances=dict(variances),
        criterion=criterion,
        weight=weight,
        cell_shrink=shrink,
        cell_factor=factor,
        blocks=blocks,
        scale=scale,
        inverse=inverse,
        learner_gain=gain,
        coefficient=coefficient,
        eliminated=gain * (right_l - blocks.al.T @ coefficient),
    )


def weigh_rows(
    layout: CrossedLayout, variances: Mapping[str, float]
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return row weights w, and h and f of each cell."""
    noise = layout.v + variances["residual"]
    if not (noise > 0).all():
        raise InputError(
            "A row has neither a sampling variance nor a residual.",
            "Give every row a known variance above 0, or let the residual be estimated.",
        )
    weight = 1.0 / noise
    own = layout.cell_scale * variances.get("cue_by_learner", 0.0)
    shrink = 1.0 / (1.0 + own * sum_cells(layout, weight))
    return weight, shrink, own * shrink


def assemble_blocks(
    layout: CrossedLayout, gg: FloatArray, cell_dense: FloatArray, cell_weight: FloatArray
) -> Blocks:
    """Spread sums of cells over the blocks of the system.

    Parameters
    ----------
    gg : shape (q, q), the block of the dense columns, ready made.
    cell_dense : shape (n_cells, q), what a cell adds to (dense column, level).
    cell_weight : shape (n_cells,), what a cell adds to (level, level).
    """
    n_kept, n_dense = layout.n_kept, layout.n_dense
    aa = np.empty((n_dense + n_kept, n_dense + n_kept))
    aa[:n_dense, :n_dense] = gg
    aa[n_dense:, :n_dense] = sum_kept(layout, cell_dense)
    aa[:n_dense, n_dense:] = aa[n_dense:, :n_dense].T
    aa[n_dense:, n_dense:] = np.bincount(
        layout.product_at,
        weights=layout.product_weight * cell_weight[layout.product_cell],
        minlength=n_kept * n_kept,
    ).reshape(n_kept, n_kept)
    return Blocks(
        aa=aa,
        al=_couple(layout, sum_eliminated(layout, cell_dense), cell_weight),
        ll=sum_eliminated(layout, cell_weight),
    )


def _couple(layout: CrossedLayout, dense_part: FloatArray, cell_weight: FloatArray) -> Coupling:
    """Return the block that couples (dense, kept) with the eliminated factor."""
    of_cell = layout.eliminated[layout.member_cell]
    has = of_cell >= 0
    kept, other = layout.member_kept[has], of_cell[has]
    value = (layout.member_weight * cell_weight[layout.member_cell])[has]
    shape = (layout.n_kept, layout.n_eliminated)
    if layout.n_kept * layout.n_eliminated <= LARGEST_DENSE_COUPLING:
        flat = np.bincount(kept * shape[1] + other, weights=value, minlength=shape[0] * shape[1])
        return np.vstack([dense_part.T, flat.reshape(shape)])
    return csr_array(vstack([csr_array(dense_part.T), coo_array((value, (kept, other)), shape)]))


def multiply_through(al: Coupling, gain: FloatArray) -> FloatArray:
    """Return ``al diag(gain) al'`` as a dense matrix."""
    if isinstance(al, np.ndarray):
        scaled = al * np.sqrt(gain)
        return scaled @ scaled.T
    return np.asarray((al @ diags_array(gain) @ al.T).toarray())


def sum_columns(al: Coupling, other: FloatArray) -> FloatArray:
    """Return the column sums of the elementwise product of the coupling with a dense matrix."""
    if isinstance(al, np.ndarray):
        return np.asarray(np.einsum("kl,kl->l", al, other))
    product = coo_array(al)
    rows, columns = product.coords
    values = product.data * other[rows, columns]
    return _sum_by(columns.astype(np.intp), values, al.shape[1])


def sum_cells(layout: CrossedLayout, values: FloatArray) -> FloatArray:
    """Add up sorted rows within cells (first axis)."""
    return np.asarray(np.add.reduceat(values, layout.cell_start, axis=0))


def sum_kept(layout: CrossedLayout, of_cell: FloatArray) -> FloatArray:
    """Add up cells within levels of the kept factor, with their weights (first axis)."""
    weight = layout.member_weight if of_cell.ndim == 1 else layout.member_weight[:, None]
    return _sum_by(layout.member_kept, weight * of_cell[layout.member_cell], layout.n_kept)


def sum_eliminated(layout: CrossedLayout, of_cell: FloatArray) -> FloatArray:
    """Add up cells within levels of the eliminated factor (first axis)."""
    has = layout.eliminated >= 0
    return _sum_by(layout.eliminated[has], of_cell[has], layout.n_eliminated)


def _sum_by(codes: IntArray, values: FloatArray, n: int) -> FloatArray:
    if values.ndim == 1:
        return np.bincount(codes, weights=values, minlength=n).astype(np.float64)
    columns = [np.bincount(codes, weights=column, minlength=n) for column in values.T]
    return np.stack(columns, axis=1) if columns else np.zeros((n, 0))


def _compute_gain(variance: float, information: FloatArray) -> FloatArray:
    return variance / (1.0 + variance * information)


def _list_scales(layout: CrossedLayout, variances: Mapping[str, float]) -> FloatArray:
    return np.concatenate(
        [
            np.ones(layout.n_fixed),
            np.full(layout.n_events, np.sqrt(variances.get("event", 0.0))),
            np.full(layout.n_kept, np.sqrt(variances.get(layout.kept_name, 0.0))),
        ]
    )


def _invert_from_root(root: FloatArray) -> FloatArray:
    inverse, _ = dpotri(root, lower=1)
    lower = np.tril(inverse)
    return np.asarray(lower + np.tril(inverse, -1).T)


def compute_joint(layout: CrossedLayout, solution: Solution) -> tuple[FloatArray, FloatArray]:
    """Return mean and covariance of (fixed columns, cues), whichever factor was eliminated.

    Returns
    -------
    shape (p + n_cues,) and (p + n_cues, p + n_cues). The covariance is that of the error of
    prediction: it holds the uncertainty of the fixed effects. Memory grows with n_cues squared.
    """
    full = solution.compute_covariance()
    fixed = np.arange(layout.n_fixed)
    mean = solution.coefficient
    if layout.kept_name == "cue":
        at = np.concatenate([fixed, np.arange(layout.n_dense, len(full))])
        return mean[at], full[np.ix_(at, at)]
    gain, al = solution.learner_gain, solution.blocks.al
    spread = np.asarray(full @ al) * gain
    own = np.diag(gain) + gain[:, None] * np.asarray(al.T @ spread)
    crossed = -spread[fixed]
    covariance = np.block([[full[np.ix_(fixed, fixed)], crossed], [crossed.T, own]])
    return np.concatenate([mean[fixed], solution.eliminated]), covariance
