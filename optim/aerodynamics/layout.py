"""How the stations of a section's layers are laid out, and how they hang on the outer flow.

Nodes 0 .. n-1 are the contour from the upper to the lower edge, n .. n+w-1 the wake. Displacement
enters as the signed mass defect M = q delta*, q being the signed speed along the contour: with both
signed, the influence matrix does not depend on where the stagnation point lies. A station's state
is a row (t, d, v, s, xi): logarithms of theta, delta* and u_e, the third unknown, and its length
from the stagnation point. Sides are 0, upper, and 1, lower; station k of a side counts from the
stagnation point.

Arguments have the same names in all kernels:

X, M, q, kappa : (nt, 5), (nt,), (nt,), (nt,) array
    States, mass defect, signed speeds and d(ln u)/d(ln q) of the nt = n + w stations.
s, sw : (n,), (w,) array
    Lengths along the contour from its first node and along the wake from the edge [chords].
terms : (nt, 6, 5) array
    Terms of the stations (layer.py); `a` and `b` are those of an interval's two ends.
js, n : int
    Last node of the upper side; number of nodes of the contour.
i, p : int
    A station and the one upstream of it.
turn, frac, why : (2,) array
    Transition of each side: station that ends its interval, fraction of that, FREE, FORCED, HELD.
trip : float
    Length from the stagnation point at which transition is forced [chords].
critical, Re, M2, k : float
    N at transition, Reynolds number on the chord, squared Mach number, Tsien's parameter [-]; an
    integer k is a station.
"""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np

from optim.aerodynamics.compressibility import compressed_speed
from optim.aerodynamics.kernels import njit
from optim.aerodynamics.laminar import STAGNATION_H, STAGNATION_THETA
from optim.arrays import FloatArray, IntArray

UPPER, LOWER = 0, 1

NEVER = 1 << 30
"""Station number of a transition that does not happen."""

LEAST_LENGTH = 1e-12
"""The two stations beside the stagnation point are kept this far from it [chords]."""

STAGNATION_SLACK = 1e-4
"""Share of the speeds' difference beside the stagnation point by which one of the two stations may
lie on the wrong side of it [-]: the first interval of the two sides differs by its truncation
error, and a stagnation point that close to a node would else change sides at every iteration."""

LEAST_SPEED = 1e-13
"""Speeds are kept this far from zero where their logarithm is taken [-]."""


class Layers(NamedTuple):
    """The layers: state (nt, 5), mass defect, speed and d(ln u)/d(ln q) (nt,) of all stations."""

    X: FloatArray
    M: FloatArray
    q: FloatArray
    kappa: FloatArray


class Turning(NamedTuple):
    """Transition of both sides: the station it lies ahead of, the fraction of the interval, why."""

    turn: IntArray
    frac: FloatArray
    why: IntArray


class Rows(NamedTuple):
    """The linear equations of a step: rows of changes, columns of the global unknowns.

    Columns are the changes of the mass defect at the nt stations, ANGLE, PLACE and RIGHT.

    V : (nt, nt + 3) array
        Speeds of all stations.
    A : (nt + 2, nt + 3) array
        The equations left to solve.
    lead, place : (2, nt + 3) array
        Of each side: t at the first station, and the fraction at which it turns.
    slope : (nt + 3,) array
        Logarithm of the speed's slope at the stagnation point.
    head : (2, nt + 3) array
        t and s at the wake's head.
    parts : (nt, 3, 9) array
        The equations of the interval ahead of each station, t, energy and s, as sums of rows.
    """

    V: FloatArray
    A: FloatArray
    lead: FloatArray
    place: FloatArray
    slope: FloatArray
    head: FloatArray
    parts: FloatArray


ANGLE, PLACE, RIGHT = -3, -2, -1
"""Columns of the angle of attack, of the stagnation point and of the right side."""

UP_T, UP_S, UP_V, DOWN_V, BY_TURN, AT_UP, AT_DOWN, AT_PLACE, AT_RIGHT = range(9)
"""What an equation of an interval is made of: rows of t, s and q upstream, of q downstream and of
the fraction at which it turns, and single entries."""

T_BEFORE, V_BEFORE, AT_BEFORE = 9, 10, 11
"""And where it turns: rows of t and q, and an entry, of the station ahead of the upstream one."""

PARTS = 12
"""Number of these."""


@njit
def node_of(side: int, k: int, js: int) -> int:
    """Return the node of station k; js is the last node of the upper side."""
    return js - k if side == UPPER else js + 1 + k


@njit
def stations_of(side: int, js: int, n: int) -> int:
    """Return the number of stations of a side."""
    return js + 1 if side == UPPER else n - 1 - js


@njit
def stagnation_node(q: FloatArray, n: int, near: int) -> int:
    """Return the node before the change of sign of the speed that lies nearest to `near`."""
    if 0 <= near < n - 1:
        slack = STAGNATION_SLACK * (q[near + 1] - q[near])
        if q[near] < slack and q[near + 1] > -slack:
            return near
    best = -1
    for j in range(n - 1):
        if q[j] < 0.0 <= q[j + 1] and (best < 0 or abs(j - near) < abs(best - near)):
            best = j
    return best


@njit
def arc_lengths(x: FloatArray, y: FloatArray, s: FloatArray) -> None:
    """Fill the length along the polygon from the first node."""
    s[0] = 0.0
    for j in range(len(x) - 1):
        s[j + 1] = s[j] + math.hypot(x[j + 1] - x[j], y[j + 1] - y[j])


@njit
def outer_speed(
    stream: FloatArray, influence: FloatArray, alpha: float, M: FloatArray, q: FloatArray
) -> None:
    """Fill the signed speeds for an angle and a mass defect."""
    c = math.cos(alpha)
    sn = math.sin(alpha)
    blown = np.dot(influence, M)
    for i in range(len(q)):
        q[i] = c * stream[i, 0] + sn * stream[i, 1] + blown[i]


@njit
def place_stagnation(q: FloatArray, s: FloatArray, js: int) -> tuple[float, float]:
    """Return the stagnation point on the contour and the slope of the speed there."""
    slope = (q[js + 1] - q[js]) / (s[js + 1] - s[js])
    return s[js] - q[js] / slope, slope


@njit
def set_lengths(X: FloatArray, s: FloatArray, sw: FloatArray, s0: float, js: int, n: int) -> None:
    """Fill the lengths from the stagnation point; the wake counts on from the longer side."""
    for i in range(n):
        X[i, 4] = max(s0 - s[i] if i <= js else s[i] - s0, LEAST_LENGTH)
    start = 1.0
    for i in range(n, len(X)):
        X[i, 4] = start + sw[i - n]


@njit
def set_speed_and_displacement(X: FloatArray, M: FloatArray, q: FloatArray, k: float) -> None:
    """Fill v and d of all stations from the signed speed and mass defect."""
    for i in range(len(q)):
        speed = max(abs(q[i]), LEAST_SPEED)
        u, _ = compressed_speed(speed, k)
        X[i, 2] = math.log(u)
        X[i, 1] = math.log(max(abs(M[i]), 1e-300) / speed)


@njit
def stagnation_thickness(slope: float, Re: float) -> float:
    """Return ln theta of Hiemenz's flow for a slope du/ds."""
    return math.log(STAGNATION_THETA) - 0.5 * math.log(Re * slope)


@njit
def mend_stagnation(
    X: FloatArray, M: FloatArray, q: FloatArray, slope: float, js: int, n: int, Re: float
) -> None:
    """Give the two stations that lead the sides, and any that changed side, the stagnation state.

    The leading stations always have it: so near the stagnation point a small change of the speed is
    a large one of M/q, which no linear step foresees. Their mass defect has the sign of the speed,
    on whichever side of the stagnation point they lie by a hair.
    """
    t = stagnation_thickness(slope, Re)
    delta = STAGNATION_H * math.exp(t)
    for i in range(n):
        if i in (js, js + 1):
            q[i] = math.copysign(max(abs(q[i]), LEAST_SPEED), q[i])
            M[i] = q[i] * delta
        elif (M[i] >= 0.0) if i <= js else (M[i] <= 0.0):
            M[i] = math.copysign(max(abs(q[i]), LEAST_SPEED) * delta, 1.0 if i > js else -1.0)
        else:
            continue
        X[i, 0] = t
        X[i, 3] = 0.0


@njit
def lead_sides(X: FloatArray, slope: float, js: int, k: float) -> None:
    """Fill v and d of the two stations that lead the sides: speeds in step with their lengths."""
    for i in (js, js + 1):
        u, _ = compressed_speed(slope * X[i, 4], k)
        X[i, 2] = math.log(u)
        X[i, 1] = X[i, 0] + math.log(STAGNATION_H)
