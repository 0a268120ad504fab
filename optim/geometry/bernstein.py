"""Bernstein polynomials: the smooth, non-negative basis of both parameterisations.

B(i, n; x) = binomial(n, i) x**i (1 - x)**(n - i), written in powers of x. Up to the degrees used
here (14) the change of basis loses three digits of sixteen.
"""

from __future__ import annotations

from functools import lru_cache
from math import comb

import numpy as np

from optim.arrays import FloatArray, frozen


@lru_cache(maxsize=32)
def to_powers(degree: int) -> FloatArray:
    """Return the matrix from Bernstein to power coefficients, (degree + 1, degree + 1).

    Column i holds the coefficients of B(i, degree) by rising power.
    """
    matrix = np.zeros((degree + 1, degree + 1))
    for i in range(degree + 1):
        for j in range(i, degree + 1):
            matrix[j, i] = comb(degree, i) * comb(degree - i, j - i) * (-1) ** (j - i)
    return frozen(matrix)


@lru_cache(maxsize=64)
def differentiation(terms: int, order: int) -> FloatArray:
    """Return the matrix that differentiates power coefficients `order` times, (terms, terms)."""
    once = np.diag(np.arange(1.0, terms), k=1)
    return frozen(np.linalg.matrix_power(once, order))


def evaluate(degree: int, x: FloatArray) -> FloatArray:
    """Return all Bernstein polynomials of one degree at `x`, (n, degree + 1) [-]."""
    i = np.arange(degree + 1)
    binomials = np.array([comb(degree, k) for k in range(degree + 1)], dtype=np.float64)
    values = binomials * x[:, None] ** i * (1.0 - x[:, None]) ** (degree - i)
    return np.asarray(values, dtype=np.float64)


class TwoSides:
    """One polynomial for each side, evaluated together with their derivatives.

    Parameters
    ----------
    upper, lower : (n,) array
        Bernstein coefficients of each side; the degrees may differ.
    """

    def __init__(self, upper: FloatArray, lower: FloatArray) -> None:
        terms = max(upper.size, lower.size)
        powers = np.zeros((terms, 2))
        for side, coefficients in enumerate((upper, lower)):
            powers[: coefficients.size, side] = to_powers(coefficients.size - 1) @ coefficients
        self._columns = np.hstack([differentiation(terms, k) @ powers for k in range(3)])
        self._terms = terms

    def derivatives(self, x: FloatArray, is_upper: FloatArray, order: int) -> FloatArray:
        """Return the values and derivatives in x up to `order`, (order + 1, n).

        Parameters
        ----------
        x : (n,) array
            Where, 0 to 1 [-].
        is_upper : (n,) array
            1 on the upper side, 0 on the lower.
        order : int
            0, 1 or 2.
        """
        powers = np.vander(x, self._terms, increasing=True)
        both = (powers @ self._columns[:, : 2 * (order + 1)]).T
        upper, lower = both[0::2], both[1::2]
        return np.asarray(lower + is_upper * (upper - lower), dtype=np.float64)
