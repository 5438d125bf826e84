"""Seeded tables of changes and a slow, plain solution of the crossed model to compare with."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from cuebook.evidence.arrays import FloatArray, IntArray


@dataclass(frozen=True, slots=True, eq=False)
class CrossedTable:
    """One table for the fitting function."""

    d: FloatArray
    X: FloatArray
    cue: IntArray
    learner: IntArray
    v: FloatArray
    event: IntArray


def draw_crossed_table(
    seed: int, n: int = 160, n_cues: int = 9, n_learners: int = 14, n_events: int = 0
) -> CrossedTable:
    """Draw a table in which every effect of the model is there."""
    rng = np.random.default_rng(seed)
    cue = rng.integers(-1, n_cues, n)
    learner = rng.integers(0, n_learners, n)
    event = rng.integers(-1, n_events, n) if n_events else np.full(n, -1)
    columns = np.column_stack([np.ones(n), cue >= 0, rng.normal(size=n)])
    effects = (
        np.append(rng.normal(0, 0.4, n_cues), 0.0)[cue]
        + rng.normal(0, 0.5, n_learners)[learner]
        + rng.normal(0, 0.3, (n_cues + 1, n_learners))[cue, learner] * (cue >= 0)
        + np.append(rng.normal(0, 0.4, n_events), 0.0)[event]
    )
    v = rng.uniform(0.2, 0.8, n)
    d = columns @ [0.1, 0.2, -0.9] + effects + rng.normal(size=n) * np.sqrt(v + 0.4)
    return CrossedTable(d, columns, cue, learner, v, event)


@dataclass(frozen=True, slots=True, eq=False)
class PlainSolution:
    """What the full covariance matrix gives."""

    criterion: float
    beta: FloatArray
    cue_effect: FloatArray
    learner_effect: FloatArray


def solve_plainly(
    table: CrossedTable,
    variances: Mapping[str, float],
    cue_weights: FloatArray | None = None,
) -> PlainSolution:
    """Solve generalised least squares with the whole n by n covariance, term by term."""
    weights = np.eye(table.cue.max() + 1) if cue_weights is None else cue_weights
    of_cue = np.where((table.cue >= 0)[:, None], weights[table.cue], 0.0)
    of_learner = np.eye(table.learner.max() + 1)[table.learner]
    same_pair = (
        (table.cue[:, None] == table.cue)
        & (table.learner[:, None] == table.learner)
        & (table.cue >= 0)
    )
    same_event = (table.event[:, None] == table.event) & (table.event >= 0)
    squares = np.where(table.cue >= 0, (weights**2).sum(axis=1)[table.cue], 0.0)
    covariance = (
        np.diag(table.v + variances["residual"])
        + variances["cue"] * of_cue @ of_cue.T
        + variances["learner"] * of_learner @ of_learner.T
        + variances["cue_by_learner"] * same_pair * squares
        + variances.get("event", 0.0) * same_event
    )
    inverse = np.linalg.inv(covariance)
    information = table.X.T @ inverse @ table.X
    beta = np.linalg.solve(information, table.X.T @ inverse @ table.d)
    rest = table.d - table.X @ beta
    criterion = (
        (len(rest) - len(beta)) * np.log(2 * np.pi)
        + np.linalg.slogdet(covariance)[1]
        + np.linalg.slogdet(information)[1]
        + rest @ inverse @ rest
    )
    return PlainSolution(
        criterion=float(criterion),
        beta=np.asarray(beta, dtype=np.float64),
        cue_effect=variances["cue"] * of_cue.T @ inverse @ rest,
        learner_effect=variances["learner"] * of_learner.T @ inverse @ rest,
    )
