"""The rows of one Newton step: changes of each station by those of the global unknowns.

Each row of t and s is a sum of rows of the station upstream (assembly.py has the coefficients), so
that only those of the station at hand are kept; what stays is a dense row of the energy equation
for each station. Once the system is solved, the same sums give the changes of t and s one by one.
"""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np

from optim.aerodynamics.interval import FREE, growth_rise
from optim.aerodynamics.kernels import njit
from optim.aerodynamics.layer import LAMINAR, THIRD, TURBULENT, WAKE, starting_stress
from optim.aerodynamics.layout import (
    AT_BEFORE,
    AT_DOWN,
    AT_PLACE,
    AT_RIGHT,
    AT_UP,
    BY_TURN,
    DOWN_V,
    LOWER,
    NEVER,
    PLACE,
    RIGHT,
    T_BEFORE,
    UP_S,
    UP_T,
    UP_V,
    UPPER,
    V_BEFORE,
    Layers,
    Rows,
    Turning,
    node_of,
    stations_of,
)
from optim.aerodynamics.starter import join_wake
from optim.aerodynamics.transition import BACKGROUND
from optim.arrays import FloatArray, IntArray


class Station(NamedTuple):
    """Changes of t and s at a station by those of the global unknowns."""

    T: FloatArray
    S: FloatArray


@njit
def add_row(out: FloatArray, c: float, row: FloatArray) -> None:
    """Add c times a row."""
    for j in range(len(out)):
        out[j] += c * row[j]


@njit
def empty_station(width: int) -> Station:
    """Return the rows of a station that does not change."""
    return Station(np.zeros(width), np.zeros(width))


@njit
def combine(
    out: FloatArray,
    c: FloatArray,
    up: Station,
    rowV: FloatArray,
    rowW: FloatArray,
    turn: FloatArray,
    p: int,
    i: int,
) -> None:
    """Fill the row that an equation's parts c stand for, between the stations p and i.

    `rowV`, `rowW` are the changes of their speeds, `turn` that of the fraction at which the
    interval turns.
    """
    t, s, v, w = c[UP_T], c[UP_S], c[UP_V], c[DOWN_V]
    rowT, rowS = up
    # one output and few inputs a loop: with more of them the compiler does not vectorise
    if s == 0.0:
        for j in range(len(out)):
            out[j] = t * rowT[j] + v * rowV[j] + w * rowW[j]
    else:
        for j in range(len(out)):
            out[j] = t * rowT[j] + s * rowS[j] + v * rowV[j] + w * rowW[j]
    if c[BY_TURN] != 0.0:
        add_row(out, c[BY_TURN], turn)
    out[p] += c[AT_UP]
    out[i] += c[AT_DOWN]
    out[PLACE] += c[AT_PLACE]
    out[RIGHT] += c[AT_RIGHT]


@njit
def fill_station(
    rows: Rows, up: Station, down: Station, turn: FloatArray, p: int, i: int, kind: int
) -> None:
    """Fill the rows of station i from those of p; a laminar station needs none of s."""
    C = rows.parts[i]
    V = rows.V
    combine(down.T, C[0], up, V[p], V[i], turn, p, i)
    combine(rows.A[i], C[1], up, V[p], V[i], turn, p, i)
    if kind != LAMINAR:
        combine(down.S, C[2], up, V[p], V[i], turn, p, i)


@njit
def add_before(rows: Rows, down: Station, before: FloatArray, ahead: int, i: int) -> None:
    """Add what the station ahead of a turning interval has in the rows of its end, station i.

    `before` is the change of t there.
    """
    for row in range(3):
        c = rows.parts[i, row]
        out = down.T if row == 0 else (rows.A[i] if row == 1 else down.S)
        add_row(out, c[T_BEFORE], before)
        add_row(out, c[V_BEFORE], rows.V[ahead])
        out[ahead] += c[AT_BEFORE]


@njit
def growth_weights(
    X: FloatArray, terms: FloatArray, js: int, side: int, turn: int, frac: float
) -> tuple[FloatArray, float]:
    """Return the change of the fraction at which a side turns, by what N is the sum of.

    These are the growth at each station upstream, extrapolated from the last two (interval.py),
    and N of the first one.
    """
    weights = np.zeros(turn)
    before = 0.0
    A0 = 0.0
    slope = 1.0
    for k in range(1, turn + 1):
        p = node_of(side, k - 1, js)
        step = X[node_of(side, k, js), 4] - X[p, 4]
        ratio = step / before if before > 0.0 else 0.0
        A1 = terms[p, THIRD, 0]
        rise, by_1, by_0 = growth_rise(A1, A0, ratio)
        share = frac if k == turn else 1.0
        half = 0.5 * share * share
        weights[k - 1] += step * (share + half * by_1)
        if k > 1:
            weights[k - 2] += step * half * by_0
        slope = -1.0 / max(step * (A1 + share * rise), 1e-12)
        before = step
        A0 = A1
    return slope * weights, slope


@njit
def add_growth(
    out: FloatArray, weight: float, A: FloatArray, layers: Layers, rows: Rows, up: Station, i: int
) -> None:
    """Add the change of the growth of N at a laminar station; `A` holds its value and slopes."""
    if A[1] == 0.0 and A[2] == 0.0:
        return
    t = weight * A[1]
    v = weight * (layers.kappa[i] * A[3] - A[2]) / layers.q[i]
    rowT = up.T
    rowV = rows.V[i]
    for j in range(len(out)):
        out[j] += t * rowT[j] + v * rowV[j]
    out[i] += weight * A[2] / layers.M[i]


@njit
def leading_station(layers: Layers, rows: Rows, js: int, side: int) -> None:
    """Fill the rows of the station beside the stagnation point, which has that point's state.

    That of the change of the logarithm of the speed's slope there is filled as well.
    """
    X, _, q, _ = layers
    V = rows.V
    i = node_of(side, 0, js)
    lead = rows.lead[side]
    slope = rows.slope
    A = rows.A[i]
    spread = q[js + 1] - q[js]
    for j in range(len(slope)):
        slope[j] = (V[js + 1, j] - V[js, j]) / spread
        lead[j] = -0.5 * slope[j]
        # dM/M - dq/q - dt = 0 times q, which may be next to zero
        A[j] = -q[i] * lead[j] - V[i, j]
    A[i] += math.exp(-X[i, 1])


@njit
def fill_side(
    layers: Layers,
    rows: Rows,
    terms: FloatArray,
    js: int,
    n: int,
    side: int,
    turning: Turning,
) -> Station:
    """Fill the rows of a side; return those of its last station."""
    turn = turning.turn[side]
    free = turning.why[side] == FREE and turn < NEVER
    weights, by_N = growth_weights(
        layers.X, terms, js, side, turn if free else 0, turning.frac[side]
    )
    leading_station(layers, rows, js, side)
    place = rows.place[side]
    place[:] = 0.0
    if free:
        # N of the first station is that of the background over its length
        place[PLACE] = by_N * (BACKGROUND if side == UPPER else -BACKGROUND)
    up = empty_station(len(place))
    down = empty_station(len(place))
    before = np.zeros(len(place))
    up.T[:] = rows.lead[side]
    i = node_of(side, 0, js)
    for k in range(1, stations_of(side, js, n)):
        p = i
        i = node_of(side, k, js)
        if free and k <= turn:
            add_growth(place, weights[k - 1], terms[p, THIRD], layers, rows, up, p)
        turned = rows.slope if k == 1 else place
        if k == turn:
            before[:] = down.T
        fill_station(rows, up, down, turned, p, i, LAMINAR if k < turn else TURBULENT)
        if k == turn and k > 1:
            add_before(rows, down, before, 2 * p - i, i)
        up, down = down, up
    return up


@njit
def join_side(
    layers: Layers,
    rows: Rows,
    end: Station,
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

    `end` are the rows of that station, `turn` the side's transition, `share` its part of the
    head's theta; d and s are the head's.
    """
    X, M, q, kappa = layers
    T, S = end
    V = rows.V[node]
    A = rows.A[i]
    head = rows.head[1]
    thickness = math.exp(X[node, 1]) / math.exp(d)
    A[node] -= thickness / M[node]
    add_row(A, thickness / q[node], V)
    if turn < NEVER:
        weight = share * math.exp(X[node, 3] - s)
        add_row(head, weight - share, T)
        add_row(head, weight, S)
        return
    start, by_t, by_d, by_v = starting_stress(X[node, 0], X[node, 1], X[node, 2], Re, M2)
    weight = share * math.exp(start - s)
    add_row(head, weight - share + weight * by_t, T)
    add_row(head, weight * (kappa[node] * by_v - by_d) / q[node], V)
    head[node] += weight * by_d / M[node]


@njit
def wake_head(
    layers: Layers,
    rows: Rows,
    upper: Station,
    lower: Station,
    n: int,
    gap: float,
    turn: IntArray,
    Re: float,
    M2: float,
) -> None:
    """Fill the rows of the first station of the wake from those of the two last of the sides."""
    X, M, q, _ = layers
    T, S = rows.head
    A = rows.A[n]
    t, d, s = join_wake(X, gap, turn, n, Re, M2)
    up = math.exp(X[0, 0] - t)
    low = math.exp(X[n - 1, 0] - t)
    for j in range(len(T)):
        T[j] = up * upper.T[j] + low * lower.T[j]
        S[j] = 0.0
        A[j] = -rows.V[n, j] / q[n]
    T[RIGHT] += t - X[n, 0]
    S[RIGHT] += s - X[n, 3]
    A[n] += 1.0 / M[n]
    A[RIGHT] += X[n, 1] - d
    join_side(layers, rows, upper, n, 0, turn[UPPER], up, d, s, Re, M2)
    join_side(layers, rows, lower, n, n - 1, turn[LOWER], low, d, s, Re, M2)


@njit
def fill_wake(rows: Rows, n: int) -> None:
    """Fill the rows of the wake behind its head."""
    nothing = rows.slope
    up = empty_station(len(nothing))
    down = empty_station(len(nothing))
    up.T[:] = rows.head[0]
    up.S[:] = rows.head[1]
    for i in range(n + 1, len(rows.V)):
        fill_station(rows, up, down, nothing, i - 1, i, WAKE)
        up, down = down, up


@njit
def part_change(
    c: FloatArray, up: FloatArray, q: float, turned: float, z: FloatArray, p: int, i: int
) -> float:
    """Return the change that an equation's parts c stand for; the twin of `combine`.

    `up` are the changes of t, s and q at station p, `q` is that at i, `turned` that of the
    fraction at which the interval turns.
    """
    near = c[UP_T] * up[0] + c[UP_S] * up[1] + c[UP_V] * up[2] + c[DOWN_V] * q
    ends = c[AT_UP] * z[p] + c[AT_DOWN] * z[i] + c[AT_PLACE] * z[PLACE] + c[AT_RIGHT] * z[RIGHT]
    return float(near + ends + c[BY_TURN] * turned)


@njit
def before_change(c: FloatArray, ahead: FloatArray, dM: float) -> float:
    """Return what the station ahead of a turning interval adds to a change; see `add_before`."""
    return float(c[T_BEFORE] * ahead[0] + c[V_BEFORE] * ahead[2] + c[AT_BEFORE] * dM)


@njit
def side_changes(
    rows: Rows, z: FloatArray, js: int, n: int, side: int, turn: int, out: FloatArray
) -> None:
    """Fill the changes of t and s along a side; s is left alone where it is laminar."""
    i = node_of(side, 0, js)
    out[i, 0] = np.dot(rows.lead[side], z)
    out[i, 1] = 0.0
    turned = np.dot(rows.slope, z)
    for k in range(1, stations_of(side, js, n)):
        p = i
        i = node_of(side, k, js)
        C = rows.parts[i]
        out[i, 0] = part_change(C[0], out[p], out[i, 2], turned, z, p, i)
        out[i, 1] = 0.0 if k < turn else part_change(C[2], out[p], out[i, 2], turned, z, p, i)
        if k == turn and k > 1:
            out[i, 0] += before_change(C[0], out[2 * p - i], z[2 * p - i])
            out[i, 1] += before_change(C[2], out[2 * p - i], z[2 * p - i])
        if k == 1:
            turned = np.dot(rows.place[side], z)


@njit
def station_changes(
    rows: Rows, z: FloatArray, js: int, n: int, turn: IntArray, out: FloatArray
) -> None:
    """Fill the changes of t, s and q of all stations (nt, 3) by those of the global unknowns."""
    out[:, 2] = np.dot(rows.V, z)
    for side in range(2):
        side_changes(rows, z, js, n, side, turn[side], out)
    out[n, :2] = np.dot(rows.head, z)
    for i in range(n + 1, len(out)):
        C = rows.parts[i]
        out[i, 0] = part_change(C[0], out[i - 1], out[i, 2], 0.0, z, i - 1, i)
        out[i, 1] = part_change(C[2], out[i - 1], out[i, 2], 0.0, z, i - 1, i)
