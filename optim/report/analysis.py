"""Sections flown because somebody asks, not because a search does.

In: sections and what is asked of them. Out: one `Analysed` a section and Reynolds number, with the
document of ``analyse --json``.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow
from optim.arrays import FloatArray
from optim.geometry.section import Section
from optim.geometry.spacing import panel_nodes
from optim.report.fields import (
    Document,
    derived_fields,
    point_fields,
    section_fields,
    surface_fields,
)
from optim.report.grid import grid_fields, panel_counts

if TYPE_CHECKING:
    from optim.aerodynamics.evaluator import SectionEvaluator
    from optim.aerodynamics.sweep import Derived


@dataclass(frozen=True)
class Asked:
    """What is asked of a section.

    Attributes
    ----------
    points : tuple of OperatingPoint
        At one Reynolds number, in the order of the answers; it is replaced by each of `reynolds`.
    reynolds : tuple of float
        Reynolds numbers [-]; one, of no account, if inviscid.
    panels : int
        Panels around the section.
    swept : bool
        Whether the points are a sweep of the angle, so that lift slope and the like are derived.
    inviscid : bool
        Without a boundary layer.
    check_grid : bool
        On half and double the panels, too.
    """

    points: tuple[OperatingPoint, ...]
    reynolds: tuple[float, ...]
    panels: int
    swept: bool = False
    inviscid: bool = False
    check_grid: bool = False


@dataclass(frozen=True)
class Analysed:
    """One section at one Reynolds number.

    Attributes
    ----------
    section : Section
        What was flown.
    flows : tuple of SectionFlow
        In the order asked.
    derived : dict or None
        What a sweep says as a whole.
    grid : list of dict or None
        The comparison with half and double the panels, one entry a point.
    second : tuple or None
        Whether a second solution was found nearby, one entry a point, None where there is no answer
        to compare with; None if it was not looked for.
    """

    section: Section
    flows: tuple[SectionFlow, ...]
    derived: Document | None = None
    grid: list[Document] | None = None
    second: tuple[bool | None, ...] | None = None

    def document(self, *, surface: bool = False) -> Document:
        """Return the entry of ``analyse --json``.

        Parameters
        ----------
        surface : bool
            With the distributions along the surface.
        """
        points = [point_fields(flow) for flow in self.flows]
        for point, found in zip(points, self.second or (), strict=self.second is not None):
            point["second_solution"] = found
        if surface:
            for point, flow in zip(points, self.flows, strict=True):
                point["surface"] = None if flow.surface is None else surface_fields(flow.surface)
        entry: Document = {"section": section_fields(self.section), "points": points}
        if self.derived is not None:
            entry["derived"] = self.derived
        if self.grid is not None:
            entry["grid"] = self.grid
        return entry


def analyse(
    section: Section, asked: Asked, make: Callable[[FloatArray], SectionEvaluator]
) -> list[Analysed]:
    """Return the flows about a section, one entry a Reynolds number.

    Parameters
    ----------
    section : Section
        A contour without faults.
    asked : Asked
        What is asked.
    make : callable
        Makes the evaluator of a section from its nodes.
    """
    counts = (asked.panels, *(panel_counts(asked.panels) if asked.check_grid else ()))
    evaluators = [make(panel_nodes(section, panels)) for panels in counts]
    answers = []
    for reynolds in asked.reynolds:
        points = [replace(point, reynolds=reynolds) for point in asked.points]
        (flows, derived), *others = [_flown(one, points, asked) for one in evaluators]
        grid = _grid(flows, *[found for found, _ in others]) if others else None
        said = None if derived is None else derived_fields(derived, flows)
        second = None if asked.inviscid else _second_solutions(evaluators[0], flows)
        answers.append(Analysed(section, flows, said, grid, second))
    return answers


def _flown(
    evaluator: SectionEvaluator, points: list[OperatingPoint], asked: Asked
) -> tuple[tuple[SectionFlow, ...], Derived | None]:
    """Return the flows in the order of the points, and what they say as a sweep."""
    from optim.aerodynamics.sweep import derive, sweep  # noqa: PLC0415  a door that loads nothing

    if asked.inviscid:
        flows = [evaluator.inviscid(alpha=p.alpha, cl=p.cl, mach=p.mach) for p in points]
        return tuple(flows), derive(flows) if asked.swept else None
    if not asked.swept:
        return tuple(evaluator.flows(points)), None
    angles = sorted(p.alpha for p in points if p.alpha is not None)
    rising, derived = sweep(evaluator, points[0], angles)
    falls = points[0].alpha != angles[0]
    return tuple(reversed(rising) if falls else rising), derived


def _second_solutions(
    evaluator: SectionEvaluator, flows: Sequence[SectionFlow]
) -> tuple[bool | None, ...]:
    """Return whether each flow has a second solution nearby; None where it has no answer."""
    from optim.aerodynamics.second_solution import second_solution  # noqa: PLC0415  as in `_flown`

    return tuple(
        second_solution(evaluator, flow) is not None if flow.converged else None for flow in flows
    )


def _grid(
    flows: Sequence[SectionFlow], half: Sequence[SectionFlow], double: Sequence[SectionFlow]
) -> list[Document]:
    return [
        grid_fields(point_fields(coarse), point_fields(one), point_fields(fine))
        for coarse, one, fine in zip(half, flows, double, strict=True)
    ]


def sweep_angles(first: float, last: float, step: float) -> list[float]:
    """Return the angles of a sweep, both ends included.

    Parameters
    ----------
    first, last, step : float
        In one unit; the last step is shorter where the range is no multiple of it.

    Examples
    --------
    >>> sweep_angles(-1.0, 1.0, 0.5), sweep_angles(4.0, 0.0, -3.0)
    ([-1.0, -0.5, 0.0, 0.5, 1.0], [4.0, 1.0, 0.0])
    """
    whole = math.floor((last - first) / step * (1.0 + 1e-12) + 1e-9)
    angles = [first + k * step for k in range(whole + 1)]
    if abs(angles[-1] - last) > 1e-9 * max(1.0, abs(last)):
        angles.append(last)
    else:
        angles[-1] = last
    return angles
