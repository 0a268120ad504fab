"""Points of a section file -> contour order, chord line on the x axis, chord 1.

Accepted are one chain around the contour in either sense, from the edge or closed from elsewhere,
and two chains, one a side, each from the nose or each from the edge. The chord line runs from the
middle of the edge to the point of the curve farthest from it. Whatever is changed is said.
"""

from __future__ import annotations

import math

import numpy as np
from scipy.interpolate import CubicSpline

from optim.arrays import FloatArray
from optim.errors import Fault, SectionError
from optim.geometry import polygon, spline
from optim.geometry.chordline import chord_line

POINTS = (9, 5000)
"""Fewest points that show a section, and the most that are dealt with in a second; more than a few
hundred describe the noise of a digitiser."""

JUMP = 0.5
"""Two neighbours farther apart than this belong to two chains [box lengths]."""

EDGE = 0.02
"""A chain whose ends are this close to its farthest abscissa starts at the edge [box lengths]; rule
of thumb."""

STEEP = 5.0
"""An end piece this much steeper than long belongs to the base of an open edge; rule of thumb."""

WIDEST_BASE = 0.1
"""A base is not higher than this [box lengths]; rule of thumb."""

LEAST_AREA = 1e-4
"""Area of a section about 0.02 % thick [box lengths**2]; less is a line."""

REPEATED = 1e-9
"""Neighbours closer than this are one point [box lengths]."""

SIZES = (1e-6, 1e6)
"""Length of the box in the unit of the file: a kilometre in millimetres is the largest."""

FARTHEST = 1e6
"""A section farther than this from the origin has lost its last digits [box lengths]."""

SMALLEST_CHANGE = 1e-5
"""Smoothing below this is not worth a word: files have five decimals [chords]."""

SMALLEST_TURN = 1e-6
"""Rotations [rad], shifts and stretches below this are not worth a word."""


def refused(message: str) -> SectionError:
    """Return the error that says why points are no section."""
    return SectionError([Fault(message)])


def contour(xy: FloatArray) -> tuple[FloatArray, list[str]]:
    """Return the points in contour order and what was done to them.

    Parameters
    ----------
    xy : (n, 2) array
        Points of one or two chains, in any unit.

    Raises
    ------
    SectionError
        If they are no section; every reason with its place.
    """
    points, size = _checked(np.asarray(xy, dtype=np.float64))
    notes: list[str] = []
    points = _one_chain(points, size, notes)
    points = _without_repeats(points, size, notes)
    points = _from_the_edge(points, size, notes)
    points = _without_base(points, size, notes)
    if points.shape[0] < POINTS[0]:
        raise refused(
            f"A section needs at least {POINTS[0]} different points; found {points.shape[0]}."
        )
    area = _area(points)
    if abs(area) < LEAST_AREA * size**2:
        raise refused(
            f"The section has no thickness: its area is {abs(area) / size**2:.1e} chord**2."
        )
    if area < 0.0:
        points = points[::-1].copy()
        notes.append("The points ran along the lower side first; they were turned round.")
    if np.hypot(*(points[0] - points[-1])) <= REPEATED * size:
        points[-1] = points[0]  # closed but for rounding, which might cross the ends
    _look_for_crossings(points, size)
    return points, notes


def _checked(xy: FloatArray) -> tuple[FloatArray, float]:
    """Return the points and the length of the box around them."""
    if xy.ndim != 2 or xy.shape[1] != 2:
        raise refused(f"A section is a list of points x, y; found an array of shape {xy.shape}.")
    if xy.shape[0] < POINTS[0]:
        raise refused(f"A section needs at least {POINTS[0]} points; found {xy.shape[0]}.")
    if xy.shape[0] > POINTS[1]:
        raise refused(f"At most {POINTS[1]} points are accepted; found {xy.shape[0]}.")
    bad = np.flatnonzero(~np.isfinite(xy).all(axis=1))
    if bad.size:
        raise refused(
            f"Coordinates must be finite; point {bad[0] + 1} is ({xy[bad[0], 0]}, {xy[bad[0], 1]})."
        )
    width, height = np.ptp(xy, axis=0).tolist()
    if width <= 0.0 or height > width:
        raise refused(
            "A section is longer along x than high; "
            f"the points span {width:.4g} along x and {height:.4g} along y."
        )
    if not SIZES[0] <= width <= SIZES[1]:
        raise refused(
            f"The length of a section must be {SIZES[0]:g} to {SIZES[1]:g} in the unit of its "
            f"file; found {width:.4g}."
        )
    if np.abs(xy).max() > FARTHEST * width:
        raise refused(
            f"The section is {width:.4g} long and {np.abs(xy).max():.4g} from the origin: its "
            "shape is lost in rounding; move it to the origin."
        )
    return xy, width


def _one_chain(points: FloatArray, size: float, notes: list[str]) -> FloatArray:
    """Return two chains, one a side, as one chain from the edge around the nose."""
    steps = np.hypot(*np.diff(points, axis=0).T)
    jumps = np.flatnonzero(steps > JUMP * size)
    if jumps.size == 0:
        return points
    if jumps.size > 1:
        places = " and ".join(str(j + 1) for j in jumps[:2].tolist())
        raise refused(
            "A section is one chain of points or two, one a side; these jump by more than half "
            f"a chord {jumps.size} times, first after the points {places}."
        )
    cut = int(jumps[0]) + 1
    first, second = points[:cut], points[cut:]
    if first[0, 0] < first[-1, 0]:
        notes.append("The points came as two sides from the nose; they were joined there.")
        return np.concatenate([first[::-1], second])
    notes.append("The points came as two sides from the edge; they were joined at the nose.")
    return np.concatenate([first, second[::-1]])


def _without_repeats(points: FloatArray, size: float, notes: list[str]) -> FloatArray:
    keep = np.ones(points.shape[0], dtype=np.bool_)
    keep[1:] = np.hypot(*np.diff(points, axis=0).T) > REPEATED * size
    if not keep.all():
        notes.append(f"Repeated points were left out: {int((~keep).sum())}.")
    return points[keep]


def _from_the_edge(points: FloatArray, size: float, notes: list[str]) -> FloatArray:
    """Return a closed chain that starts at the nose or on a side as one from the edge."""
    if points[[0, -1], 0].max() >= points[:, 0].max() - EDGE * size:
        return points
    if _turns_back(points):
        raise refused("The edge of the section lies ahead of its nose; x runs from nose to edge.")
    if np.hypot(*(points[0] - points[-1])) <= REPEATED * size:
        points = points[:-1]
    edge = int(np.argmax(points[:, 0]))
    following = points[(edge + 1) % points.shape[0]]
    chain = np.roll(points, -edge, axis=0)
    if _is_base(points[edge], following, size):
        chain = np.roll(chain, -1, axis=0)
    elif not _is_base(points[edge - 1], points[edge], size):
        chain = np.concatenate([chain, chain[:1]])
    if not _turns_back(chain):
        raise refused(
            "The contour is round where x is largest; a chain that does not start at its edge "
            "must turn back there."
        )
    notes.append("The points did not start at the edge; the closed chain was made to start there.")
    return chain


def _turns_back(chain: FloatArray) -> bool:
    """Whether a chain ends against the direction in which it starts, as it does at an edge."""
    return bool((chain[1] - chain[0]) @ (chain[-1] - chain[-2]) < 0.0)


def _is_base(a: FloatArray, b: FloatArray, size: float) -> bool:
    """Whether two neighbours at an end of the contour lie on the base of an open edge."""
    dx, dy = np.abs(b - a).tolist()
    return bool(dy > STEEP * dx and dy < WIDEST_BASE * size)


def _without_base(points: FloatArray, size: float, notes: list[str]) -> FloatArray:
    """Return the chain without the points that lie on the base between its two corners."""
    first, last = 0, points.shape[0]
    while last - first > 3 and _is_base(points[first], points[first + 1], size):
        first += 1
    while last - first > 3 and _is_base(points[last - 1], points[last - 2], size):
        last -= 1
    left_out = points.shape[0] - (last - first)
    if left_out:
        notes.append(f"Points on the base of the open edge were left out: {left_out}.")
    return points[first:last]


def _area(points: FloatArray) -> float:
    """Return the area inside the closed chain, positive if it runs anticlockwise."""
    x, y = points.T
    return float(0.5 * np.sum(x * np.roll(y, -1) - y * np.roll(x, -1)))


def _look_for_crossings(points: FloatArray, size: float) -> None:
    """Raise SectionError if the chain crosses itself or has a spike."""
    nose_x = points[:, 0].min()
    faults = [
        Fault(f"The contour crosses itself at x/c = {(x - nose_x) / size:.4f}.")
        for x in sorted(polygon.crossings(points)[:, 0].tolist())
    ]
    for k in polygon.spikes(polygon.turns(np.diff(points, axis=0))):
        x, y = points[k + 1].tolist()
        if not _is_nose(points, k + 1):
            faults.append(Fault(f"The contour has a spike at the point ({x:.6g}, {y:.6g})."))
    if faults:
        raise SectionError(faults)


def _is_nose(points: FloatArray, k: int) -> bool:
    """Whether the point is the foremost or next to it, where a chain may turn sharply."""
    return abs(k - int(np.argmin(points[:, 0]))) <= 1


def normalised(points: FloatArray, notes: list[str]) -> tuple[spline.SplineCurve, float, float]:
    """Return the curve along the points on the chord line, the rotation [rad] and the scale.

    Parameters
    ----------
    points : (n, 2) array
        In contour order.
    notes : list of str
        What was changed is added.
    """
    raw, change, left_out = spline.through(points)
    line = chord_line(raw, 0.0)
    knots = raw.spline.x
    placed = CubicSpline(knots, line.placed(raw.point(knots)))
    if left_out:
        notes.append(f"Points all but on their neighbours were left out: {left_out}.")
    if change > SMALLEST_CHANGE:
        notes.append(f"The points were smoothed, by {change:.1e} chords at most.")
    if abs(line.rotation) > SMALLEST_TURN:
        notes.append(f"The chord line was turned by {math.degrees(line.rotation):+.4f} degrees.")
    if abs(line.scale - 1.0) > SMALLEST_TURN:
        notes.append(f"The chord was scaled to 1 by the factor {line.scale:.6g}.")
    if max(map(abs, line.nose)) > SMALLEST_TURN:
        x, y = line.nose
        notes.append(f"The nose was moved to the origin from ({x:.6f}, {y:.6f}).")
    return spline.SplineCurve(placed), line.rotation, line.scale
