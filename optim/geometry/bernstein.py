"""Bernstein polynomials: the smooth, non-negative basis of both parameterisations.

B(i, n; x) = binomial(n, i) x**i (1 - x)**(n - i). A sum of them is differentiated and raised in
degree on its coefficients, so everything is evaluated in this basis, whose sums are convex
combinations; in powers of x the degree 14 would lose five digits.

References
----------
Farin, Curves and Surfaces for CAGD, 5th ed., 2002, sections 5.3 (derivatives), 6.1 (degree).
"""

from __future__ import annotations

from functools import lru_cache
from math import comb

import numpy as np

from optim.arrays import FloatArray, frozen


@lru_cache(maxsize=32)
def _binomials(degree: int) -> FloatArray:
    return frozen(np.array([comb(degree, i) for i in range(degree + 1)]))


def evaluate(degree: int, x: FloatArray) -> FloatArray:
    """Return all Bernstein polynomials of one degree at `x`, (n, degree + 1) [-]."""
    rising = np.vander(x, degree + 1, increasing=True)
    falling = np.vander(1.0 - x, degree + 1)
    return np.asarray(_binomials(degree) * rising * falling, dtype=np.float64)


def raised(coefficients: FloatArray, degree: int) -> FloatArray:
    """Return the coefficients of the same polynomial at a higher degree, (degree + 1,)."""
    c = coefficients
    for n in range(c.size, degree + 1):
        share = np.arange(n + 1) / n
        c = share * np.concatenate([[0.0], c]) + (1.0 - share) * np.concatenate([c, [0.0]])
    return c


class TwoSides:
    """One polynomial for each side, evaluated together with their derivatives.

    Parameters
    ----------
    upper, lower : (n,) array
        Bernstein coefficients of each side; the degrees may differ.
    """

    def __init__(self, upper: FloatArray, lower: FloatArray) -> None:
        self._degree = max(upper.size, lower.size) - 1
        values = np.column_stack([raised(upper, self._degree), raised(lower, self._degree)])
        slopes = self._degree * np.diff(values, axis=0)
        self._coefficients = (values, slopes, (self._degree - 1) * np.diff(slopes, axis=0))

    def derivatives(self, x: FloatArray, is_upper: FloatArray, order: int) -> list[FloatArray]:
        """Return the values and derivatives in x up to `order`, each (n,).

        Parameters
        ----------
        x : (n,) array
            Where, 0 to 1 [-].
        is_upper : (n,) array
            1 on the upper side, 0 on the lower.
        order : int
            0, 1 or 2.
        """
        rising = np.vander(x, self._degree + 1, increasing=True)
        falling = np.vander(1.0 - x, self._degree + 1)
        found = []
        for k in range(order + 1):
            n = self._degree - k
            basis = _binomials(n) * rising[:, : n + 1] * falling[:, k:]
            upper, lower = (basis @ self._coefficients[k]).T
            found.append(np.where(is_upper > 0.0, upper, lower))
        return found
