"""A few dimensions of Sobol's sequence: points that fill the unit cube evenly, always the same.

References
----------
Sobol, I. M. (1967), USSR Comput. Math. Math. Phys. 7:86.
Joe, S. & Kuo, F. Y. (2008), SIAM J. Sci. Comput. 30:2635: the direction numbers.
"""

from __future__ import annotations

import numpy as np

from cuebook.errors import InputError
from cuebook.evidence.arrays import FloatArray

_BITS = 30
# Degree and coefficients of the primitive polynomial, then the first direction numbers.
_DIRECTIONS = (
    (1, 0, (1,)),
    (2, 1, (1, 3)),
    (3, 1, (1, 3, 1)),
    (3, 2, (1, 1, 1)),
    (4, 1, (1, 1, 3, 3)),
    (4, 4, (1, 3, 5, 13)),
)
MOST_DIMENSIONS = len(_DIRECTIONS) + 1


def compute_sobol_points(n_points: int, n_dimensions: int) -> FloatArray:
    """Return the first points of the sequence, each moved to the middle of its cell.

    Parameters
    ----------
    n_points : a power of 2; then every coordinate takes each of n equal cells once.
    n_dimensions : 1 to 7.

    Returns
    -------
    shape (n_points, n_dimensions), strictly between 0 and 1.
    """
    if not 1 <= n_dimensions <= MOST_DIMENSIONS:
        raise InputError(f"Sobol points have 1 to {MOST_DIMENSIONS} dimensions.")
    numbers = np.arange(n_points)
    gray = numbers ^ (numbers >> 1)
    directions = [_list_directions(dimension) for dimension in range(n_dimensions)]
    points = np.zeros((n_points, n_dimensions), dtype=np.int64)
    for bit in range(int(n_points).bit_length()):
        on = (gray >> bit) & 1
        for dimension, direction in enumerate(directions):
            points[:, dimension] ^= on * direction[bit]
    return points / 2.0**_BITS + 0.5 / n_points


def _list_directions(dimension: int) -> list[int]:
    """Return the direction numbers of one dimension, as fixed-point integers."""
    if dimension == 0:
        return [1 << (_BITS - 1 - bit) for bit in range(_BITS)]
    degree, coefficients, first = _DIRECTIONS[dimension - 1]
    m = list(first)
    for at in range(degree, _BITS):
        new = m[at - degree] ^ (m[at - degree] << degree)
        for step in range(1, degree):
            if (coefficients >> (degree - 1 - step)) & 1:
                new ^= m[at - step] << step
        m.append(new)
    return [value << (_BITS - 1 - bit) for bit, value in enumerate(m)]
