"""The equations of the layer between two stations.

The box scheme in logarithms of thickness, speed and length: exact for power-law flows, so that few
stations suffice at the nose, and for terms that are linear in length. An interval that holds
transition is two intervals, laminar up to a place at which the state is interpolated and turbulent
after it; where amplification reaches its critical value is part of the equations.

Residuals are named by row, momentum, energy and third, and their slopes by column: t, d, v, s, xi
of the upstream and of the downstream station (layer.py explains the letters). x1, a and x2, b are
the states and terms of the two ends, R (3,) and J (3, 10) the residuals and their slopes.

References
----------
Drela, M., Giles, M. B., AIAA J. 25(10), 1987 (equations; transition inside the interval).
"""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.kernels import njit
from optim.aerodynamics.layer import (
    ENERGY,
    EXCHANGE,
    FRICTION,
    INERTIA,
    LAMINAR,
    SHAPE,
    SLOPES,
    TERMS,
    THIRD,
    TURBULENT,
    laminar_station,
    starting_stress,
    station_terms,
)
from optim.arrays import FloatArray

EQUATIONS = 3
COLUMNS = 10
"""Shape of an interval's slopes: t, d, v, s, xi upstream, then downstream."""

RELAXATION = 20.0
"""Length over which a turbulent layer's shape and stress relax, in momentum thicknesses [-]; from
the lag equation, delta/(K sqrt(Ct)) is some 20 to 40 theta. It only weighs the two ends of an
interval: the error of any value vanishes with the interval."""

UP, DOWN = 0, 5
"""First column of the upstream and of the downstream station."""

XI = 4
"""Column of the length within a station."""

INTO_NEXT = 4
"""Power of the fraction by which the state at transition passes from the one extrapolated along the
laminar layer to the one interpolated: the equations then go over smoothly into those of the next
interval when transition passes a station."""

FREE, FORCED, HELD = 0, 1, 2
"""Why an interval turns turbulent: amplification, a trip, or only for the moment."""


@njit
def length_weights(xi1: float, xi2: float) -> tuple[float, float, float, float, float]:
    """Return L = ln(xi2/xi1), h = L w and w with their slopes by L.

    w = 1/L - 1/(exp(L) - 1) is the downstream weight that integrates a function linear in xi
    exactly over d(ln xi); it is 1/2 where the interval is short beside its distance from the
    stagnation point.
    """
    L = math.log(xi2 / xi1)
    if L < 0.05:
        L2 = L * L
        w = 0.5 - L / 12.0 + L * L2 / 720.0
        return L, L * w, 0.5 - L / 6.0 + L * L2 / 180.0, w, -1.0 / 12.0 + L2 / 240.0
    e = math.exp(L) - 1.0
    h = 1.0 - L / e
    h_L = -1.0 / e + L * (e + 1.0) / (e * e)
    w = h / L
    return L, h, h_L, w, (h_L - w) / L


@njit
def relaxation_weight(x: float) -> tuple[float, float]:
    """Return the downstream weight 1/(1 - exp(-x)) - 1/x of an interval, and its slope by x.

    Exact for a quantity that relaxes over the length interval/x; 1/2 where the interval is short
    beside that length, 1 where the layer follows at once. The trapezoidal rule would overshoot
    there, right after transition in a thin layer, below any shape that a layer can have.
    """
    if x < 0.05:
        return 0.5 + x / 12.0 - x * x * x / 720.0, 1.0 / 12.0 - x * x / 240.0
    if x > 40.0:
        return 1.0 - 1.0 / x, 1.0 / (x * x)
    e = math.exp(-x)
    return 1.0 / (1.0 - e) - 1.0 / x, 1.0 / (x * x) - e / ((1.0 - e) * (1.0 - e))


@njit
def balance(
    row: int,
    flux: int,
    factor: int,
    x1: FloatArray,
    x2: FloatArray,
    a: FloatArray,
    b: FloatArray,
    W: tuple[float, float, float, float, float],
    R: FloatArray,
    J: FloatArray,
) -> float:
    """Add -int flux dxi + int factor dv to one equation and its slopes; return its slope by w.

    Parameters
    ----------
    row : int
        Equation.
    flux, factor : int
        Rows of the station terms `a` (upstream) and `b` (downstream).
    x1, x2 : (5,) array
        The two stations.
    W : tuple
        L, h, h_L, w, w_L of `length_weights`, or the like for another weight w.
    """
    L, h, h_L, w, w_L = W
    xi1 = x1[XI]
    xi2 = x2[XI]
    F1 = a[flux, 0]
    F2 = b[flux, 0]
    G1 = a[factor, 0]
    G2 = b[factor, 0]
    dv = x2[2] - x1[2]
    rise = xi2 * F2 - xi1 * F1
    G = G1 + w * (G2 - G1)
    R[row] += -(L * xi1 * F1 + h * rise) + G * dv
    for k in range(4):
        J[row, UP + k] += -(L - h) * xi1 * a[flux, 1 + k] + (1.0 - w) * dv * a[factor, 1 + k]
        J[row, DOWN + k] += -h * xi2 * b[flux, 1 + k] + w * dv * b[factor, 1 + k]
    J[row, UP + 2] -= G
    J[row, DOWN + 2] += G
    by_L = -(xi1 * F1 + h_L * rise) + w_L * (G2 - G1) * dv
    J[row, UP + XI] += -(L - h) * F1 - by_L / xi1
    J[row, DOWN + XI] += -h * F2 + by_L / xi2
    return float(-L * rise + (G2 - G1) * dv)


@njit
def third_balance(
    w: float,
    x1: FloatArray,
    x2: FloatArray,
    a: FloatArray,
    b: FloatArray,
    R: FloatArray,
    J: FloatArray,
) -> float:
    """Fill 2 (s2 - s1) - int A dxi with the downstream weight w; return its slope by w."""
    step = x2[XI] - x1[XI]
    mean = (1.0 - w) * a[THIRD, 0] + w * b[THIRD, 0]
    R[2] = 2.0 * (x2[3] - x1[3]) - mean * step
    for k in range(4):
        J[2, UP + k] = -(1.0 - w) * step * a[THIRD, 1 + k]
        J[2, DOWN + k] = -w * step * b[THIRD, 1 + k]
    J[2, UP + 3] -= 2.0
    J[2, DOWN + 3] += 2.0
    J[2, UP + XI] = mean
    J[2, DOWN + XI] = -mean
    return float(-step * (b[THIRD, 0] - a[THIRD, 0]))


@njit
def plain_interval(
    kind: int,
    x1: FloatArray,
    x2: FloatArray,
    a: FloatArray,
    b: FloatArray,
    R: FloatArray,
    J: FloatArray,
) -> None:
    """Fill residuals and slopes of an interval of one kind of layer.

    Parameters
    ----------
    kind : int
        LAMINAR, TURBULENT or WAKE.
    x1, x2 : (5,) array
        t, d, v, s, xi of the two stations.
    a, b : (6, 5) array
        Their terms.
    R, J : (3,), (3, 10) array
        Filled.
    """
    W = length_weights(x1[XI], x2[XI])
    J[:] = 0.0
    R[0] = x2[0] - x1[0]
    J[0, UP] = -1.0
    J[0, DOWN] = 1.0
    R[1] = b[SHAPE, 0] - a[SHAPE, 0]
    for k in range(4):
        J[1, UP + k] = -a[SHAPE, 1 + k]
        J[1, DOWN + k] = b[SHAPE, 1 + k]
    balance(0, FRICTION, INERTIA, x1, x2, a, b, W, R, J)
    if kind == LAMINAR:
        # amplification is marched on its own: it reaches over two intervals
        balance(1, ENERGY, EXCHANGE, x1, x2, a, b, W, R, J)
        R[2] = 0.0
        return
    step = x2[XI] - x1[XI]
    x = step / (RELAXATION * math.exp(x1[0]))
    w, w_x = relaxation_weight(x)
    L = W[0]
    by_w = balance(1, ENERGY, EXCHANGE, x1, x2, a, b, (L, L * w, w, w, 0.0), R, J)
    by_w_third = third_balance(w, x1, x2, a, b, R, J)
    for row in (1, 2):
        change = (by_w if row == 1 else by_w_third) * w_x * x
        J[row, UP] -= change
        if step > 0.0:
            J[row, UP + XI] -= change / step
            J[row, DOWN + XI] += change / step


@njit
def between(x1: FloatArray, x2: FloatArray, f: float, out: FloatArray) -> None:
    """Fill the state at the fraction f between two stations; s is left to the caller."""
    for k in range(SLOPES):
        out[k] = x1[k] + f * (x2[k] - x1[k])


@njit
def turning_state(
    x0: FloatArray,
    x1: FloatArray,
    x2: FloatArray,
    f: float,
    ahead: bool,  # noqa: FBT001  compiled functions have no keyword-only arguments
    out: FloatArray,
    weights: FloatArray,
) -> None:
    """Fill the state at transition, and its weights and slopes.

    Thicknesses are extrapolated along the laminar layer from the stations x0 and x1: interpolated
    towards the turbulent station x2, their ratio and the starting stress with it would hang on the
    fraction f. Without a station ahead they are interpolated, as the speed is.

    Parameters
    ----------
    out : (5,) array
        Filled but for its place 3.
    weights : (4,) array
        Filled with the shares of x0, x1 and x2 in the thicknesses; the last is the share that is
        extrapolated.
    """
    between(x1, x2, f, out)
    weights[0], weights[1], weights[2], weights[3] = 0.0, 1.0 - f, f, 0.0
    if not ahead:
        return
    own = 1.0 - f**INTO_NEXT
    reach = f * (x2[XI] - x1[XI]) / (x1[XI] - x0[XI])
    weights[0] = -own * reach
    weights[1] = own * (1.0 + reach) + (1.0 - own) * (1.0 - f)
    weights[2] = (1.0 - own) * f
    weights[3] = own
    for k in range(2):
        out[k] = weights[0] * x0[k] + weights[1] * x1[k] + weights[2] * x2[k]


@njit
def turning_rise(x0: FloatArray, x1: FloatArray, x2: FloatArray, own: float, k: int) -> float:
    """Return the slope by f of `turning_state` for a thickness (k = 0, 1) of the share `own`."""
    chord = x2[k] - x1[k]
    if own == 0.0:
        return float(chord)
    tangent = (x1[k] - x0[k]) * (x2[XI] - x1[XI]) / (x1[XI] - x0[XI])
    return float(tangent + (1.0 + INTO_NEXT) * (1.0 - own) * (chord - tangent))


@njit
def growth_rise(A1: float, A0: float, ratio: float) -> tuple[float, float, float]:
    """Return the change of growth over an interval, extrapolated, and its slopes by A1 and A0.

    `ratio` is the interval's length over that of the one ahead of it, zero if there is none. The
    growth does not fall below zero at the interval's end.
    """
    rise = ratio * (A1 - A0)
    if rise < -A1:
        return -A1, -1.0, 0.0
    return rise, ratio, -ratio


@njit
def amplified(N: float, A1: float, rise: float, step: float, f: float) -> float:
    """Return N at the fraction f of an interval: growth extrapolated from the stations upstream.

    Second order (Adams-Bashforth), and blind to the state downstream, which is turbulent where
    transition is: growth interpolated towards it would never reach the critical value.
    """
    return N + step * f * (A1 + 0.5 * f * rise)


@njit
def fraction_at(N: float, A1: float, rise: float, step: float, critical: float) -> float:
    """Return the fraction of an interval at which N is critical; -1 if it is not within it."""
    lack = (critical - N) / step
    if lack <= 0.0:
        return 0.0
    square = A1 * A1 + 2.0 * rise * lack
    if square < 0.0:
        return -1.0
    low = A1 + math.sqrt(square)
    f = 2.0 * lack / low if low > 0.0 else 2.0
    return f if f <= 1.0 else -1.0


@njit
def transition_interval(
    x0: FloatArray,
    x1: FloatArray,
    x2: FloatArray,
    a: FloatArray,
    b: FloatArray,
    f: float,
    ahead: bool,  # noqa: FBT001  compiled functions have no keyword-only arguments
    Re: float,
    M2: float,
    R: FloatArray,
    J: FloatArray,
    by_f: FloatArray,
    before: FloatArray,
) -> None:
    """Fill residuals and slopes of an interval that turns turbulent at the fraction f.

    Parameters
    ----------
    x0, x1, x2 : (5,) array
        Stations; x2 holds ln sqrt(Ct) in place 3. x0, the one ahead of the interval, counts only if
        `ahead`.
    a, b : (6, 5) array
        Laminar terms of x1, turbulent terms of x2.
    f : float
        Where, as a fraction of the interval.
    by_f, before : (3,), (3, 2) array
        Filled with the slopes of the residuals by f, and by t and d of x0.
    """
    middle = np.empty(SLOPES)
    weights = np.empty(4)
    turning_state(x0, x1, x2, f, ahead, middle, weights)
    lam = np.empty((TERMS, SLOPES))
    tur = np.empty((TERMS, SLOPES))
    laminar_station(middle[0], middle[1], middle[2], Re, M2, growing=False, out=lam)
    by_start = np.zeros(SLOPES)
    start = starting_stress(middle[0], middle[1], middle[2], Re, M2)
    middle[3], by_start[0], by_start[1], by_start[2] = start
    station_terms(TURBULENT, middle, Re, M2, tur)
    Ra = np.zeros(EQUATIONS)
    Ja = np.zeros((EQUATIONS, COLUMNS))
    Jb = np.zeros((EQUATIONS, COLUMNS))
    plain_interval(LAMINAR, x1, middle, a, lam, Ra, Ja)
    plain_interval(TURBULENT, middle, x2, tur, b, R, Jb)
    R += Ra
    for row in range(EQUATIONS):
        by_f[row] = 0.0
        for k in range(SLOPES):
            J[row, UP + k] = Ja[row, UP + k]
            J[row, DOWN + k] = Jb[row, DOWN + k]
            if k == 3:
                continue
            by_middle = Ja[row, DOWN + k] + Jb[row, UP + k] + Jb[row, UP + 3] * by_start[k]
            thickness = k < 2
            J[row, UP + k] += (weights[1] if thickness else 1.0 - f) * by_middle
            J[row, DOWN + k] += (weights[2] if thickness else f) * by_middle
            rise = turning_rise(x0, x1, x2, weights[3] if thickness else 0.0, k)
            by_f[row] += by_middle * rise
            if thickness:
                before[row, k] = weights[0] * by_middle
