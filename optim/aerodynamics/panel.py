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
from typing import NamedTuple

import numpy as np

from optim.aerodynamics.kernels import njit
from optim.arrays import FloatArray

OUTWARD = -0.5 * math.pi
DOWNSTREAM = 0.0
"""Least angle from a panel's own direction: the angles of its sources are cut along the outward
normal, where no node sees the cut, and those of the wake's along the wake."""


class Panel(NamedTuple):
    """First end, unit tangent and length of a panel."""

    x: float
    y: float
    tx: float
    ty: float
    length: float


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
def sights(
    ax: FloatArray, ay: FloatArray, x: FloatArray, y: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return ln r and the direction of each point x, y (columns) from each point ax, ay (rows).

    A panel needs those from its two ends, and two panels meet at an end.
    """
    logs = np.zeros((len(ax), len(x)))
    angles = np.zeros((len(ax), len(x)))
    for j in range(len(ax)):
        for i in range(len(x)):
            dx = x[i] - ax[j]
            dy = y[i] - ay[j]
            logs[j, i] = 0.5 * math.log(dx * dx + dy * dy)
            angles[j, i] = math.atan2(dy, dx)
    return logs, angles


@njit
def mutual_sights(x: FloatArray, y: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return ln r and the direction of each point from each other; zero from itself."""
    n = len(x)
    logs = np.zeros((n, n))
    angles = np.zeros((n, n))
    for j in range(n):
        for i in range(j + 1, n):
            dx = x[i] - x[j]
            dy = y[i] - y[j]
            logs[j, i] = 0.5 * math.log(dx * dx + dy * dy)
            logs[i, j] = logs[j, i]
            angles[j, i] = math.atan2(dy, dx)
            angles[i, j] = angles[j, i] - math.copysign(math.pi, angles[j, i])
    return logs, angles


@njit
def on_branch(angle: float, least: float) -> float:
    """Return an angle, within a turn of it, in [least, least + 2 pi)."""
    # no branches, so that loops of it are vectorised
    up = 2.0 * math.pi if angle < least else 0.0
    down = 2.0 * math.pi if angle >= least + 2.0 * math.pi else 0.0
    return angle + up - down


@njit
def turn_row(
    panel: Panel,
    x: FloatArray,
    y: FloatArray,
    least: float,
    out: FloatArray,
) -> None:
    """Fill the angle under which a panel is seen from all points, on a branch of its two ends.

    Where the cuts run outward, one side on, a point between them sees both from the far side. The
    difference of two directions would be the same angle less exactly: it is small where the panel
    is, and what it errs by is divided by the panel's length.
    """
    ax, ay, tx, ty, L = panel
    for i in range(len(x)):
        X1 = (x[i] - ax) * tx + (y[i] - ay) * ty
        Y = (y[i] - ay) * tx - (x[i] - ax) * ty
        X2 = X1 - L
        out[i] = math.atan2(Y * L, X1 * X2 + Y * Y)
        if least == OUTWARD and Y < 0.0 and X2 < 0.0 < X1:
            out[i] += 2.0 * math.pi


@njit
def source_row(
    panel: Panel,
    x: FloatArray,
    y: FloatArray,
    g: FloatArray,
    ahead: FloatArray,
    turn: FloatArray,
    least: float,
    out: FloatArray,
) -> None:
    """Fill int theta ds of a panel at all points.

    Parameters
    ----------
    panel : Panel
        Where it lies.
    x, y : (n,) array
        The points.
    g : (2, n) array
        ln r of the points from the two ends (any finite value where r = 0).
    ahead, turn : (n,) array
        Direction of the points from the second end, which is not to be one of them; of `turn_row`.
    least : float
        Least angle on the branch of the angles from the panel's own direction.
    out : (n,) array
        Filled.
    """
    ax, ay, tx, ty, L = panel
    g1, g2 = g
    own = math.atan2(ty, tx)
    for i in range(len(x)):
        X1 = (x[i] - ax) * tx + (y[i] - ay) * ty
        Y = (y[i] - ay) * tx - (x[i] - ax) * ty
        a2 = on_branch(ahead[i] - own, least)
        out[i] = L * a2 - X1 * turn[i] + Y * (g1[i] - g2[i])


@njit
def vortex_rows(
    panel: Panel,
    x: FloatArray,
    y: FloatArray,
    g: FloatArray,
    turn: FloatArray,
    plain: FloatArray,
    second: FloatArray,
) -> None:
    """Fill int ln r ds and int (s/L) ln r ds of a panel at all points (see `source_row`)."""
    ax, ay, tx, ty, L = panel
    g1, g2 = g
    # two loops with few arrays each: with more of them the compiler does not vectorise
    for i in range(len(x)):
        X1 = (x[i] - ax) * tx + (y[i] - ay) * ty
        Y = (y[i] - ay) * tx - (x[i] - ax) * ty
        plain[i] = X1 * g1[i] - (X1 - L) * g2[i] - L + Y * turn[i]
    for i in range(len(x)):
        X1 = (x[i] - ax) * tx + (y[i] - ay) * ty
        Y = (y[i] - ay) * tx - (x[i] - ax) * ty
        X2 = X1 - L
        r1 = X1 * X1 + Y * Y
        r2 = X2 * X2 + Y * Y
        moment = 0.5 * (r2 * g2[i] - r1 * g1[i]) - 0.25 * (r2 - r1)
        second[i] = (moment + X1 * plain[i]) / L


@njit
def contour_columns(
    x: FloatArray,
    y: FloatArray,
    tx: FloatArray,
    ty: FloatArray,
    length: FloatArray,
    logs: FloatArray,
    angles: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """Return the streamfunction at the nodes by the speeds there and by sources on the panels.

    Parameters
    ----------
    x, y : (n,) array
        Nodes of the contour [chords].
    tx, ty, length : (n - 1,) array
        Unit tangents and lengths of its panels.
    logs, angles : (n, n) array
        Of `mutual_sights`.

    Returns
    -------
    columns : (n + 1, n + 1) array
        A row for each unknown, speeds at the n nodes and psi0; a column for each equation.
    sources : (n - 1, n) array
        A row for the unit source on each panel.
    """
    n = len(x)
    columns = np.zeros((n + 1, n + 1))
    sources = np.empty((n - 1, n))
    plain = np.empty(n)
    second = np.empty(n)
    turn = np.empty(n)
    scale = 0.5 / math.pi
    for j in range(n - 1):
        panel = Panel(x[j], y[j], tx[j], ty[j], length[j])
        g = logs[j : j + 2]
        turn_row(panel, x, y, OUTWARD, turn)
        vortex_rows(panel, x, y, g, turn, plain, second)
        source_row(panel, x, y, g, angles[j + 1], turn, OUTWARD, sources[j])
        # the second end has no direction from itself; from the first one it lies straight ahead
        sources[j, j + 1] = 0.0
        for i in range(n):
            columns[j, i] -= scale * (plain[i] - second[i])
        for i in range(n):
            columns[j + 1, i] = -scale * second[i]
            sources[j, i] *= scale
    columns[n, :n] = -1.0
    close_edge(x, y, tx, ty, logs, angles, columns)
    return columns, sources


@njit
def close_edge(
    x: FloatArray,
    y: FloatArray,
    tx: FloatArray,
    ty: FloatArray,
    logs: FloatArray,
    angles: FloatArray,
    columns: FloatArray,
) -> None:
    """Add the base panel and the Kutta condition to the equations.

    With q_e = (q[-1] - q[0])/2 the speed at the edge, the base panel from the lower to the upper
    corner carries the source q_e |sin phi| and the vortex q_e cos phi, phi being its angle with
    the bisector. The edge must be open, by however little (outer.py sees to it).
    """
    n = len(x)
    base, vortex, source = base_panel(x, y, tx, ty)
    plain = np.empty(n)
    second = np.empty(n)
    flux = np.empty(n)
    turn = np.empty(n)
    g = logs[np.array([n - 1, 0])]
    turn_row(base, x, y, OUTWARD, turn)
    vortex_rows(base, x, y, g, turn, plain, second)
    source_row(base, x, y, g, angles[0], turn, OUTWARD, flux)
    flux[0] = 0.0
    for i in range(n):
        strength = (source * flux[i] - vortex * plain[i]) / (2.0 * math.pi)
        columns[n - 1, i] += 0.5 * strength
        columns[0, i] -= 0.5 * strength
    columns[0, n] = 1.0
    columns[n - 1, n] = 1.0


@njit
def base_panel(
    x: FloatArray, y: FloatArray, tx: FloatArray, ty: FloatArray
) -> tuple[Panel, float, float]:
    """Return the base panel of the edge, and the vortex and the source on it by the edge speed."""
    n = len(x)
    dx = x[0] - x[n - 1]
    dy = y[0] - y[n - 1]
    gap = math.sqrt(dx * dx + dy * dy)
    bx = -tx[0] + tx[n - 2]
    by = -ty[0] + ty[n - 2]
    norm = math.sqrt(bx * bx + by * by)
    ex = dx / gap
    ey = dy / gap
    vortex = (bx * ex + by * ey) / norm
    source = abs(bx * ey - by * ex) / norm
    return Panel(x[n - 1], y[n - 1], ex, ey, gap), vortex, source


@njit
def wake_sources(
    x: FloatArray,
    y: FloatArray,
    xw: FloatArray,
    yw: FloatArray,
    wx: FloatArray,
    wy: FloatArray,
    wl: FloatArray,
    logs: FloatArray,
    angles: FloatArray,
) -> FloatArray:
    """Return the streamfunction at the contour's nodes of unit sources on the wake's panels.

    Parameters
    ----------
    xw, yw, wx, wy, wl : array
        Nodes, tangents and lengths of the wake, the first node at the middle of the edge.
    logs, angles : (w, n) array
        Of `sights` from the wake's nodes.

    Returns
    -------
    sources : (w - 1, n) array
    """
    out = np.empty((len(wl), len(x)))
    turn = np.empty(len(x))
    for k in range(len(wl)):
        panel = Panel(xw[k], yw[k], wx[k], wy[k], wl[k])
        turn_row(panel, x, y, DOWNSTREAM, turn)
        source_row(panel, x, y, logs[k : k + 2], angles[k + 1], turn, DOWNSTREAM, out[k])
    out *= 0.5 / math.pi
    return out


@njit
def streams_at_rest(x: FloatArray, y: FloatArray) -> FloatArray:
    """Return the right sides of unit free streams at 0 and 90 degrees, (2, n + 1)."""
    n = len(x)
    right = np.zeros((2, n + 1))
    for i in range(n):
        right[0, i] = -y[i]
        right[1, i] = x[i]
    return right
