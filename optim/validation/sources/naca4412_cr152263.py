"""Pressures on NACA 4412 near its maximum lift: NASA CR-152263."""

from __future__ import annotations

import math

import numpy as np
from scipy.integrate import trapezoid

from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow
from optim.arrays import FloatArray
from optim.validation.case import Case, Comparison, Panel, Series, judge
from optim.validation.flight import curve, naca, pressure
from optim.validation.record import Record

POINT = OperatingPoint(1.52e6, alpha=0.0, trip_upper=0.025, trip_lower=0.103)

ANGLE = math.radians(13.87)
"""Geometric angle of the test [rad]."""

FROM = 0.02
"""Ahead of this x/c the pressure is nearly a step and is not compared."""

SIDES = ("upper", "lower")

PLATEAU = 0.8
"""Where the measured pressure becomes level [x/c], read off the table."""


def compare(record: Record) -> Comparison:
    """Compare pressures at the measured pressures' lift, and at the computed peak for show."""
    table, side = record.columns(), np.array(record.words("surface"))
    lift = _lift(table, side)
    section = naca("4412")
    (matched,) = section.lifts(POINT, np.array([lift]))
    peak = section.evaluator.maximum_lift(POINT)
    cases = [
        _pressures(record, table, side, flow, key, of)
        for flow, key, of in (
            (matched, "pressure", f"{lift:.3f}"),
            (peak, "pressure_at_peak", ""),
        )
    ]
    drawn = matched if matched.converged else peak
    alpha = section.degrees(matched.alpha)
    cases += [
        judge(record, "alpha", math.degrees(ANGLE), alpha),
        judge(record, "separation", PLATEAU, drawn.upper.separation),
    ]
    panel = Panel(
        "Do pressures agree at equal lift?" if matched.converged
        else "Do pressures agree at the peak (the lift is not reached)?", "x/c", "cp",
        tuple(
            Series(f"measured, {name} side", table["x_c"][side == name], table["cp"][side == name])
            for name in SIDES
        ),
        tuple(Series(f"computed, {name} side", *curve(drawn, name)) for name in SIDES),
        downwards=True,
    )  # fmt: skip
    return Comparison(record, tuple(cases), (panel,))


def _pressures(
    record: Record, table: dict[str, FloatArray], side: np.ndarray, flow: SectionFlow,
    key: str, of: str,
) -> Case:  # fmt: skip
    """Return the case of the pressures of both sides."""
    measured, computed = [], []
    for name in SIDES:
        here = (side == name) & (table["x_c"] >= FROM)
        measured.append(table["cp"][here])
        computed.append(pressure(flow, name, table["x_c"][here]))
    cp, ours = np.concatenate(measured), np.concatenate(computed)
    means = float(np.mean(cp)), float(np.mean(ours))
    return judge(record, key, *means, error=float(np.mean(np.abs(ours - cp))), of=of)


def _lift(table: dict[str, FloatArray], side: np.ndarray) -> float:
    """Return the lift of the measured pressures: the forces along and across the chord, turned."""
    x, y, cp = table["x_c"], table["y_c"], table["cp"]
    upper = np.flatnonzero(side == "upper")
    lower = np.flatnonzero(side == "lower")
    around = np.r_[upper[::-1], lower[::-1]]  # upper edge, nose, lower edge, as the table's order
    normal = trapezoid(cp[around], x[around])
    axial = -trapezoid(cp[around], y[around])
    return float(normal * math.cos(ANGLE) - axial * math.sin(ANGLE))
