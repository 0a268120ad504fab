"""The wake line behind the edge, and the speed that vortices and sources induce along it.

The line follows the streamline of the inviscid flow at zero lift and then stays where it is: its
shape is of second order (a frozen wake costs at most 0.1 % in drag), and one set of matrices
serves every condition of a section.

In all functions x, y are the n nodes of the contour, tx, ty and length the unit tangents and the
lengths of its panels; xw, yw and wx, wy, wl are those of the wake, w nodes.

References
----------
Lighthill, M. J., J. Fluid Mech. 4, 1958. Katz, J., Plotkin, A., Low-Speed Aerodynamics, 2nd ed.,
Cambridge 2001, chapter 10.
"""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.kernels import njit
from optim.aerodynamics.lapack import AS_STORED, factorise, substitute
from optim.aerodynamics.panel import (
    Panel,
    base_panel,
    contour_columns,
    mutual_sights,
    on_branch,
    panel_frames,
    sights,
    streams_at_rest,
    wake_sources,
)
from optim.arrays import FloatArray

WAKE_LENGTH = 1.0
"""Length of the wake line [chords]: the drag taken at its end is within 0.1 % of that at 2."""

WAKE_FIRST_STEP = 0.002
"""First step behind the edge [chords]."""

WAKE_NODES = 18
"""Number of nodes, in geometric progression."""


@njit
def growth_ratio(first: float, total: float, steps: int) -> float:
    """Return r of first (1 + r + ... + r^(steps-1)) = total, by bisection."""
    low = 1.0 + 1e-9
    high = 4.0
    for _ in range(60):
        middle = 0.5 * (low + high)
        if first * (middle**steps - 1.0) / (middle - 1.0) < total:
            low = middle
        else:
            high = middle
    return 0.5 * (low + high)


@njit
def panel_velocities(
    panel: Panel, px: float, py: float, spread: float, angle: float
) -> tuple[float, float, float, float, float, float]:
    """Return the velocities at a point off a panel, per unit of what lies on it.

    Parameters
    ----------
    panel : Panel
        Where it lies.
    px, py : float
        The point.
    spread, angle : float
        ln(r1/r2) of the distances from its two ends, and the angle under which it is seen.

    Returns
    -------
    (u, v) of the speed at the first end, of the speed at the second end, of a unit source.
    """
    ax, ay, tx, ty, L = panel
    X1 = (px - ax) * tx + (py - ay) * ty
    Y = (py - ay) * tx - (px - ax) * ty
    second_Y = (X1 * angle - Y * spread) / L
    second_X = (X1 * spread - L + Y * angle) / L
    first_Y = angle - second_Y
    first_X = spread - second_X
    scale = 0.5 / math.pi
    return (
        -scale * (first_Y * tx + first_X * ty),
        scale * (first_X * tx - first_Y * ty),
        -scale * (second_Y * tx + second_X * ty),
        scale * (second_X * tx - second_Y * ty),
        scale * (spread * tx - angle * ty),
        scale * (angle * tx + spread * ty),
    )


@njit
def vortex_and_source(
    panel: Panel, px: float, py: float
) -> tuple[float, float, float, float, float, float]:
    """Return `panel_velocities` where logarithm and angle are not known yet."""
    ax, ay, tx, ty, L = panel
    X1 = (px - ax) * tx + (py - ay) * ty
    Y = (py - ay) * tx - (px - ax) * ty
    X2 = X1 - L
    spread = 0.5 * math.log((X1 * X1 + Y * Y) / (X2 * X2 + Y * Y))
    angle = math.atan2(Y * L, X1 * X2 + Y * Y)
    return panel_velocities(panel, px, py, spread, angle)


@njit
def velocity(
    px: float,
    py: float,
    x: FloatArray,
    y: FloatArray,
    tx: FloatArray,
    ty: FloatArray,
    length: FloatArray,
    q: FloatArray,
    alpha: float,
) -> tuple[float, float]:
    """Return the inviscid velocity at a point off the contour; the base panel is left out."""
    u = math.cos(alpha)
    v = math.sin(alpha)
    for j in range(len(x) - 1):
        panel = Panel(x[j], y[j], tx[j], ty[j], length[j])
        u1, v1, u2, v2, _, _ = vortex_and_source(panel, px, py)
        u += u1 * q[j] + u2 * q[j + 1]
        v += v1 * q[j] + v2 * q[j + 1]
    return u, v


@njit
def wake_line(
    x: FloatArray,
    y: FloatArray,
    tx: FloatArray,
    ty: FloatArray,
    length: FloatArray,
    q: FloatArray,
    alpha: float,
) -> tuple[FloatArray, FloatArray]:
    """Return the nodes of the wake: from the middle of the edge along the streamline.

    Parameters
    ----------
    x, y, q : (n,) array
        Contour nodes and inviscid speeds at `alpha`.
    """
    n = len(x)
    xw = np.empty(WAKE_NODES)
    yw = np.empty(WAKE_NODES)
    xw[0] = 0.5 * (x[0] + x[n - 1])
    yw[0] = 0.5 * (y[0] + y[n - 1])
    u = -tx[0] + tx[n - 2]
    v = -ty[0] + ty[n - 2]
    ratio = growth_ratio(WAKE_FIRST_STEP, WAKE_LENGTH, WAKE_NODES - 1)
    step = WAKE_FIRST_STEP
    for k in range(1, WAKE_NODES):
        norm = math.sqrt(u * u + v * v)
        xw[k] = xw[k - 1] + step * u / norm
        yw[k] = yw[k - 1] + step * v / norm
        u2, v2 = velocity(xw[k], yw[k], x, y, tx, ty, length, q, alpha)
        norm2 = math.sqrt(u2 * u2 + v2 * v2)
        mx = u / norm + u2 / norm2
        my = v / norm + v2 / norm2
        mean = math.sqrt(mx * mx + my * my)
        xw[k] = xw[k - 1] + step * mx / mean
        yw[k] = yw[k - 1] + step * my / mean
        u, v = u2, v2
        step *= ratio
    return xw, yw


@njit
def wake_directions(wx: FloatArray, wy: FloatArray) -> FloatArray:
    """Return the unit directions (w, 2) of the wake at its nodes; zero at the edge.

    There the speed is that of the contour, and nothing that is induced counts.
    """
    w = len(wx) + 1
    along = np.zeros((w, 2))
    for k in range(1, w):
        ahead = min(k, w - 2)
        dx = wx[k - 1] + wx[ahead]
        dy = wy[k - 1] + wy[ahead]
        norm = math.sqrt(dx * dx + dy * dy)
        along[k, 0] = dx / norm
        along[k, 1] = dy / norm
    return along


@njit
def induced_by_contour(
    x: FloatArray,
    y: FloatArray,
    tx: FloatArray,
    ty: FloatArray,
    length: FloatArray,
    xw: FloatArray,
    yw: FloatArray,
    along: FloatArray,
    logs: FloatArray,
    angles: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """Return what the contour induces along the wake.

    Parameters
    ----------
    along : (w, 2) array
        Directions of the wake.
    logs, angles : (w, n) array
        Of `sights` from the wake's nodes: what the panels see is the same, turned about.

    Returns
    -------
    speeds : (w, n + 1) array
        By the speeds at the contour nodes; the last column, psi0, stays zero.
    sources : (n - 1, w) array
        By unit sources on the panels.
    """
    n = len(x)
    w = len(xw)
    speeds = np.zeros((w, n + 1))
    sources = np.zeros((n - 1, w))
    for k in range(1, w):
        dx = along[k, 0]
        dy = along[k, 1]
        for j in range(n - 1):
            panel = Panel(x[j], y[j], tx[j], ty[j], length[j])
            angle = on_branch(angles[k, j + 1] - angles[k, j], -math.pi)
            u1, v1, u2, v2, us, vs = panel_velocities(
                panel, xw[k], yw[k], logs[k, j] - logs[k, j + 1], angle
            )
            speeds[k, j] += u1 * dx + v1 * dy
            speeds[k, j + 1] += u2 * dx + v2 * dy
            sources[j, k] = us * dx + vs * dy
    base, vortex, source = base_panel(x, y, tx, ty)
    for k in range(1, w):
        u1, v1, u2, v2, us, vs = vortex_and_source(base, xw[k], yw[k])
        u = vortex * (u1 + u2) + source * us
        v = vortex * (v1 + v2) + source * vs
        strength = u * along[k, 0] + v * along[k, 1]
        speeds[k, n - 1] += 0.5 * strength
        speeds[k, 0] -= 0.5 * strength
    return speeds, sources


@njit
def induced_by_wake(
    xw: FloatArray,
    yw: FloatArray,
    wx: FloatArray,
    wy: FloatArray,
    wl: FloatArray,
    along: FloatArray,
) -> FloatArray:
    """Return the speed along the wake by unit sources on its panels, shape (w - 1, w).

    The two panels that meet at a node have opposite logarithmic ends; their finite part is the one
    exact for a source linear through the node.
    """
    w = len(xw)
    sources = np.zeros((w - 1, w))
    for k in range(1, w):
        for j in range(w - 1):
            if j in (k - 1, k):
                continue
            panel = Panel(xw[j], yw[j], wx[j], wy[j], wl[j])
            _, _, _, _, us, vs = vortex_and_source(panel, xw[k], yw[k])
            sources[j, k] = us * along[k, 0] + vs * along[k, 1]
        a = wl[k - 1]
        b = wl[min(k, w - 2)]
        inner = (a * math.log(a) + b * math.log(b)) / (a + b) - 2.0
        sources[k - 1, k] = (math.log(a) - inner) / (2.0 * math.pi)
        if k < w - 1:
            sources[k, k] = -(math.log(b) - inner) / (2.0 * math.pi)
    return sources


@njit
def by_mass(sources: FloatArray, length: FloatArray, out: FloatArray) -> None:
    """Turn rows by source strength into rows by the signed mass defect at the panels' ends.

    A panel's source is the difference of the signed mass over its length. `out` has one row more
    than `sources` and may have longer ones.
    """
    for j in range(len(length)):
        for i in range(sources.shape[1]):
            strength = sources[j, i] / length[j]
            out[j, i] -= strength
            out[j + 1, i] += strength


@njit
def angle_without_circulation(q: FloatArray, length: FloatArray) -> float:
    """Return the angle of attack at which speeds (2, n) of unit streams have no circulation."""
    still = 0.0
    upright = 0.0
    for j in range(len(length)):
        still += (q[0, j] + q[0, j + 1]) * length[j]
        upright += (q[1, j] + q[1, j + 1]) * length[j]
    return -math.atan(still / upright)


@njit
def outer_flow(
    x: FloatArray, y: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
    """Return the outer flow of a section: all that does not depend on the condition.

    Parameters
    ----------
    x, y : (n,) array
        Nodes of the contour [chords].

    Returns
    -------
    stream : (n + w, 2) array
        Signed speed at contour and wake nodes in unit streams at 0 and 90 degrees.
    influence : (n + w, n + w) array
        Change of that speed by signed mass defect at the nodes.
    xw, yw : (w,) array
        Nodes of the wake.
    """
    n = len(x)
    tx = np.empty(n - 1)
    ty = np.empty(n - 1)
    length = np.empty(n - 1)
    panel_frames(x, y, tx, ty, length)
    logs, angles = mutual_sights(x, y)
    columns, sources = contour_columns(x, y, tx, ty, length, logs, angles)
    pivots = np.empty(n + 1, np.int32)
    if not factorise(columns, pivots):
        raise np.linalg.LinAlgError("the panels of the contour have no solution")
    streams = streams_at_rest(x, y)
    substitute(columns, pivots, streams, AS_STORED)
    # the wake of a mirrored section is the mirrored wake
    angle = angle_without_circulation(streams, length)
    q = math.cos(angle) * streams[0] + math.sin(angle) * streams[1]
    xw, yw = wake_line(x, y, tx, ty, length, q, angle)
    w = len(xw)
    wx = np.empty(w - 1)
    wy = np.empty(w - 1)
    wl = np.empty(w - 1)
    panel_frames(xw, yw, wx, wy, wl)
    logs, angles = sights(xw, yw, x, y)
    along = wake_directions(wx, wy)
    solved = np.zeros((n + w, n + 1))
    by_mass(-sources, length, solved[:n])
    by_mass(-wake_sources(x, y, xw, yw, wx, wy, wl, logs, angles), wl, solved[n:])
    substitute(columns, pivots, solved, AS_STORED)
    speeds, blown = induced_by_contour(x, y, tx, ty, length, xw, yw, along, logs, angles)
    direct = np.zeros((n + w, w))
    by_mass(blown, length, direct[:n])
    by_mass(induced_by_wake(xw, yw, wx, wy, wl, along), wl, direct[n:])
    stream = with_wake(streams, np.ascontiguousarray(along.T), speeds)
    return stream, with_wake(solved, direct, speeds), xw, yw


@njit
def with_wake(contour: FloatArray, direct: FloatArray, speeds: FloatArray) -> FloatArray:
    """Return the speeds at contour and wake nodes (n + w, m) by each of m causes.

    Parameters
    ----------
    contour : (m, n + 1) array
        Speeds at the contour by each cause, and psi0.
    direct : (m, w) array
        What each cause induces along the wake itself.
    speeds : (w, n + 1) array
        What the speeds at the contour induce there. At the edge, the first node, the speed is the
        mean of the contour's two.
    """
    m, n = contour.shape[0], contour.shape[1] - 1
    w = len(speeds)
    out = np.empty((n + w, m))
    out[:n] = contour.T[:n]
    out[n:] = np.dot(speeds, contour.T) + direct.T
    out[n] = 0.5 * (contour[:, n - 1] - contour[:, 0])
    return out
