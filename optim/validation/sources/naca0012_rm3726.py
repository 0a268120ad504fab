"""Pressures on the upper side of NACA 0012: ARC R&M 3726."""

from __future__ import annotations

import numpy as np

from optim.aerodynamics.operating_point import OperatingPoint
from optim.validation.case import Case, Comparison, Panel, Series, judge
from optim.validation.flight import curve, naca, pressure
from optim.validation.record import Record

POINT = OperatingPoint(2.88e6, alpha=0.0, trip_upper=0.05, trip_lower=0.05)

FROM = 0.02
"""Ahead of this x/c the digitised curve is nearly vertical and is not compared."""

ANGLES = (0.0, 10.0, 15.0)
"""Angles of the test [deg]."""


def compare(record: Record) -> Comparison:
    """Compare pressures behind the suction peak at three angles."""
    table = record.columns()
    flows = naca("0012").angles(POINT, ANGLES)
    cases: list[Case] = []
    panels = []
    for angle, flow in zip(ANGLES, flows, strict=True):
        here = table["alpha_deg"] == angle
        x, cp = table["x_c"][here], table["cp"][here]
        behind = x >= FROM
        computed = pressure(flow, "upper", x)
        size = float(np.mean(np.abs(computed - cp)[behind]))
        key = f"pressure_{angle:g}"
        means = float(np.mean(cp[behind])), float(np.mean(computed[behind]))
        cases.append(judge(record, key, *means, error=size))
        panels.append(
            Panel(
                f"Do pressures agree at {angle:g} deg?", "x/c", "cp",
                (Series("measured, upper side", x, cp, record.allowances[key].reading),),
                (Series("computed", *curve(flow, "upper")),), downwards=True,
            )
        )  # fmt: skip
    return Comparison(record, tuple(cases), tuple(panels))
