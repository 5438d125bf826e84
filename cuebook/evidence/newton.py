"""Newton steps on log variances with average information, halved until the criterion falls."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from cuebook.evidence.arrays import FloatArray
from cuebook.evidence.crossed_layout import CrossedLayout
from cuebook.evidence.eliminated import Solution, solve_crossed
from cuebook.evidence.gradient import compute_slope

FLOOR_BELOW_LOG_SPREAD = 25.0
"""A log variance stays above the log variance of the changes minus this."""
NEGLIGIBLE_ABOVE_FLOOR = 12.0
"""A log variance this near to its floor changes nothing that anybody could see."""
LARGEST_STEP = 2.0
STEP_TOLERANCE = 1e-8
MOST_STEPS = 200
MOST_HALVINGS = 30
ROUNDING = 1e-11
"""Relative rise of the criterion that rounding alone may cause."""
FIRST_SHARES = {
    "residual": 0.6,
    "cue": 0.1,
    "learner": 0.1,
    "cue_by_learner": 0.1,
    "event": 0.1,
}


@dataclass(frozen=True, slots=True, eq=False)
class Optimum:
    """Where the steps ended."""

    solution: Solution
    gradient: FloatArray
    """By the log of each free variance."""
    free: tuple[str, ...]
    at_floor: tuple[str, ...]
    converged: bool
    n_steps: int


def minimise_criterion(layout: CrossedLayout, fixed: Mapping[str, float]) -> Optimum:
    """Find the variances that minimise -2 log L, some of them held.

    Parameters
    ----------
    layout : the rows.
    fixed : variances that are held, by name; names that the layout lacks are ignored.

    Notes
    -----
    A variance whose best value is 0 walks down to its floor and is listed in ``at_floor``.
    """
    names = layout.get_names()
    free = tuple(name for name in names if name not in fixed)
    at = np.array([names.index(name) for name in free], dtype=np.intp)
    spread = max(float(np.var(layout.d)), np.finfo(float).tiny)
    floor = np.log(spread) - FLOOR_BELOW_LOG_SPREAD
    held = {name: float(fixed[name]) for name in names if name in fixed}
    log = np.log([FIRST_SHARES[name] * spread for name in free])

    def solve(log_variances: FloatArray) -> Solution:
        return solve_crossed(layout, held | dict(zip(free, np.exp(log_variances), strict=True)))

    solution = solve(log)
    n_steps, converged = 0, not free
    gradient = np.zeros(0)
    while free and n_steps < MOST_STEPS:
        slope = compute_slope(layout, solution)
        gradient, information = slope.gradient[at], slope.information[np.ix_(at, at)]
        step = _choose_step(gradient, information, log - floor)
        moved, solution = _walk(solve, solution, log, step, floor)
        n_steps += 1
        change = float(np.abs(moved - log).max())
        log = moved
        if change < STEP_TOLERANCE:
            converged = True
            break
    low = tuple(name for name, value in zip(free, log, strict=True) if value <= floor)
    if low and (layout.v.min() > 0 or "residual" not in low):
        solution = solve_crossed(layout, {**solution.variances, **dict.fromkeys(low, 0.0)})
    return Optimum(solution, gradient, free, low, converged, n_steps)


def _choose_step(gradient: FloatArray, information: FloatArray, height: FloatArray) -> FloatArray:
    """Return a Newton step; a negligible variance that would sink goes straight to its floor."""
    sinks = (height <= NEGLIGIBLE_ABOVE_FLOOR) & (gradient > 0)
    step = np.where(sinks, -height, 0.0)
    moving = ~sinks
    if moving.any():
        part = np.ix_(moving, moving)
        damped = information[part] + np.diag(np.maximum(gradient[moving], 0.0))
        # A variance on its floor carries no information; a trace of it keeps the matrix regular.
        damped[np.diag_indices_from(damped)] += 1e-12 * max(float(np.trace(damped)), 1e-300)
        newton = -np.linalg.solve(damped, gradient[moving])
        step[moving] = np.clip(newton, -LARGEST_STEP, LARGEST_STEP)
    return step


def _walk(
    solve: Callable[[FloatArray], Solution],
    start: Solution,
    log: FloatArray,
    step: FloatArray,
    floor: float,
) -> tuple[FloatArray, Solution]:
    """Take the step, halved until the criterion does not rise; stay if no part of it helps."""
    # Near the optimum the criterion is flat to its last digits; the gradient still leads on.
    allowed = start.criterion + ROUNDING * (1.0 + abs(start.criterion))
    for _ in range(MOST_HALVINGS):
        moved = np.maximum(log + step, floor)
        solution = solve(moved)
        if solution.criterion <= allowed:
            return moved, solution
        step = step / 2
    return log, start
