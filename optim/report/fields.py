"""The names and units under which sections and flows leave the tool: angles in degrees.

One function a kind of thing, used for flows computed now and for flows read from an archive, so
that both come out under the same names with the same numbers.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from optim.aerodynamics.accuracy import band, derived_band
from optim.aerodynamics.coverage import flags
from optim.aerodynamics.operating_point import SectionFlow, SideState, Surface
from optim.geometry.section import Section

if TYPE_CHECKING:
    from optim.aerodynamics.sweep import Derived

Document = dict[str, Any]
"""Plain data; a float that is absent is not-a-number and becomes null in JSON."""


def section_fields(section: Section) -> Document:
    """Return name and measures of a section [chords], and what normalising its file did."""
    return {
        "name": section.name,
        "thickness": section.thickness,
        "thickness_x": section.thickness_x,
        "camber": section.camber,
        "camber_x": section.camber_x,
        "area": section.area,
        "nose_radius": section.nose_radius,
        "trailing_edge_gap": section.trailing_edge_gap,
        "trailing_edge_angle_deg": math.degrees(section.trailing_edge_angle),
        "rotation_deg": math.degrees(section.rotation),
        "scale": section.scale,
    }


def point_fields(flow: SectionFlow) -> Document:
    """Return everything that is stated of one operating point.

    The angle is that of the flow, or the one asked for where the flow has no answer; the same
    holds for the lift.
    """
    point = flow.point
    alpha, cl = flow.alpha, flow.cl
    if not flow.converged:
        alpha, cl = _asked(point.alpha), math.nan
    return {
        "alpha_deg": math.degrees(alpha),
        "reynolds": point.reynolds,
        "mach": point.mach,
        "n_factor": point.n_factor,
        "panels": flow.panels,
        "cl": cl,
        "cd": flow.cd,
        "cd_friction": flow.cd_friction,
        "cd_pressure": flow.cd_pressure,
        "cm_quarter": flow.cm_quarter,
        "x_cp": flow.x_cp,
        "lift_to_drag": flow.lift_to_drag,
        "stagnation_x": flow.stagnation_x,
        "stagnation_side": flow.stagnation_side if flow.converged else None,
        "cp_min": flow.cp_min,
        "cp_min_x": flow.cp_min_x,
        **_side_fields("upper", flow.upper),
        **_side_fields("lower", flow.lower),
        "outcome": flow.outcome.label,
        "iterations": flow.iterations,
        "residual": flow.residual,
        "second_solution": None,
        "band": band(flow),
        "flags": list(flags(flow)),
    }


def _asked(alpha: float | None) -> float:
    return math.nan if alpha is None else alpha


def _side_fields(side: str, state: SideState) -> Document:
    return {
        f"transition_{side}": state.transition,
        f"transition_kind_{side}": state.transition_kind,
        f"separation_{side}": state.separation,
        f"bubble_{side}": None if state.bubble is None else list(state.bubble),
    }


def derived_fields(derived: Derived, flows: Sequence[SectionFlow]) -> Document:
    """Return what a sweep of flows says as a whole."""
    span = derived.slope_range
    stated: Document = {
        "alpha_zero_lift_deg": math.degrees(derived.alpha_zero_lift),
        "lift_slope_per_deg": math.radians(derived.lift_slope),
        "slope_range_deg": None if span is None else [math.degrees(end) for end in span],
        "cl_max": derived.cl_max,
        "alpha_cl_max_deg": math.degrees(derived.alpha_cl_max),
        "aerodynamic_centre_x": derived.aerodynamic_centre_x,
        "cm_aerodynamic_centre": derived.cm_aerodynamic_centre,
        "cm_zero_lift": derived.cm_zero_lift,
        "stall": derived.stall,
        "x_cp_range": _pair(derived.x_cp_range),
        "low_drag_range": _pair(derived.low_drag_range),
    }
    return stated | {"band": derived_band(stated, flows)}


def _pair(span: tuple[float, float] | None) -> list[float] | None:
    return None if span is None else list(span)


def surface_fields(surface: Surface) -> Document:
    """Return the distributions along a section and its wake, flat lists of one length.

    The layer's lists are None where the flow is inviscid.
    """
    layer = {
        "theta": surface.theta,
        "delta_star": surface.delta_star,
        "shape_factor": surface.shape_factor,
        "skin_friction": surface.skin_friction,
        "n": surface.n,
    }
    return {
        "side": list(surface.side),
        "x": surface.x.tolist(),
        "y": surface.y.tolist(),
        "s": surface.s.tolist(),
        "cp": surface.cp.tolist(),
        "speed": surface.speed.tolist(),
        **{name: None if v is None else v.tolist() for name, v in layer.items()},
    }
