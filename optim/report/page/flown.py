"""Finalists flown again for the page: the layer at each condition, and the way there and beyond.

At its conditions a finalist is flown as the search did it, so that the numbers are the recorded
ones. Beyond them it is swept over the angle at each condition's Reynolds and Mach number, clean and
with the layers turned near the nose. A point without an answer is a gap.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow
from optim.arrays import FloatArray
from optim.geometry.section import Section
from optim.geometry.spacing import panel_nodes
from optim.problem.conditions import Condition
from optim.problem.flying import FlowSolver, MakeSolver, fly
from optim.report.fields import Document
from optim.report.page.packing import packed

ANGLES = (-6.0, 16.0, 1.0)
"""First angle, last angle and step of the off-design sweeps [deg]."""

CONTAMINATED_UPPER, CONTAMINATED_LOWER = 0.05, 0.10
"""Where the layers of a contaminated nose turn [x/c] (common practice; milder than real dirt)."""

SWEPT = ("alpha_deg", "cl", "cd", "cm_quarter", "x_cp")
"""Columns of a sweep."""

LAYER = ("x", "cp", "shape_factor", "theta", "delta_star", "skin_friction", "n")
"""Columns of one side of a section at one condition."""


@dataclass(frozen=True)
class Flown:
    """How finalists are flown.

    Attributes
    ----------
    conditions : tuple of Condition
        Of the study.
    panels : int
        Panels around a section.
    solver : callable
        Makes the evaluator of a section from its nodes.
    """

    conditions: tuple[Condition, ...]
    panels: int
    solver: MakeSolver

    def document(self, section: Section) -> Document:
        """Return what is shown of a finalist.

        Parameters
        ----------
        section : Section
            A contour without faults.

        Returns
        -------
        dict
            Condition -> ``point`` (what the flow comes to), ``upper`` and ``lower`` (the layer of
            each side, packed, None without an answer), ``clean`` and ``contaminated`` (sweeps,
            packed).
        """
        solver = self.solver(panel_nodes(section, self.panels))
        flows = fly(solver, self.conditions)
        return {
            condition.name: {
                "point": _point(flow),
                "upper": _side(flow, "upper"),
                "lower": _side(flow, "lower"),
                "clean": _sweep(solver, swept_point(condition)),
                "contaminated": _sweep(solver, contaminated(swept_point(condition))),
            }
            for condition, flow in zip(self.conditions, flows, strict=True)
        }


def swept_point(condition: Condition) -> OperatingPoint:
    """Return the condition at no incidence."""
    return replace(condition.point, alpha=0.0, cl=None)


def contaminated(point: OperatingPoint) -> OperatingPoint:
    """Return a point with the layers turned near the nose, if they were not before."""
    return replace(
        point,
        trip_upper=min(point.trip_upper, CONTAMINATED_UPPER),
        trip_lower=min(point.trip_lower, CONTAMINATED_LOWER),
    )


def sweep_angles() -> FloatArray:
    """Return the angles of a sweep, rising [deg]."""
    first, last, step = ANGLES
    return np.arange(first, last + 0.5 * step, step)


def _sweep(solver: FlowSolver, point: OperatingPoint) -> Document:
    """Return a sweep, from no incidence up and then down, so that each flow starts from an easier.

    Each walk is one list of the evaluator and so depends on nothing flown before.
    """
    rising = sweep_angles()
    walks = [rising[rising >= 0.0], rising[rising < 0.0][::-1]]
    up, down = [
        solver.flows([replace(point, alpha=math.radians(angle)) for angle in walk])
        for walk in walks
    ]
    flows = [*reversed(down), *up]
    rows = [_swept(angle, flow) for angle, flow in zip(rising.tolist(), flows, strict=True)]
    return packed(np.array(rows).T)


def _swept(angle: float, flow: SectionFlow) -> list[float]:
    if not flow.converged:
        return [angle, *[math.nan] * (len(SWEPT) - 1)]
    return [angle, flow.cl, flow.cd, flow.cm_quarter, flow.x_cp]


def _point(flow: SectionFlow) -> Document:
    return {
        "outcome": flow.outcome.label,
        "alpha_deg": math.degrees(flow.alpha),
        "cl": flow.cl,
        "cd": flow.cd,
        "cm_quarter": flow.cm_quarter,
        "x_cp": flow.x_cp,
        "transition_upper": flow.upper.transition,
        "transition_lower": flow.lower.transition,
        "separation_upper": flow.upper.separation,
        "separation_lower": flow.lower.separation,
    }


def _side(flow: SectionFlow, side: str) -> Document | None:
    """Return the layer of one side from the stagnation point to the edge."""
    surface = flow.surface
    if surface is None:
        return None
    here = np.array(surface.side) == side
    order = np.argsort(surface.s[here], kind="stable")
    found: Sequence[FloatArray | None] = [getattr(surface, name) for name in LAYER]
    nothing = np.full(len(order), math.nan)
    return packed(np.array([nothing if v is None else v[here][order] for v in found]))
