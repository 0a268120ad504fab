"""Layer and wake of RAE 2822, case 1: AGARD AR-138."""

from __future__ import annotations

import numpy as np

from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow
from optim.geometry.section import section_from_coordinates
from optim.validation.case import Comparison, Panel, Series, judge
from optim.validation.flight import model, on_side
from optim.validation.record import Record

POINT = OperatingPoint(5.7e6, alpha=0.0, mach=0.676, trip_upper=0.11, trip_lower=0.11)

LIFT = 0.5656
"""Lift of the measured cn 0.566 at the corrected angle of 1.93 deg and the measured cd 0.0085."""

SIDES = ("upper", "lower")


def compare(record: Record) -> Comparison:
    """Compare the layer at the edge and the drag of the far wake at equal lift."""
    table, side = record.columns("layer"), np.array(record.words("surface", "layer"))
    at = record.columns("ordinates")
    upper = np.column_stack([at["x_c"], at["y_upper_measured"]])
    lower = np.column_stack([at["x_c"], at["y_lower_measured"]])
    section, _ = section_from_coordinates(np.concatenate([upper[::-1], lower[1:]]), "RAE 2822")
    (flow,) = model(section).lifts(POINT, np.array([LIFT]))
    cases = []
    for name in SIDES:
        row = int(np.flatnonzero(side == f"{name}_half_wake")[0])
        for key, column, field in (
            ("theta", "theta_c", "theta"),
            ("displacement", "dstar_c", "delta_star"),
        ):
            found = _at_edge(flow, name, field)
            cases.append(judge(record, key, float(table[column][row]), found, of=name))
    far = int(np.argmax(table["x_c"]))
    cases.append(judge(record, "drag", 2.0 * float(table["theta_c"][far]), flow.cd))
    on_upper = side == "upper"
    panel = Panel(
        "Does the layer of the upper side grow as measured?", "x/c", "theta/c",
        (Series("measured", table["x_c"][on_upper], table["theta_c"][on_upper], 0.0001),),
        (_line(flow),),
    )  # fmt: skip
    return Comparison(record, tuple(cases), (panel,))


def _at_edge(flow: SectionFlow, side: str, field: str) -> float:
    if flow.surface is None:
        return float("nan")
    here = on_side(flow, side)
    order = np.argsort(flow.surface.x[here])
    return float(getattr(flow.surface, field)[here][order][-1])


def _line(flow: SectionFlow) -> Series:
    if flow.surface is None or flow.surface.theta is None:
        return Series("computed", np.zeros(0), np.zeros(0))
    here = on_side(flow, "upper")
    order = np.argsort(flow.surface.x[here])
    return Series("computed", flow.surface.x[here][order], flow.surface.theta[here][order])
