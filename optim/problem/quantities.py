"""From a section and its flows to the numbers that a study judges and an archive keeps.

The words are those of optim.study.vocabulary; a test holds the two rooms together. Lengths are in
chords and angles in radians; the moment is nose-up positive about the quarter chord. A number that
does not exist (drag of a point that did not converge, transition of a side that has none, the
centre of pressure near zero lift) is not-a-number here, and the outcome or the kind says why.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from types import MappingProxyType

import numpy as np

from optim.aerodynamics.operating_point import SectionFlow, SideState
from optim.arrays import FloatArray
from optim.geometry.section import Section
from optim.study.vocabulary import CONDITION_QUANTITIES, SECTION_QUANTITIES

TRANSITION_KINDS = ("none", "natural", "forced", "bubble")
"""What the codes 0, 1, ... of ``transition_kind_upper`` and ``_lower`` mean."""

STAGNATION_SIDES = ("lower", "upper")
"""What the codes 0, 1 of ``stagnation_side`` mean."""


def nose_down_moment(flow: SectionFlow) -> float:
    """Return max(0, -cm_quarter) [-]: how hard the section pitches its nose down."""
    return math.nan if math.isnan(flow.cm_quarter) else max(0.0, -flow.cm_quarter)


def _kind(side: SideState, flow: SectionFlow) -> float:
    return float(TRANSITION_KINDS.index(side.transition_kind)) if flow.converged else math.nan


def _bubble(side: SideState, end: int) -> float:
    return math.nan if side.bubble is None else side.bubble[end]


def _stagnation_side(flow: SectionFlow) -> float:
    return float(STAGNATION_SIDES.index(flow.stagnation_side)) if flow.converged else math.nan


_OF_A_FLOW: Mapping[str, Callable[[SectionFlow], float]] = MappingProxyType(
    {
        "alpha": lambda flow: flow.alpha,
        "cl": lambda flow: flow.cl,
        "cd": lambda flow: flow.cd,
        "cd_friction": lambda flow: flow.cd_friction,
        "cd_pressure": lambda flow: flow.cd_pressure,
        "cm_quarter": lambda flow: flow.cm_quarter,
        "nose_down_moment": nose_down_moment,
        "lift_to_drag": lambda flow: flow.lift_to_drag,
        "cl_max": lambda flow: flow.cl,
        "x_cp": lambda flow: flow.x_cp,
        "stagnation_x": lambda flow: flow.stagnation_x,
        "cp_min": lambda flow: flow.cp_min,
        "cp_min_x": lambda flow: flow.cp_min_x,
        "transition_upper": lambda flow: flow.upper.transition,
        "transition_lower": lambda flow: flow.lower.transition,
        "separation_upper": lambda flow: flow.upper.separation,
        "separation_lower": lambda flow: flow.lower.separation,
        "bubble_upper_start": lambda flow: _bubble(flow.upper, 0),
        "bubble_upper_end": lambda flow: _bubble(flow.upper, 1),
        "bubble_lower_start": lambda flow: _bubble(flow.lower, 0),
        "bubble_lower_end": lambda flow: _bubble(flow.lower, 1),
        "transition_kind_upper": lambda flow: _kind(flow.upper, flow),
        "transition_kind_lower": lambda flow: _kind(flow.lower, flow),
        "stagnation_side": _stagnation_side,
        "iterations": lambda flow: float(flow.iterations),
        "residual": lambda flow: flow.residual,
    }
)

RECORDED_BESIDE = (
    "transition_kind_upper",
    "transition_kind_lower",
    "stagnation_side",
    "iterations",
    "residual",
)
"""What is recorded of a condition beside the vocabulary: codes, cost and state of the solve."""

RECORDED_OF_A_CONDITION = (*CONDITION_QUANTITIES, *RECORDED_BESIDE)
"""Every number kept of a condition, in the archive's order."""

_OF_A_SECTION: Mapping[str, Callable[[Section], float]] = MappingProxyType(
    {
        "thickness": lambda section: section.thickness,
        "thickness_x": lambda section: section.thickness_x,
        "camber": lambda section: section.camber,
        "camber_x": lambda section: section.camber_x,
        "area": lambda section: section.area,
        "nose_radius": lambda section: section.nose_radius,
        "trailing_edge_gap": lambda section: section.trailing_edge_gap,
        "trailing_edge_angle": lambda section: section.trailing_edge_angle,
    }
)

RECORDED_OF_A_SECTION = tuple(name for name in SECTION_QUANTITIES if name != "depth")
"""Every number kept of a section that needs no place, in the archive's order."""

_WHERE_ABSENT: Mapping[str, float] = MappingProxyType(
    {
        "transition_upper": 1.0,
        "transition_lower": 1.0,
        "separation_upper": 1.0,
        "separation_lower": 1.0,
        "bubble_upper_start": 1.0,
        "bubble_lower_start": 1.0,
        "bubble_upper_end": 0.0,
        "bubble_lower_end": 0.0,
    }
)
"""How a limit reads what is absent: a layer that stays laminar or attached does so to the edge,
and no bubble starts later than, and ends before, any real one."""


def flow_quantities(flow: SectionFlow, *, at_maximum: bool) -> FloatArray:
    """Return what is recorded of a flow.

    Parameters
    ----------
    flow : SectionFlow
        The flow at one condition.
    at_maximum : bool
        Whether the condition is flown at its maximum lift: ``cl_max`` exists only then.

    Returns
    -------
    (len(RECORDED_OF_A_CONDITION),) array
        Numbers in the order of `RECORDED_OF_A_CONDITION`.
    """
    values = np.array([_OF_A_FLOW[name](flow) for name in RECORDED_OF_A_CONDITION])
    if not at_maximum:
        values[RECORDED_OF_A_CONDITION.index("cl_max")] = math.nan
    return values


def judged(quantity: str, value: float, *, converged: bool) -> float:
    """Return a recorded number as objectives and constraints read it.

    Parameters
    ----------
    quantity : str
        Its name.
    value : float
        What was recorded.
    converged : bool
        Whether the flow has an answer, so that a missing number means absence.

    Returns
    -------
    float
        The value; where a transition, separation or bubble is absent from a converged flow, the
        place that stands for it.
    """
    if converged and math.isnan(value):
        return _WHERE_ABSENT.get(quantity, math.nan)
    return value


def section_quantity(section: Section, quantity: str, at: float | None = None) -> float:
    """Return a measure of a section.

    Parameters
    ----------
    section : Section
        A contour without faults.
    quantity : str
        One of the vocabulary's quantities of a section.
    at : float or None
        Place of a ``depth`` [x/c].

    Returns
    -------
    float
        Its value in chords, square chords or radians.

    Raises
    ------
    ValueError
        If a depth has no place.
    """
    if quantity != "depth":
        return _OF_A_SECTION[quantity](section)
    if at is None:
        raise ValueError("a depth needs its place along the chord.")
    return section.depth(at)
