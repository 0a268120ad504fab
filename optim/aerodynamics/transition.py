"""Natural transition: growth of the instability waves of a laminar layer (e^N).

The amplification exponent N grows along the surface as

    dN/dxi = (dN/dRe_theta) (theta dRe_theta/dxi) / theta,

the first factor from the envelope over all frequencies of the similar layer with the local shape
factor, the second from that layer's growth, theta_eta^2. Both come from one table: spatial
Orr-Sommerfeld solutions of Falkner-Skan layers on the attached and the separated branch, computed
for this project by tests/derivations/stability_envelope.py. It distils the envelope to

    dN/dRe_theta = s q (1 + a q + b q^2),    q = 1 - Rc/Re_theta,

and tabulates ln Rc, ln s, a, b and theta_eta^2 at even steps of t = 1/(H - 1).

A layer that has left the wall grows faster; separated_growth.py says how the envelope passes over
to that.

Range: 2.136 <= H <= 26 and 0.5 <= N <= 13; there Re_theta at given N is within 0.3 % of the
solution at the nodes and 0.7 % between them. Parallel flow, two-dimensional waves, no receptivity.
Beyond the table its columns go on straight to H = 2.10 and 101, and are constant from there.

References
----------
van Ingen, J. L., TH Delft VTH-74, 1956; Smith, A. M. O., Gamberoni, N., Douglas ES 26388, 1956
(e^N). Gleyzes, C., Cousteix, J., Bonnet, J. L., 1985; Drela, M., Giles, M. B., AIAA J. 25(10), 1987
(envelope of similar layers, kinematics).
"""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.kernels import njit
from optim.aerodynamics.separated_growth import separated_growth, separated_share
from optim.arrays import FloatArray

FIRST_T, STEP_T = 0.04, 0.03
"""First node and step of the table in t = 1/(H - 1) [-]: H = 26 downwards."""

SIMILAR_LAYERS = np.array(
    [
        (0.272775, -1.352111, 0.902729, -0.464675, 0.062672),
        (0.882840, -1.512563, 0.355176, -0.165666, 0.120893),
        (1.279697, -1.635892, 0.097908, -0.023340, 0.174453),
        (1.578140, -1.736444, -0.061099, 0.064032, 0.220462),
        (1.820708, -1.822612, -0.173716, 0.124735, 0.258267),
        (2.028168, -1.899415, -0.260353, 0.170015, 0.288119),
        (2.212440, -1.970212, -0.330668, 0.205123, 0.310639),
        (2.381203, -2.037497, -0.389794, 0.232718, 0.326583),
        (2.539914, -2.103331, -0.440594, 0.254076, 0.336728),
        (2.692826, -2.169613, -0.484615, 0.269577, 0.341814),
        (2.843584, -2.238313, -0.522424, 0.278816, 0.342522),
        (2.995633, -2.311694, -0.553631, 0.280473, 0.339467),
        (3.152564, -2.398617, -0.557336, 0.254377, 0.333191),
        (3.318478, -2.491634, -0.566226, 0.228519, 0.324173),
        (3.498449, -2.601715, -0.556245, 0.179280, 0.312831),
        (3.699200, -2.736757, -0.516467, 0.094207, 0.299525),
        (3.930139, -2.906694, -0.434601, -0.039986, 0.284569),
        (4.204976, -3.116608, -0.324684, -0.206695, 0.268232),
        (4.543938, -3.346324, -0.305727, -0.273006, 0.250743),
        (4.975097, -3.591503, -0.422448, -0.170962, 0.232299),
        (5.526673, -3.853380, -0.590198, 0.032126, 0.213064),
        (6.190864, -4.079352, -0.704912, 0.231061, 0.193176),
        (6.879524, -4.179143, -0.710581, 0.339384, 0.172748),
        (7.482448, -4.146669, -0.541029, 0.266376, 0.151869),
        (7.959999, -4.038064, -0.084294, -0.102242, 0.130607),
        (8.326898, -3.871726, 0.383385, -0.289053, 0.109007),
        (8.609864, -3.658828, 0.268387, -0.837264, 0.087094),
        (8.831712, -3.390846, -1.418082, 1.340144, 0.064868),
        (9.009263, -3.221794, -2.816505, 3.860925, 0.042306),
    ]
)
"""ln Rc, ln s, a, b, theta_eta^2 of the similar layers at t = FIRST_T + i STEP_T [-]; written by
tests/derivations/stability_envelope.py."""

CRITICAL, SLOPE, LINEAR, SQUARE, GROWTH = 0, 1, 2, 3, 4
"""Columns of the table."""

ONSET = 0.03
"""Half-width in q over which growth sets in [-], about Rc: the kink that the envelope has there is
rounded to continuous slopes, for Newton's method."""

BACKGROUND = 0.3
"""Growth of N over a chord wherever it is [1/chord]. Where an accelerated layer damps every wave
the envelope stands still, and a layer that falls short of the critical N by a hair would turn
turbulent half a chord later: no place of transition is then consistent with the flow it makes. Over
a whole chord this is a tenth of the difference between a quiet and an average tunnel."""

LEAST_FINITE_H = 2.0
"""Shape factor below which t is not formed [-]; the table is constant there already."""


def spline_pieces(nodes: FloatArray) -> FloatArray:
    """Return the not-a-knot cubics between evenly spaced nodes, and straight lines beyond them.

    Parameters
    ----------
    nodes : (n, c) array
        Values of c functions.

    Returns
    -------
    (n + 1, c, 4) array
        Ascending powers of the fraction 0..1 of each step: one step before the first node, the
        n - 1 between the nodes, one after the last. Slopes are continuous everywhere.
    """
    n = len(nodes)
    matrix = 4.0 * np.eye(n) + np.eye(n, k=1) + np.eye(n, k=-1)
    matrix[0, :3] = matrix[-1, -3:] = 1.0, -2.0, 1.0  # one cubic over each two steps at the ends
    wanted = np.zeros_like(nodes)
    wanted[1:-1] = 6.0 * np.diff(nodes, n=2, axis=0)
    bend = np.linalg.solve(matrix, wanted)
    left, right, rise = bend[:-1], bend[1:], np.diff(nodes, axis=0)
    start = rise - (2.0 * left + right) / 6.0
    end = rise + (left + 2.0 * right) / 6.0
    pieces = np.zeros((n + 1, nodes.shape[1], 4))
    pieces[1:-1] = np.stack([nodes[:-1], start, left / 2.0, (right - left) / 6.0], axis=-1)
    pieces[0, :, 0], pieces[0, :, 1] = nodes[0] - start[0], start[0]
    pieces[-1, :, 0], pieces[-1, :, 1] = nodes[-1], end[-1]
    return pieces


PIECES = spline_pieces(SIMILAR_LAYERS)
"""Cubics of SIMILAR_LAYERS, (steps + 2, columns, 4)."""


@njit
def _place(H: float) -> tuple[int, float, float]:
    """Return the step of the table that holds H, the fraction of it, and d(fraction)/dH."""
    t = 1.0 / (max(H, LEAST_FINITE_H) - 1.0)
    steps = (t - FIRST_T) / STEP_T + 1.0
    inside = min(max(steps, 0.0), float(len(PIECES)))
    i = min(int(inside), len(PIECES) - 1)
    return i, inside - i, -t * t / STEP_T if inside == steps else 0.0


@njit
def _column(i: int, column: int, x: float) -> tuple[float, float]:
    """Return one function of the table at fraction x of step i, and its slope in x."""
    c1, c2, c3 = PIECES[i, column, 1], PIECES[i, column, 2], PIECES[i, column, 3]
    value = PIECES[i, column, 0] + x * (c1 + x * (c2 + x * c3))
    return value, c1 + x * (2.0 * c2 + 3.0 * x * c3)


@njit
def critical_re_theta(H: float) -> tuple[float, float]:
    """Return Re_theta below which every wave is damped, and its slope in H (range: see the top)."""
    i, x, x_H = _place(H)
    ln_Rc, slope = _column(i, CRITICAL, x)
    Rc = math.exp(ln_Rc)
    return Rc, Rc * slope * x_H


@njit
def similar_flow_growth(H: float) -> tuple[float, float]:
    """Return theta dRe_theta/dxi = theta_eta^2 of the similar layer, and its slope in H.

    Within 5e-4 of the Falkner-Skan solution for 2.136 <= H <= 13, 2e-3 up to 26.
    """
    i, x, x_H = _place(H)
    value, slope = _column(i, GROWTH, x)
    return value, slope * x_H


@njit
def amplification(H: float, Rt: float) -> tuple[float, float, float]:
    """Return the growth of the envelope, dN/dRe_theta, and its slopes.

    Parameters
    ----------
    H : float
        Kinematic shape factor [-].
    Rt : float
        Re_theta, positive [-].

    Returns
    -------
    g, g_H, g_Rt : float
        dN/dRe_theta and its derivatives by H and Re_theta [-]; zero below Rc/(1 + ONSET), smooth
        from there.
    """
    i, x, x_H = _place(H)
    ln_Rc, Rc_x = _column(i, CRITICAL, x)
    ratio = math.exp(ln_Rc) / Rt
    q = 1.0 - ratio
    if q <= -ONSET:
        return 0.0, 0.0, 0.0
    q_q = 1.0
    if q < ONSET:
        q_q = (q + ONSET) / (2.0 * ONSET)
        q = q_q * (q + ONSET) / 2.0
    ln_s, s_x = _column(i, SLOPE, x)
    a, a_x = _column(i, LINEAR, x)
    b, b_x = _column(i, SQUARE, x)
    s = math.exp(ln_s)
    g = s * q * (1.0 + q * (a + q * b))
    by_ratio = -s * (1.0 + q * (2.0 * a + 3.0 * q * b)) * q_q * ratio
    g_x = by_ratio * Rc_x + g * s_x + s * q * q * (a_x + q * b_x)
    return g, g_x * x_H, -by_ratio / Rt


@njit
def growth_per_thickness(H: float, Rt: float) -> tuple[float, float, float]:
    """Return theta dN/dxi along a layer, attached or separated, and its slopes.

    Parameters
    ----------
    H : float
        Kinematic shape factor [-].
    Rt : float
        Re_theta, positive [-].

    Returns
    -------
    A, A_H, A_Rt : float
        Growth of N over one momentum thickness and its derivatives by H and Re_theta [-].
    """
    g, g_H, g_Rt = amplification(H, Rt)
    if g == 0.0:
        return 0.0, 0.0, 0.0
    rate, rate_H = similar_flow_growth(H)
    A, A_H, A_Rt = g * rate, g_H * rate + g * rate_H, g_Rt * rate
    share, share_H = separated_share(H)
    if share == 0.0:
        return A, A_H, A_Rt
    other, other_H = separated_growth(H)
    attached = 1.0 - share
    return (
        A * attached + other * share,
        A_H * attached + other_H * share + share_H * (other - A),
        A_Rt * attached,
    )
