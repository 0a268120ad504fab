"""How far a computed number may be from a measured one: the error beside the number.

An empirical model of the residuals of the package's published measurements. The half-width of a
quantity's 80 % band is

    base x scale(value) x near_stall x low_reynolds x forced,

with each factor where its regime applies: near the stall, at low Reynolds numbers, with transition
forced on either side. Base and factors are quantiles of the sizes of the residuals in which every
section weighs the same; a regime is called more accurate than the rest only where at least two
sections say so. The level of the quantile is the one at which the bands, fitted with one section
left out at a time, hold four in five of the points of the section left out; the sections differ
more than the points of one do. tests/derivations/error_bands.py makes the constants, and
tests/aerodynamics/test_accuracy.py holds the share of left-out points to 70 to 90 %.

The scatter of the measurements is part of the residuals, and so is what the method is known to do
to all sections alike: a band is no correction. It says nothing of differences between two designs.
Drag is compared at equal lift, lift and moment at equal angles.

Range: two-dimensional flow about sections 6 to 24 % thick at Reynolds numbers of 1e5 to 9e6 and
Mach numbers to 0.15; what lies outside is flagged (coverage.py).
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

from optim.aerodynamics.operating_point import SectionFlow
from optim.aerodynamics.suction_limit import suction_limit

Measure = Literal["absolute", "relative", "lift"]
"""What a half-width is a share of: one, the value, or the value but at least LEAST_LIFT."""

LEAST_LIFT = 0.2
"""Lift coefficient below which the error of lift no longer falls with it [-]."""

LOW_REYNOLDS = 7e5
"""Reynolds number below which bubbles rule; no section was measured between 4.6e5 and 1e6."""

SUCTION_SHARE = 0.5
"""Share of the suction limit (suction_limit.py) past which a flow counts as near the stall [-]."""


@dataclass(frozen=True, slots=True)
class Spread:
    """The band of a quantity: its base and the factors of the regimes."""

    measure: Measure
    base: float
    near_stall: float
    low_reynolds: float
    forced: float

    def scale(self, value: float) -> float:
        """Return what the base is a share of."""
        if self.measure == "absolute":
            return 1.0
        return abs(value) if self.measure == "relative" else max(abs(value), LEAST_LIFT)


SPREADS = {
    "cl": Spread("lift", 0.074, 0.45, 1.00, 1.04),
    "cd": Spread("relative", 0.11, 3.28, 1.65, 1.00),
    "cm_quarter": Spread("absolute", 0.0084, 1.38, 1.05, 1.00),
    "cl_max": Spread("relative", 0.036, 1.00, 1.00, 1.00),
    "alpha_zero_lift_deg": Spread("absolute", 0.27, 1.00, 1.00, 1.00),
    "lift_slope_per_deg": Spread("relative", 0.043, 1.00, 1.00, 1.00),
    "aerodynamic_centre_x": Spread("absolute", 0.0071, 1.00, 1.00, 1.00),
    "cm_aerodynamic_centre": Spread("absolute", 0.0046, 1.00, 1.00, 1.00),
}
"""Quantity -> its band; written by tests/derivations/error_bands.py. A factor of 1 is also one for
which too few sections speak."""

LIFT_PER_DEGREE = math.radians(2.0 * math.pi)
"""Slope by which an error of lift becomes one of the angle, thin-section theory [1/deg]."""


BANDED = ("alpha_deg", "cl", "cd", "cm_quarter", "lift_to_drag")
"""What of a flow may have a band."""


def near_stall(separation: float, cp_min: float, reynolds: float) -> bool:
    """Return whether separation [x/c, 1 for none] or suction tell of a stall to come."""
    return separation < 1.0 or -cp_min > SUCTION_SHARE * suction_limit(reynolds)


def separation(flow: SectionFlow) -> float:
    """Return the separation furthest forward of both sides [x/c]; 1 if there is none."""
    places = (side.separation for side in (flow.upper, flow.lower))
    return min(1.0 if math.isnan(place) else place for place in places)


def half_width(quantity: str, value: float, flow: SectionFlow) -> float:
    """Return the half-width of a quantity's band in its own unit.

    Parameters
    ----------
    quantity : str
        One of SPREADS.
    value : float
        What was computed of it.
    flow : SectionFlow
        The flow it belongs to, converged and with a layer: of a sweep an attached one.
    """
    spread, point = SPREADS[quantity], flow.point
    width = spread.base * spread.scale(value)
    if near_stall(separation(flow), flow.cp_min, point.reynolds):
        width *= spread.near_stall
    if point.reynolds < LOW_REYNOLDS:
        width *= spread.low_reynolds
    if point.trip_upper < 1.0 or point.trip_lower < 1.0:
        width *= spread.forced
    return width


def band(flow: SectionFlow) -> dict[str, float] | None:
    """Return the half-widths of a flow's bands; None where it has no answer or no layer.

    Where the lift was given it has no error; its band is then one of the angle, but near the stall,
    where lift says little about the angle. At a peak of the lift the band is that of maximum lift.
    """
    if not flow.converged or not math.isfinite(flow.point.reynolds):
        return None
    widths = _lift_or_angle(flow)
    for quantity in ("cd", "cm_quarter"):
        widths[quantity] = half_width(quantity, getattr(flow, quantity), flow)
    of_drag = flow.lift_to_drag * widths["cd"] / flow.cd
    widths["lift_to_drag"] = math.hypot(of_drag, widths.get("cl", 0.0) / flow.cd)
    return widths


def _lift_or_angle(flow: SectionFlow) -> dict[str, float]:
    if at_peak(flow):
        return {"cl": half_width("cl_max", flow.cl, flow)}
    width = half_width("cl", flow.cl, flow)
    if flow.point.cl is None:
        return {"cl": width}
    if near_stall(separation(flow), flow.cp_min, flow.point.reynolds):
        return {}
    return {"alpha_deg": width / LIFT_PER_DEGREE}


def at_peak(flow: SectionFlow) -> bool:
    """Return whether a flow was sought as the peak of the lift: it has neither angle nor lift."""
    return flow.point.alpha is not None and math.isnan(flow.point.alpha)


def derived_band(
    stated: Mapping[str, object], flows: Sequence[SectionFlow]
) -> dict[str, float] | None:
    """Return the half-widths of what is derived of a sweep; None without a layer or an answer.

    Parameters
    ----------
    stated : mapping
        Name -> what was derived; those of SPREADS that are numbers get a band.
    flows : sequence of SectionFlow
        The sweep.
    """
    good = [flow for flow in flows if flow.converged]
    if not good or not math.isfinite(good[0].point.reynolds):
        return None
    easiest = max(good, key=lambda flow: flow.cp_min)
    return {
        name: half_width(name, value, easiest)
        for name, value in stated.items()
        if name in SPREADS and isinstance(value, float) and math.isfinite(value)
    }
