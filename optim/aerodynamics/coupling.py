"""The simultaneous solution of the outer flow and the layers, by Newton's method.

The equations of the layers leave one dense system for the mass defect, the angle of attack and the
stagnation point (assembly.py); two rows close it, the lift or the angle, and the speed that is
zero at the stagnation point.

References
----------
Drela, M., Giles, M. B., AIAA J. 25(10), 1987, pp. 1347-1355. Lock, R. C., Williams, B. R.,
Prog. Aerospace Sci. 24, 1987 (viscous-inviscid interaction).
"""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.assembly import side_equations, wake_equations
from optim.aerodynamics.compressibility import compressed_speed
from optim.aerodynamics.forces import lift_force
from optim.aerodynamics.interval import EQUATIONS, HELD
from optim.aerodynamics.kernels import njit
from optim.aerodynamics.lapack import TRANSPOSED, factorise, substitute
from optim.aerodynamics.layer import SLOPES, TERMS
from optim.aerodynamics.layout import (
    ANGLE,
    LOWER,
    NEVER,
    PARTS,
    PLACE,
    RIGHT,
    UPPER,
    Layers,
    Rows,
    Turning,
    lead_sides,
    mend_stagnation,
    outer_speed,
    place_stagnation,
    set_lengths,
    set_speed_and_displacement,
    stagnation_node,
)
from optim.aerodynamics.placement import place_transitions
from optim.aerodynamics.rows import fill_side, fill_wake, station_changes, wake_head
from optim.aerodynamics.step import CAUTION, LARGEST_STEP, limit_step, take_step
from optim.arrays import FloatArray, IntArray

PATIENCE = 5
"""Iterations after which an unsettled state no longer holds transition up: where it is held there
need be no solution."""

SETTLED = 0.3
"""Step below which the state has settled enough to tell where transition is not [-]."""

GREATEST_RESIDUAL = 1e8
GREATEST_CHANGE = 1e12
"""Residual and step beyond which the iteration is lost [-]."""


@njit
def refresh(
    layers: Layers, s: FloatArray, sw: FloatArray, js: int, n: int, k: float, Re: float
) -> int:
    """Bring stagnation point, lengths and logarithms up to date with speeds and mass defect.

    Returns the node before the stagnation point; -1 if the speed changes sign nowhere.
    """
    X, M, q, kappa = layers
    found = stagnation_node(q, n, js)
    if found < 1 or found > n - 3:
        return -1
    s0, slope = place_stagnation(q, s, found)
    mend_stagnation(X, M, q, slope, found, n, Re)
    set_lengths(X, s, sw, s0, found, n)
    set_speed_and_displacement(X, M, q, k)
    lead_sides(X, slope, found, k)
    for i in range(len(q)):
        kappa[i] = compressed_speed(abs(q[i]), k)[1]
    return found


@njit
def renumber(turn: IntArray, moved: int) -> None:
    """Keep transition at its nodes when the stagnation point moves: stations count from it."""
    if turn[UPPER] < NEVER:
        turn[UPPER] = max(turn[UPPER] + moved, 1)
    if turn[LOWER] < NEVER:
        turn[LOWER] = max(turn[LOWER] - moved, 1)


@njit
def outer_rows(
    V: FloatArray,
    stream: FloatArray,
    influence: FloatArray,
    alpha: float,
    M: FloatArray,
    q: FloatArray,
) -> float:
    """Fill angle and right side of the rows dq = D dM + q_alpha dalpha - (q - q0 - D M).

    A first state comes from a march whose speeds do not fit its mass defect yet: the difference is
    part of the step, and is gone after the first full one. Returns its largest magnitude.
    """
    c = math.cos(alpha)
    sn = math.sin(alpha)
    outer_speed(stream, influence, alpha, M, V[:, RIGHT])
    worst = 0.0
    for i in range(len(q)):
        V[i, ANGLE] = -sn * stream[i, 0] + c * stream[i, 1]
        V[i, RIGHT] -= q[i]
        worst = max(worst, abs(V[i, RIGHT]))
    return worst


@njit
def lift_row(
    rows: Rows,
    x: FloatArray,
    y: FloatArray,
    q: FloatArray,
    alpha: float,
    mach: float,
    wanted: float,
) -> float:
    """Fill the row of the lift wanted, or of the angle if it is given; return its residual."""
    row = rows.A[len(q)]
    row[:] = 0.0
    if math.isnan(wanted):
        row[ANGLE] = 1.0
        return 0.0
    n = len(x)
    by_q = np.empty(n)
    cl, by_alpha, _, _ = lift_force(x, y, q[:n], alpha, mach, by_q)
    row += np.dot(by_q, rows.V[:n])
    row[ANGLE] += by_alpha
    row[RIGHT] += cl - wanted
    return abs(float(cl - wanted))


@njit
def stagnation_row(rows: Rows, q: FloatArray, s: FloatArray, js: int, s0: float) -> None:
    """Fill the row by which the speed stays zero at the stagnation point, which may move."""
    row = rows.A[len(q) + 1]
    step = s[js + 1] - s[js]
    tau = (s0 - s[js]) / step
    for j in range(len(row)):
        row[j] = (1.0 - tau) * rows.V[js, j] + tau * rows.V[js + 1, j]
    row[PLACE] += (q[js + 1] - q[js]) / step


@njit
def all_finite(A: FloatArray) -> bool:
    """Whether all entries are finite numbers."""
    lost = 0
    for row in A:
        for j in range(len(row)):
            lost += 0 if abs(row[j]) < math.inf else 1
    return lost == 0


@njit
def solve_rows(A: FloatArray, z: FloatArray) -> bool:
    """Fill the changes z of the global unknowns, with 1 for the right side; False if singular.

    The rows are overwritten.
    """
    for i in range(len(A)):
        z[i] = -A[i, RIGHT]
    z[RIGHT] = 1.0
    pivots = np.empty(len(A), np.int32)
    # the equations are the rows, which LAPACK takes for columns
    if not factorise(A, pivots):
        return False
    substitute(A, pivots, z.reshape((1, len(z))), TRANSPOSED)
    return True


@njit
def empty_rows(V: FloatArray) -> Rows:
    """Return the rows about those of the outer flow, zero."""
    nt, width = V.shape
    return Rows(
        V,
        np.zeros((nt + 2, width)),
        np.zeros((2, width)),
        np.zeros((2, width)),
        np.zeros(width),
        np.zeros((2, width)),
        np.zeros((nt, EQUATIONS, PARTS)),
    )


@njit
def set_equations(
    layers: Layers,
    rows: Rows,
    terms: FloatArray,
    turning: Turning,
    x: FloatArray,
    y: FloatArray,
    s: FloatArray,
    stream: FloatArray,
    influence: FloatArray,
    gap: float,
    js: int,
    s0: float,
    alpha: float,
    wanted: float,
    Re: float,
    mach: float,
) -> float:
    """Fill all but the rows of the stations (arguments: see `newton`); return the residual."""
    n = len(x)
    M2 = mach * mach
    q = layers.q
    parts = rows.parts
    mismatch = outer_rows(rows.V, stream, influence, alpha, layers.M, q)
    upper = side_equations(layers, parts, terms, js, n, UPPER, turning, Re, M2)
    lower = side_equations(layers, parts, terms, js, n, LOWER, turning, Re, M2)
    wake = wake_equations(layers, parts, terms, n, gap, turning.turn, Re, M2)
    lift = lift_row(rows, x, y, q, alpha, mach, wanted)
    stagnation_row(rows, q, s, js, s0)
    return max(upper, lower, wake, mismatch, lift)


@njit
def solve_step(
    layers: Layers,
    rows: Rows,
    terms: FloatArray,
    turning: Turning,
    n: int,
    gap: float,
    js: int,
    Re: float,
    M2: float,
    z: FloatArray,
    changes: FloatArray,
) -> bool:
    """Fill the changes of the global unknowns and of t, s and q at all stations (nt, 3).

    False if there is no step. It comes after `set_equations`, apart from it because the rows of the
    stations are most of the work, and a solution found needs none.
    """
    turn = turning.turn
    upper = fill_side(layers, rows, terms, js, n, UPPER, turning)
    lower = fill_side(layers, rows, terms, js, n, LOWER, turning)
    wake_head(layers, rows, upper, lower, n, gap, turn, Re, M2)
    fill_wake(rows, n)
    if not (all_finite(rows.A) and solve_rows(rows.A, z)):
        return False
    station_changes(rows, z, js, n, turn, changes)
    return True


@njit
def newton(
    x: FloatArray,
    y: FloatArray,
    s: FloatArray,
    sw: FloatArray,
    stream: FloatArray,
    influence: FloatArray,
    V: FloatArray,
    gap: float,
    X: FloatArray,
    M: FloatArray,
    q: FloatArray,
    kappa: FloatArray,
    js: int,
    alpha: float,
    turn: IntArray,
    frac: FloatArray,
    why: IntArray,
    trips: FloatArray,
    wanted: float,
    critical: float,
    Re: float,
    mach: float,
    k: float,
    budget: int,
    tolerance: float,
    history: FloatArray,
) -> tuple[bool, int, float, int, float]:
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
    M2 = mach * mach
    layers = Layers(X, M, q, kappa)
    turning = Turning(turn, frac, why)
    rows = empty_rows(V)
    terms = np.empty((nt, TERMS, SLOPES))
    marches = np.zeros(2, np.int64)
    floor = np.ones(2, np.int64)
    last_turn = turn.copy()
    waited = 0
    since = 0
    z = np.ones(nt + 3)
    changes = np.empty((nt, 3))
    residual = 1e9
    change = 1e9
    for iteration in range(budget):
        before = js
        js = refresh(layers, s, sw, js, n, k, Re)
        if js < 0:
            return False, 0, alpha, iteration, residual
        renumber(turn, js - before)
        s0, _ = place_stagnation(q, s, js)
        settled = change < SETTLED or waited >= PATIENCE
        waited = 0 if settled else waited + 1
        if settled:
            floor[:] = 1
        place_transitions(
            layers, terms, s0, js, n, trips, floor, marches, turning, settled, k, critical, Re, M2
        )
        since = since + 1 if np.all(turn == last_turn) else 0
        last_turn[:] = turn
        residual = set_equations(
            layers, rows, terms, turning, x, y, s, stream, influence, gap, js, s0, alpha, wanted,
            Re, mach,
        )  # fmt: skip
        history[iteration, 0] = residual
        held = why[UPPER] == HELD or why[LOWER] == HELD
        if residual < tolerance and change < math.sqrt(tolerance) and not held:
            return True, js, alpha, iteration, residual
        if not (
            residual < GREATEST_RESIDUAL
            and solve_step(layers, rows, terms, turning, n, gap, js, Re, M2, z, changes)
        ):
            return False, js, alpha, iteration, residual
        bound = LARGEST_STEP / (1.0 + since / CAUTION)
        factor, change = limit_step(layers, changes, z, js, bound)
        if not change < GREATEST_CHANGE:
            return False, js, alpha, iteration, residual
        history[iteration, 1] = change
        take_step(layers, changes, z, factor, js, n, turn)
        alpha += factor * z[ANGLE]
    return False, js, alpha, budget, residual
