"""Graduation of tabulated ordinates: rounding and slips are smoothed, the shape is not.

Ordinates printed with five decimals are off by up to half a unit of the last one, and old tables
have slips of ten of them; at the closely spaced stations of a nose that is enough to turn the
curvature of an interpolating curve round. The smoothed ordinates f minimise

    sum h (f - y)**2 + (L / 2 pi)**6 integral (d3 f / d theta3)**2 d theta,

Whittaker's graduation with third divided differences on uneven stations. It is a low-pass filter
that passes waves longer than L and halves those of length L, whatever the spacing: stations
farther apart than L / 2 keep nearly all they have. The variable theta = arccos(-t), 0 to pi from
edge to edge, is the one in which cosine-spaced panels are equally long: short waves are kept at
the nose and at the edge, where sections have them.

References
----------
Whittaker, "On a new method of graduation", Proc. Edinburgh Math. Soc. 41, 1922, 63-75.
Henderson, "A new method of graduation", Trans. Actuarial Soc. America 25, 1924, 29-40.
"""

from __future__ import annotations

import numpy as np
from scipy.linalg import solveh_banded

from optim.arrays import FloatArray

CUTOFF = 0.06
"""L: length of a wave in theta that is halved [rad]: three panels of 160, which no panel method
resolves; rule of thumb."""

END_WEIGHT = 1e6
"""Weight of the two ends, which stay where they are because the edge gap lies between them."""


def graduated(theta: FloatArray, points: FloatArray) -> FloatArray:
    """Return the smoothed points.

    Parameters
    ----------
    theta : (n,) array
        Rising variable of the points [rad], n > 3.
    points : (n, 2) array
        Points at them.
    """
    apart = np.diff(theta)
    weight = 0.5 * (np.concatenate([apart[:1], apart]) + np.concatenate([apart, apart[-1:]]))
    weight[[0, -1]] *= END_WEIGHT
    rows = _third_derivative(theta)  # (n - 3, 4): coefficients of four neighbours
    stretch = (CUTOFF / (2.0 * np.pi)) ** 6 * (theta[3:] - theta[:-3]) / 3.0
    bands = np.zeros((4, theta.size))  # upper form of the matrix of seven diagonals
    pull = np.zeros_like(points)
    bent = sum(rows[:, j, None] * points[j : theta.size - 3 + j] for j in range(4))
    for j in range(4):
        pull[j : theta.size - 3 + j] += (stretch * rows[:, j])[:, None] * bent
        for k in range(j, 4):
            bands[3 - (k - j), k : theta.size - 3 + k] += stretch * rows[:, j] * rows[:, k]
    bands[3] += weight
    # Solved for the change, which is small, because the penalty is large and its rounding too.
    return points - np.asarray(solveh_banded(bands, pull), dtype=np.float64)


def _third_derivative(t: FloatArray) -> FloatArray:
    """Return the coefficients of the third derivative of cubics through four neighbours."""
    corners = np.stack([t[j : t.size - 3 + j] for j in range(4)], axis=1)
    rows = np.empty_like(corners)
    for j in range(4):
        others = [k for k in range(4) if k != j]
        rows[:, j] = 6.0 / np.prod(corners[:, j, None] - corners[:, others], axis=1)
    return rows
