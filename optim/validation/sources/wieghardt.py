"""The turbulent layer of a flat plate at 33 m/s: Wieghardt and Tillmann."""

from __future__ import annotations

import numpy as np

from optim.validation.case import Comparison, Panel, Series, judge
from optim.validation.prescribed import march
from optim.validation.record import Record

SPEED, VISCOSITY = 33.0, 1.51e-5
"""Edge speed [m/s] and kinematic viscosity [m2/s]; the stations' own speeds scatter by 0.3 %."""

FROM = 0.6
"""The stations ahead have few profile points [m]."""

STATIONS = 200
"""Of the march."""


def compare(record: Record) -> Comparison:
    """Compare momentum thickness and shape factor along the plate."""
    table = record.columns()
    kept = table["x_m"] > FROM
    x, theta, H = (table[name][kept] for name in ("x_m", "theta_m", "H"))
    length = np.unique(np.r_[np.linspace(x[0], x[-1], STATIONS), x])
    layer = march(SPEED / VISCOSITY, length, np.ones(len(length)), float(theta[0]), float(H[0]))
    at = np.searchsorted(length, x)
    ours, shape = layer.theta[at], layer.shape_factor[at]
    worst, bent = int(np.argmax(np.abs(ours / theta - 1))), int(np.argmax(np.abs(shape - H)))
    cases = (
        judge(record, "theta", float(theta[worst]), float(ours[worst])),
        judge(record, "shape", float(H[bent]), float(shape[bent])),
    )
    panels = (
        Panel(
            "Does the layer grow as measured?", "x m", "theta m",
            (Series("measured", x, theta, 0.02 * float(np.mean(theta))),),
            (Series("computed", length, layer.theta),),
        ),
        Panel(
            "Is its shape right?", "x m", "H",
            (Series("measured", x, H, 0.02),), (Series("computed", length, layer.shape_factor),),
        ),
    )  # fmt: skip
    return Comparison(record, cases, panels)
