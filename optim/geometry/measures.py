"""Measures of a contour by root finding and quadrature on its exact curve.

Thickness is measured across the chord: depth(x) = y_upper(x) - y_lower(x), the height a spar finds
at a station, and the mean line is halfway between the sides at one x. The NACA reports measure
both across the mean line; for sections to 6 % camber the two agree to 0.3 % of the thickness,
because the mean line is nearly level where the thickness is greatest (tests/geometry/test_naca.py
measures it). Only the first kind answers "does the spar fit", so it is the one used.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import lru_cache
from typing import Literal, NamedTuple

import numpy as np

from optim.arrays import BoolArray, FloatArray, frozen
from optim.geometry.curve import Curve, cosine_parameters

SAMPLES = 240
"""Intervals of the samples that bracket each root."""

NEWTON_STEPS = 12
"""Budget of a root; from a bracket of the samples three or four are taken."""

ROUNDING = 1e-14
"""Abscissas this close are equal [chords]."""

SETTLED = 1e-8
"""Newton's step in x after which an extreme is found to rounding, as the next is its square."""

LEAST_SLOPE = 1e-9
"""dx/dt below which a station is left where it is: the nose, where x has its least [chords]."""

LEAST_CAMBER = 1e-9
"""Camber below this is that of a symmetric section and has no place [chords]."""

BESIDE_NOSE = 1e-9
"""Parameter at which the curvature of one side at the nose is taken [-]."""

GAUSS_NODES = 32
"""Quadrature nodes an analytic piece; exact for the areas of all closed-form sides."""

FEW_PIECES = 8
"""Above this many pieces (a spline through points) six nodes a piece do."""


class Extreme(NamedTuple):
    """A greatest or least value [chords] and the abscissa where it is taken [chords]."""

    value: float
    x: float


@dataclass(frozen=True)
class Samples:
    """The curve at full cosine spacing: (n,) parameters, (n, 2) points and derivatives."""

    t: FloatArray
    point: FloatArray
    first: FloatArray
    second: FloatArray

    @property
    def foremost(self) -> int:
        """Index of the sample with the least x."""
        return int(np.argmin(self.point[:, 0]))


@lru_cache(maxsize=1)
def _sample_parameters() -> FloatArray:
    return frozen(cosine_parameters(SAMPLES))


def sample(curve: Curve) -> Samples:
    """Return the samples of `curve`."""
    t = _sample_parameters()
    return Samples(t, *curve.derivatives(t, 2))


def foremost(curve: Curve, samples: Samples) -> float:
    """Return the parameter where x is least [-]."""
    if curve.abscissa_is_square:
        return 0.0
    k = samples.foremost
    t, low, high = samples.t[k], samples.t[max(k - 1, 0)], samples.t[min(k + 1, SAMPLES)]
    for _ in range(NEWTON_STEPS):
        _, first, second = curve.derivatives(np.array([t]), 2)
        step = -first[0, 0] / second[0, 0] if second[0, 0] > 0.0 else 0.0
        t = min(max(t + step, low), high)
        if abs(step) < ROUNDING:
            break
    return float(t)


def stations(
    curve: Curve, samples: Samples, nose: float, x: FloatArray, side: Literal["upper", "lower"]
) -> FloatArray:
    """Return the parameters of the points of one side at the abscissas `x`, (n,) [-].

    An abscissa beyond an end of the side is answered by that end.
    """
    upper = side == "upper"
    if curve.abscissa_is_square:
        root = np.sqrt(np.clip(x, 0.0, 1.0))
        return -root if upper else root
    end = -1.0 if upper else 1.0
    on_side = samples.t < nose if upper else samples.t > nose
    known_t = np.concatenate([[nose], samples.t[on_side][:: -1 if upper else 1]])
    nose_x, end_x = curve.point(np.array([nose, end]))[:, 0]
    wanted = np.clip(x, nose_x, end_x)
    # The square root of x - x_nose is nearly linear in t, so this start is good at the nose too.
    known = np.sqrt(np.maximum(samples.point[on_side, 0][:: -1 if upper else 1] - nose_x, 0.0))
    t: FloatArray = np.interp(np.sqrt(wanted - nose_x), np.concatenate([[0.0], known]), known_t)
    low, high = min(nose, end), max(nose, end)
    for _ in range(NEWTON_STEPS):
        point, first = curve.derivatives(t, 1)
        gap = wanted - point[:, 0]
        movable = np.abs(first[:, 0]) > LEAST_SLOPE
        step = np.where(movable, gap / np.where(movable, first[:, 0], 1.0), 0.0)
        t = np.clip(t + step, low, high)
        if not np.any(np.abs(gap[movable]) > ROUNDING):
            break
    return t


def extreme(
    curve: Curve,
    pair: tuple[float, float],
    bracket: tuple[float, float],
    weights: tuple[float, float],
) -> Extreme:
    """Return the extreme of a y_upper + b y_lower at equal x, with its place.

    Newton's method on its slope in x, kept inside `bracket` by bisection.

    Parameters
    ----------
    curve : Curve
        The contour.
    pair : (float, float)
        Parameters of a point of the upper and one of the lower side close to the extreme [-].
    bracket : (float, float)
        Abscissas between which the extreme lies [chords].
    weights : (float, float)
        a and b: (1, -1) for the thickness, (0.5, 0.5) for the mean line; the extreme sought is a
        maximum, so both are turned round for a minimum.
    """
    low, high = bracket
    a, b = weights
    t = np.array(pair)
    for _ in range(NEWTON_STEPS):
        point, first, second = curve.derivatives(t, 2)
        xu, xl = point[:, 0].tolist()
        (dxu, dyu), (dxl, dyl) = first.tolist()
        (ddxu, ddyu), (ddxl, ddyl) = second.tolist()
        if dxu == 0.0 or dxl == 0.0:
            break
        slope_u, slope_l = dyu / dxu, dyl / dxl
        bend_u, bend_l = (ddyu - slope_u * ddxu) / dxu**2, (ddyl - slope_l * ddxl) / dxl**2
        # Both points are brought to one abscissa, that of the upper one, to second order.
        slope = a * slope_u + b * (slope_l + bend_l * (xu - xl))
        bend = a * bend_u + b * bend_l
        low, high = (xu, high) if slope > 0.0 else (low, xu)
        target = xu - slope / bend if bend < 0.0 else math.inf
        if not low <= target <= high:
            target = 0.5 * (low + high)
        moved = np.array([(target - xu) / dxu, (target - xl) / dxl])
        t = np.clip(t + moved, -1.0, 1.0)
        if max(abs(target - xu), abs(target - xl)) < SETTLED:
            break
    point = curve.point(t)
    return Extreme(float(a * point[0, 1] + b * point[1, 1]), float(point[0, 0]))


@lru_cache(maxsize=64)
def _quadrature(breaks: tuple[float, ...]) -> tuple[FloatArray, FloatArray]:
    """Return nodes and weights of Gauss's rule on the pieces between `breaks`."""
    nodes, weights = np.polynomial.legendre.leggauss(
        GAUSS_NODES if len(breaks) <= FEW_PIECES + 1 else 6
    )
    edges = np.asarray(breaks)
    half = 0.5 * np.diff(edges)[:, None]
    middle = 0.5 * (edges[1:] + edges[:-1])[:, None]
    return frozen((middle + half * nodes).ravel()), frozen((half * weights).ravel())


def area_and_length(curve: Curve) -> tuple[float, float]:
    """Return the enclosed area [chords**2] and the length of both sides [chords].

    The area is closed by the straight base of an open edge; the length leaves the base out.
    """
    t, weights = _quadrature(curve.breaks)
    point, first = curve.derivatives(t, 1)
    turned = point[:, 0] * first[:, 1] - point[:, 1] * first[:, 0]
    (x_first, y_first), (x_last, y_last) = curve.point(np.array([-1.0, 1.0])).tolist()
    base = x_last * y_first - x_first * y_last
    area = 0.5 * (float(weights @ turned) + base)
    return area, float(weights @ np.hypot(first[:, 0], first[:, 1]))


def curvature(first: FloatArray, second: FloatArray) -> FloatArray:
    """Return the curvature, positive where the contour is convex, (n,) [1/chord]."""
    turned = first[:, 0] * second[:, 1] - first[:, 1] * second[:, 0]
    return np.asarray(turned / np.hypot(first[:, 0], first[:, 1]) ** 3)


def sign_changes(curve: Curve, samples: Samples) -> FloatArray:
    """Return the parameters where the curvature changes its sign, in rising order [-].

    Secant steps kept inside the interval of the samples by bisection.
    """
    values = curvature(samples.first, samples.second)
    changed: BoolArray = values[:-1] * values[1:] < 0.0
    low, high = samples.t[:-1][changed], samples.t[1:][changed]
    at_low = values[:-1][changed]
    for _ in range(50 if low.size else 0):  # halvings down to rounding
        middle = 0.5 * (low + high)
        _, first, second = curve.derivatives(middle, 2)
        at_middle = curvature(first, second)
        same = at_middle * at_low > 0.0
        low, high = np.where(same, middle, low), np.where(same, high, middle)
    return 0.5 * (low + high)
