"""Posterior of the variances: a mode, then a few weighted points around it.

The effects given one set of variances are normal; averaged over the points they are a mixture of
normals, which is what every shown interval and probability is computed from.

References
----------
Chung, Y. et al. (2013), Psychometrika 78:685: a prior that keeps a variance off its boundary.
Gelman, A. (2006), Bayesian Anal. 1:515: half-normal priors on standard deviations.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field

import numpy as np
from scipy.optimize import minimize
from scipy.special import stdtrit

from cuebook.evidence.arrays import FloatArray
from cuebook.evidence.crossed_layout import CrossedLayout
from cuebook.evidence.eliminated import Solution, solve_crossed
from cuebook.evidence.gradient import compute_gradient
from cuebook.evidence.sobol import compute_sobol_points

LARGEST_SYSTEM = 1000
"""With more fixed columns, events and cues than this, the variances are held at the mode."""
FIRST_POINTS = 128
MOST_POINTS = 1024
ENOUGH_EFFECTIVE_POINTS = 20.0
FREEDOM = 5.0
SMALLEST_CURVATURE = 0.12
_CURVATURE_STEP = 0.1
_LEAST_RESIDUAL = 1e-4
"""As a share of the spread; changes that fit perfectly are still no better known than this."""
_NEGLIGIBLE_WEIGHT = 1e-6


@dataclass(frozen=True, slots=True)
class VariancePrior:
    """Half-normal priors on the standard deviations, one of them kept off 0."""

    spread: float
    """SD of the changes after the fixed columns; the scales below are multiples of it."""
    scales: Mapping[str, float] = field(
        default_factory=lambda: {
            "residual": 1.0,
            "cue": 0.5,
            "learner": 0.5,
            "cue_by_learner": 0.5,
            "event": 0.5,
        }
    )
    boundary_avoiding: frozenset[str] = frozenset({"cue"})
    """Standard deviations whose prior is s exp(-s^2 / 2A^2) in place of exp(-s^2 / 2A^2)."""

    def get_scale(self, name: str) -> float:
        """Return A of one standard deviation."""
        return self.spread * self.scales[name]

    def evaluate(self, name: str, log_variance: float) -> tuple[float, float]:
        """Return log density of a log variance (up to a constant) and its derivative."""
        quadratic = np.exp(log_variance) / (2 * self.get_scale(name) ** 2)
        power = 0.5 * (1 + (name in self.boundary_avoiding))
        return float(power * log_variance - quadratic), float(power - quadratic)


@dataclass(frozen=True, slots=True, eq=False)
class VariancePosterior:
    """Weighted points in the space of the variances."""

    layout: CrossedLayout = field(repr=False)
    names: tuple[str, ...]
    """The variances that vary, in the order of the columns of ``points``."""
    held: Mapping[str, float]
    mode: Mapping[str, float]
    points: FloatArray
    """shape (n_points, n_names), variances."""
    weights: FloatArray
    """shape (n_points,), sum 1; points of no weight are left out."""
    effective_points: float
    is_plug_in: bool
    """True: a single point at the mode, since the points did not cover the posterior."""

    def iterate_solutions(self) -> Iterator[tuple[float, Solution]]:
        """Yield every point's weight and best prediction."""
        for weight, point in zip(self.weights, self.points, strict=True):
            yield float(weight), self.solve_at(point)

    def solve_at(self, point: FloatArray) -> Solution:
        """Return the best prediction at one row of ``points``."""
        return solve_crossed(self.layout, _name_variances(self.names, point, self.held))

    def compute_mean_variances(self) -> dict[str, float]:
        """Return the posterior mean of each variance."""
        means = self.weights @ self.points
        return _name_variances(self.names, means, self.held)


def fit_posterior(
    layout: CrossedLayout, prior: VariancePrior, held: Mapping[str, float] | None = None
) -> VariancePosterior:
    """Find the posterior of the variances of a crossed model.

    Parameters
    ----------
    layout : the rows.
    prior : priors of the standard deviations.
    held : variances that are known, by name; the others vary.

    Notes
    -----
    Mode by L-BFGS-B with the exact gradient; curvature by central differences of it; points of
    Sobol's sequence through a t proposal with 5 degrees of freedom; importance weights. The number
    of points doubles until 20 of them count; beyond 1024 the mode alone is used and said so. All
    steps are deterministic.
    """
    known = {name: value for name, value in (held or {}).items() if name in layout.get_names()}
    names = tuple(name for name in layout.get_names() if name not in known)
    target = _Target(layout, prior, names, known)
    mode = target.find_mode()
    plug_in = VariancePosterior(
        layout=layout,
        names=names,
        held=known,
        mode=_name_variances(names, np.exp(mode), known),
        points=np.exp(mode)[None, :],
        weights=np.ones(1),
        effective_points=1.0,
        is_plug_in=True,
    )
    if not names or layout.n_dense + layout.n_kept > LARGEST_SYSTEM:
        return plug_in
    axes = target.find_axes(mode)
    n_points = FIRST_POINTS
    while n_points <= MOST_POINTS:
        points, weights = _weigh_points(target, mode, axes, n_points)
        effective = 1.0 / float(weights @ weights)
        if effective >= ENOUGH_EFFECTIVE_POINTS:
            counts = weights > _NEGLIGIBLE_WEIGHT
            return VariancePosterior(
                layout=layout,
                names=names,
                held=known,
                mode=plug_in.mode,
                points=np.exp(points[counts]),
                weights=weights[counts] / weights[counts].sum(),
                effective_points=effective,
                is_plug_in=False,
            )
        n_points *= 2
    return plug_in


class _Target:
    """Minus the log posterior of the log variances."""

    def __init__(
        self,
        layout: CrossedLayout,
        prior: VariancePrior,
        names: tuple[str, ...],
        held: Mapping[str, float],
    ) -> None:
        self.layout, self.prior, self.names, self.held = layout, prior, names, held
        all_names = layout.get_names()
        self.at = np.array([all_names.index(name) for name in names], dtype=np.intp)
        least = 2 * np.log(_LEAST_RESIDUAL * prior.spread)
        self.low = np.array([least if name == "residual" else -np.inf for name in names])
        """Below it a log variance is not let: without any noise the system has no inverse."""

    def solve(self, log_variances: FloatArray) -> Solution:
        return solve_crossed(
            self.layout, _name_variances(self.names, np.exp(log_variances), self.held)
        )

    def evaluate(self, log_variances: FloatArray) -> float:
        """Return the value alone."""
        return self.solve(log_variances).criterion / 2 - self._evaluate_prior(log_variances)[0]

    def differentiate(self, log_variances: FloatArray) -> tuple[float, FloatArray]:
        """Return value and gradient."""
        solution = self.solve(log_variances)
        log_prior, slope = self._evaluate_prior(log_variances)
        gradient = compute_gradient(self.layout, solution)[self.at] / 2 - slope
        return solution.criterion / 2 - log_prior, gradient

    def find_mode(self) -> FloatArray:
        """Return the log variances with the highest posterior density."""
        if not self.names:
            return np.zeros(0)
        start = np.array(
            [
                2 * np.log((0.6 if name == "residual" else 0.4) * self.prior.get_scale(name))
                for name in self.names
            ]
        )
        # The prior holds the mode well inside; the bounds only keep a wild first step finite.
        bounds = [
            (max(value - 40.0, low), value + 10.0)
            for value, low in zip(start, self.low, strict=True)
        ]
        found = minimize(self.differentiate, start, jac=True, method="L-BFGS-B", bounds=bounds)
        return np.asarray(found.x, dtype=np.float64)

    def find_axes(self, mode: FloatArray) -> FloatArray:
        """Return a square root of the inverse curvature at the mode."""
        rows = []
        for at in range(len(mode)):
            step = np.zeros(len(mode))
            step[at] = _CURVATURE_STEP
            above, below = self.differentiate(mode + step)[1], self.differentiate(mode - step)[1]
            rows.append((above - below) / (2 * _CURVATURE_STEP))
        curvature = np.array(rows)
        values, vectors = np.linalg.eigh((curvature + curvature.T) / 2)
        return np.asarray(vectors / np.sqrt(np.maximum(values, SMALLEST_CURVATURE)))

    def _evaluate_prior(self, log_variances: FloatArray) -> tuple[float, FloatArray]:
        pairs = [
            self.prior.evaluate(name, float(value))
            for name, value in zip(self.names, log_variances, strict=True)
        ]
        return sum(value for value, _ in pairs), np.array([slope for _, slope in pairs])


def _weigh_points(
    target: _Target, mode: FloatArray, axes: FloatArray, n_points: int
) -> tuple[FloatArray, FloatArray]:
    """Return log variances and normalised importance weights."""
    steps = stdtrit(FREEDOM, compute_sobol_points(n_points, len(mode)))
    points = np.maximum(mode + steps @ axes.T, target.low)
    log_proposal = -(FREEDOM + 1) / 2 * np.log1p(steps**2 / FREEDOM).sum(axis=1)
    log_weights = np.array([-target.evaluate(point) for point in points]) - log_proposal
    weights = np.exp(log_weights - log_weights.max())
    return points, weights / weights.sum()


def _name_variances(
    names: tuple[str, ...], values: FloatArray, held: Mapping[str, float]
) -> dict[str, float]:
    return {**held, **dict(zip(names, values.tolist(), strict=True))}
