"""One station of a march: the layer's equations together with an interaction law.

In the law, u = u_ext + D_ii m, the station's own mass defect acts on its own speed: that removes
the singularity at separation.

References
----------
Veldman, A. E. P., AIAA J. 19(1), 1981, pp. 79-85.
"""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.compressibility import compressed_speed
from optim.aerodynamics.interval import COLUMNS, EQUATIONS, plain_interval, transition_interval
from optim.aerodynamics.kernels import njit
from optim.aerodynamics.layer import LAMINAR, SLOPES, TERMS, WAKE, station_terms
from optim.arrays import FloatArray

LOCAL_STEPS = 20
"""Newton steps of one station."""

LOCAL_TOLERANCE = 1e-7
"""Residual at which a station is done; the simultaneous solution follows."""

LOCAL_SLACK = 1e-2
"""Residual with which the march goes on after the last step of a station."""

LEAST_START_SHAPE = (2.0, 1.15)
GREATEST_START_SHAPE = (6.0, 3.0)
"""Shape factors that the march builds on, laminar and turbulent [-]; a guess needs no more."""

HOLD_SHAPE = (4.5, 1.6)
HOLD_RATE = 0.3
"""Where the shape of a station that did not close goes, and the share of the way a station [-]."""

GREATEST_START_GROWTH = 0.25
"""Greatest rise of ln theta at a station that did not close [-]."""


@njit
def pivot_row(A: FloatArray, c: int) -> int:
    """Return the row, c or below it, with the largest element in column c."""
    p = c
    for i in range(c + 1, len(A)):
        if abs(A[i, c]) > abs(A[p, c]):
            p = i
    return p


@njit
def solve_small(J: FloatArray, R: FloatArray, out: FloatArray) -> bool:
    """Solve a 3 x 3 system by elimination with row exchange; False if it is singular."""
    A = np.empty((3, 4))
    for i in range(3):
        for j in range(3):
            A[i, j] = J[i, j]
        A[i, 3] = R[i]
    for c in range(3):
        p = pivot_row(A, c)
        if abs(A[p, c]) < 1e-300:
            return False
        for j in range(4):
            A[c, j], A[p, j] = A[p, j], A[c, j]
        for i in range(c + 1, 3):
            f = A[i, c] / A[c, c]
            for j in range(c, 4):
                A[i, j] -= f * A[c, j]
    for c in range(2, -1, -1):
        total = A[c, 3]
        for j in range(c + 1, 3):
            total -= A[c, j] * out[j]
        out[c] = total / A[c, c]
    return True


@njit
def close_station(
    kind: int,
    f: float,
    x1: FloatArray,
    a: FloatArray,
    x2: FloatArray,
    external: float,
    own: float,
    k: float,
    Re: float,
    M2: float,
) -> bool:
    """Solve one station with the interaction law; return whether it closed.

    Parameters
    ----------
    kind : int
        LAMINAR, TURBULENT or WAKE at the downstream end.
    f : float
        Fraction at which the interval turns turbulent; negative for a plain one.
    x1, a : (5,), (6, 5) array
        Upstream station and its terms.
    x2 : (5,) array
        In: guess; out: solution.
    external, own : float
        u = external + own m, the interaction law.
    """
    b = np.empty((TERMS, SLOPES))
    R = np.zeros(EQUATIONS)
    J = np.zeros((EQUATIONS, COLUMNS))
    by_f = np.zeros(EQUATIONS)
    before = np.zeros((EQUATIONS, 2))
    ahead = False  # a march knows the station at hand alone
    small = np.empty((3, 3))
    step = np.zeros(3)
    speed = math.exp(x2[2])
    m = math.exp(x2[1]) * speed
    worst = 1.0
    for _ in range(LOCAL_STEPS):
        q = max(external + own * m, 0.2 * speed)
        speed = q
        u, kappa = compressed_speed(q, k)
        x2[2] = math.log(u)
        x2[1] = math.log(m / q)
        station_terms(kind, x2, Re, M2, b)
        if f < 0.0:
            plain_interval(kind, x1, x2, a, b, R, J)
        else:
            transition_interval(x1, x1, x2, a, b, f, ahead, Re, M2, R, J, by_f, before)
        if kind == LAMINAR:
            J[2, 8] = 1.0
        worst = max(abs(R[0]), abs(R[1]), abs(R[2]))
        if worst < LOCAL_TOLERANCE:
            return True
        share = own * m / q
        for row in range(3):
            small[row, 0] = J[row, 5]
            small[row, 1] = J[row, 6] * (1.0 - share) + J[row, 7] * kappa * share
            small[row, 2] = J[row, 8]
        if not solve_small(small, R, step):
            return False
        largest = max(abs(step[0]), abs(step[1]), abs(step[2]))
        damp = min(1.0, 0.4 / largest) if largest > 0.0 else 1.0
        x2[0] -= damp * step[0]
        m *= math.exp(-damp * step[1])
        x2[3] -= damp * step[2]
    return worst < LOCAL_SLACK


@njit
def within(kind: int, H: float) -> bool:
    """Whether a shape factor is one that the march may build on."""
    if kind == LAMINAR:
        return LEAST_START_SHAPE[0] < H < GREATEST_START_SHAPE[0]
    least = 1.005 if kind == WAKE else LEAST_START_SHAPE[1]
    return least < H < GREATEST_START_SHAPE[1]


@njit
def hold_shape(
    x1: FloatArray, a: FloatArray, x2: FloatArray, external: float, stress: float, kind: int
) -> None:
    """Give a station that did not close a plausible shape, a shear stress, and theta by momentum.

    A laminar layer goes on towards separation, a turbulent one towards its usual shape.
    """
    H1 = math.exp(x1[1] - x1[0])
    H = H1 + HOLD_RATE * (HOLD_SHAPE[0 if kind == LAMINAR else 1] - H1)
    x2[2] = math.log(external)
    rise = a[0, 0] * (x2[4] - x1[4]) - (H + 2.0) * (x2[2] - x1[2])
    x2[0] = x1[0] + min(max(rise, -GREATEST_START_GROWTH), GREATEST_START_GROWTH)
    x2[1] = x2[0] + math.log(H)
    x2[3] = stress
