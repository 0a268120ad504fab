"""A study whose flows cost nothing, so that all that is measured is the machinery around them.

In a module of its own, because a spawned worker has to be able to import what builds its problem.
"""

from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from optim.aerodynamics.operating_point import SectionFlow
from optim.outcomes import Outcome
from optim.problem.problem import Problem
from optim.study.load import parse_study

STUDY = """
study: paper-glider
section:
  shape: cst
  coefficients: {upper: 5, lower: 5}
  baseline: naca:2412
  freedom: 0.15
  trailing_edge: 0.2 %
chord: 0.2
air: {altitude: 0.0}
conditions:
  survey: {speed: 20.0, lift: 0.5}
  loiter: {speed: 15.0, lift: 0.8}
objectives:
  - {maximise: lift_to_drag, at: survey}
  - {minimise: nose_down_moment, at: loiter}
constraints:
  - {quantity: thickness, min: 9 %}
search: {algorithm: nsga2, population: 200, generations: 5, seed: 3}
"""


@dataclass(frozen=True)
class Free:
    """Closed forms of thickness and camber in place of flows."""

    nodes: np.ndarray
    solves: ClassVar[int] = 2

    def flows(self, points):
        thickness, camber = np.ptp(self.nodes[:, 1]), self.nodes[:, 1].mean()
        return [
            SectionFlow(
                point,
                Outcome.CONVERGED,
                len(self.nodes) - 1,
                alpha=float(point.cl / 6.3 - 3.0 * camber),
                cl=float(point.cl),
                cd=float(0.004 + 0.02 * thickness + 0.01 * (point.cl - 20.0 * camber) ** 2),
                cm_quarter=float(-2.0 * camber - 0.1 * thickness),
                iterations=5,
                residual=1e-9,
            )
            for point in points
        ]


def build(text):
    return Problem.from_study(parse_study(text), solver=Free)
