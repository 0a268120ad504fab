"""The simultaneous solution of the outer flow and the layers, by Newton's method.

Along each side the momentum and the third equation give the changes of theta and of the third
unknown in terms of all changes of mass defect, row by row; what is left is one dense system for
the mass defect, the angle of attack and the stagnation point. The slopes are analytic, those of
the place of transition and of the stagnation point included.

References
----------
Drela, M., Giles, M. B., AIAA J. 25(10), 1987, pp. 1347-1355. Lock, R. C., Williams, B. R.,
Prog. Aerospace Sci. 24, 1987 (viscous-inviscid interaction).
"""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.compressibility import compressed_speed
from optim.aerodynamics.forces import lift_force
from optim.aerodynamics.interval import (
    COLUMNS,
    EQUATIONS,
    FORCED,
    FREE,
    HELD,
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
    stress_at_equilibrium,
)
from optim.aerodynamics.layout import (
    NEVER,
    UPPER,
    keep_from_stagnation,
    mend_stagnation,
    node_of,
    place_stagnation,
    set_lengths,
    set_speed_and_displacement,
    stagnation_node,
    stagnation_thickness,
    stations_of,
)
from optim.aerodynamics.starter import (
    LARGEST_START_STRESS,
    join_wake,
    station_terms,
    sweep_side,
    turning_fraction,
)
from optim.aerodynamics.turbulent import START_RATIO

UPSTREAM_MOVE = 6
"""Stations by which transition may move upstream in one iteration."""

MARCHES = 3
"""Times that a side may be marched anew because transition left its place."""

PATIENCE = 5
"""Iterations after which an unsettled state no longer holds transition up: where it is held there
need be no solution."""

NEARLY_LAMINAR = 0.9
"""Fraction beyond which an interval's end has the shape of a laminar layer [-]."""

STALLED_GROWTH = 0.05
"""Growth of N over a station below which transition will not come soon [-]."""

SETTLED = 0.3
"""Step below which the state has settled enough to tell where transition is not [-]."""

LEAST_SHAPE = (1.8, 1.02, 1.0)
"""Shape factors that a laminar, a turbulent and a wake station keep away from during the iteration
[-]: the turbulent relations have a second root below 1, which is no layer."""

LEAST_ROOM = 0.05
"""Distance from the least shape factor that is always left [-]."""

SHAPE_ROOM = 0.4
"""Share of the distance to the least shape factor that one iteration must leave [-]."""

LARGEST_STEP = 0.5
"""Largest change of the logarithms of theta, delta* and sqrt(Ct) in one iteration."""

CAUTION = 12.0
"""Iterations since transition moved after which the largest step is halved [-]: about the least of H* Newton steps leap
from one side to the other, and only shorter ones settle."""

LARGEST_SPEED_STEP = 0.4
"""Largest relative change of an edge speed in one iteration, the two stagnation stations apart."""

LARGEST_TURN = math.radians(3.0)
"""Largest change of the angle of attack in one iteration [rad]."""


@njit
def locate_transition(
    X, M, q, terms, js, n, side, trip, floor, turn, frac, why, settled, critical, Re, M2
):  # type: ignore[no-untyped-def]
    """March amplification along the laminar stations of a side, filling their terms.

    N depends on stations upstream alone. Where it turns critical ahead of the present place, or a
    trip lies there, transition moves, by a few stations an iteration. Where it stays below at the
    end of the present interval, that one is HELD laminar to its end; once the state has settled
    and N is still not reached, the next one is, and True is returned: the present place is lost. A
    side that turned laminar at once would not come back. Stations ahead of `floor` stay laminar.
    """
    count = stations_of(side, js, n)
    before = turn[side]
    held = why[side] == HELD
    mixed = frac[side] < NEARLY_LAMINAR
    earliest = max(floor, min(before, count) - UPSTREAM_MOVE)
    first = node_of(side, 0, js)
    X[first, 3] = 0.0
    station_terms(LAMINAR, X[first], Re, M2, terms[first])
    turn[side] = NEVER
    growth_before = 0.0
    step_before = 0.0
    lost = False
    for k in range(1, count):
        i = node_of(side, k, js)
        p = node_of(side, k - 1, js)
        step = X[i, 4] - X[p, 4]
        N, f = turning_fraction(X, terms[p], growth_before, i, p, step_before, trip, critical, Re)
        if f >= 0.0 and k >= earliest:
            turn[side] = k
            frac[side] = f
            why[side] = FORCED if f == max((trip - X[p, 4]) / step, 0.0) else FREE
        elif (k == before and held and not settled) or k == before + 1:
            lost = k > before and held and terms[p, THIRD, 0] * step < STALLED_GROWTH
            turn[side] = k
            frac[side] = 1.0
            why[side] = HELD
        if turn[side] == k:
            break
        growth_before = terms[p, THIRD, 0]
        step_before = step
        if k >= before and mixed:
            # a station that was largely turbulent goes on from the laminar one ahead of it
            X[i, 0] = X[p, 0]
            X[i, 1] = X[p, 1]
            M[i] = q[i] * math.exp(X[i, 1])
        station_terms(LAMINAR, X[i], Re, M2, terms[i])
        X[i, 3] = min(N, critical)
    if turn[side] == NEVER:
        why[side] = FREE
    for k in range(turn[side], min(before, count)):
        set_start_stress(X, node_of(side, k, js), Re, M2)
    return lost


@njit
def set_start_stress(X, i, Re, M2):  # type: ignore[no-untyped-def]
    """Give a station that was laminar the shear stress of a layer that has just turned."""
    start = stress_at_equilibrium(X[i, 0], X[i, 1], X[i, 2], Re, M2)[0]
    X[i, 3] = min(start + 0.5 * math.log(START_RATIO), LARGEST_START_STRESS)


@njit
def add_row(out, c, row):  # type: ignore[no-untyped-def]
    """Add c times a row."""
    for j in range(len(out)):
        out[j] += c * row[j]


@njit
def station_row(out, J, first, T, S, V, X, M, q, kappa, i, column):  # type: ignore[no-untyped-def]
    """Add one equation's slopes at one station, turned into changes of the global unknowns.

    d(ln delta*) = dM/M - dq/q and d(ln u) = kappa dq/q, signed, so that signs cancel.
    """
    t = J[first]
    d = J[first + 1]
    l = J[first + 2]
    s = J[first + 3]
    per_q = (kappa[i] * l - d) / q[i]
    rowT = T[i]
    rowS = S[i]
    rowV = V[i]
    for j in range(len(out)):
        out[j] += t * rowT[j] + s * rowS[j] + per_q * rowV[j]
    out[i] += d / M[i]
    out[column] += J[first + 4]


@njit
def downstream_row(out, J, S_too, T, S, V, M, q, kappa, i):  # type: ignore[no-untyped-def]
    """Add what is explicit in an equation at its downstream station: d, l and, if told, t."""
    d = J[6]
    l = J[7]
    per_q = (kappa[i] * l - d) / q[i]
    rowV = V[i]
    for j in range(len(out)):
        out[j] += per_q * rowV[j]
    out[i] += d / M[i]
    if S_too:
        add_row(out, J[5], T[i])


@njit
def eliminate_interval(R, J, by_f, place, p, i, sign, T, S, V, A, M, q, X, kappa, nt):  # type: ignore[no-untyped-def]
    """Turn one interval's equations into the rows of its downstream station.

    Fills T[i] and S[i], the changes of t and s by the global unknowns, and the dense row A[i].
    `sign` is d(xi)/d(s0) of the side; `place` is the row of the change of the fraction f at which
    the interval turns, by which the residuals have the slopes `by_f`.
    """
    W = nt + 3
    s0 = nt + 1
    for row in (0, 2, 1):
        # the length from the stagnation point moves with it
        J[row, 4] = sign * (J[row, 4] + J[row, 9])
        out = T[i] if row == 0 else (S[i] if row == 2 else A[i])
        for j in range(W):
            out[j] = 0.0
        station_row(out, J[row], 0, T, S, V, X, M, q, kappa, p, s0)
        downstream_row(out, J[row], row != 0, T, S, V, M, q, kappa, i)
        out[W - 1] += R[row]
        if by_f[row] != 0.0:
            add_row(out, by_f[row], place)
        if row == 0:
            scale = -1.0 / J[0, 5]
            for j in range(W):
                out[j] *= scale
        elif row == 2:
            scale = -1.0 / J[2, 8]
            for j in range(W):
                out[j] *= scale
        else:
            add_row(out, J[1, 8], S[i])


@njit
def growth_row(out, A, T, V, M, q, kappa, i):  # type: ignore[no-untyped-def]
    """Fill the change of the growth of N at a laminar station; `A` holds its value and slopes."""
    per_q = (kappa[i] * A[3] - A[2]) / q[i]
    rowT = T[i]
    rowV = V[i]
    for j in range(len(out)):
        out[j] = A[1] * rowT[j] + per_q * rowV[j]
    out[i] += A[2] / M[i]


@njit
def place_row(out, X, terms, growth, i, p, step_before, frac, S):  # type: ignore[no-untyped-def]
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
def march_growth(S, X, terms, growth, i, p, step_before):  # type: ignore[no-untyped-def]
    """Fill the change of N at a laminar station from those upstream, into S[i]."""
    step = X[i, 4] - X[p, 4]
    ratio = step / step_before if step_before > 0.0 else 0.0
    A0 = terms[2 * p - i, THIRD, 0] if step_before > 0.0 else 0.0
    rise, by_1, by_0 = growth_rise(terms[p, THIRD, 0], A0, ratio)
    c1 = step * (1.0 + 0.5 * by_1)
    c0 = step * 0.5 * by_0
    for j in range(S.shape[1]):
        S[i, j] = S[p, j] + c1 * growth[0, j] + c0 * growth[1, j]


@njit
def assemble_side(X, M, q, kappa, s, js, n, side, turn, frac, why, Re, M2, terms, T, S, V, A):  # type: ignore[no-untyped-def]
    """Fill the rows of a side; return its largest residual."""
    nt = len(M)
    W = nt + 3
    R = np.zeros(EQUATIONS)
    J = np.zeros((EQUATIONS, COLUMNS))
    by_f = np.zeros(EQUATIONS)
    place = np.zeros(W)
    slope_row = np.zeros(W)
    growth = np.zeros((2, W))
    sign = 1.0 if side == UPPER else -1.0
    i = node_of(side, 0, js)
    unused, slope = place_stagnation(q, s, js)
    r = X[i, 0] - stagnation_thickness(slope, Re)
    spread = q[js + 1] - q[js]
    for j in range(W):
        slope_row[j] = (V[js + 1, j] - V[js, j]) / spread
        T[i, j] = -0.5 * slope_row[j]
        S[i, j] = 0.0
    T[i, W - 1] -= r
    # H is that of the stagnation point, dM/M - dq/q - dt = 0; times q, which may be next to zero
    lack = X[i, 1] - X[i, 0] - math.log(STAGNATION_H)
    for j in range(W):
        A[i, j] = -q[i] * T[i, j] - V[i, j]
    A[i, i] += q[i] / M[i]
    A[i, W - 1] += q[i] * lack
    worst = max(abs(r), abs(X[i, 1] - X[i, 0] - math.log(STAGNATION_H)))
    step_before = 0.0
    free = why[side] == FREE and turn[side] < NEVER
    for k in range(1, stations_of(side, js, n)):
        p = i
        i = node_of(side, k, js)
        by_f[:] = 0.0
        laminar = k < turn[side]
        if free and k <= turn[side]:
            growth[1] = growth[0]
            growth_row(growth[0], terms[p, THIRD], T, V, M, q, kappa, p)
        if k == turn[side]:
            station_terms(TURBULENT, X[i], Re, M2, terms[i])
            transition_interval(X[p], X[i], terms[p], terms[i], frac[side], Re, M2, R, J, by_f)
            if free:
                place_row(place, X, terms, growth, i, p, step_before, frac[side], S)
        else:
            kind = LAMINAR if laminar else TURBULENT
            if kind == TURBULENT:
                station_terms(kind, X[i], Re, M2, terms[i])
            plain_interval(kind, X[p], X[i], terms[p], terms[i], R, J)
        if laminar:
            J[2, 8] = 1.0
        if k == 1:
            # the leading station has the stagnation point's H and a speed in step with its length
            for row in range(EQUATIONS):
                J[row, 0] += J[row, 1]
                J[row, 4] += J[row, 2] / X[p, 4]
                by_f[row] = J[row, 2]
                J[row, 1] = 0.0
                J[row, 2] = 0.0
            place[:] = slope_row
        eliminate_interval(R, J, by_f, place, p, i, sign, T, S, V, A, M, q, X, kappa, nt)
        if k == 1:
            place[:] = 0.0
        if laminar and free:
            march_growth(S, X, terms, growth, i, p, step_before)
        step_before = X[i, 4] - X[p, 4]
        worst = max(worst, abs(R[0]), abs(R[1]), abs(R[2]))
    return worst


@njit
def assemble_wake(X, M, q, kappa, n, gap, turn, Re, M2, terms, T, S, V, A):  # type: ignore[no-untyped-def]
    """Fill the rows of the wake; return its largest residual."""
    nt = len(M)
    W = nt + 3
    t, d, s3 = join_wake(X, gap, turn[0] < NEVER, turn[1] < NEVER, n, Re, M2)
    i = n
    a = math.exp(X[0, 0] - t)
    b = math.exp(X[n - 1, 0] - t)
    delta = math.exp(d)
    for j in range(W):
        T[i, j] = a * T[0, j] + b * T[n - 1, j]
        S[i, j] = 0.0
        A[i, j] = -V[i, j] / q[i]
    T[i, W - 1] += t - X[i, 0]
    S[i, W - 1] += s3 - X[i, 3]
    A[i, i] += 1.0 / M[i]
    A[i, W - 1] += X[i, 1] - d
    worst = max(abs(t - X[i, 0]), abs(s3 - X[i, 3]), abs(X[i, 1] - d))
    for e in range(2):
        node = 0 if e == 0 else n - 1
        share = math.exp(X[node, 1]) / delta
        theta = a if e == 0 else b
        A[i, node] -= share / M[node]
        for j in range(W):
            A[i, j] += share * V[node, j] / q[node]
        if turn[e] < NEVER:
            s_edge = X[node, 3]
        else:
            s_edge, by_t, by_d, by_l = stress_at_equilibrium(
                X[node, 0], X[node, 1], X[node, 2], Re, M2
            )
            s_edge += 0.5 * math.log(START_RATIO)
        weight = theta * math.exp(s_edge - s3)
        for j in range(W):
            S[i, j] += (weight - theta) * T[node, j]
        if turn[e] < NEVER:
            add_row(S[i], weight, S[node])
        else:
            for j in range(W):
                S[i, j] += weight * by_t * T[node, j]
                S[i, j] += weight * (kappa[node] * by_l - by_d) / q[node] * V[node, j]
            S[i, node] += weight * by_d / M[node]
    R = np.zeros(EQUATIONS)
    J = np.zeros((EQUATIONS, COLUMNS))
    by_f = np.zeros(EQUATIONS)
    station_terms(WAKE, X[n], Re, M2, terms[n])
    for i in range(n + 1, nt):
        station_terms(WAKE, X[i], Re, M2, terms[i])
        plain_interval(WAKE, X[i - 1], X[i], terms[i - 1], terms[i], R, J)
        eliminate_interval(R, J, by_f, S[i], i - 1, i, 0.0, T, S, V, A, M, q, X, kappa, nt)
        worst = max(worst, abs(R[0]), abs(R[1]), abs(R[2]))
    return worst


@njit
def refresh(X, M, q, kappa, s, sw, js, n, k, Re):  # type: ignore[no-untyped-def]
    """Bring stagnation point, lengths and logarithms up to date with speeds and mass defect.

    Returns the node before the stagnation point; -1 if the speed changes sign nowhere.
    """
    found = stagnation_node(q, n, js)
    if found < 1 or found > n - 3:
        return -1
    s0, slope = place_stagnation(q, s, found)
    keep_from_stagnation(q, slope, found)
    mend_stagnation(X, M, q, s, found, n, Re)
    set_lengths(X, s, sw, s0, found, n)
    set_speed_and_displacement(X, M, q, k)
    for i in range(len(q)):
        kappa[i] = compressed_speed(abs(q[i]), k)[1]
    return found


@njit
def outer_rows(V, stream, influence, alpha, M, q):  # type: ignore[no-untyped-def]
    """Fill angle and right side of the rows dq = D dM + q_alpha dalpha - (q - q0 - D M).

    A first state comes from a march whose speeds do not fit its mass defect yet: the difference is
    part of the step, and is gone after the first full one. Returns its largest magnitude.
    """
    nt = len(q)
    c = math.cos(alpha)
    sn = math.sin(alpha)
    worst = 0.0
    for i in range(nt):
        total = c * stream[i, 0] + sn * stream[i, 1]
        row = influence[i]
        for j in range(nt):
            total += row[j] * M[j]
        V[i, nt] = -sn * stream[i, 0] + c * stream[i, 1]
        V[i, nt + 2] = total - q[i]
        worst = max(worst, abs(V[i, nt + 2]))
    return worst


@njit
def is_laminar(i, js, turn):  # type: ignore[no-untyped-def]
    """Whether a node of the contour lies ahead of transition."""
    return js - i < turn[0] if i <= js else i - js - 1 < turn[1]


@njit
def keep_shape(X, M, q, i, before, least):  # type: ignore[no-untyped-def]
    """Keep a station's shape factor from falling to where no layer is.

    A step from the shape `before` that would use more than its share of the way to the least one is
    stopped there, by the mass defect alone. The residual then is not zero, so that no solution can
    rest there.
    """
    bound = least + SHAPE_ROOM * max(before - least, LEAST_ROOM)
    low = X[i, 0] + math.log(bound)
    if math.log(max(abs(M[i] / q[i]), 1e-300)) < low:
        M[i] = math.copysign(math.exp(low) * abs(q[i]), q[i])


@njit
def limit_step(X, M, q, kappa, T, S, V, z, js, n, turn, bound):  # type: ignore[no-untyped-def]
    """Return the largest fraction of a step that is safe, and the largest change it makes."""
    nt = len(M)
    factor = 1.0
    largest = 0.0
    for i in range(nt):
        dt = 0.0
        ds = 0.0
        dq = 0.0
        for j in range(nt + 3):
            dt += T[i, j] * z[j]
            ds += S[i, j] * z[j]
            dq += V[i, j] * z[j]
        if i < n and is_laminar(i, js, turn):
            ds = 0.0
        V[i, nt + 2] = dq
        dlnq = dq / q[i]
        dd = z[i] / M[i] - dlnq
        T[i, nt + 2] = dt
        S[i, nt + 2] = ds
        near = js - 1 <= i <= js + 2
        if near:
            largest = max(largest, abs(dt))
            factor = min(factor, bound / max(abs(dt), 1e-30))
            continue
        change = max(abs(dt), abs(dd), abs(ds))
        largest = max(largest, change, abs(dlnq))
        factor = min(factor, bound / max(change, 1e-30))
        factor = min(factor, LARGEST_SPEED_STEP / max(abs(dlnq), 1e-30))
    turned = abs(z[nt])
    factor = min(factor, LARGEST_TURN / max(turned, 1e-30))
    return factor, max(largest, turned)


@njit
def newton(
    x, y, s, sw, stream, influence, V, gap,
    X, M, q, kappa, js, alpha, turn, frac, why,
    trips, wanted, critical, Re, mach, k, budget, tolerance, history,
):  # type: ignore[no-untyped-def]  # fmt: skip
    """Iterate to the coupled solution.

    Parameters
    ----------
    x, y, s : (n,) array
        Contour nodes and their arc length. `sw`: lengths along the wake.
    stream, influence : (nt, 2), (nt, nt) array
        The outer flow.
    V : (nt, nt + 3) array
        `influence` with room for the columns of angle, stagnation point and right side.
    gap : float
        Gap of the edge [chords].
    X, M, q, kappa : (nt, 5), (nt,), (nt,), (nt,) array
        State, mass defect, speeds, d(ln u)/d(ln q); in: guess, out: result.
    js, alpha : int, float
        Node before the stagnation point; angle of attack [rad].
    turn, frac, why : (2,) array
        Transition of each side.
    trips : (2,) array
        Lengths along the contour, from the first node, at which transition is forced; out of the
        contour if it is free.
    wanted : float
        Lift coefficient to be met; not-a-number if the angle is given.
    critical, Re, mach, k : float
        Amplification at transition, Reynolds and Mach numbers, Tsien's parameter.
    budget, tolerance : int, float
        Iterations at most; residual and step at which the solution is accepted.
    history : (budget + 1, 2) array
        Filled with residual and step of each iteration.

    Returns
    -------
    done : bool
    js : int
    alpha : float
    iterations : int
    residual : float
    """
    n = len(x)
    nt = len(M)
    W = nt + 3
    M2 = mach * mach
    terms = np.empty((nt, TERMS, SLOPES))
    T = np.zeros((nt, W))
    S = np.zeros((nt, W))
    A = np.zeros((nt + 2, W))
    by_q = np.empty(n)
    marches = np.zeros(2, np.int64)
    floor = np.ones(2, np.int64)
    waited = 0
    since = 0
    last_turn = turn.copy()
    z = np.zeros(W)
    z[W - 1] = 1.0
    residual = 1e9
    change = 1e9
    for iteration in range(budget):
        moved = js
        js = refresh(X, M, q, kappa, s, sw, js, n, k, Re)
        if js < 0:
            return False, 0, alpha, iteration, residual
        # stations count from the stagnation point: the same nodes have other numbers now
        if turn[0] < NEVER:
            turn[0] = max(turn[0] + js - moved, 1)
        if turn[1] < NEVER:
            turn[1] = max(turn[1] - js + moved, 1)
        s0, unused = place_stagnation(q, s, js)
        settled = change < SETTLED or waited >= PATIENCE
        waited = 0 if settled else waited + 1
        if settled:
            floor[:] = 1
        for side in range(2):
            trip = s0 - trips[0] if side == UPPER else trips[1] - s0
            lost = locate_transition(
                X,
                M,
                q,
                terms,
                js,
                n,
                side,
                trip,
                floor[side],
                turn,
                frac,
                why,
                settled,
                critical,
                Re,
                M2,
            )
            if lost and marches[side] < MARCHES:
                # too far to follow station by station: march the side anew, past the place lost
                marches[side] += 1
                floor[side] = turn[side]
                settled = False
                sweep_side(X, M, q, js, n, side, trip, floor[side], turn, frac, k, critical, Re, M2)
                locate_transition(
                    X, M, q, terms, js, n, side, trip, floor[side], turn, frac, why, settled,
                    critical, Re, M2,
                )  # fmt: skip
        since += 1
        if turn[0] != last_turn[0] or turn[1] != last_turn[1]:
            since = 0
            last_turn[:] = turn
        mismatch = outer_rows(V, stream, influence, alpha, M, q)
        residual = assemble_side(
            X, M, q, kappa, s, js, n, 0, turn, frac, why, Re, M2, terms, T, S, V, A
        )
        residual = max(
            residual,
            assemble_side(X, M, q, kappa, s, js, n, 1, turn, frac, why, Re, M2, terms, T, S, V, A),
        )
        residual = max(
            residual,
            assemble_wake(X, M, q, kappa, n, gap, turn, Re, M2, terms, T, S, V, A),
        )
        residual = max(residual, mismatch)
        for row in range(nt, nt + 2):
            for j in range(W):
                A[row, j] = 0.0
        if math.isnan(wanted):
            A[nt, nt] = 1.0
        else:
            cl, by_alpha, unused2, unused3 = lift_force(x, y, q[:n], alpha, mach, by_q)
            for i in range(n):
                add_row(A[nt], by_q[i], V[i])
            A[nt, nt] += by_alpha
            A[nt, W - 1] += cl - wanted
            residual = max(residual, abs(cl - wanted))
        tau = (s0 - s[js]) / (s[js + 1] - s[js])
        for j in range(W):
            A[nt + 1, j] = (1.0 - tau) * V[js, j] + tau * V[js + 1, j]
        A[nt + 1, nt + 1] += (q[js + 1] - q[js]) / (s[js + 1] - s[js])
        history[iteration, 0] = residual
        history[iteration, 3] = turn[0]
        history[iteration, 4] = turn[1]
        history[iteration, 5] = frac[0]
        history[iteration, 6] = frac[1]
        history[iteration, 7] = js
        if (
            residual < tolerance
            and change < math.sqrt(tolerance)
            and why[0] != HELD
            and why[1] != HELD
        ):
            return True, js, alpha, iteration, residual
        if not (residual < 1e8) or not np.all(np.isfinite(A)):
            return False, js, alpha, iteration, residual
        z[: nt + 2] = np.linalg.solve(A[:, : nt + 2], -A[:, W - 1])
        factor, change = limit_step(
            X, M, q, kappa, T, S, V, z, js, n, turn, LARGEST_STEP / (1.0 + since / CAUTION)
        )
        if not (change < 1e12):
            return False, js, alpha, iteration, residual
        history[iteration, 1] = change
        history[iteration, 2] = factor
        for i in range(nt):
            kind = 2 if i >= n else (0 if is_laminar(i, js, turn) else 1)
            M[i] += factor * z[i]
            q[i] += factor * V[i, nt + 2]
            shape = math.exp(X[i, 1] - X[i, 0])
            X[i, 0] += factor * T[i, W - 1]
            X[i, 3] += factor * S[i, W - 1]
            if not js - 1 <= i <= js + 2:
                keep_shape(X, M, q, i, shape, LEAST_SHAPE[kind])
        alpha += factor * z[nt]
    return False, js, alpha, budget, residual
