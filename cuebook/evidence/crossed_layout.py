"""Rows of the crossed model, sorted by cell and indexed once for every later sum.

A *cell* is what the model treats alike: the rows of one cue with one learner. Cells are
eliminated one by one, then one of the two factors (the *eliminated* one, the larger); fixed
columns, group events and the other factor (the *kept* one) stay in a small dense system.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, TypeAlias

import numpy as np
import numpy.typing as npt

from cuebook.errors import InputError
from cuebook.evidence.arrays import FloatArray, IntArray

Members: TypeAlias = tuple[IntArray, IntArray, FloatArray]
VARIANCE_NAMES = ("residual", "cue", "learner", "cue_by_learner", "event")


@dataclass(frozen=True, slots=True, eq=False)
class CrossedLayout:
    """Everything about the rows that does not depend on the variances."""

    d: FloatArray
    """shape (n,), sorted by cell."""
    dense: FloatArray
    """shape (n, p + n_events): fixed columns, then one column an event."""
    v: FloatArray
    """shape (n,): known sampling variance; 0 where all noise is in the residual."""
    n_fixed: int
    n_events: int
    prior_precision: FloatArray
    """shape (p,): 0 is a flat prior on a fixed column."""
    order: IntArray
    """shape (n,): row of the input behind each sorted row."""
    cell: IntArray
    """shape (n,): cell of each sorted row."""
    cell_start: IntArray
    """shape (n_cells,): first sorted row of each cell."""
    cell_scale: FloatArray
    """shape (n_cells,): sum of squared cue weights; 0 where the cell has no effect of its own."""
    kept_name: Literal["cue", "learner"]
    n_kept: int
    n_eliminated: int
    member_cell: IntArray
    member_kept: IntArray
    member_weight: FloatArray
    """Three columns of one list: the cell belongs to the kept level with this weight."""
    product_at: IntArray
    product_cell: IntArray
    product_weight: FloatArray
    """Three columns of one list: where a cell adds to the flattened kept-by-kept block."""
    eliminated: IntArray
    """shape (n_cells,): level of the eliminated factor; -1 is none."""

    @property
    def n_rows(self) -> int:
        """Number of rows."""
        return len(self.d)

    @property
    def n_cells(self) -> int:
        """Number of cells."""
        return len(self.cell_start)

    @property
    def n_dense(self) -> int:
        """Fixed columns and events together."""
        return self.n_fixed + self.n_events

    @property
    def eliminated_name(self) -> Literal["cue", "learner"]:
        """The factor that is eliminated."""
        return "learner" if self.kept_name == "cue" else "cue"

    def get_names(self) -> tuple[str, ...]:
        """Return the variances this layout has, in the order of ``VARIANCE_NAMES``."""
        has = {
            "residual": True,
            self.kept_name: self.n_kept > 0,
            self.eliminated_name: self.n_eliminated > 0,
            "cue_by_learner": bool(np.any(self.cell_scale > 0)),
            "event": self.n_events > 0,
        }
        return tuple(name for name in VARIANCE_NAMES if has[name])


def build_layout(
    d: npt.ArrayLike,
    X: npt.ArrayLike,
    cue: npt.ArrayLike | None,
    learner: npt.ArrayLike | None,
    v: npt.ArrayLike,
    *,
    pair: bool | npt.ArrayLike | None = None,
    event: npt.ArrayLike | None = None,
    cue_weights: npt.ArrayLike | None = None,
    prior_precision: npt.ArrayLike | None = None,
) -> CrossedLayout:
    """Check the arrays of a crossed model and index them.

    Parameters
    ----------
    d : shape (n,), the changes (or any plain scores).
    X : shape (n, p), fixed columns of full rank.
    cue, learner : shape (n,), codes from 0; -1 is none; None leaves the factor out.
    v : shape (n,) or a number >= 0, the known sampling variance of each row.
    pair : True gives each cue x learner pair an effect of its own; codes (n,), -1 for none, give
        an effect to any factor nested in cue x learner; None leaves it out.
    event : shape (n,), codes of events shared by several learners; -1 is none.
    cue_weights : shape (n_codes, n_cues): row k holds the weights of the cues that share the code
        k of ``cue`` (a change that belongs to several cues); None: the code is the cue.
    prior_precision : shape (p,), 1/variance of a normal prior with mean 0; 0 is flat.

    Raises
    ------
    InputError : shapes do not agree, a value is not finite, or a pair is not nested.
    """
    scores, columns, known = _check_numbers(d, X, v)
    n = len(scores)
    cue_codes = _check_codes(cue, n, "cue")
    learner_codes = _check_codes(learner, n, "learner")
    event_codes = _check_codes(event, n, "event")
    pair_codes = _read_pair(cue_codes, n, pair=pair)
    order, cell, start = _sort_into_cells(cue_codes, learner_codes, pair_codes)
    first = order[start]
    if not (pair is None or isinstance(pair, bool)):
        _check_nested(pair_codes[first])
    n_cues, member = _list_members(cue_weights, cue_codes[first])
    n_learners = int(learner_codes.max(initial=-1)) + 1
    scale = _sum_squared_weights(member, len(start))
    scale[pair_codes[first] < 0] = 0.0
    # A row shared by several cues ties their columns together, so cues cannot be eliminated then.
    swap = n_cues > n_learners and cue_weights is None
    eliminated = cue_codes[first] if swap else learner_codes[first]
    if swap:
        has = learner_codes[first] >= 0
        member = (np.flatnonzero(has), learner_codes[first][has], np.ones(int(has.sum())))
    n_kept = n_learners if swap else n_cues
    products = _list_products(member, n_kept)
    n_events = int(event_codes.max(initial=-1)) + 1
    prior = np.zeros(columns.shape[1]) if prior_precision is None else prior_precision
    return CrossedLayout(
        d=scores[order],
        dense=np.hstack([columns, _mark_levels(event_codes, n_events)])[order],
        v=known[order],
        n_fixed=columns.shape[1],
        n_events=n_events,
        prior_precision=np.asarray(prior, dtype=np.float64),
        order=order,
        cell=cell,
        cell_start=start,
        cell_scale=scale,
        kept_name="learner" if swap else "cue",
        n_kept=n_kept,
        n_eliminated=n_cues if swap else n_learners,
        member_cell=member[0],
        member_kept=member[1],
        member_weight=member[2],
        product_at=products[0],
        product_cell=products[1],
        product_weight=products[2],
        eliminated=eliminated,
    )


def _check_numbers(
    d: npt.ArrayLike, X: npt.ArrayLike, v: npt.ArrayLike
) -> tuple[FloatArray, FloatArray, FloatArray]:
    scores = np.asarray(d, dtype=np.float64)
    columns = np.asarray(X, dtype=np.float64)
    if scores.ndim != 1 or columns.ndim != 2 or len(columns) != len(scores):
        raise InputError(
            f"The changes have shape {scores.shape} and the fixed columns {columns.shape}.",
            "Give n changes and n rows of fixed columns.",
        )
    known = np.broadcast_to(np.asarray(v, dtype=np.float64), scores.shape).copy()
    if len(scores) <= columns.shape[1]:
        raise InputError(
            f"{len(scores)} rows cannot carry {columns.shape[1]} fixed columns.",
            "Add rows or leave columns out.",
        )
    if not (np.isfinite(scores).all() and np.isfinite(columns).all()):
        raise InputError("A change or a fixed column is not a finite number.", "Leave the row out.")
    if not np.isfinite(known).all() or (known < 0).any():
        raise InputError("A sampling variance is negative or not finite.", "Leave the row out.")
    return scores, columns, known


def _check_codes(codes: npt.ArrayLike | None, n: int, name: str) -> IntArray:
    if codes is None:
        return np.full(n, -1, dtype=np.intp)
    checked = np.asarray(codes)
    if checked.shape != (n,) or checked.dtype.kind not in "iu" or checked.min(initial=0) < -1:
        raise InputError(
            f"The codes of {name} must be {n} whole numbers from -1 up.",
            "Number the levels from 0; -1 is none.",
        )
    return checked.astype(np.intp)


def _read_pair(cue: IntArray, n: int, *, pair: bool | npt.ArrayLike | None) -> IntArray:
    """Return pair codes; with True one code serves all, since cells part the pairs already."""
    if pair is None or pair is False:
        return np.full(n, -1, dtype=np.intp)
    if pair is True:
        return np.where(cue >= 0, 0, -1).astype(np.intp)
    return _check_codes(pair, n, "pair")


def _sort_into_cells(
    cue: IntArray, learner: IntArray, pair: IntArray
) -> tuple[IntArray, IntArray, IntArray]:
    order = np.lexsort((pair, learner, cue)).astype(np.intp)
    keys = np.stack([cue, learner, pair])[:, order]
    is_first = np.ones(len(order), dtype=bool)
    is_first[1:] = (keys[:, 1:] != keys[:, :-1]).any(axis=0)
    return order, np.cumsum(is_first) - 1, np.flatnonzero(is_first)


def _check_nested(pair_of_cell: IntArray) -> None:
    codes = pair_of_cell[pair_of_cell >= 0]
    if len(codes) != len(np.unique(codes)):
        raise InputError(
            "A pair code stands with two learners or two cues.",
            "Give each cue x learner pair codes of its own.",
        )


def _list_members(cue_weights: npt.ArrayLike | None, code_of_cell: IntArray) -> tuple[int, Members]:
    """Return the number of cues and which cell belongs to which cue, with what weight."""
    cells = np.flatnonzero(code_of_cell >= 0)
    codes = code_of_cell[cells]
    n_codes = int(codes.max(initial=-1)) + 1
    if cue_weights is None:
        return n_codes, (cells, codes, np.ones(len(cells)))
    weights = np.asarray(cue_weights, dtype=np.float64)
    if weights.ndim != 2 or len(weights) < n_codes:
        raise InputError(
            f"Weights are given for {len(weights)} of {n_codes} sets of cues.",
            "Give one row of weights for each code.",
        )
    at, kept = np.nonzero(weights[codes])
    return weights.shape[1], (cells[at], kept, weights[codes][at, kept])


def _sum_squared_weights(member: Members, n_cells: int) -> FloatArray:
    """Return the scale of each cell's own effect: 1, or less where several cues share it."""
    scale = np.bincount(member[0], weights=member[2] ** 2, minlength=n_cells)
    return np.where(scale > 0, scale, 1.0)


def _list_products(member: Members, n_kept: int) -> tuple[IntArray, IntArray, FloatArray]:
    cells, kept, weight = member
    at: list[IntArray] = [kept * n_kept + kept]
    of: list[IntArray] = [cells]
    product: list[FloatArray] = [weight**2]
    # Members of a cell lie side by side; compare each with those 1, 2, ... places further on.
    for shift in range(1, len(cells)):
        same = np.flatnonzero(cells[shift:] == cells[:-shift])
        if not len(same):
            break
        left, right = kept[same], kept[same + shift]
        at += [left * n_kept + right, right * n_kept + left]
        of += [cells[same]] * 2
        product += [weight[same] * weight[same + shift]] * 2
    return np.concatenate(at), np.concatenate(of), np.concatenate(product)


def _mark_levels(codes: IntArray, n_levels: int) -> FloatArray:
    marks = np.zeros((len(codes), n_levels))
    rows = np.flatnonzero(codes >= 0)
    marks[rows, codes[rows]] = 1.0
    return marks
