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
from optim.aerodynamics.panel import contour_matrices, panel_frames, stream_at_rest
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
def vortex_and_source(
    px: float, py: float, ax: float, ay: float, tx: float, ty: float, L: float
) -> tuple[float, float, float, float, float, float]:
    """Return the velocities at a point off a panel, per unit of what lies on it.

    Parameters
    ----------
    px, py : float
        The point.
    ax, ay, tx, ty, L : float
        First end, unit tangent and length of the panel.

    Returns
    -------
    (u, v) of the speed at the first end, of the speed at the second end, of a unit source.
    """
    X1 = (px - ax) * tx + (py - ay) * ty
    Y = (py - ay) * tx - (px - ax) * ty
    X2 = X1 - L
    spread = 0.5 * math.log((X1 * X1 + Y * Y) / (X2 * X2 + Y * Y))
    angle = math.atan2(Y * L, X1 * X2 + Y * Y)
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
        u1, v1, u2, v2, _, _ = vortex_and_source(px, py, x[j], y[j], tx[j], ty[j], length[j])
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
def wake_rows(
    x: FloatArray,
    y: FloatArray,
    tx: FloatArray,
    ty: FloatArray,
    length: FloatArray,
    xw: FloatArray,
    yw: FloatArray,
    wx: FloatArray,
    wy: FloatArray,
    wl: FloatArray,
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return what induces the speed along the wake.

    Returns
    -------
    stream : (w, 2) array
        Of unit free streams at 0 and 90 degrees.
    speeds : (w, n) array
        Of the speeds at the contour nodes.
    sources : (w, n - 1 + w - 1) array
        Of sources on contour and wake panels. The two panels that meet at a node have opposite
        logarithmic ends; their finite part is the one exact for a source linear through the node.
    The first row, at the edge, stays zero: there the speed is that of the contour.
    """
    n = len(x)
    w = len(xw)
    stream = np.zeros((w, 2))
    speeds = np.zeros((w, n))
    sources = np.zeros((w, n + w - 2))
    for k in range(1, w):
        ahead = min(k, w - 2)
        dx = wx[k - 1] + wx[ahead]
        dy = wy[k - 1] + wy[ahead]
        norm = math.sqrt(dx * dx + dy * dy)
        dx /= norm
        dy /= norm
        stream[k, 0] = dx
        stream[k, 1] = dy
        for j in range(n - 1):
            u1, v1, u2, v2, us, vs = vortex_and_source(
                xw[k], yw[k], x[j], y[j], tx[j], ty[j], length[j]
            )
            speeds[k, j] += u1 * dx + v1 * dy
            speeds[k, j + 1] += u2 * dx + v2 * dy
            sources[k, j] = us * dx + vs * dy
        for j in range(w - 1):
            if j in (k - 1, k):
                continue
            u1, v1, u2, v2, us, vs = vortex_and_source(
                xw[k], yw[k], xw[j], yw[j], wx[j], wy[j], wl[j]
            )
            sources[k, n - 1 + j] = us * dx + vs * dy
        a = wl[k - 1]
        b = wl[ahead]
        inner = (a * math.log(a) + b * math.log(b)) / (a + b) - 2.0
        sources[k, n - 1 + k - 1] = (math.log(a) - inner) / (2.0 * math.pi)
        if k < w - 1:
            sources[k, n - 1 + k] = -(math.log(b) - inner) / (2.0 * math.pi)
    return stream, speeds, sources


@njit
def base_rows(
    x: FloatArray,
    y: FloatArray,
    tx: FloatArray,
    ty: FloatArray,
    xw: FloatArray,
    yw: FloatArray,
    stream: FloatArray,
    speeds: FloatArray,
) -> None:
    """Add what the base panel of a blunt edge induces along the wake, by the edge speed."""
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
    for k in range(1, len(xw)):
        u1, v1, u2, v2, us, vs = vortex_and_source(xw[k], yw[k], x[n - 1], y[n - 1], ex, ey, gap)
        u = vortex * (u1 + u2) + source * us
        v = vortex * (v1 + v2) + source * vs
        along = u * stream[k, 0] + v * stream[k, 1]
        speeds[k, n - 1] += 0.5 * along
        speeds[k, 0] -= 0.5 * along


@njit
def by_mass(sources: FloatArray, length: FloatArray, wl: FloatArray, n: int) -> FloatArray:
    """Turn columns by source strength into columns by signed mass defect at the nodes.

    A panel's source is the difference of the signed mass over its length; contour nodes come
    first, then those of the wake.
    """
    rows = sources.shape[0]
    w = len(wl) + 1
    out = np.zeros((rows, n + w))
    for i in range(rows):
        for j in range(n - 1):
            strength = sources[i, j] / length[j]
            out[i, j + 1] += strength
            out[i, j] -= strength
        for k in range(w - 1):
            strength = sources[i, n - 1 + k] / wl[k]
            out[i, n + k + 1] += strength
            out[i, n + k] -= strength
    return out


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
    right = stream_at_rest(x, y)
    far = np.array([2.0, 3.0])
    lhs, _ = contour_matrices(x, y, far, np.zeros(2))
    guess = np.linalg.solve(lhs, right)
    still = 0.0
    upright = 0.0
    for j in range(n - 1):
        still += (guess[j, 0] + guess[j + 1, 0]) * length[j]
        upright += (guess[j, 1] + guess[j + 1, 1]) * length[j]
    # the angle without circulation: the wake of a mirrored section is the mirrored wake
    angle = -math.atan(still / upright)
    q = math.cos(angle) * guess[:n, 0] + math.sin(angle) * guess[:n, 1]
    xw, yw = wake_line(x, y, tx, ty, length, q, angle)
    w = len(xw)
    wx = np.empty(w - 1)
    wy = np.empty(w - 1)
    wl = np.empty(w - 1)
    panel_frames(xw, yw, wx, wy, wl)
    lhs, sources = contour_matrices(x, y, xw, yw)
    blown = by_mass(sources, length, wl, n)
    both = np.zeros((n + 1, 2 + n + w))
    both[:, :2] = right
    both[:n, 2:] = -blown
    solved = np.linalg.solve(lhs, both)
    total = np.empty((n + w, 2 + n + w))
    total[:n] = solved[:n]
    total[n] = 0.5 * (solved[n - 1] - solved[0])
    stream, speeds, along = wake_rows(x, y, tx, ty, length, xw, yw, wx, wy, wl)
    base_rows(x, y, tx, ty, xw, yw, stream, speeds)
    induced = np.ascontiguousarray(speeds) @ np.ascontiguousarray(solved[:n])
    direct = by_mass(along, length, wl, n)
    for k in range(1, w):
        for j in range(2):
            total[n + k, j] = induced[k, j] + stream[k, j]
        for j in range(n + w):
            total[n + k, 2 + j] = induced[k, 2 + j] + direct[k, j]
    return np.ascontiguousarray(total[:, :2]), np.ascontiguousarray(total[:, 2:]), xw, yw
