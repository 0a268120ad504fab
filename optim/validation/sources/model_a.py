"""The near wake of DSMA661, Model A: Nakayama."""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.operating_point import OperatingPoint
from optim.arrays import FloatArray
from optim.validation.case import Comparison, Panel, Series, judge
from optim.validation.flight import mean_error, model, on_side
from optim.validation.record import Record

POINT = OperatingPoint(1.2e6, alpha=0.0, trip_upper=0.16, trip_lower=0.05)

DRAG = 0.0107
"""Mean of the drags of the seven profiles."""

NEAR = 1.9
"""The computed wake ends about a chord behind the edge [x/c]."""


def compare(record: Record) -> Comparison:
    """Compare drag, and the wake's momentum thickness for show."""
    wake = record.columns("wake")
    (flow,) = model(record.sides()).angles(POINT, [0.0])
    x: FloatArray = np.zeros(0)
    theta: FloatArray = np.zeros(0)
    computed = np.full(len(wake["x_c"]), math.nan)
    if flow.surface is not None and flow.surface.theta is not None:
        here = on_side(flow, "wake")
        x, theta = flow.surface.x[here], flow.surface.theta[here]
        computed = np.interp(wake["x_c"], x, theta)
    near = wake["x_c"] < NEAR
    measured = wake["theta_c"][near]
    means = float(np.mean(measured)), float(np.mean(computed[near]))
    cases = (
        judge(record, "drag", DRAG, flow.cd),
        judge(record, "theta", *means, error=mean_error(measured, computed[near])),
    )
    panel = Panel(
        "Does the wake lose momentum thickness as measured?", "x/c", "theta/c",
        (Series("measured", wake["x_c"], wake["theta_c"], 0.0002),),
        (Series("computed", x, theta),),
    )  # fmt: skip
    return Comparison(record, cases, (panel,))
