"""Streamfunction panels with linear vorticity, and sources for the displacement of the layer.

The contour is a closed polygon through its nodes, walked from the upper edge over the nose to the
lower edge, so that the inside lies to the left. The signed speed q along that walk is linear on
each panel; the streamfunction has one unknown value psi0 at all nodes, on their inner side, where
the air is at rest:

    y cos(alpha) - x sin(alpha) - (1/2pi) int q ln r ds + (1/2pi) int sigma theta ds = psi0.

Sources sigma (constant on a panel) blow the displacement of the layer out of the contour. Their
angle theta is cut along the outward normal, where no node can see the cut. The flow leaves a blunt
edge along the bisector at the edge speed: the base panel carries what that needs as source and
vortex. Kutta: the speeds of both sides are equal at the edge.

Everything is linear and independent of the angle, so one factorisation serves all angles.

References
----------
Kennedy, J. L., Marsden, D. J., Canadian Aeronautics and Space J. 22, 1976. Lighthill, M. J.,
J. Fluid Mech. 4, 1958 (equivalent sources). Katz, J., Plotkin, A., Low-Speed Aerodynamics, 2nd
ed., Cambridge 2001, chapter 10 (integrals of linear panels).
"""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.kernels import njit
from optim.arrays import FloatArray


@njit
def panel_frames(
    x: FloatArray, y: FloatArray, tx: FloatArray, ty: FloatArray, length: FloatArray
) -> None:
    """Fill unit tangents and lengths of the panels between consecutive nodes."""
    for j in range(len(x) - 1):
        dx = x[j + 1] - x[j]
        dy = y[j + 1] - y[j]
        length[j] = math.sqrt(dx * dx + dy * dy)
        tx[j] = dx / length[j]
        ty[j] = dy / length[j]


@njit
def panel_integrals(
    X1: float, X2: float, Y: float, L: float, g1: float, g2: float, a1: float, a2: float
) -> tuple[float, float, float]:
    """Return the streamfunction integrals of one panel at one point.

    Parameters
    ----------
    X1, X2, Y : float
        Place of the point from the first and the second end, along and across the panel.
    L : float
        Length of the panel.
    g1, g2 : float
        ln r from the two ends (any finite value where r = 0).
    a1, a2 : float
        Angles of the point from the two ends, on one continuous branch.

    Returns
    -------
    first, second, source : float
        int (1 - s/L) ln r ds, int (s/L) ln r ds and int theta ds.
    """
    r1 = X1 * X1 + Y * Y
    r2 = X2 * X2 + Y * Y
    plain = X1 * g1 - X2 * g2 - L + Y * (a2 - a1)
    moment = 0.5 * (r2 * g2 - r1 * g1) - 0.25 * (r2 - r1) + X1 * plain
    second = moment / L
    source = X1 * a1 - X2 * a2 + Y * (g1 - g2)
    return plain - second, second, source


@njit
def branch_outward(Y: float, X: float) -> float:
    """Return the angle of (X, Y) in (-pi/2, 3 pi/2): cut along the outward normal."""
    return 0.5 * math.pi - math.atan2(X, Y)


@njit
def branch_downstream(Y: float, X: float) -> float:
    """Return the angle of (X, Y) in (0, 2 pi): cut along the panel's own direction."""
    return math.pi + math.atan2(-Y, -X)


@njit
def contour_matrices(
    x: FloatArray, y: FloatArray, xw: FloatArray, yw: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return the matrices of the streamfunction equations at the nodes.

    Parameters
    ----------
    x, y : (n,) array
        Nodes of the contour [chords].
    xw, yw : (w,) array
        Nodes of the wake, the first at the middle of the edge [chords].

    Returns
    -------
    lhs : (n + 1, n + 1) array
        Of the unknowns: speeds at the n nodes and psi0.
    sources : (n, n - 1 + w - 1) array
        Streamfunction at the nodes of unit sources on contour and wake panels.
    """
    n = len(x)
    w = len(xw)
    two_pi = 2.0 * math.pi
    tx = np.empty(n - 1)
    ty = np.empty(n - 1)
    length = np.empty(n - 1)
    panel_frames(x, y, tx, ty, length)
    wx = np.empty(w - 1)
    wy = np.empty(w - 1)
    wl = np.empty(w - 1)
    panel_frames(xw, yw, wx, wy, wl)
    lhs = np.zeros((n + 1, n + 1))
    sources = np.empty((n, n + w - 2))
    logs = np.empty(n)
    for i in range(n):
        for j in range(n):
            dx = x[i] - x[j]
            dy = y[i] - y[j]
            r = dx * dx + dy * dy
            logs[j] = 0.5 * math.log(r) if r > 0.0 else 0.0
        for j in range(n - 1):
            X1 = (x[i] - x[j]) * tx[j] + (y[i] - y[j]) * ty[j]
            Y = (y[i] - y[j]) * tx[j] - (x[i] - x[j]) * ty[j]
            X2 = X1 - length[j]
            if i == j or i == j + 1:
                Y = 0.0
            first, second, source = panel_integrals(
                X1,
                X2,
                Y,
                length[j],
                logs[j],
                logs[j + 1],
                branch_outward(Y, X1),
                branch_outward(Y, X2),
            )
            lhs[i, j] -= first / two_pi
            lhs[i, j + 1] -= second / two_pi
            sources[i, j] = source / two_pi
        for k in range(w - 1):
            X1 = (x[i] - xw[k]) * wx[k] + (y[i] - yw[k]) * wy[k]
            Y = (y[i] - yw[k]) * wx[k] - (x[i] - xw[k]) * wy[k]
            X2 = X1 - wl[k]
            r1 = X1 * X1 + Y * Y
            r2 = X2 * X2 + Y * Y
            g1 = 0.5 * math.log(r1) if r1 > 0.0 else 0.0
            first, second, source = panel_integrals(
                X1,
                X2,
                Y,
                wl[k],
                g1,
                0.5 * math.log(r2),
                branch_downstream(Y, X1),
                branch_downstream(Y, X2),
            )
            sources[i, n - 1 + k] = source / two_pi
        lhs[i, n] = -1.0
    close_edge(x, y, tx, ty, lhs)
    return lhs, sources


@njit
def close_edge(
    x: FloatArray, y: FloatArray, tx: FloatArray, ty: FloatArray, lhs: FloatArray
) -> None:
    """Add the base panel and the Kutta condition to the equations.

    With q_e = (q[-1] - q[0])/2 the speed at the edge, the base panel from the lower to the upper
    corner carries the source q_e |sin phi| and the vortex q_e cos phi, phi being its angle with
    the bisector. The edge must be open, by however little (outer.py sees to it).
    """
    n = len(x)
    two_pi = 2.0 * math.pi
    dx = x[0] - x[n - 1]
    dy = y[0] - y[n - 1]
    gap = math.sqrt(dx * dx + dy * dy)
    lhs[n, 0] = 1.0
    lhs[n, n - 1] = 1.0
    bx = -tx[0] + tx[n - 2]
    by = -ty[0] + ty[n - 2]
    norm = math.sqrt(bx * bx + by * by)
    ex = dx / gap
    ey = dy / gap
    vortex = (bx * ex + by * ey) / norm
    source = abs(bx * ey - by * ex) / norm
    for i in range(n):
        X1 = (x[i] - x[n - 1]) * ex + (y[i] - y[n - 1]) * ey
        Y = (y[i] - y[n - 1]) * ex - (x[i] - x[n - 1]) * ey
        if i == 0 or i == n - 1:
            Y = 0.0
        X2 = X1 - gap
        r1 = X1 * X1 + Y * Y
        r2 = X2 * X2 + Y * Y
        first, second, flux = panel_integrals(
            X1,
            X2,
            Y,
            gap,
            0.5 * math.log(r1) if r1 > 0.0 else 0.0,
            0.5 * math.log(r2) if r2 > 0.0 else 0.0,
            branch_outward(Y, X1),
            branch_outward(Y, X2),
        )
        strength = (-vortex * (first + second) + source * flux) / two_pi
        lhs[i, n - 1] += 0.5 * strength
        lhs[i, 0] -= 0.5 * strength


@njit
def stream_at_rest(x: FloatArray, y: FloatArray) -> FloatArray:
    """Return the right sides of unit free streams at 0 and 90 degrees, shape (n + 1, 2)."""
    n = len(x)
    right = np.zeros((n + 1, 2))
    for i in range(n):
        right[i, 0] = -y[i]
        right[i, 1] = x[i]
    return right
