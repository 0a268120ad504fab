"""Section: a closed contour of chord 1 with its measures.

The contour runs from the upper trailing edge along the upper side to the nose and back along the
lower side. x is in chords from the nose, y is up. The definitions of thickness and camber are in
`measures`; measures presume a contour without faults (see `validity`).
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from optim.arrays import FloatArray, check_finite
from optim.errors import Fault, SectionError
from optim.geometry import measures, ordinates, validity
from optim.geometry.curve import Curve


@dataclass(frozen=True)
class Section:
    """A closed contour of chord 1.

    Attributes
    ----------
    name : str
        What it is called on the screen.
    curve : Curve
        The exact contour.
    rotation : float
        Angle by which normalising turned the points of a file, anticlockwise [rad].
    scale : float
        Factor by which normalising stretched them [-].
    """

    name: str
    curve: Curve
    rotation: float = 0.0
    scale: float = 1.0

    @cached_property
    def samples(self) -> measures.Samples:
        """The curve at full cosine spacing, from which every root is bracketed."""
        return measures.sample(self.curve)

    @cached_property
    def foremost(self) -> float:
        """Parameter of the point with the least x, where the sides meet [-]."""
        return measures.foremost(self.curve, self.samples)

    def points(self, t: FloatArray) -> FloatArray:
        """Return the points at the parameters `t`, -1 to 1, (n, 2) [chords]."""
        return self.curve.point(t)

    def upper_lower(self, x: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return the ordinates of the upper and the lower side.

        Parameters
        ----------
        x : (n,) array
            Stations, 0 to 1 [chords].

        Returns
        -------
        tuple of (n,) array
            y_upper and y_lower [chords].

        Raises
        ------
        ValueError
            If a station lies outside the chord.
        """
        stations = np.atleast_1d(np.asarray(x, dtype=np.float64))
        check_finite("x", stations)
        if np.any((stations < 0.0) | (stations > 1.0)):
            raise ValueError("Stations must lie between 0 and 1 chord.")
        upper = measures.stations(self.curve, self.samples, self.foremost, stations, "upper")
        lower = measures.stations(self.curve, self.samples, self.foremost, stations, "lower")
        both = self.curve.point(np.concatenate([upper, lower]))[:, 1]
        return both[: stations.size], both[stations.size :]

    def depth(self, x: float) -> float:
        """Return the height of the section across the chord at one station x [chords]."""
        upper, lower = self.upper_lower(np.array([x]))
        return float(upper[0] - lower[0])

    @cached_property
    def sampled_sides(self) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Parameters of the upper and of the lower side at equal stations, and those stations."""
        if self.curve.abscissa_is_square:
            half = measures.SAMPLES // 2
            upper, lower = self.samples.t[half:0:-1], self.samples.t[half:-1]
            return upper, lower, lower**2
        x = self.samples.point[: self.samples.foremost, 0][:0:-1]
        x = x[(x > 0.0) & (x < 1.0)]
        upper, lower = (
            measures.stations(self.curve, self.samples, self.foremost, x, side)
            for side in ("upper", "lower")
        )
        return upper, lower, x

    @cached_property
    def sampled_ordinates(self) -> tuple[FloatArray, FloatArray]:
        """Ordinates of both sides at the stations of `sampled_sides` [chords]."""
        upper, lower, _ = self.sampled_sides
        if self.curve.abscissa_is_square:
            half = measures.SAMPLES // 2
            y = self.samples.point[:, 1]
            return y[half:0:-1], y[half:-1]
        both = self.curve.point(np.concatenate([upper, lower]))[:, 1]
        return both[: upper.size], both[upper.size :]

    def _extreme(self, a: float, b: float) -> measures.Extreme:
        """Return the maximum of a y_upper + b y_lower over the chord."""
        upper, lower, x = self.sampled_sides
        values = a * self.sampled_ordinates[0] + b * self.sampled_ordinates[1]
        k = int(np.argmax(values))
        if k in (0, x.size - 1):  # greatest at an end: there is no stationary point to refine
            return measures.Extreme(float(values[k]), float(x[k]))
        bracket = (float(x[k - 1]), float(x[k + 1]))
        return measures.extreme(self.curve, (float(upper[k]), float(lower[k])), bracket, (a, b))

    @cached_property
    def _thickness(self) -> measures.Extreme:
        return self._extreme(1.0, -1.0)

    @cached_property
    def _camber(self) -> measures.Extreme:
        mean = 0.5 * (self.sampled_ordinates[0] + self.sampled_ordinates[1])
        if np.abs(mean).max() < measures.LEAST_CAMBER:
            return measures.Extreme(0.0, math.nan)
        if mean.max() >= -mean.min():
            return self._extreme(0.5, 0.5)
        below = self._extreme(-0.5, -0.5)
        return measures.Extreme(-below.value, below.x)

    @property
    def thickness(self) -> float:
        """Greatest depth across the chord [chords]."""
        return self._thickness.value

    @property
    def thickness_x(self) -> float:
        """Where the depth is greatest [chords]."""
        return self._thickness.x

    @property
    def camber(self) -> float:
        """Height of the mean line where it is farthest from the chord, with its sign [chords]."""
        return self._camber.value

    @property
    def camber_x(self) -> float:
        """Where the camber is greatest [chords]; not-a-number for a symmetric section."""
        return self._camber.x

    @cached_property
    def _area_and_length(self) -> tuple[float, float]:
        return measures.area_and_length(self.curve)

    @property
    def area(self) -> float:
        """Enclosed area, an open edge closed by its straight base [chords**2]."""
        return self._area_and_length[0]

    @property
    def perimeter(self) -> float:
        """Length of the upper and the lower side together, without the base [chords]."""
        return self._area_and_length[1]

    @cached_property
    def nose_radius(self) -> float:
        """Radius of curvature at the nose, t = 0 [chords].

        The smaller one if the sides have two; zero if the nose is not round.
        """
        sharpest = float(self.curvature(np.array([-1.0, 1.0]) * measures.BESIDE_NOSE).max())
        return 1.0 / sharpest if sharpest > 0.0 else 0.0

    @cached_property
    def trailing_edge_gap(self) -> float:
        """Distance between the ends of the two sides [chords]."""
        (x_upper, y_upper), (x_lower, y_lower) = self.samples.point[[0, -1]].tolist()
        return math.hypot(x_upper - x_lower, y_upper - y_lower)

    @cached_property
    def trailing_edge_angle(self) -> float:
        """Angle between the two sides at the edge, positive if they close downstream [rad]."""
        (dx_upper, dy_upper), (dx_lower, dy_lower) = self.samples.first[[0, -1]].tolist()
        return math.atan2(dy_lower, dx_lower) - math.atan2(-dy_upper, -dx_upper)

    def curvature(self, t: FloatArray) -> FloatArray:
        """Return the curvature at `t`, positive where the contour is convex, (n,) [1/chord]."""
        _, first, second = self.curve.derivatives(t, 2)
        return measures.curvature(first, second)

    def curvature_sign_changes(self) -> FloatArray:
        """Return the parameters where the contour turns from convex to concave or back [-]."""
        return measures.sign_changes(self.curve, self.samples)


def section_from_coordinates(xy: FloatArray, name: str) -> tuple[Section, tuple[str, ...]]:
    """Return the section through points, on its chord line, and what was changed.

    Parameters
    ----------
    xy : (n, 2) array
        9 to 5000 points in any unit, as one chain around the contour in either sense or as two
        sides, the edge open or closed.
    name : str
        What it is called on the screen.

    Returns
    -------
    section : Section
        A spline through the points; `rotation` and `scale` say how they were normalised.
    notes : tuple of str
        One sentence for each change.

    Raises
    ------
    SectionError
        If the points are no section; every reason with its place.
    """
    points, notes = ordinates.contour(xy)
    curve, rotation, scale = ordinates.normalised(points, notes)
    section = Section(name, curve, rotation, scale)
    found = validity.faults(section)
    if found:
        raise SectionError([Fault(fault.sentence) for fault in found])
    return section, tuple(notes)
