"""First states: a quasi-simultaneous march along the layers.

It marches both sides and the wake. At each station the three equations of the layer are
solved together with an interaction law, u = u_ext + D_ii m, in which the station's own mass defect
acts on its own speed: that removes the singularity at separation.

References
----------
Veldman, A. E. P., AIAA J. 19(1), 1981, pp. 79-85.
"""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.compressibility import compressed_speed
from optim.aerodynamics.interval import (
    COLUMNS,
    EQUATIONS,
    amplified,
    fraction_at,
    growth_rise,
    plain_interval,
    transition_interval,
)
from optim.aerodynamics.kernels import njit
from optim.aerodynamics.laminar import STAGNATION_H
from optim.aerodynamics.layer import (
    LAMINAR,
    SLOPES,
    TERMS,
    THIRD,
    TURBULENT,
    WAKE,
    laminar_station,
    stress_at_equilibrium,
    turbulent_station,
)
from optim.aerodynamics.layout import (
    LEAST_SPEED,
    NEVER,
    UPPER,
    keep_from_stagnation,
    node_of,
    place_stagnation,
    set_lengths,
    stagnation_node,
    stagnation_thickness,
    stations_of,
)
from optim.aerodynamics.turbulent import START_RATIO

LOCAL_STEPS = 20
"""Newton steps of one station."""

LOCAL_TOLERANCE = 1e-7
"""Residual at which a station is done; the simultaneous solution follows."""

EDGE_REACH = 0.05
"""Length ahead of the edge over which the first march ignores the inviscid stagnation [chords]."""

WAKE_RECOVERY = 0.3
"""Length over which the speed of the first wake returns to the free stream [chords]."""

INTERACTION = 0.5
"""Speed by the bend of the mass defect over the station's length, in the interaction law of the
march [-]; 2/pi is the value of a single hat of displacement in thin-aerofoil theory."""

LOCAL_SLACK = 1e-2
"""Residual with which the march goes on after the last step of a station."""

LARGEST_START_STRESS = math.log(0.2)
"""Largest ln sqrt(Ct) with which a station turns turbulent [-]; separated layers have less."""

LEAST_TURBULENT = 100.0
"""Re_theta below which a trip leaves a layer laminar [-]. Relaminarised and tripped layers are
found laminar below some 100 to 300 (Preston, J. Fluid Mech. 3, 1958; from memory)."""

SEPARATION_START = 3.8
"""Shape factor at which the march lets a laminar layer turn [-]; the one at which differential
solutions separate is 3.5 to 3.8."""

LEAST_START_SHAPE = (2.0, 1.15)
GREATEST_START_SHAPE = (6.0, 3.0)
"""Shape factors that the march builds on, laminar and turbulent [-]; a guess needs no more."""

HOLD_SHAPE = (4.5, 1.6)
HOLD_RATE = 0.3
"""Where the shape of a station that did not close goes, and the share of the way a station [-]."""

GREATEST_START_GROWTH = 0.25
"""Greatest rise of ln theta at a station that did not close [-]."""


@njit
def station_terms(kind, x, Re, M2, out):  # type: ignore[no-untyped-def]
    """Fill the terms of a station of any kind."""
    if kind == LAMINAR:
        laminar_station(x[0], x[1], x[2], Re, M2, True, out)
    else:
        turbulent_station(x[0], x[1], x[2], x[3], Re, M2, kind == WAKE, out)


@njit
def join_wake(X, gap, turbulent_up, turbulent_low, n, Re, M2):  # type: ignore[no-untyped-def]
    """Return t, d and s at the wake's head from the two sides.

    Thicknesses add, the edge's gap adds to the displacement, and the shear stress is the
    theta-weighted mean; a side that is laminar to the edge joins with the starting stress.
    """
    su = X[0, 3]
    sl = X[n - 1, 3]
    if not turbulent_up:
        su = stress_at_equilibrium(X[0, 0], X[0, 1], X[0, 2], Re, M2)[0]
        su += 0.5 * math.log(START_RATIO)
    if not turbulent_low:
        sl = stress_at_equilibrium(X[n - 1, 0], X[n - 1, 1], X[n - 1, 2], Re, M2)[0]
        sl += 0.5 * math.log(START_RATIO)
    a = math.exp(X[0, 0])
    b = math.exp(X[n - 1, 0])
    t = math.log(a + b)
    d = math.log(math.exp(X[0, 1]) + math.exp(X[n - 1, 1]) + gap)
    return t, d, math.log((a * math.exp(su) + b * math.exp(sl)) / (a + b))


@njit
def solve_small(J, R, out):  # type: ignore[no-untyped-def]
    """Solve a 3 x 3 system by elimination with row exchange; False if it is singular."""
    A = np.empty((3, 4))
    for i in range(3):
        for j in range(3):
            A[i, j] = J[i, j]
        A[i, 3] = R[i]
    for c in range(3):
        p = c
        for i in range(c + 1, 3):
            if abs(A[i, c]) > abs(A[p, c]):
                p = i
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
def close_station(kind, f, x1, a, x2, external, own, k, Re, M2):  # type: ignore[no-untyped-def]
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
    small = np.empty((3, 3))
    step = np.zeros(3)
    speed = math.exp(x2[2])
    m = math.exp(x2[1]) * speed
    worst = 1.0
    for unused in range(LOCAL_STEPS):
        q = max(external + own * m, 0.2 * speed)
        speed = q
        u, kappa = compressed_speed(q, k)
        x2[2] = math.log(u)
        x2[1] = math.log(m / q)
        station_terms(kind, x2, Re, M2, b)
        if f < 0.0:
            plain_interval(kind, x1, x2, a, b, R, J)
        else:
            transition_interval(x1, x2, a, b, f, Re, M2, R, J, by_f)
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
def within(kind, H):  # type: ignore[no-untyped-def]
    """Whether a shape factor is one that the march may build on."""
    if kind == LAMINAR:
        return LEAST_START_SHAPE[0] < H < GREATEST_START_SHAPE[0]
    least = 1.005 if kind == WAKE else LEAST_START_SHAPE[1]
    return least < H < GREATEST_START_SHAPE[1]


@njit
def hold_shape(x1, a, x2, external, kind):  # type: ignore[no-untyped-def]
    """Give a station that did not close a plausible shape, and theta by the momentum equation.

    A laminar layer goes on towards separation, a turbulent one towards its usual shape.
    """
    H1 = math.exp(x1[1] - x1[0])
    H = H1 + HOLD_RATE * (HOLD_SHAPE[0 if kind == LAMINAR else 1] - H1)
    x2[2] = math.log(external)
    rise = a[0, 0] * (x2[4] - x1[4]) - (H + 2.0) * (x2[2] - x1[2])
    x2[0] = x1[0] + min(max(rise, -GREATEST_START_GROWTH), GREATEST_START_GROWTH)
    x2[1] = x2[0] + math.log(H)


@njit
def straight_mass(X, M, sign, i, p, j):  # type: ignore[no-untyped-def]
    """Return the mass defect that goes on straight from the two stations upstream."""
    if j < 2:
        return sign * M[p] * math.exp(X[i, 2] - X[p, 2])
    pp = 2 * p - i
    slope = sign * (M[p] - M[pp]) / (X[p, 4] - X[pp, 4])
    return max(sign * M[p] + slope * (X[i, 4] - X[p, 4]), 0.5 * sign * M[p])


@njit
def turning_fraction(X, a, before, i, p, step_before, trip, critical, Re):  # type: ignore[no-untyped-def]
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
def sweep_side(X, M, q, js, n, side, trip, earliest, turn, frac, k, critical, Re, M2):  # type: ignore[no-untyped-def]
    """March one side once, finding transition on the way; return the number of failed stations.

    `turn[side]` and `frac[side]` are filled with the station that ends the interval of transition
    and the fraction at which it turns; it is not looked for ahead of station `earliest`.
    """
    a = np.empty((TERMS, SLOPES))
    x2 = np.empty(SLOPES)
    failed = 0
    turn[side] = NEVER
    frac[side] = 0.0
    sign = -1.0 if side == UPPER else 1.0
    first = node_of(side, 0, js)
    X[first, 3] = 0.0
    station_terms(LAMINAR, X[first], Re, M2, a)
    growth_before = 0.0
    step_before = 0.0
    for j in range(1, stations_of(side, js, n)):
        i = node_of(side, j, js)
        p = node_of(side, j - 1, js)
        step = X[i, 4] - X[p, 4]
        own = INTERACTION / step
        outside = max(sign * q[i], 0.05)
        external = outside - own * straight_mass(X, M, sign, i, p, j)
        x2[:] = X[p]
        x2[4] = X[i, 4]
        x2[2] = math.log(max(outside, 0.05 * math.exp(X[p, 2])))
        f = -1.0
        N = 0.0
        kind = TURBULENT
        if turn[side] == NEVER:
            N, f = turning_fraction(X, a, growth_before, i, p, step_before, trip, critical, Re)
            growth_before = a[THIRD, 0]
            step_before = step
            N = min(N, critical)
            if f >= 0.0 and j >= earliest:
                turn[side] = j
                frac[side] = f
                x2[3] = stress_at_equilibrium(x2[0], x2[1], x2[2], Re, M2)[0]
                x2[3] = min(x2[3] + 0.5 * math.log(START_RATIO), LARGEST_START_STRESS)
            else:
                kind = LAMINAR
        done = close_station(kind, f, X[p], a, x2, external, own, k, Re, M2)
        if (
            kind == LAMINAR
            and j >= earliest
            and not (done and math.exp(x2[1] - x2[0]) < SEPARATION_START)
        ):
            # where the laminar layer separates, the march lets it turn; the iteration will move
            # transition downstream as far as amplification allows
            kind = TURBULENT
            f = 0.0
            turn[side] = j
            frac[side] = 0.0
            x2[:] = X[p]
            x2[4] = X[i, 4]
            x2[2] = math.log(max(outside, 0.05 * math.exp(X[p, 2])))
            x2[3] = stress_at_equilibrium(x2[0], x2[1], x2[2], Re, M2)[0]
            x2[3] = min(x2[3] + 0.5 * math.log(START_RATIO), LARGEST_START_STRESS)
            done = close_station(kind, f, X[p], a, x2, external, own, k, Re, M2)
        stress = X[p, 3] if f < 0.0 else LARGEST_START_STRESS
        if not done or not within(kind, math.exp(x2[1] - x2[0])):
            failed += 1
            hold_shape(X[p], a, x2, outside, kind)
            x2[3] = stress
        if kind == LAMINAR:
            x2[3] = N
        X[i] = x2
        q[i] = sign * undo(x2[2], k)
        M[i] = q[i] * math.exp(x2[1])
        station_terms(kind, X[i], Re, M2, a)
    return failed


@njit
def undo(l, k):  # type: ignore[no-untyped-def]
    """Return the incompressible speed of a corrected one, given as its logarithm."""
    u = math.exp(l)
    if k == 0.0:
        return u
    # u (1 - k q^2) = q (1 - k)
    half = 0.5 * (1.0 - k) / (k * u)
    return -half + math.sqrt(half * half + 1.0 / k)


@njit
def sweep_wake(X, M, q, n, gap, turn, k, Re, M2):  # type: ignore[no-untyped-def]
    """March the wake once; return the number of failed stations."""
    a = np.empty((TERMS, SLOPES))
    x2 = np.empty(SLOPES)
    failed = 0
    t, d, s3 = join_wake(X, gap, turn[0] < NEVER, turn[1] < NEVER, n, Re, M2)
    X[n, 0] = t
    X[n, 1] = d
    X[n, 3] = s3
    X[n, 2] = 0.5 * (X[0, 2] + X[n - 1, 2])
    q[n] = undo(X[n, 2], k)
    M[n] = q[n] * math.exp(d)
    station_terms(WAKE, X[n], Re, M2, a)
    for i in range(n + 1, len(M)):
        total = q[i]
        own = INTERACTION / (X[i, 4] - X[i - 1, 4])
        straight = M[i - 1]
        x2[:] = X[i - 1]
        x2[4] = X[i, 4]
        x2[2] = math.log(max(total, 0.05))
        done = close_station(WAKE, -1.0, X[i - 1], a, x2, total - own * straight, own, k, Re, M2)
        if not done or not within(WAKE, math.exp(x2[1] - x2[0])):
            failed += 1
            hold_shape(X[i - 1], a, x2, total, WAKE)
            x2[3] = X[i - 1, 3]
        X[i] = x2
        q[i] = undo(x2[2], k)
        M[i] = q[i] * math.exp(x2[1])
        station_terms(WAKE, X[i], Re, M2, a)
    return failed


@njit
def soften_edge(q, s, sw, n):  # type: ignore[no-untyped-def]
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
    X, M, q, stream, influence, s, sw, alpha, n, gap, trips, turn, frac, k, critical, Re, M2, warm
):  # type: ignore[no-untyped-def]
    """Fill a first state for an angle of attack; return the node before stagnation and failures.

    The march runs on the inviscid speeds; if `warm`, on the speeds that the mass defect of a
    neighbouring solution, found in `M`, makes at the new angle. -1 if that flow has no stagnation
    point on the contour.
    """
    c = math.cos(alpha)
    sn = math.sin(alpha)
    nt = len(q)
    for i in range(nt):
        q[i] = c * stream[i, 0] + sn * stream[i, 1]
        if warm:
            row = influence[i]
            for j in range(nt):
                q[i] += row[j] * M[j]
    js = stagnation_node(q, n, n // 2)
    if js < 1 or js > n - 3:
        return -1, 0
    s0, slope = place_stagnation(q, s, js)
    keep_from_stagnation(q, slope, js)
    if not warm:
        soften_edge(q, s, sw, n)
    set_lengths(X, s, sw, s0, js, n)
    failed = 0
    for side in range(2):
        trip = s0 - trips[0] if side == UPPER else trips[1] - s0
        first = node_of(side, 0, js)
        X[first, 0] = stagnation_thickness(slope, Re)
        X[first, 1] = X[first, 0] + math.log(STAGNATION_H)
        X[first, 2] = math.log(compressed_speed(abs(q[first]), k)[0])
        M[first] = q[first] * math.exp(X[first, 1])
        failed += sweep_side(X, M, q, js, n, side, trip, 1, turn, frac, k, critical, Re, M2)
    return js, failed + sweep_wake(X, M, q, n, gap, turn, k, Re, M2)
