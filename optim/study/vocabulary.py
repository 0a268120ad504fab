"""Every quantity a study may name: its unit, its usual sense and one sentence.

`problem` computes them under the same names; a test holds the two together. Lengths are in chords
and angles in radians, as everywhere inside.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Literal

Sense = Literal["maximise", "minimise"]
Unit = Literal["1", "chord", "chord^2", "rad", "m", "m^2"]


@dataclass(frozen=True, slots=True)
class Quantity:
    """One quantity that an objective or a constraint may name.

    Attributes
    ----------
    name : str
        As a study and an archive write it.
    unit : str
        "1" for a pure number, "chord", "chord^2" or "rad".
    of : str
        "section" if the contour alone has it, "condition" if it takes a flow.
    sentence : str
        What it is.
    sense : str or None
        What a designer usually wants of it, None if that depends.
    lowest, highest : float
        Ends of what a limit may ask for, in `unit`.
    needs_at : bool
        Whether a place x/c must be given.
    maximum_only : bool
        Whether it exists at conditions with ``lift: maximum`` only.
    """

    name: str
    unit: Unit
    of: Literal["section", "condition"]
    sentence: str
    sense: Sense | None = None
    lowest: float = -1e4
    highest: float = 1e4
    needs_at: bool = False
    maximum_only: bool = False


def _flow(
    name: str,
    sentence: str,
    sense: Sense | None = None,
    *,
    ends: tuple[float, float] = (-1e4, 1e4),
    unit: Unit = "1",
    maximum_only: bool = False,
) -> Quantity:
    return Quantity(name, unit, "condition", sentence, sense, *ends, maximum_only=maximum_only)


def _place(name: str, sentence: str, sense: Sense | None = None) -> Quantity:
    return Quantity(name, "chord", "condition", sentence, sense, 0.0, 1.0)


def _contour(
    name: str,
    sentence: str,
    *,
    ends: tuple[float, float] = (0.0, 1.0),
    unit: Unit = "chord",
    needs_at: bool = False,
) -> Quantity:
    return Quantity(name, unit, "section", sentence, None, *ends, needs_at=needs_at)


_COEFFICIENT = (-10.0, 10.0)
"""No section in subsonic flow has a lift or moment coefficient beyond; catches a per cent slip."""

_DRAG = (0.0, 10.0)

_ALL = (
    _flow("lift_to_drag", "Lift coefficient over drag coefficient.", "maximise"),
    _flow(
        "cl_max",
        "Lift coefficient at the computed peak, at a condition with lift: maximum.",
        "maximise",
        ends=_COEFFICIENT,
        maximum_only=True,
    ),
    _flow("cl", "Lift coefficient.", "maximise", ends=_COEFFICIENT),
    _flow("cd", "Drag coefficient at the end of the wake (Squire-Young).", "minimise", ends=_DRAG),
    _flow("cd_friction", "Drag of the skin friction alone.", "minimise", ends=_DRAG),
    _flow("cd_pressure", "Drag of the pressures alone: cd less cd_friction.", "minimise"),
    _flow(
        "cm_quarter",
        "Pitching moment coefficient about x/c = 0.25, nose-up positive.",
        ends=_COEFFICIENT,
    ),
    _flow(
        "nose_down_moment",
        "max(0, -cm_quarter): how strongly the section pitches nose-down.",
        "minimise",
        ends=(0.0, 10.0),
    ),
    _flow(
        "x_cp",
        "Centre of pressure 0.25 - cm_quarter/cn, absent for |cl| below 0.05.",
        unit="chord",
        ends=_COEFFICIENT,
    ),
    _flow("alpha", "Angle of attack from the chord line.", unit="rad", ends=(-1.0, 1.0)),
    _place("stagnation_x", "Where the flow divides, x/c."),
    _flow("cp_min", "Pressure coefficient at the suction peak.", "maximise"),
    _place("cp_min_x", "Where the suction peak is, x/c."),
    _place("transition_upper", "Transition on the upper side, x/c.", "maximise"),
    _place("transition_lower", "Transition on the lower side, x/c.", "maximise"),
    _place("separation_upper", "Turbulent separation on the upper side, x/c; absent if attached."),
    _place("separation_lower", "Turbulent separation on the lower side, x/c; absent if attached."),
    _place("bubble_upper_start", "Where a laminar bubble on the upper side starts, x/c."),
    _place("bubble_upper_end", "Where a laminar bubble on the upper side closes, x/c."),
    _place("bubble_lower_start", "Where a laminar bubble on the lower side starts, x/c."),
    _place("bubble_lower_end", "Where a laminar bubble on the lower side closes, x/c."),
    _contour("thickness", "Greatest depth of the section."),
    _contour("thickness_x", "Where the greatest depth is, x/c."),
    _contour("camber", "Greatest height of the mean line.", ends=(-1.0, 1.0)),
    _contour("camber_x", "Where the mean line is highest, x/c."),
    _contour("depth", "Depth of the section at a given x/c.", needs_at=True),
    _contour("area", "Area of the section.", unit="chord^2"),
    _contour("nose_radius", "Radius of curvature at the nose."),
    _contour("trailing_edge_gap", "Thickness of the trailing edge."),
    _contour(
        "trailing_edge_angle",
        "Angle between the two sides at the trailing edge.",
        ends=(-1.6, 1.6),
        unit="rad",
    ),
)

QUANTITIES: Mapping[str, Quantity] = MappingProxyType({q.name: q for q in _ALL})
"""Name -> quantity, flow quantities first."""

CONDITION_QUANTITIES = tuple(q.name for q in _ALL if q.of == "condition")
"""Names of what a flow has, in the order of the archive."""

SECTION_QUANTITIES = tuple(q.name for q in _ALL if q.of == "section")
"""Names of what a contour has, in the order of the archive; `depth` at the places asked for."""


def coefficient_names(
    shape: str, upper: int, lower: int, *, leading_edge_term: bool = False
) -> tuple[str, ...]:
    """Return the names of a section's coefficients, which `bounds` may use.

    `geometry` gives its variables the same names; a test holds the two together.

    Parameters
    ----------
    shape : str
        "cst" or "bezier".
    upper, lower : int
        Coefficients of each side.
    leading_edge_term : bool
        Whether a cst section has the leading-edge term.
    """
    term = shape == "cst" and leading_edge_term
    shared = term or shape == "bezier"
    first = 2 if shared else 1
    sides = [f"upper_{i}" for i in range(first, upper + 1)]
    sides += [f"lower_{i}" for i in range(first, lower + 1)]
    return (*["nose"] * shared, *sides, *["leading_edge"] * term)
