"""Lift, moment and drag from the speeds along the contour and the state at the wake's end.

Lift and moment come from the pressure on the panels, on which the square of the linear speed is
integrated exactly; drag comes from the momentum thickness at the wake's end by Squire and Young's
formula, friction by integration, and pressure drag is what remains.

References
----------
Squire, H. B., Young, A. D., ARC R&M 1838, 1938.
"""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.compressibility import compressed_pressure
from optim.aerodynamics.kernels import njit
from optim.arrays import FloatArray


@njit
def normal_force(
    x: FloatArray,
    y: FloatArray,
    q: FloatArray,
    mach: float,
    by_q: FloatArray,
    by_q_along: FloatArray,
) -> tuple[float, float, float]:
    """Return the pressure force on the contour along and across the chord, and the moment.

    Parameters
    ----------
    x, y, q : (n,) array
        Nodes and signed incompressible speeds there.
    mach : float
        Free-stream Mach number [-].
    by_q, by_q_along : (n,) array
        Filled with the slopes of the normal and the axial force by the speeds.

    Returns
    -------
    cn, ca, cm : float
        Force across the chord (up), along it (aft), moment about (0.25, 0), nose up.
    """
    n = len(x)
    cn = 0.0
    ca = 0.0
    cm = 0.0
    by_q[:] = 0.0
    by_q_along[:] = 0.0
    for j in range(n - 1):
        dx = x[j + 1] - x[j]
        dy = y[j + 1] - y[j]
        a = q[j]
        b = q[j + 1]
        cp, slope = compressed_pressure(1.0 - (a * a + a * b + b * b) / 3.0, mach)
        # inside to the left: the outward normal of a panel is (dy, -dx), pressure pushes inwards
        cn += cp * dx
        ca -= cp * dy
        ga = -slope * (2.0 * a + b) / 3.0
        gb = -slope * (a + 2.0 * b) / 3.0
        by_q[j] += ga * dx
        by_q[j + 1] += gb * dx
        by_q_along[j] -= ga * dy
        by_q_along[j + 1] -= gb * dy
        # the pressure acts ahead of or behind the middle by the first moment of the square
        shift = -slope * (b * b - a * a) / 12.0
        mx = 0.5 * (x[j] + x[j + 1]) - 0.25
        my = 0.5 * (y[j] + y[j + 1])
        cm -= cp * (mx * dx + my * dy) + shift * (dx * dx + dy * dy)
    dx = x[0] - x[n - 1]
    dy = y[0] - y[n - 1]
    cp, slope = compressed_pressure(1.0 - 0.5 * (q[0] * q[0] + q[n - 1] * q[n - 1]), mach)
    cn += cp * dx
    ca -= cp * dy
    by_q[0] -= slope * q[0] * dx
    by_q[n - 1] -= slope * q[n - 1] * dx
    by_q_along[0] += slope * q[0] * dy
    by_q_along[n - 1] += slope * q[n - 1] * dy
    cm -= cp * ((0.5 * (x[0] + x[n - 1]) - 0.25) * dx + 0.5 * (y[0] + y[n - 1]) * dy)
    return cn, ca, cm


@njit
def lift_force(
    x: FloatArray, y: FloatArray, q: FloatArray, alpha: float, mach: float, by_q: FloatArray
) -> tuple[float, float, float, float]:
    """Return cl, its slope by the angle at fixed speeds, cm and cn; fill cl's slopes by speed."""
    along = np.empty(len(x))
    cn, ca, cm = normal_force(x, y, q, mach, by_q, along)
    c = math.cos(alpha)
    s = math.sin(alpha)
    for j in range(len(x)):
        by_q[j] = by_q[j] * c - along[j] * s
    return cn * c - ca * s, -cn * s - ca * c, cm, cn


@njit
def squire_young(t: float, d: float, v: float) -> float:
    """Return cd = 2 theta u^((H + 5)/2) from the logarithms of theta, delta* and u at a place."""
    H = math.exp(d - t)
    return 2.0 * math.exp(t + 0.5 * (H + 5.0) * v)
