"""A small run, recorded from closed-form flows, for whatever shows an archive."""

import math
from dataclasses import replace

import numpy as np
from scipy.interpolate import CubicSpline

from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow, SideState, Surface
from optim.archive.journal import Journal
from optim.archive.writer import finish
from optim.outcomes import Outcome
from optim.problem.pareto import hypervolume
from optim.problem.problem import Problem
from optim.runner.records import generation_record, run_header
from optim.search.space import SearchState
from optim.study.load import parse_study

STUDY = """\
study: paper-plane
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
  survey: {speed: 18 m/s}
  loiter: {speed: 14.5 m/s}
  slow: {speed: 12.5 m/s, lift: maximum}
objectives:
  - maximise: lift_to_drag
    at: {survey: 0.7, loiter: 0.3}
  - minimise: nose_down_moment
    at: survey
constraints:
  - {quantity: thickness, min: 10 %}
  - {quantity: depth, at: 30 %, min: 17 mm}
  - {quantity: cl_max, condition: slow, min: 1.40}
search: {population: 24, generations: 3, seed: 5}
"""

POPULATION, GENERATIONS = 24, 3


def greatest(values):
    """The top of a curve through values at even steps: of the section, whatever its panels."""
    steps = np.arange(len(values))
    return float(CubicSpline(steps, values)(np.linspace(0, steps[-1], 40 * len(steps))).max())


class ClosedForm:
    """Flows that follow from thickness, camber and the point by made-up formulas.

    Nothing here claims to be aerodynamics; a peak that thin sections miss makes failures.
    """

    solves = 3

    def __init__(self, nodes):
        half = (len(nodes) - 1) // 2
        upper, lower = nodes[half::-1, 1], nodes[half:, 1]
        self.nodes = nodes
        self.panels = len(nodes) - 1
        self.thickness = greatest(upper - lower)
        self.camber = greatest(upper + lower) / 2.0

    def flows(self, points):
        return [self._flow(point) for point in points]

    def solve(self, point, near=None, *, patient=True):  # noqa: ARG002  the evaluator's form
        return self._flow(point), None

    def maximum_lift(self, point):
        if self.thickness < 0.105:
            return SectionFlow(point, Outcome.NO_PEAK, self.panels, iterations=99)
        return self._converged(point, 0.7 + 5.0 * self.thickness + 6.0 * self.camber)

    def inviscid(self, *, alpha=None, cl=None, mach=0.0):
        angle = alpha if alpha is not None else cl / (2.0 * math.pi) - 2.0 * self.camber
        lift = 2.0 * math.pi * (angle + 2.0 * self.camber)
        point = OperatingPoint(math.inf, alpha=alpha, cl=cl, mach=mach)
        surface = replace(
            self._surface(lift),
            theta=None, delta_star=None, shape_factor=None, skin_friction=None, n=None,
        )  # fmt: skip
        return SectionFlow(
            point, Outcome.CONVERGED, self.panels, alpha=angle, cl=lift, cm_quarter=-0.05,
            cp_min=-1.0, cp_min_x=0.1, stagnation_x=0.001, surface=surface,
        )  # fmt: skip

    def _flow(self, point):
        cl = point.cl if point.cl is not None else 2.0 * math.pi * (point.alpha + 2 * self.camber)
        if cl > 1.4:
            return SectionFlow(point, Outcome.NOT_CONVERGED, self.panels, iterations=40)
        return self._converged(point, cl)

    def _converged(self, point, cl):
        cd = 0.005 + 0.1 * self.thickness**2 + 0.01 * (cl - 12.0 * self.camber) ** 2
        cd += 0.3 / self.panels**2
        return SectionFlow(
            point=point,
            outcome=Outcome.CONVERGED,
            panels=self.panels,
            alpha=cl / (2.0 * math.pi) - 2.0 * self.camber,
            cl=cl,
            cd=cd,
            cd_friction=0.7 * cd,
            cd_pressure=0.3 * cd,
            cm_quarter=-2.5 * self.camber,
            x_cp=math.nan if abs(cl) < 0.05 else 0.25 + 2.5 * self.camber / cl,
            stagnation_x=0.001,
            stagnation_side="lower",
            cp_min=-1.0 - cl,
            cp_min_x=0.05,
            upper=SideState(0.5 - 0.2 * cl, "natural", bubble=(0.4, 0.45)),
            lower=SideState(),
            iterations=8,
            residual=1e-10,
            surface=self._surface(cl),
        )

    def _surface(self, cl):
        x, y = self.nodes.T
        half = self.panels // 2
        side = ("upper",) * half + ("lower",) * (half + 1)
        cp = np.where(np.arange(len(x)) < half, -cl * (1.0 - x), 0.5 * cl * (1.0 - x))
        fine = np.linspace(2.2, 2.8, len(x))
        return Surface(
            side, x, y, np.abs(x), cp, np.sqrt(np.clip(1.0 - cp, 0.0, None)),
            theta=1e-3 * x, delta_star=2e-3 * x, shape_factor=fine, skin_friction=1e-3 * fine,
            n=np.where(x < 0.5, 9.0 * x, math.nan),
        )  # fmt: skip


def record(path, text=STUDY, generations=GENERATIONS, *, finished=True):
    """Record random designs about the baseline, the baseline first; unfinished as if killed."""
    study = parse_study(text)
    problem = Problem.from_study(study, ClosedForm)
    header = run_header(study, problem, problem.reference_point, {"python": "3"})
    rng = np.random.default_rng(11)
    told = np.empty((0, len(problem.objectives)))
    journal = Journal.create(path, header)
    for generation in range(generations):
        designs = rng.uniform(problem.lower, problem.upper, (POPULATION, len(problem.lower)))
        if generation == 0:
            designs[0] = problem.baseline_design
        found = [problem.evaluate(design) for design in designs]
        told = np.vstack([told, *[e.search_objectives for e in found if e.feasible]])
        volume = hypervolume(told, problem.reference_point)
        state = SearchState("{}", {})
        journal.append(generation_record(generation, found, volume, 4.0 * generation + 4.0, state))
    if finished:
        finish(journal)
    else:
        journal.close()
    return path
