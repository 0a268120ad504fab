"""First states: a quasi-simultaneous march along the layers.

It marches both sides and the wake, station by station (closing.py), on speeds of the outer flow
that the layers do not change but at the station itself.

References
----------
Veldman, A. E. P., AIAA J. 19(1), 1981, pp. 79-85.
"""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.closing import close_station, hold_shape, within
from optim.aerodynamics.compressibility import incompressible_speed
from optim.aerodynamics.interval import amplified, fraction_at, growth_rise
from optim.aerodynamics.kernels import njit
from optim.aerodynamics.layer import (
    LAMINAR,
    SLOPES,
    TERMS,
    THIRD,
    TURBULENT,
    WAKE,
    starting_stress,
    station_terms,
)
from optim.aerodynamics.layout import (
    NEVER,
    UPPER,
    lead_sides,
    node_of,
    outer_speed,
    place_stagnation,
    set_lengths,
    stagnation_node,
    stagnation_thickness,
    stations_of,
)
from optim.aerodynamics.transition import BACKGROUND
from optim.arrays import FloatArray, IntArray

EDGE_REACH = 0.05
"""Length ahead of the edge over which the first march ignores the inviscid stagnation [chords]."""

WAKE_RECOVERY = 0.3
"""Length over which the speed of the first wake returns to the free stream [chords]."""

INTERACTION = 0.5
"""Speed by the bend of the mass defect over the station's length, in the interaction law of the
march [-]; 2/pi is the value of a single hat of displacement in thin-aerofoil theory."""

LARGEST_START_STRESS = math.log(0.2)
"""Largest ln sqrt(Ct) with which a station turns turbulent [-]; separated layers have less."""

LEAST_TURBULENT = 100.0
"""Re_theta below which a trip leaves a layer laminar [-]. Relaminarised and tripped layers are
found laminar below some 100 to 300 (Preston, J. Fluid Mech. 3, 1958; from memory)."""

PARTED_STATIONS = 3
"""Stations that the march holds separated before it lets the layer turn; at Re 1e6 and more a
bubble is no longer."""

SEPARATION_START = 3.8
"""Shape factor at which the march lets a laminar layer turn [-]; the one at which differential
solutions separate is 3.5 to 3.8."""

LEAST_START_SPEED = 0.05
"""Edge speed below which the march does not go [-], beside that at the station upstream as well."""


@njit
def first_stress(x: FloatArray, Re: float, M2: float) -> float:
    """Return the shear stress ln sqrt(Ct) that a station gets which was laminar."""
    return min(starting_stress(x[0], x[1], x[2], Re, M2)[0], LARGEST_START_STRESS)


@njit
def join_wake(
    X: FloatArray, gap: float, turn: IntArray, n: int, Re: float, M2: float
) -> tuple[float, float, float]:
    """Return t, d and s at the wake's head from the two sides.

    Thicknesses add, the edge's gap adds to the displacement, and the shear stress is the
    theta-weighted mean; a side that is laminar to the edge joins with the starting stress.
    """
    up = X[0]
    low = X[n - 1]
    su = up[3]
    sl = low[3]
    if turn[0] >= NEVER:
        su = starting_stress(up[0], up[1], up[2], Re, M2)[0]
    if turn[1] >= NEVER:
        sl = starting_stress(low[0], low[1], low[2], Re, M2)[0]
    a = math.exp(up[0])
    b = math.exp(low[0])
    t = math.log(a + b)
    d = math.log(math.exp(up[1]) + math.exp(low[1]) + gap)
    return t, d, math.log((a * math.exp(su) + b * math.exp(sl)) / (a + b))


@njit
def straight_mass(X: FloatArray, M: FloatArray, sign: float, i: int, p: int, j: int) -> float:
    """Return the mass defect that goes on straight from the two stations upstream."""
    if j < 2:
        return float(sign * M[p] * math.exp(X[i, 2] - X[p, 2]))
    pp = 2 * p - i
    slope = sign * (M[p] - M[pp]) / (X[p, 4] - X[pp, 4])
    return float(max(sign * M[p] + slope * (X[i, 4] - X[p, 4]), 0.5 * sign * M[p]))


@njit
def turning_fraction(
    X: FloatArray,
    a: FloatArray,
    before: float,
    i: int,
    p: int,
    step_before: float,
    trip: float,
    critical: float,
    Re: float,
) -> tuple[float, float]:
    """Return N at the end of an interval and the fraction at which it turns; -1 if it does not.

    `a` are the terms of the upstream station, `before` is the growth of the one ahead of it. A trip
    acts from where the layer is thick enough to be turbulent.
    """
    step = X[i, 4] - X[p, 4]
    ratio = step / step_before if step_before > 0.0 else 0.0
    rise = growth_rise(a[THIRD, 0], before, ratio)[0]
    f = fraction_at(X[p, 3], a[THIRD, 0], rise, step, critical)
    fixed = max((trip - X[p, 4]) / step, 0.0)
    thick = Re * math.exp(X[p, 0] + X[p, 2]) > LEAST_TURBULENT
    if thick and fixed < 1.0 and (f < 0.0 or fixed < f):
        f = fixed
    return amplified(X[p, 3], a[THIRD, 0], rise, step, 1.0), f


@njit
def lead_side(X: FloatArray, i: int, Re: float, M2: float, out: FloatArray) -> None:
    """Start amplification at the first station of a side, and fill its terms."""
    X[i, 3] = BACKGROUND * X[i, 4]
    station_terms(LAMINAR, X[i], Re, M2, out)


@njit
def set_out(x: FloatArray, X: FloatArray, p: int, i: int, speed: float) -> None:
    """Fill the guess of station i: the state of station p at another length and speed."""
    x[:] = X[p]
    x[4] = X[i, 4]
    x[2] = math.log(max(speed, LEAST_START_SPEED * math.exp(X[p, 2])))


@njit
def set_out_turbulent(
    x: FloatArray, X: FloatArray, p: int, i: int, speed: float, Re: float, M2: float
) -> None:
    """Fill the guess of station i, which turns turbulent."""
    set_out(x, X, p, i, speed)
    x[3] = first_stress(x, Re, M2)


@njit
def settle(
    kind: int,
    x: FloatArray,
    i: int,
    sign: float,
    X: FloatArray,
    M: FloatArray,
    q: FloatArray,
    k: float,
    Re: float,
    M2: float,
    a: FloatArray,
) -> None:
    """Put a station's state in its place, with its speed and mass defect, and fill its terms."""
    X[i] = x
    q[i] = sign * incompressible_speed(x[2], k)
    M[i] = q[i] * math.exp(x[1])
    station_terms(kind, X[i], Re, M2, a)


@njit
def attached(x2: FloatArray, done: bool) -> bool:  # noqa: FBT001  as for `start`
    """Whether a laminar station closed short of separation."""
    return done and math.exp(x2[1] - x2[0]) < SEPARATION_START


@njit
def sweep_side(
    X: FloatArray,
    M: FloatArray,
    q: FloatArray,
    js: int,
    n: int,
    side: int,
    trip: float,
    earliest: int,
    turn: IntArray,
    frac: FloatArray,
    k: float,
    critical: float,
    Re: float,
    M2: float,
) -> None:
    """March one side once, finding transition on the way.

    `turn[side]` and `frac[side]` are filled with the station that ends the interval of transition
    and the fraction at which it turns; it is not looked for ahead of station `earliest`.
    """
    a = np.empty((TERMS, SLOPES))
    x2 = np.empty(SLOPES)
    turn[side], frac[side] = NEVER, 0.0
    sign = -1.0 if side == UPPER else 1.0
    lead_side(X, node_of(side, 0, js), Re, M2, a)
    growth_before = 0.0
    step_before = 0.0
    parted = 0
    for j in range(1, stations_of(side, js, n)):
        i = node_of(side, j, js)
        p = node_of(side, j - 1, js)
        step = X[i, 4] - X[p, 4]
        own = INTERACTION / step
        outside = max(sign * q[i], LEAST_START_SPEED)
        external = outside - own * straight_mass(X, M, sign, i, p, j)
        set_out(x2, X, p, i, outside)
        N, f = 0.0, -1.0
        if turn[side] == NEVER:
            N, f = turning_fraction(X, a, growth_before, i, p, step_before, trip, critical, Re)
            growth_before, step_before = a[THIRD, 0], step
            if f >= 0.0 and j >= earliest:
                turn[side], frac[side] = j, f
                set_out_turbulent(x2, X, p, i, outside, Re, M2)
            else:
                f = -1.0
        kind = LAMINAR if turn[side] == NEVER else TURBULENT
        done = close_station(kind, f, X[p], a, x2, external, own, k, Re, M2)
        if kind == LAMINAR and not attached(x2, done):
            parted += 1
            hold_shape(X[p], a, x2, outside, 0.0, LAMINAR)
        if kind == LAMINAR and j >= earliest and parted > PARTED_STATIONS:
            # a short bubble is held as it separates; behind it the march lets the layer turn, and
            # the iteration moves transition downstream as far as amplification allows
            kind, f, turn[side] = TURBULENT, 0.0, j
            set_out_turbulent(x2, X, p, i, outside, Re, M2)
            done = close_station(kind, f, X[p], a, x2, external, own, k, Re, M2)
        if kind == LAMINAR:
            x2[3] = min(N, critical)
        elif not done or not within(kind, math.exp(x2[1] - x2[0])):
            hold_shape(X[p], a, x2, outside, X[p, 3] if f < 0.0 else LARGEST_START_STRESS, kind)
        settle(kind, x2, i, sign, X, M, q, k, Re, M2, a)


@njit
def sweep_wake(
    X: FloatArray,
    M: FloatArray,
    q: FloatArray,
    n: int,
    gap: float,
    turn: IntArray,
    k: float,
    Re: float,
    M2: float,
) -> None:
    """March the wake once."""
    a = np.empty((TERMS, SLOPES))
    x2 = np.empty(SLOPES)
    x2[:] = X[n]
    x2[0], x2[1], x2[3] = join_wake(X, gap, turn, n, Re, M2)
    x2[2] = 0.5 * (X[0, 2] + X[n - 1, 2])
    settle(WAKE, x2, n, 1.0, X, M, q, k, Re, M2, a)
    for i in range(n + 1, len(M)):
        total = q[i]
        own = INTERACTION / (X[i, 4] - X[i - 1, 4])
        straight = M[i - 1]
        x2[:] = X[i - 1]
        x2[4] = X[i, 4]
        x2[2] = math.log(max(total, LEAST_START_SPEED))
        done = close_station(WAKE, -1.0, X[i - 1], a, x2, total - own * straight, own, k, Re, M2)
        if not done or not within(WAKE, math.exp(x2[1] - x2[0])):
            hold_shape(X[i - 1], a, x2, total, X[i - 1, 3], WAKE)
        settle(WAKE, x2, i, 1.0, X, M, q, k, Re, M2, a)


@njit
def soften_edge(q: FloatArray, s: FloatArray, sw: FloatArray, n: int) -> None:
    """Take the inviscid stagnation at the edge out of the speeds that the first march sees.

    The layer keeps the flow from stopping there. Within EDGE_REACH of the edge the speed goes on
    straight, at the slope of the stretch ahead, and the wake recovers from the mean edge speed.
    """
    for side in range(2):
        step = 1 if side == UPPER else -1
        edge = 0 if side == UPPER else n - 1
        i = edge
        while abs(s[i] - s[edge]) < EDGE_REACH:
            i += step
        j = i
        while abs(s[j] - s[edge]) < 2.0 * EDGE_REACH:
            j += step
        slope = min(max((q[i] - q[j]) / (s[i] - s[j]), -2.0), 2.0)
        m = edge
        while m != i:
            straight = q[i] + slope * (s[m] - s[i])
            # never against the direction of the side, whatever the slope
            q[m] = min(straight, 0.5 * q[i]) if side == UPPER else max(straight, 0.5 * q[i])
            m += step
    edge_speed = 0.5 * (q[n - 1] - q[0])
    for i in range(n, len(q)):
        recovered = 1.0 - (1.0 - edge_speed) * math.exp(-sw[i - n] / WAKE_RECOVERY)
        q[i] = max(q[i], recovered)


@njit
def start(
    X: FloatArray,
    M: FloatArray,
    q: FloatArray,
    stream: FloatArray,
    influence: FloatArray,
    s: FloatArray,
    sw: FloatArray,
    alpha: float,
    n: int,
    gap: float,
    trips: FloatArray,
    turn: IntArray,
    frac: FloatArray,
    k: float,
    critical: float,
    Re: float,
    M2: float,
    warm: bool,  # noqa: FBT001  compiled functions have no keyword-only arguments
) -> int:
    """Fill a first state for an angle of attack; return the node before stagnation.

    The march runs on the inviscid speeds; if `warm`, on the speeds that the mass defect of a
    neighbouring solution, found in `M`, makes at the new angle. -1 if that flow has no stagnation
    point on the contour.
    """
    outer_speed(stream, influence, alpha, M, q)
    js = stagnation_node(q, n, n // 2)
    if js < 1 or js > n - 3:
        return -1
    s0, slope = place_stagnation(q, s, js)
    if not warm:
        soften_edge(q, s, sw, n)
    set_lengths(X, s, sw, s0, js, n)
    X[js, 0] = X[js + 1, 0] = stagnation_thickness(slope, Re)
    lead_sides(X, slope, js, k)
    for side in range(2):
        trip = s0 - trips[0] if side == UPPER else trips[1] - s0
        first = node_of(side, 0, js)
        M[first] = q[first] * math.exp(X[first, 1])
        sweep_side(X, M, q, js, n, side, trip, 1, turn, frac, k, critical, Re, M2)
    sweep_wake(X, M, q, n, gap, turn, k, Re, M2)
    return js
