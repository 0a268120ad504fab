"""A measured polar beside the computed flow about a section: computed less measured.

Lift is compared at the measured angle; drag and moment at the measured lift, because an error of
the angle, which a tunnel has too, would else count as one of drag. A point that the computation
has no answer for is counted, and compared with nothing.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow
from optim.arrays import FloatArray
from optim.geometry.section import Section
from optim.geometry.spacing import panel_nodes
from optim.report.fields import Document

if TYPE_CHECKING:
    from optim.aerodynamics.evaluator import SectionEvaluator
    from optim.study.polar_file import MeasuredPolar


@dataclass(frozen=True)
class Residual:
    """One coefficient of a polar.

    Attributes
    ----------
    quantity : str
        cl, cd or cm_quarter.
    at : (n,) array
        Where it was measured: angle [deg] for cl, lift for the others.
    measured, computed : (n,) array
        Values [-]; computed is not-a-number without an answer.
    """

    quantity: str
    at: FloatArray
    measured: FloatArray
    computed: FloatArray

    def fields(self) -> Document:
        """Return mean, root mean square and largest size of computed less measured."""
        off = (self.computed - self.measured)[np.isfinite(self.computed)]
        nothing = not off.size
        return {
            "compared": int(off.size),
            "without_answer": int(self.measured.size - off.size),
            "mean": np.nan if nothing else float(off.mean()),
            "rms": np.nan if nothing else float(np.sqrt(np.mean(off**2))),
            "largest": np.nan if nothing else float(np.abs(off).max()),
        }


def residuals(
    section: Section,
    polar: MeasuredPolar,
    panels: int,
    make: Callable[[FloatArray], SectionEvaluator],
) -> list[Residual]:
    """Return what a section computes to where a polar was measured.

    Parameters
    ----------
    section : Section
        A contour without faults; angles of a file's section count from the file's own axis.
    polar : MeasuredPolar
        The measurement.
    panels : int
        Panels around the section.
    make : callable
        Makes the evaluator of a section from its nodes.
    """
    from optim.validation.flight import Model  # noqa: PLC0415  loads the compiler

    model = Model(section, make(panel_nodes(section, panels)))
    point = OperatingPoint(
        polar.reynolds, alpha=0.0, mach=polar.mach, n_factor=polar.n_factor,
        trip_upper=polar.trip_upper, trip_lower=polar.trip_lower,
    )  # fmt: skip
    found = []
    given = np.isfinite(polar.alpha_deg) & np.isfinite(polar.cl)
    if given.any():
        angles, lift = polar.alpha_deg[given], polar.cl[given]
        rising, back = np.unique(angles, return_inverse=True)
        flown = _values(model.angles(point, rising.tolist()), "cl")[back]
        found.append(Residual("cl", angles, lift, flown))
    of_drag, of_moment = (
        np.isfinite(one) & np.isfinite(polar.cl) for one in (polar.cd, polar.cm_quarter)
    )
    lifts = np.unique(polar.cl[of_drag | of_moment])
    if not lifts.size:
        return found
    flows = model.lifts(point, lifts)
    for name, given in (("cd", of_drag), ("cm_quarter", of_moment)):
        if given.any():
            at = polar.cl[given]
            computed = _values(flows, name)[np.searchsorted(lifts, at)]
            found.append(Residual(name, at, getattr(polar, name)[given], computed))
    return found


def _values(flows: list[SectionFlow], name: str) -> FloatArray:
    return np.array([getattr(flow, name) for flow in flows])
