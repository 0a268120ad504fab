"""The exact contour at the real chord as one cubic spline, for programs that draw and cut.

The spline runs over the length along the contour, from the upper trailing edge around the nose to
the lower one. It passes through the exact curve at chosen places, keeps its tangents at both ends
and at the nose, and has continuous curvature on each side; at the nose, where the curvature of a
section may step, a double knot leaves it that freedom (Piegl and Tiller [1]_, sections 9.2 and
5.2). Where it strays too far, a place is added half-way.

References
----------
.. [1] L. Piegl, W. Tiller, The NURBS Book, 2nd ed., 1997: interpolation with end derivatives,
   multiple knots (from memory).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
from scipy.interpolate import BSpline, make_interp_spline
from scipy.spatial import cKDTree

from optim.arrays import FloatArray
from optim.geometry.curve import cosine_parameters
from optim.geometry.measures import BESIDE_NOSE
from optim.geometry.section import Section
from optim.geometry.spacing import nose_parameters

Spacing = Literal["cosine", "nose", "even"]
"""How points are spread along the contour."""

DEGREE = 3
"""What every program of the trade reads."""

MILLIMETRE = 1e-3
"""[m]"""

TRUE_ENOUGH = 2e-7
"""Distance from the exact curve at which the spline gets no more knots [chords]: 0.2 micrometres at
a chord of 1 m, a fifth of what is promised."""

MOST_KNOTS = 4000
"""Where refinement ends; smooth contours need less than a hundredth of that."""

LOOKS = 8
"""Places between two knots at which the distance is looked at."""

LENGTH_NODES = np.polynomial.legendre.leggauss(10)
"""Gauss's rule for the length between two places."""

FINE = 4096
"""Intervals of the exact curve in which the foot of a perpendicular is bracketed."""

STEPS, SETTLED = 40, 1e-12
"""Steps to that foot, three or four for a round nose; the last one that matters."""


@dataclass(frozen=True)
class BuiltCurve:
    """A contour at its chord.

    Attributes
    ----------
    chord : float
        As built [m].
    points : (n, 2) array
        Points of the exact curve through which it passes, x from the nose, y up [mm].
    knots : (n + 6,) array
        Length along the contour [mm].
    controls : (n + 2, 2) array
        Control points [mm].
    """

    chord: float
    points: FloatArray
    knots: FloatArray
    controls: FloatArray

    def beziers(self) -> FloatArray:
        """Return the same curve as cubic Bezier pieces, (pieces, 4, 2) [mm]."""
        breaks = np.unique(self.knots)
        spline = BSpline(self.knots, self.controls, DEGREE)
        third = np.diff(breaks)[:, None] / 3.0
        point, slope = spline(breaks), spline(breaks, nu=1)
        return np.stack(
            [point[:-1], point[:-1] + third * slope[:-1], point[1:] - third * slope[1:], point[1:]],
            axis=1,
        )


def sampled(knots: FloatArray, controls: FloatArray, degree: int) -> FloatArray:
    """Return points along a spline, `LOOKS` between two knots, both ends included, (m, 2)."""
    breaks = np.unique(knots)
    share = np.arange(LOOKS) / LOOKS
    at = np.append((breaks[:-1, None] + np.diff(breaks)[:, None] * share).ravel(), breaks[-1])
    return np.asarray(BSpline(knots, controls, degree)(at), dtype=np.float64)


def built_curve(section: Section, chord: float, t: FloatArray, *, refine: bool) -> BuiltCurve:
    """Return the spline of a contour.

    Parameters
    ----------
    section : Section
        A contour without faults.
    chord : float
        As built [m].
    t : (n,) array
        Parameters of the curve through which it passes, rising from -1 to 1, the nose among them.
    refine : bool
        Whether places are added until it is true enough.
    """
    while True:
        knots, controls = _through(section, t)
        if not refine or len(t) > MOST_KNOTS:
            break
        off = distances(section, sampled(knots, controls, DEGREE))
        poor = np.flatnonzero(off[:-1].reshape(-1, LOOKS).max(axis=1) > TRUE_ENOUGH)
        if not poor.size:
            break
        t = np.sort(np.append(t, 0.5 * (t[poor] + t[poor + 1])))
    size = chord / MILLIMETRE
    return BuiltCurve(chord, section.points(t) * size, knots * size, controls * size)


def _through(section: Section, t: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return knots and control points of the spline through the curve at `t`, at chord 1."""
    nose = int(np.searchsorted(t, 0.0))
    length = lengths(section, t)
    points = section.points(t)
    ends = _directions(section, np.array([-1.0, -BESIDE_NOSE, BESIDE_NOSE, 1.0]))
    at_nose = ends[1] + ends[2]
    at_nose /= np.hypot(*at_nose)
    upper = _side(length[: nose + 1], points[: nose + 1], ends[0], at_nose)
    lower = _side(length[nose:], points[nose:], at_nose, ends[3])
    # The nose itself is a control point between two others on the common tangent. Spaced like
    # the knots beside it, it says nothing new, and a double knot remains.
    knots = np.concatenate([upper.t[: -DEGREE - 1], [length[nose]] * 2, lower.t[DEGREE + 1 :]])
    return knots, np.concatenate([upper.c[:-1], lower.c[1:]])


def _side(
    length: FloatArray, points: FloatArray, first: FloatArray, last: FloatArray
) -> BSpline[np.float64]:
    """Return the spline through points, with its directions at both ends."""
    ends: Any = ([(1, first)], [(1, last)])  # the stubs of scipy lack this form
    return make_interp_spline(length, points, DEGREE, bc_type=ends)


def spaced(section: Section, intervals: int, spacing: Spacing) -> FloatArray:
    """Return parameters of the curve, rising from -1 to 1, the nose among them.

    Parameters
    ----------
    section : Section
        The contour.
    intervals : int
        Intervals around the contour, an even number.
    spacing : str
        cosine is dense at the nose and at the edge, nose is denser yet at the nose, even has one
        length of arc on each side.
    """
    if spacing == "cosine":
        return cosine_parameters(intervals)
    if spacing == "nose":
        return nose_parameters(intervals)
    fine = cosine_parameters(FINE)
    length = lengths(section, fine)
    ends = [0.0, length[FINE // 2], length[-1]]
    wanted = np.interp(np.arange(intervals + 1), [0, intervals // 2, intervals], ends)
    t: FloatArray = np.interp(wanted, length, fine)
    t[intervals // 2] = 0.0
    return t


def _directions(section: Section, t: FloatArray) -> FloatArray:
    first = section.curve.derivatives(t, 1)[1]
    return np.asarray(first / np.hypot(first[:, 0], first[:, 1])[:, None])


def lengths(section: Section, t: FloatArray) -> FloatArray:
    """Return the length along the contour from the first to each parameter [chords]."""
    nodes, weights = LENGTH_NODES
    half = 0.5 * np.diff(t)[:, None]
    at = 0.5 * (t[1:] + t[:-1])[:, None] + half * nodes
    first = section.curve.derivatives(at.ravel(), 1)[1]
    speed = np.hypot(first[:, 0], first[:, 1]).reshape(at.shape)
    return np.concatenate([[0.0], np.cumsum((half * weights * speed).sum(axis=1))])


def distances(section: Section, points: FloatArray) -> FloatArray:
    """Return how far points are from the exact contour, along its normal, (n,) [chords].

    Parameters
    ----------
    section : Section
        The contour.
    points : (n, 2) array
        Anywhere near it [chords].

    Notes
    -----
    Newton's method for the foot of the perpendicular, kept by bisection between the neighbours of
    the nearest of `FINE` places; beyond an end of the contour the distance is that from the end.
    """
    fine = cosine_parameters(FINE)
    nearest, k = cKDTree(section.points(fine)).query(points)
    low, high, t = fine[np.maximum(k - 1, 0)], fine[np.minimum(k + 1, FINE)], fine[k]
    for _ in range(STEPS):
        point, first, second = section.curve.derivatives(t, 2)
        off = point - points
        slope = (off * first).sum(axis=1)
        bend = (first * first).sum(axis=1) + (off * second).sum(axis=1)
        low, high = np.where(slope < 0.0, t, low), np.where(slope < 0.0, high, t)
        sought = t - slope / np.where(bend > 0.0, bend, np.inf)
        inside = (bend > 0.0) & (low <= sought) & (sought <= high)
        moved = np.where(inside, sought, 0.5 * (low + high))
        if np.abs(moved - t).max() < SETTLED:
            break
        t = moved
    found = section.points(t) - points
    return np.minimum(np.hypot(found[:, 0], found[:, 1]), nearest)
