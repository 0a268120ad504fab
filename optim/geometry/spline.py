"""A curve along measured or tabulated ordinates: a cubic spline in a parameter like t.

The parameter matters more than the spline. In the abscissa a round nose has an infinite slope; in
the length of the chords a spline through few nose points bulges, because the chords are shorter
than the arcs by up to a tenth there. Here the parameter is found from the length of the curve
itself, measured from the nose, by the relation that holds on the parabola x = tau**2, y = a tau
with the curvature of the nose: both x and y are then nearly polynomials of tau, and a sparse nose
comes out smooth. As the length is that of the spline, a few rounds settle it.

References
----------
de Boor, A Practical Guide to Splines, 1978, chapter IV (cubic interpolation, not-a-knot ends).
Farin, Curves and Surfaces for CAGD, 5th ed., 2002, section 9.6 (the choice of the parameter).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.interpolate import CubicSpline

from optim.arrays import FloatArray, IntArray
from optim.errors import Fault, SectionError
from optim.geometry.chordline import chord_line
from optim.geometry.curve import Curve
from optim.geometry.graduation import graduated

ROUNDS = 6
"""Rounds of the parameter; the last ones move it by less than rounding of the ordinates does."""

CLOSEST = 3e-4
"""Least distance of two points in theta = arccos(-t) [rad]: 5000 points on 160 panels."""

NOSE_RADII = (1e-4, 0.2)
"""Between these the nose radius of the parabola is kept [chords]."""

NEWTON_STEPS = 20
"""Budget of the inversion of the length, which is convex."""


@dataclass(frozen=True, eq=False)
class SplineCurve(Curve):
    """A cubic spline through points, not-a-knot at both ends.

    Attributes
    ----------
    spline : CubicSpline
        Points of the plane over the parameter -1 to 1.
    """

    spline: CubicSpline

    @property
    def breaks(self) -> tuple[float, ...]:
        """Parameters of the points through which the curve goes."""
        return tuple(self.spline.x.tolist())

    def derivatives(self, t: FloatArray, order: int) -> tuple[FloatArray, ...]:
        """Return the point and its derivatives in t up to `order`, each (n, 2) [chords]."""
        return tuple(np.asarray(self.spline(t, k), dtype=np.float64) for k in range(order + 1))


def through(points: FloatArray) -> tuple[SplineCurve, float, int]:
    """Return the curve along points in contour order, with its nose at t = 0, and the changes.

    Parameters
    ----------
    points : (n, 2) array
        From the upper edge around the nose to the lower edge, no two neighbours equal; the frame
        and the scale do not matter.

    Returns
    -------
    curve : SplineCurve
        The curve, which leaves the points by what `graduation` smooths.
    change : float
        The farthest that it moves a point [chords].
    left_out : int
        Number of points too close to their neighbours to tell a slope [-].

    Raises
    ------
    SectionError
        If the points do not run from the edge to the nose and back.
    """
    edge = 0.5 * (points[0] + points[-1])
    reach = np.hypot(*(points - edge).T)
    chord = float(reach.max())
    t = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(points, axis=0).T))])
    curve = SplineCurve(CubicSpline(t, points))
    nose = chord_line(curve, float(t[int(np.argmax(reach))]), (0.0, float(t[-1]))).t
    clear = _clear(np.arccos(-_parameters(curve, nose, chord)))
    curve = SplineCurve(CubicSpline(t[clear], points[clear]))
    left_out = points.shape[0] - clear.size
    points = points[clear]
    smooth = points
    for _ in range(ROUNDS):
        t = _parameters(curve, nose, chord)
        # The rounds may bring points closer again; the filter then sees them a little apart.
        apart = np.maximum(np.diff(np.arccos(-t)), CLOSEST / 3.0)
        smooth = graduated(np.concatenate([[0.0], np.cumsum(apart)]), points)
        curve = SplineCurve(CubicSpline(t, smooth))
        nose = chord_line(curve, 0.0).t
    # What is left between the nose and t = 0 is a matter of names: the ends stay, the nose moves.
    curve = SplineCurve(CubicSpline(t - nose * (1.0 - t**2), smooth))
    return curve, float(np.hypot(*(smooth - points).T).max()) / chord, left_out


def _clear(theta: FloatArray) -> IntArray:
    """Return the indices of points that keep the least distance, both ends among them."""
    kept = [0]
    for k, place in enumerate(theta.tolist()):
        if theta[kept[-1]] + CLOSEST < place < theta[-1] - CLOSEST:
            kept.append(k)
    return np.array([*kept, theta.size - 1], dtype=np.int64)


def _parameters(curve: SplineCurve, nose: float, chord: float) -> FloatArray:
    """Return better parameters of the points, -1 to 1 with the nose at 0, (n,)."""
    knots = curve.spline.x
    length = np.concatenate([[0.0], np.cumsum(_lengths(curve, knots[:-1], knots[1:]))])
    last = int(np.clip(np.searchsorted(knots, nose, side="right") - 1, 0, knots.size - 2))
    at_nose = length[last] + _lengths(curve, knots[last : last + 1], np.array([nose]))[0]
    _, (first,), (second,) = curve.derivatives(np.array([nose]), 2)
    bend = abs(first[0] * second[1] - first[1] * second[0]) / np.hypot(*first) ** 3 * chord
    slope = np.sqrt(2.0 * np.clip(1.0 / max(bend, 1e-9), *NOSE_RADII))
    tau = _root_like((length - at_nose) / chord, float(slope))
    upper, lower = -tau[0], tau[-1]
    if not min(upper, lower) > 0.0:
        raise _no_way_back()
    # t = p tau + q tau**2 puts both ends at one without a bend at the nose
    p = (upper / lower + lower / upper) / (upper + lower)
    q = (1.0 / lower - p) / lower
    t = p * tau + q * tau**2
    t[0], t[-1] = -1.0, 1.0
    if not np.abs(t).max() <= 1.0:
        raise _no_way_back()
    return np.asarray(t, dtype=np.float64)


def _no_way_back() -> SectionError:
    message = (
        "The points do not run from the edge around the nose and back to the edge: one side is "
        "much shorter than the other, or a point lies far off."
    )
    return SectionError([Fault(message)])


def _lengths(curve: SplineCurve, start: FloatArray, end: FloatArray) -> FloatArray:
    """Return the lengths of pieces of the curve by Gauss's rule, (n,)."""
    nodes, weights = np.polynomial.legendre.leggauss(8)
    half = 0.5 * (end - start)
    t = 0.5 * (start + end)[:, None] + half[:, None] * nodes
    first = curve.first(t.ravel())
    speed = np.hypot(first[:, 0], first[:, 1]).reshape(t.shape)
    return np.asarray(half * (speed @ weights), dtype=np.float64)


def _root_like(length: FloatArray, a: float) -> FloatArray:
    """Return tau at signed lengths from the nose of the parabola (tau**2, a tau), (n,).

    The length is tau root / 2 + a**2 asinh(2 tau / a) / 4 with root = sqrt(4 tau**2 + a**2), which
    Newton's method inverts from above, where it is convex.
    """
    wanted = np.abs(length)
    tau = np.minimum(np.sqrt(wanted), wanted / a)
    for _ in range(NEWTON_STEPS):
        root = np.sqrt(4.0 * tau**2 + a * a)
        found = 0.5 * tau * root + 0.25 * a * a * np.arcsinh(2.0 * tau / a)
        tau = np.maximum(tau - (found - wanted) / root, 0.0)
    return np.asarray(np.copysign(tau, length), dtype=np.float64)
