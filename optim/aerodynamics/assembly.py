"""The linear equations of one Newton step, station by station.

Along each side the momentum and the third equation give the changes of theta and of the third
unknown in terms of the global unknowns, row by row; the energy equation of each station is left as
a dense row. The slopes are analytic, those of the place of transition and of the stagnation point
included.
"""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.interval import (
    COLUMNS,
    EQUATIONS,
    FREE,
    growth_rise,
    plain_interval,
    transition_interval,
)
from optim.aerodynamics.kernels import njit
from optim.aerodynamics.layer import (
    LAMINAR,
    THIRD,
    TURBULENT,
    WAKE,
    starting_stress,
    station_terms,
)
from optim.aerodynamics.layout import (
    NEVER,
    PLACE,
    RIGHT,
    UPPER,
    Layers,
    Rows,
    Turning,
    node_of,
    stations_of,
)
from optim.aerodynamics.starter import join_wake
from optim.aerodynamics.transition import BACKGROUND
from optim.arrays import FloatArray, IntArray


@njit
def add_row(out: FloatArray, c: float, row: FloatArray) -> None:
    """Add c times a row."""
    for j in range(len(out)):
        out[j] += c * row[j]


@njit
def upstream_row(out: FloatArray, J: FloatArray, layers: Layers, rows: Rows, i: int) -> None:
    """Add one equation's slopes at its upstream station, as changes of the global unknowns.

    d(ln delta*) = dM/M - dq/q and d(ln u) = kappa dq/q, signed, so that signs cancel.
    """
    t = J[0]
    d = J[1]
    v = J[2]
    s = J[3]
    per_q = (layers.kappa[i] * v - d) / layers.q[i]
    rowT = rows.T[i]
    rowS = rows.S[i]
    rowV = rows.V[i]
    for j in range(len(out)):
        out[j] += t * rowT[j] + s * rowS[j] + per_q * rowV[j]
    out[i] += d / layers.M[i]
    out[PLACE] += J[4]


@njit
def downstream_row(out: FloatArray, J: FloatArray, layers: Layers, rows: Rows, i: int) -> None:
    """Add what is explicit in an equation at its downstream station: d and v."""
    d = J[6]
    v = J[7]
    per_q = (layers.kappa[i] * v - d) / layers.q[i]
    rowV = rows.V[i]
    for j in range(len(out)):
        out[j] += per_q * rowV[j]
    out[i] += d / layers.M[i]


@njit
def eliminate_interval(
    R: FloatArray,
    J: FloatArray,
    by_f: FloatArray,
    place: FloatArray,
    p: int,
    i: int,
    sign: float,
    layers: Layers,
    rows: Rows,
) -> None:
    """Turn one interval's equations into the rows of its downstream station.

    Fills T[i] and S[i], the changes of t and s by the global unknowns, and the dense row A[i].
    `sign` is d(xi)/d(s0) of the side; `place` is the row of the change of the fraction f at which
    the interval turns, by which the residuals have the slopes `by_f`.
    """
    T, S, _, A = rows
    for row in (0, 2, 1):
        # the length from the stagnation point moves with it
        J[row, 4] = sign * (J[row, 4] + J[row, 9])
        out = T[i] if row == 0 else (S[i] if row == 2 else A[i])
        out[:] = 0.0
        upstream_row(out, J[row], layers, rows, p)
        downstream_row(out, J[row], layers, rows, i)
        if row != 0:
            add_row(out, J[row, 5], T[i])
        out[RIGHT] += R[row]
        if by_f[row] != 0.0:
            add_row(out, by_f[row], place)
        if row == 1:
            add_row(out, J[1, 8], S[i])
            continue
        scale = -1.0 / J[row, 5 if row == 0 else 8]
        for j in range(len(out)):
            out[j] *= scale


@njit
def growth_row(out: FloatArray, A: FloatArray, layers: Layers, rows: Rows, i: int) -> None:
    """Fill the change of the growth of N at a laminar station; `A` holds its value and slopes."""
    per_q = (layers.kappa[i] * A[3] - A[2]) / layers.q[i]
    rowT = rows.T[i]
    rowV = rows.V[i]
    for j in range(len(out)):
        out[j] = A[1] * rowT[j] + per_q * rowV[j]
    out[i] += A[2] / layers.M[i]


@njit
def place_row(
    out: FloatArray,
    X: FloatArray,
    terms: FloatArray,
    growth: FloatArray,
    i: int,
    p: int,
    step_before: float,
    frac: float,
    S: FloatArray,
) -> None:
    """Fill the change of the fraction at which an interval turns by amplification.

    `growth` are the rows of the change of growth at the upstream station and the one ahead of it.
    """
    step = X[i, 4] - X[p, 4]
    ratio = step / step_before if step_before > 0.0 else 0.0
    A1 = terms[p, THIRD, 0]
    A0 = terms[2 * p - i, THIRD, 0] if step_before > 0.0 else 0.0
    rise, by_1, by_0 = growth_rise(A1, A0, ratio)
    slope = -1.0 / max(step * (A1 + frac * rise), 1e-12)
    half = 0.5 * frac * frac
    c1 = slope * step * (frac + half * by_1)
    c0 = slope * step * half * by_0
    rowN = S[p]
    for j in range(len(out)):
        out[j] = slope * rowN[j] + c1 * growth[0, j] + c0 * growth[1, j]


@njit
def march_growth(
    S: FloatArray,
    X: FloatArray,
    terms: FloatArray,
    growth: FloatArray,
    i: int,
    p: int,
    step_before: float,
) -> None:
    """Fill the change of N at a laminar station from those upstream, into S[i]."""
    step = X[i, 4] - X[p, 4]
    ratio = step / step_before if step_before > 0.0 else 0.0
    A0 = terms[2 * p - i, THIRD, 0] if step_before > 0.0 else 0.0
    _, by_1, by_0 = growth_rise(terms[p, THIRD, 0], A0, ratio)
    c1 = step * (1.0 + 0.5 * by_1)
    c0 = step * 0.5 * by_0
    for j in range(S.shape[1]):
        S[i, j] = S[p, j] + c1 * growth[0, j] + c0 * growth[1, j]


@njit
def leading_station(
    layers: Layers, rows: Rows, js: int, i: int, sign: float, slope_row: FloatArray
) -> None:
    """Fill the rows of the station beside the stagnation point, which has that point's state.

    `slope_row` is filled with the change of the logarithm of the speed's slope there; `sign` is
    d(xi)/d(s0) of the side.
    """
    X, _, q, _ = layers
    T, S, V, A = rows
    spread = q[js + 1] - q[js]
    for j in range(len(slope_row)):
        slope_row[j] = (V[js + 1, j] - V[js, j]) / spread
        T[i, j] = -0.5 * slope_row[j]
        S[i, j] = 0.0
        # dM/M - dq/q - dt = 0 times q, which may be next to zero
        A[i, j] = -q[i] * T[i, j] - V[i, j]
    A[i, i] += math.exp(-X[i, 1])
    S[i, PLACE] = sign * BACKGROUND


@njit
def fill_interval(
    X: FloatArray,
    terms: FloatArray,
    p: int,
    i: int,
    past: int,
    frac: float,
    Re: float,
    M2: float,
    R: FloatArray,
    J: FloatArray,
    by_f: FloatArray,
) -> None:
    """Fill residuals and slopes of the interval from p to i, `past` stations past transition."""
    by_f[:] = 0.0
    if past < 0:
        plain_interval(LAMINAR, X[p], X[i], terms[p], terms[i], R, J)
        J[2, 8] = 1.0
        return
    station_terms(TURBULENT, X[i], Re, M2, terms[i])
    if past == 0:
        transition_interval(X[p], X[i], terms[p], terms[i], frac, Re, M2, R, J, by_f)
    else:
        plain_interval(TURBULENT, X[p], X[i], terms[p], terms[i], R, J)


@njit
def lead_interval(J: FloatArray, by_f: FloatArray, xi: float, kappa: float) -> None:
    """Tie an interval's upstream end to the stagnation point, at the length xi from it.

    That station has the stagnation point's H and a speed in step with its length and the slope
    there, which takes the place of the fraction f. `kappa` is d(ln u)/d(ln q) at it.
    """
    for row in range(EQUATIONS):
        J[row, 0] += J[row, 1]
        by_f[row] = kappa * J[row, 2]
        J[row, 4] += by_f[row] / xi
        J[row, 1] = 0.0
        J[row, 2] = 0.0


@njit
def assemble_side(
    layers: Layers,
    rows: Rows,
    terms: FloatArray,
    js: int,
    n: int,
    side: int,
    turning: Turning,
    Re: float,
    M2: float,
) -> float:
    """Fill the rows of a side; return its largest residual."""
    X = layers.X
    width = rows.T.shape[1]
    R = np.zeros(EQUATIONS)
    J = np.zeros((EQUATIONS, COLUMNS))
    by_f = np.zeros(EQUATIONS)
    place = np.zeros(width)
    slope_row = np.zeros(width)
    growth = np.zeros((2, width))
    sign = 1.0 if side == UPPER else -1.0
    turn = turning.turn[side]
    frac = turning.frac[side]
    free = turning.why[side] == FREE and turn < NEVER
    i = node_of(side, 0, js)
    leading_station(layers, rows, js, i, sign, slope_row)
    worst = 0.0
    step_before = 0.0
    for k in range(1, stations_of(side, js, n)):
        p = i
        i = node_of(side, k, js)
        if free and k <= turn:
            growth[1] = growth[0]
            growth_row(growth[0], terms[p, THIRD], layers, rows, p)
        if free and k == turn:
            place_row(place, X, terms, growth, i, p, step_before, frac, rows.S)
        fill_interval(X, terms, p, i, k - turn, frac, Re, M2, R, J, by_f)
        if k == 1:
            lead_interval(J, by_f, X[p, 4], layers.kappa[p])
            eliminate_interval(R, J, by_f, slope_row, p, i, sign, layers, rows)
        else:
            eliminate_interval(R, J, by_f, place, p, i, sign, layers, rows)
        if free and k < turn:
            march_growth(rows.S, X, terms, growth, i, p, step_before)
        step_before = X[i, 4] - X[p, 4]
        worst = max(worst, abs(R[0]), abs(R[1]), abs(R[2]))
    return worst


@njit
def join_side(
    layers: Layers,
    rows: Rows,
    i: int,
    node: int,
    turn: int,
    share: float,
    d: float,
    s: float,
    Re: float,
    M2: float,
) -> None:
    """Add what one side's last station, `node`, brings to the wake's head, station i.

    `turn` is the side's transition, `share` its part of the head's theta; d and s are the head's.
    """
    X, M, q, kappa = layers
    T, S, V, A = rows
    thickness = math.exp(X[node, 1]) / math.exp(d)
    A[i, node] -= thickness / M[node]
    for j in range(T.shape[1]):
        A[i, j] += thickness * V[node, j] / q[node]
    if turn < NEVER:
        weight = share * math.exp(X[node, 3] - s)
        for j in range(T.shape[1]):
            S[i, j] += (weight - share) * T[node, j]
        add_row(S[i], weight, S[node])
        return
    start, by_t, by_d, by_v = starting_stress(X[node, 0], X[node, 1], X[node, 2], Re, M2)
    weight = share * math.exp(start - s)
    for j in range(T.shape[1]):
        S[i, j] += (weight - share) * T[node, j]
        S[i, j] += weight * by_t * T[node, j]
        S[i, j] += weight * (kappa[node] * by_v - by_d) / q[node] * V[node, j]
    S[i, node] += weight * by_d / M[node]


@njit
def wake_head(
    layers: Layers, rows: Rows, n: int, gap: float, turn: IntArray, Re: float, M2: float
) -> float:
    """Fill the rows of the first station of the wake; return its largest residual."""
    X, M, q, _ = layers
    T, S, V, A = rows
    t, d, s = join_wake(X, gap, turn, n, Re, M2)
    up = math.exp(X[0, 0] - t)
    low = math.exp(X[n - 1, 0] - t)
    for j in range(T.shape[1]):
        T[n, j] = up * T[0, j] + low * T[n - 1, j]
        S[n, j] = 0.0
        A[n, j] = -V[n, j] / q[n]
    T[n, RIGHT] += t - X[n, 0]
    S[n, RIGHT] += s - X[n, 3]
    A[n, n] += 1.0 / M[n]
    A[n, RIGHT] += X[n, 1] - d
    join_side(layers, rows, n, 0, turn[0], up, d, s, Re, M2)
    join_side(layers, rows, n, n - 1, turn[1], low, d, s, Re, M2)
    return float(max(abs(t - X[n, 0]), abs(s - X[n, 3]), abs(X[n, 1] - d)))


@njit
def assemble_wake(
    layers: Layers,
    rows: Rows,
    terms: FloatArray,
    n: int,
    gap: float,
    turn: IntArray,
    Re: float,
    M2: float,
) -> float:
    """Fill the rows of the wake; return its largest residual."""
    X = layers.X
    worst = wake_head(layers, rows, n, gap, turn, Re, M2)
    R = np.zeros(EQUATIONS)
    J = np.zeros((EQUATIONS, COLUMNS))
    by_f = np.zeros(EQUATIONS)
    station_terms(WAKE, X[n], Re, M2, terms[n])
    for i in range(n + 1, len(X)):
        station_terms(WAKE, X[i], Re, M2, terms[i])
        plain_interval(WAKE, X[i - 1], X[i], terms[i - 1], terms[i], R, J)
        eliminate_interval(R, J, by_f, rows.S[i], i - 1, i, 0.0, layers, rows)
        worst = max(worst, abs(R[0]), abs(R[1]), abs(R[2]))
    return worst
