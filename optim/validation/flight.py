"""A section as it was measured, flown at the conditions of the test."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from optim.aerodynamics.evaluator import SectionEvaluator
from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow
from optim.aerodynamics.sweep import Derived, sweep
from optim.arrays import BoolArray, FloatArray
from optim.geometry.naca import naca_section
from optim.geometry.section import Section
from optim.geometry.spacing import panel_nodes

PANELS = 160
"""Panels of every case: those of a study unless it asks for others."""


@dataclass(frozen=True)
class Model:
    """A section with its evaluator, set up once for all conditions of a source.

    Angles are in degrees from the chord line of the report; a table of ordinates may be turned a
    little when its points are put on their own chord line.
    """

    section: Section
    evaluator: SectionEvaluator

    def angles(self, point: OperatingPoint, degrees: Sequence[float]) -> list[SectionFlow]:
        """Return the flows at ascending angles."""
        return self.swept(point, degrees)[0]

    def swept(
        self, point: OperatingPoint, degrees: Sequence[float]
    ) -> tuple[list[SectionFlow], Derived]:
        """Return the flows at ascending angles and what they say together."""
        wanted = [math.radians(angle) + self.section.rotation for angle in degrees]
        return sweep(self.evaluator, point, wanted)

    def lifts(self, point: OperatingPoint, lifts: FloatArray) -> list[SectionFlow]:
        """Return the flows at lift coefficients, in their order; walked outwards from zero."""
        found: dict[int, SectionFlow] = {}
        order = np.argsort(np.abs(lifts), kind="stable")
        for side in (lifts >= 0.0, lifts < 0.0):
            walk = [int(i) for i in order if side[i]]
            points = [replace(point, alpha=None, cl=float(lifts[i])) for i in walk]
            found.update(zip(walk, self.evaluator.flows(points), strict=True))
        return [found[i] for i in range(len(lifts))]

    def degrees(self, alpha: float) -> float:
        """Return an angle as the report counts it [deg]."""
        return math.degrees(alpha - self.section.rotation)


def model(section: Section) -> Model:
    """Return a section ready to fly."""
    return Model(section, SectionEvaluator(panel_nodes(section, PANELS)))


def naca(number: str) -> Model:
    """Return a NACA section, by its formula, ready to fly."""
    return model(naca_section(number))


def values(flows: Sequence[SectionFlow], name: str) -> FloatArray:
    """Return one coefficient of every flow; not-a-number without an answer."""
    return np.array([getattr(flow, name) for flow in flows])


def mean_error(measured: FloatArray, computed: FloatArray) -> float:
    """Return the mean size of the relative errors; not-a-number if an answer is missing."""
    return float(np.mean(np.abs(computed / measured - 1.0)))


def pressure(flow: SectionFlow, side: str, x: FloatArray) -> FloatArray:
    """Return the pressure coefficient of one side at x/c; not-a-number without an answer."""
    if flow.surface is None:
        return np.full(len(x), math.nan)
    here = on_side(flow, side)
    order = np.argsort(flow.surface.x[here], kind="stable")
    return np.interp(x, flow.surface.x[here][order], flow.surface.cp[here][order])


def on_side(flow: SectionFlow, side: str) -> BoolArray:
    """Return which points of a flow's surface lie on the upper or lower side or in the wake.

    Points of the other side between the stagnation point and the nose are left out: a tap's side
    is told by the nose, not by the stagnation point.
    """
    if flow.surface is None:
        return np.zeros(0, dtype=bool)
    surface, sides = flow.surface, np.array(flow.surface.side)
    wake = np.asarray(sides == "wake")
    if side == "wake":
        return wake
    count = int(np.count_nonzero(~wake))
    upper = int(np.count_nonzero(sides == "upper"))
    contour = np.r_[np.arange(upper - 1, -1, -1), np.arange(upper, count)]
    nose = int(np.argmin(surface.x[contour]))
    chosen = contour[: nose + 1] if side == "upper" else contour[nose:]
    mask = np.zeros(len(surface.side), dtype=bool)
    mask[chosen] = True
    return mask


def curve(flow: SectionFlow, side: str) -> tuple[FloatArray, FloatArray]:
    """Return x/c and pressure coefficient along one side, for a line."""
    if flow.surface is None:
        return np.zeros(0), np.zeros(0)
    here = on_side(flow, side)
    order = np.argsort(flow.surface.x[here], kind="stable")
    return flow.surface.x[here][order], flow.surface.cp[here][order]
