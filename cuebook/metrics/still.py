"""Metrics of quiet standing: how far and how fast the centre of pressure or a marker sways."""

from __future__ import annotations

import math

import numpy as np

from cuebook.metrics.discrete import compute_path_length
from cuebook.metrics.profiles import FloatArray


def compute_sway_duration(n_samples: int, rate_hz: float, duration: str) -> float:
    """Return the seconds a path is divided by.

    ``intervals`` gives (n - 1) / rate, ``samples`` n / rate (the recipe of the published
    balance set of Santos & Duarte 2016, PeerJ 4:e2648).
    """
    return (n_samples if duration == "samples" else n_samples - 1) / rate_hz


def compute_sway_path(position: FloatArray) -> float:
    """Return the length of the sway path, shape (n_samples, 2), in its own unit."""
    return compute_path_length(position)


def compute_sway_velocity(position: FloatArray, rate_hz: float, duration: str) -> float:
    """Return mean velocity: path over time, in the position's unit per second."""
    seconds = compute_sway_duration(position.shape[0], rate_hz, duration)
    return compute_sway_path(position) / seconds


def compute_prediction_ellipse_area(position: FloatArray, form: str) -> float:
    """Return the area of the 95 % prediction ellipse.

    Parameters
    ----------
    position : shape (n_samples, 2), n_samples >= 4.
    form : ``chi2`` (large samples; Schubert & Kirchner 2014, Gait Posture 39:518), ``f``
        (exact for a next observation; Duarte 2015, Gait Posture 41:44) or ``prieto``
        (Prieto et al. 1996, IEEE Trans Biomed Eng 43:956, with F taken as 3).

    Returns
    -------
    The unit of position squared.

    Notes
    -----
    The 95 % points are closed: chi2(.95; 2) = -2 ln .05 and
    F(.95; 2, m) = m/2 (.05^(-2/m) - 1). Area grows with duration.
    """
    n = position.shape[0]
    covariance = np.cov(position, rowvar=False, ddof=1)
    root = math.sqrt(max(float(np.linalg.det(covariance)), 0.0))
    if form == "prieto":
        return 6.0 * math.pi * root
    if form == "f":
        m = n - 2
        point = (m / 2.0) * (0.05 ** (-2.0 / m) - 1.0)
        return float(math.pi * root * point * 2.0 * (n - 1) * (n + 1) / (n * (n - 2)))
    return math.pi * root * (-2.0 * math.log(0.05))
