"""NACA 0012 with transition fixed: NASA TM-4074."""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow
from optim.arrays import FloatArray
from optim.validation.case import Case, Comparison, Panel, Series, judge
from optim.validation.flight import Model, mean_error, naca, values
from optim.validation.record import Record

POINT = OperatingPoint(6e6, alpha=0.0, mach=0.15, trip_upper=0.05, trip_lower=0.05)

ANGLES = tuple(np.arange(-8.0, 17.0).tolist())
"""Angles computed [deg]."""

STALLED = 17.5
"""Angle past which the section is stalled [deg]."""

STRAIGHT = 8.5
"""Range of angles of the lift slope [deg]."""

HIGH = (12.0, 15.0)
"""Angles near the stall at which drag is compared [deg]."""


def compare(record: Record) -> Comparison:
    """Compare drag to a lift of one, drag near the stall, lift slope and maximum lift."""
    table = record.columns()
    kept = np.abs(table["alpha_deg"]) < STALLED
    measured = {name: column[kept] for name, column in table.items()}
    section = naca("0012")
    flows = section.angles(POINT, ANGLES)
    cases = [
        *_drag(record, measured, section, flows),
        _slope(record, measured, flows),
        *_peak(record, measured, section),
    ]
    alpha, cl, cd = (measured[name] for name in ("alpha_deg", "cl", "cd"))
    panels = (
        Panel(
            "Does drag agree at equal lift?", "cl", "cd",
            (Series("measured, three grits", cl, cd, 0.02 * float(np.mean(cd))),),
            (Series("computed", values(flows, "cl"), values(flows, "cd")),),
        ),
        Panel(
            "Does lift agree over the angle?", "alpha deg", "cl",
            (Series("measured, three grits", alpha, cl, 0.01),),
            (Series("computed", np.array(ANGLES), values(flows, "cl")),),
        ),
    )  # fmt: skip
    return Comparison(record, tuple(cases), panels)


def _drag(
    record: Record, measured: dict[str, FloatArray], section: Model, flows: list[SectionFlow]
) -> list[Case]:
    """Compare drag at equal lift to a lift of one, and near the stall at the angle, too."""
    low = np.abs(measured["cl"]) <= 1.0
    cl, cd = measured["cl"][low], measured["cd"][low]
    flown = values(section.lifts(POINT, cl), "cd")
    means = float(np.mean(cd)), float(np.mean(flown))
    cases = [judge(record, "drag_to_lift_one", *means, error=mean_error(cd, flown))]
    for angle in HIGH:
        lift, drag = (_at(angle, measured, name) for name in ("cl", "cd"))
        of = f"{angle:g} deg"
        cases.append(judge(record, "drag_at_angle", drag, flows[ANGLES.index(angle)].cd, of=of))
        (at_lift,) = section.lifts(POINT, np.array([lift]))
        cases.append(judge(record, "drag_at_lift", drag, at_lift.cd, of=of))
    return cases


def _slope(record: Record, measured: dict[str, FloatArray], flows: list[SectionFlow]) -> Case:
    straight = np.abs(measured["alpha_deg"]) < STRAIGHT
    slope = np.polyfit(measured["alpha_deg"][straight], measured["cl"][straight], 1)[0]
    inside = np.abs(ANGLES) < STRAIGHT
    ours = np.polyfit(np.array(ANGLES)[inside], values(flows, "cl")[inside], 1)[0]
    return judge(record, "lift_slope", float(slope), float(ours))


def _peak(record: Record, measured: dict[str, FloatArray], section: Model) -> list[Case]:
    """Compare the mean over the grits of greatest lift and its angle with the computed peak."""
    grits, cl = measured["trip_grit"], measured["cl"]
    tops = [int(np.argmax(np.where(grits == one, cl, -math.inf))) for one in np.unique(grits)]
    angle = float(np.mean(measured["alpha_deg"][tops]))
    peak = section.evaluator.maximum_lift(POINT)
    return [
        judge(record, "cl_max", float(np.mean(cl[tops])), peak.cl),
        judge(record, "alpha_cl_max", angle, section.degrees(peak.alpha)),
    ]


def _at(angle: float, measured: dict[str, FloatArray], name: str) -> float:
    """Return the mean over the grits of what is interpolated between their points."""
    alpha, grits = measured["alpha_deg"], measured["trip_grit"]
    each = [
        np.interp(angle, alpha[grits == one], measured[name][grits == one])
        for one in np.unique(grits)
    ]
    return float(np.mean(each))
