"""The chord line: from the point of the contour farthest from the edge to the middle of the edge.

At that point the contour is square to the chord line, so a contour placed on it has its nose at
the origin with a vertical tangent, and no point ahead of it.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from optim.arrays import FloatArray
from optim.geometry.curve import Curve

NEWTON_STEPS = 20
"""Budget of the farthest point; from a start in the nose five or six are taken."""


@dataclass(frozen=True, slots=True)
class ChordLine:
    """How a contour is placed on its chord line: moved, turned and scaled.

    Attributes
    ----------
    t : float
        Parameter of the nose [-].
    nose : (float, float)
        The nose, which goes to the origin.
    rotation : float
        Angle by which the contour is turned, anticlockwise [rad].
    scale : float
        Factor by which it is then stretched [-].
    """

    t: float
    nose: tuple[float, float]
    rotation: float
    scale: float

    def placed(self, points: FloatArray) -> FloatArray:
        """Return points of the contour on its chord line, (n, 2) [chords]."""
        return self.scale * self.turned(points - np.array(self.nose))

    def turned(self, vectors: FloatArray) -> FloatArray:
        """Return directions of the contour on its chord line, (n, 2)."""
        c, s = math.cos(self.rotation), math.sin(self.rotation)
        return np.asarray(vectors @ np.array([[c, s], [-s, c]]), dtype=np.float64)


def chord_line(curve: Curve, start: float, span: tuple[float, float] = (-1.0, 1.0)) -> ChordLine:
    """Return the chord line of a contour.

    Parameters
    ----------
    curve : Curve
        The contour, in any frame.
    start : float
        Parameter of a point close to the nose; kept if the distance has no maximum near it.
    span : (float, float)
        Parameters of the two ends at the edge.
    """
    edge = curve.point(np.array(span)).mean(axis=0)
    t = start
    for _ in range(NEWTON_STEPS):
        point, first, second = (d[0] for d in curve.derivatives(np.array([t]), 2))
        arm = point - edge
        bend = float(first @ first + arm @ second)
        if bend >= 0.0:
            t = start
            break
        step = -float(arm @ first) / bend
        t = min(max(t + step, span[0]), span[1])
        if abs(step) < 1e-15:
            break
    nose = curve.point(np.array([t]))[0]
    along = (edge - nose).tolist()
    return ChordLine(
        t=float(t),
        nose=(float(nose[0]), float(nose[1])),
        rotation=-math.atan2(along[1], along[0]),
        scale=1.0 / math.hypot(*along),
    )
