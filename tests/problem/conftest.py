"""An analytic stand-in for the evaluator, for tests of what a problem does with flows."""

from __future__ import annotations

import math

import numpy as np
import pytest

from optim.aerodynamics.operating_point import SectionFlow, SideState
from optim.outcomes import Outcome
from optim.problem.problem import Problem
from optim.study.load import parse_study

PANELS = 160

SOLVES_OF_A_PEAK = 9
"""What the stand-in says that a peak costs."""

STUDY = """\
study: tollgate-6-wing
section:
  shape: cst
  coefficients: {upper: 5, lower: 5}
  baseline: naca:2412
  freedom: 0.12
  trailing_edge: 0.8 mm
chord: 212 mm
air: {altitude: 500 m, warmer_than_standard: 10 K}
craft: {mass: 6.0 kg, wing_area: 0.55 m^2}
conditions:
  slow: {speed: 12.5 m/s, lift: maximum}
  survey: {speed: 18 m/s}
  loiter: {speed: 14.5 m/s}
objectives:
  - maximise: lift_to_drag
    at: {survey: 0.7, loiter: 0.3}
  - minimise: nose_down_moment
    at: survey
constraints:
  - {quantity: thickness, min: 10 %}
  - {quantity: depth, at: 30 %, min: 17 mm}
  - {quantity: cl_max, condition: slow, min: 1.40}
"""


class ThinSection:
    """Thin-aerofoil lift with a made-up drag bucket and stall: smooth, cheap and easy to check.

    The lift slope is 2 pi; drag grows with thickness and away from the camber's own lift; the
    peak of the lift grows with thickness and camber. Nothing here claims to be aerodynamics.
    """

    def __init__(self, nodes):
        half = (len(nodes) - 1) // 2
        upper, lower = nodes[half::-1, 1], nodes[half:, 1]
        self.thickness = float(np.max(upper - lower))
        self.camber = float(np.max(upper + lower)) / 2.0
        self.asked = []
        self.solves = 0

    @property
    def peak(self):
        return 0.7 + 5.0 * self.thickness + 6.0 * self.camber

    def flows(self, points):
        self.asked.append(("flows", tuple(points)))
        self.solves += len(points)
        return [self._flow(point) for point in points]

    def maximum_lift(self, point):
        self.asked.append(("maximum_lift", point))
        self.solves += SOLVES_OF_A_PEAK
        return self._converged(point, self.peak)

    def _flow(self, point):
        cl = point.cl if point.cl is not None else 2.0 * math.pi * (point.alpha + 2 * self.camber)
        if cl > self.peak:
            return SectionFlow(
                point, Outcome.OUT_OF_RANGE, PANELS, iterations=40, residual=1e-2 * cl
            )
        return self._converged(point, cl)

    def _converged(self, point, cl):
        own = 4.0 * math.pi * self.camber
        cd = 0.005 + 0.1 * self.thickness**2 + 0.01 * (cl - own) ** 2
        return SectionFlow(
            point=point,
            outcome=Outcome.CONVERGED,
            panels=PANELS,
            alpha=cl / (2.0 * math.pi) - 2.0 * self.camber,
            cl=cl,
            cd=cd,
            cd_friction=0.7 * cd,
            cd_pressure=0.3 * cd,
            cm_quarter=-2.5 * self.camber,
            x_cp=0.25 + 2.5 * self.camber / cl,
            stagnation_x=0.001,
            cp_min=-1.0 - cl,
            cp_min_x=0.05,
            upper=SideState(0.5, "natural"),
            lower=SideState(),
            iterations=8,
            residual=1e-10,
        )


@pytest.fixture
def study_text():
    """A study of an invented survey wing with all kinds of parts."""
    return STUDY


@pytest.fixture
def make_problem():
    """Return the problem of a study's text, flown by the stand-in (or by another maker)."""

    def make(text=STUDY, solver=ThinSection):
        return Problem.from_study(parse_study(text), solver)

    return make


@pytest.fixture
def thin_section():
    """Return the stand-in's class."""
    return ThinSection
