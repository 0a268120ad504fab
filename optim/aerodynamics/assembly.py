"""The linear equations of one Newton step, as a few numbers for each interval.

Along each side the momentum and the third equation give the changes of theta and of the third
unknown in terms of those of the global unknowns; the energy equation is left. All three are sums
of the same rows and of single entries, so that the unknowns of the station are eliminated among
the coefficients of those sums; rows.py makes the rows. The slopes are analytic, those of the place
of transition and of the stagnation point included.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from optim.aerodynamics.interval import (
    COLUMNS,
    EQUATIONS,
    plain_interval,
    transition_interval,
)
from optim.aerodynamics.kernels import njit
from optim.aerodynamics.layer import LAMINAR, TURBULENT, WAKE, station_terms
from optim.aerodynamics.layout import (
    AT_BEFORE,
    AT_DOWN,
    AT_PLACE,
    AT_RIGHT,
    AT_UP,
    BY_TURN,
    DOWN_V,
    PARTS,
    T_BEFORE,
    UP_S,
    UP_T,
    UP_V,
    UPPER,
    V_BEFORE,
    Layers,
    Turning,
    node_of,
    stations_of,
)
from optim.aerodynamics.starter import join_wake
from optim.arrays import FloatArray, IntArray


class Interval(NamedTuple):
    """Residuals (3,) of an interval and their slopes.

    Those by its stations are (3, 10), by the fraction f at which it turns (3,), and by t and d of
    the station ahead of it (3, 2).
    """

    R: FloatArray
    J: FloatArray
    by_f: FloatArray
    before: FloatArray


@njit
def empty_interval() -> Interval:
    """Return room for the equations of an interval."""
    return Interval(
        np.zeros(EQUATIONS),
        np.zeros((EQUATIONS, COLUMNS)),
        np.zeros(EQUATIONS),
        np.zeros((EQUATIONS, 2)),
    )


@njit
def gather(interval: Interval, p: int, i: int, sign: float, layers: Layers, C: FloatArray) -> None:
    """Write one interval's equations as sums of rows and single entries, into C (3, 12).

    d(ln delta*) = dM/M - dq/q and d(ln u) = kappa dq/q, signed, so that signs cancel. `sign` is
    d(xi)/d(s0) of the side: the length from the stagnation point moves with it.
    """
    R, J, by_f, before = interval
    _, M, q, kappa = layers
    ahead = max(2 * p - i, 0)
    for row in range(EQUATIONS):
        C[row, UP_T] = J[row, 0]
        C[row, UP_S] = J[row, 3]
        C[row, UP_V] = (kappa[p] * J[row, 2] - J[row, 1]) / q[p]
        C[row, DOWN_V] = (kappa[i] * J[row, 7] - J[row, 6]) / q[i]
        C[row, BY_TURN] = by_f[row]
        C[row, AT_UP] = J[row, 1] / M[p]
        C[row, AT_DOWN] = J[row, 6] / M[i]
        C[row, AT_PLACE] = sign * (J[row, 4] + J[row, 9])
        C[row, AT_RIGHT] = R[row]
        C[row, T_BEFORE] = before[row, 0]
        C[row, V_BEFORE] = -before[row, 1] / q[ahead]
        C[row, AT_BEFORE] = before[row, 1] / M[ahead]


@njit
def eliminate(J: FloatArray, C: FloatArray) -> None:
    """Solve the first and the third equation for t and s downstream, and put them in the second."""
    for c in range(PARTS):
        C[0, c] *= -1.0 / J[0, 5]
        C[2, c] = -(C[2, c] + J[2, 5] * C[0, c]) / J[2, 8]
        C[1, c] += J[1, 5] * C[0, c] + J[1, 8] * C[2, c]


@njit
def fill_interval(
    X: FloatArray,
    terms: FloatArray,
    p: int,
    i: int,
    k: int,
    turn: int,
    frac: float,
    Re: float,
    M2: float,
    interval: Interval,
) -> None:
    """Fill residuals and slopes of a side's k-th interval, from p to i; the `turn`-th one turns."""
    R, J, by_f, before = interval
    by_f[:] = 0.0
    before[:] = 0.0
    if k < turn:
        plain_interval(LAMINAR, X[p], X[i], terms[p], terms[i], R, J)
        J[2, 8] = 1.0
        return
    station_terms(TURBULENT, X[i], Re, M2, terms[i])
    if k == turn:
        x0 = X[2 * p - i] if k > 1 else X[p]
        transition_interval(
            x0, X[p], X[i], terms[p], terms[i], frac, k > 1, Re, M2, R, J, by_f, before
        )
    else:
        plain_interval(TURBULENT, X[p], X[i], terms[p], terms[i], R, J)


@njit
def lead_interval(interval: Interval, xi: float, kappa: float) -> None:
    """Tie an interval's upstream end to the stagnation point, at the length xi from it.

    That station has the stagnation point's H and a speed in step with its length and the slope
    there, which takes the place of the fraction f. `kappa` is d(ln u)/d(ln q) at it.
    """
    _, J, by_f, _ = interval
    for row in range(EQUATIONS):
        J[row, 0] += J[row, 1]
        by_f[row] = kappa * J[row, 2]
        J[row, 4] += by_f[row] / xi
        J[row, 1] = 0.0
        J[row, 2] = 0.0


@njit
def side_equations(
    layers: Layers,
    parts: FloatArray,
    terms: FloatArray,
    js: int,
    n: int,
    side: int,
    turning: Turning,
    Re: float,
    M2: float,
) -> float:
    """Fill the parts of a side's equations; return its largest residual."""
    X = layers.X
    interval = empty_interval()
    R = interval.R
    sign = 1.0 if side == UPPER else -1.0
    turn = turning.turn[side]
    frac = turning.frac[side]
    i = node_of(side, 0, js)
    worst = 0.0
    for k in range(1, stations_of(side, js, n)):
        p = i
        i = node_of(side, k, js)
        fill_interval(X, terms, p, i, k, turn, frac, Re, M2, interval)
        if k == 1:
            lead_interval(interval, X[p, 4], layers.kappa[p])
        gather(interval, p, i, sign, layers, parts[i])
        eliminate(interval.J, parts[i])
        worst = max(worst, abs(R[0]), abs(R[1]), abs(R[2]))
    return float(worst)


@njit
def wake_equations(
    layers: Layers,
    parts: FloatArray,
    terms: FloatArray,
    n: int,
    gap: float,
    turn: IntArray,
    Re: float,
    M2: float,
) -> float:
    """Fill the parts of the wake's equations; return its largest residual."""
    X = layers.X
    t, d, s = join_wake(X, gap, turn, n, Re, M2)
    worst = max(abs(t - X[n, 0]), abs(s - X[n, 3]), abs(X[n, 1] - d))
    interval = empty_interval()
    R, J, _, _ = interval
    station_terms(WAKE, X[n], Re, M2, terms[n])
    for i in range(n + 1, len(X)):
        station_terms(WAKE, X[i], Re, M2, terms[i])
        plain_interval(WAKE, X[i - 1], X[i], terms[i - 1], terms[i], R, J)
        gather(interval, i - 1, i, 0.0, layers, parts[i])
        eliminate(J, parts[i])
        worst = max(worst, abs(R[0]), abs(R[1]), abs(R[2]))
    return float(worst)
