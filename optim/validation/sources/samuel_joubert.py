"""A turbulent layer in an increasingly adverse pressure: Samuel and Joubert."""

from __future__ import annotations

import numpy as np
from scipy.interpolate import PchipInterpolator

from optim.validation.case import Comparison, Panel, Series, judge
from optim.validation.prescribed import march
from optim.validation.record import Record

SPEED, VISCOSITY = 26.2, 1.54e-5
"""Reference speed [m/s] and kinematic viscosity [m2/s]."""

STATIONS = 400
"""Of the march; 2000 change no digit shown."""


def compare(record: Record) -> Comparison:
    """Compare momentum thickness, shape factor and friction along the measured edge speed."""
    table, edge = record.columns(), record.columns("speed")
    x, theta, H = table["x_m"], table["theta_m"], table["H"]
    length = np.unique(np.r_[np.linspace(x[0], x[-1], STATIONS), x])
    speed = PchipInterpolator(edge["x_m"], edge["ue_mps"])(length) / SPEED
    layer = march(SPEED / VISCOSITY, length, speed, float(theta[0]), float(H[0]))
    at = np.searchsorted(length, x)
    cf = table["cf_clauser"]
    rows = {
        "theta": (theta, layer.theta, 0.03 * float(np.mean(theta)), "theta m"),
        "shape": (H, layer.shape_factor, 0.02, "H"),
        "friction": (
            cf,
            layer.skin_friction * speed**2,
            0.05 * float(np.mean(cf)),
            "cf on the reference speed",
        ),
    }
    cases, panels = [], []
    for key, (measured, line, bar, name) in rows.items():
        errors = np.abs(line[at] - measured)
        if record.allowances[key].measure == "relative":
            errors = errors / measured
        worst = 1 + int(np.argmax(errors[1:]))  # the first station is given
        cases.append(judge(record, key, float(measured[worst]), float(line[at][worst])))
        panels.append(
            Panel(
                f"Does {name.split()[0]} follow the pressure?", "x m", name,
                (Series("measured", x, measured, bar),), (Series("computed", length, line),),
            )
        )  # fmt: skip
    return Comparison(record, tuple(cases), tuple(panels))
