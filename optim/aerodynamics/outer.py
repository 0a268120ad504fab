"""What a section's outer flow is for all its conditions: matrices, nodes and lengths."""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.layout import arc_lengths
from optim.aerodynamics.wake import outer_flow
from optim.arrays import FloatArray, check_finite, check_shape

LATEST_TRANSITION = 0.98
"""Layers turn here at the latest [x/c]. A layer that is laminar so far separates ahead of the edge
and turns at once in the near wake; left laminar to the edge, it has no solution that an iteration
finds. Turbulent friction on the last 2 % adds less than 1 % to the least drag of a section."""

BURIED_GAP = 0.02
"""Gap of an edge of which the outer flow sees half [chords]. A thinner base is buried in the
layers, whose displacement thickness at the edge is 0.5 to 2 % of the chord: outside them the flow
closes behind it as behind a sharp edge. With a base of 0.25 % left as it is, the lift slope is 3.5
% higher than with a sharp edge, and 5.7 % higher than measured over thirteen four- and five-digit
sections (Abbott, von Doenhoff, Stivers, NACA Report 824, 1945); closed, 2.5 %."""

LEAST_GAP = 1e-5
"""Edges are opened at least so far [chords]: the two edge nodes of a closed one would have the same
equation. Lift, moment and speeds of exact closed sections stay within a tenth of the error of the
panels (tests/aerodynamics)."""


def check_contour(nodes: FloatArray) -> None:
    """Raise ValueError unless the nodes are finite points."""
    check_shape("nodes", nodes, {"panels + 1": None, "x, y": 2})
    check_finite("nodes", nodes)


def bury_base(nodes: FloatArray) -> FloatArray:
    """Return the contour that the outer flow sees: a thin base is closed by a wedge.

    The gap h becomes h r/(1 + r) with r = (h/BURIED_GAP)^2, and either side moves by half of the
    difference times x: nothing at the nose, and at the edge little beside the layer.
    """
    check_contour(nodes)
    base = nodes[0] - nodes[-1]
    ratio = float(base @ base) / BURIED_GAP**2
    upper = np.arange(len(nodes)) <= np.argmin(nodes[:, 0])
    half = np.where(upper, 0.5, -0.5) * nodes[:, 0] / (1.0 + ratio)
    return np.asarray(nodes - half[:, None] * base)


def open_edge(nodes: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return x and y of the nodes, the last ones moved apart if the edge is closed."""
    x = np.array(nodes[:, 0])
    y = np.array(nodes[:, 1])
    gap = math.hypot(x[0] - x[-1], y[0] - y[-1])
    if gap < LEAST_GAP:
        # across the bisector of the two edge panels
        bx = (x[0] - x[1]) / math.hypot(x[0] - x[1], y[0] - y[1])
        by = (y[0] - y[1]) / math.hypot(x[0] - x[1], y[0] - y[1])
        lx = (x[-1] - x[-2]) / math.hypot(x[-1] - x[-2], y[-1] - y[-2])
        ly = (y[-1] - y[-2]) / math.hypot(x[-1] - x[-2], y[-1] - y[-2])
        norm = math.hypot(bx + lx, by + ly)
        shift = 0.5 * LEAST_GAP / norm
        middle = (0.5 * (x[0] + x[-1]), 0.5 * (y[0] + y[-1]))
        x[0], y[0] = middle[0] - (by + ly) * shift, middle[1] + (bx + lx) * shift
        x[-1], y[-1] = middle[0] + (by + ly) * shift, middle[1] - (bx + lx) * shift
    return x, y


class Outer:
    """The outer flow about one section.

    Parameters
    ----------
    nodes : (panels + 1, 2) array
        Contour from the upper edge over the nose to the lower edge [chords].

    Attributes
    ----------
    x, y, s : (n,) array
        Nodes and their length along the contour.
    xw, yw, sw : (w,) array
        The same of the wake.
    stream, influence : (n + w, 2), (n + w, n + w) array
        Speeds in unit streams at 0 and 90 degrees, and by the signed mass defect.
    gap : float
        Gap of the edge that the outer flow sees [chords].
    """

    def __init__(self, nodes: FloatArray) -> None:
        check_contour(nodes)
        self.x, self.y = open_edge(nodes)
        self.stream, self.influence, self.xw, self.yw = outer_flow(self.x, self.y)
        self.n = len(self.x)
        self.total = len(self.influence)
        self.s = np.zeros(self.n)
        arc_lengths(self.x, self.y, self.s)
        self.sw = np.zeros(len(self.xw))
        arc_lengths(self.xw, self.yw, self.sw)
        self.gap = math.hypot(self.x[0] - self.x[-1], self.y[0] - self.y[-1])
        self.nose = int(np.argmin(self.x))
        self.s_nose = float(self.s[self.nose])

    def trips(self, upper: float, lower: float) -> FloatArray:
        """Return the lengths along the contour of forced transition, given as x/c.

        A layer turns at LATEST_TRANSITION at the latest.
        """
        x, s, nose = self.x, self.s, self.nose
        up = np.interp(-min(upper, LATEST_TRANSITION), -x[: nose + 1], s[: nose + 1])
        low = np.interp(min(lower, LATEST_TRANSITION), x[nose:], s[nose:])
        return np.array([float(up), float(low)])

    def angle_of_lift(self, cl: float) -> float:
        """Return the angle at which the inviscid circulation gives a lift; nan if none does."""
        step = np.diff(self.s)
        q = self.stream[: self.n]
        circulation = -2.0 * np.sum(0.5 * (q[1:] + q[:-1]) * step[:, None], axis=0)
        size = math.hypot(circulation[0], circulation[1])
        if abs(cl) >= size:
            return math.nan
        return math.asin(cl / size) - math.atan2(circulation[0], circulation[1])
