"""E387 with laminar bubbles: NASA TM-4062."""

from __future__ import annotations

import numpy as np

from optim.aerodynamics.operating_point import OperatingPoint
from optim.aerodynamics.sweep import DRAG_FACTOR
from optim.arrays import BoolArray, FloatArray
from optim.geometry.section import section_from_coordinates
from optim.validation.case import Case, Comparison, Panel, Series, judge
from optim.validation.flight import Model, curve, mean_error, model, pressure, values
from optim.validation.record import Record

REYNOLDS, MACH = 2e5, 0.06

POLAR = (0.25, 1.1)
"""Lifts of the whole polar that is compared."""

PRESSURE_ANGLES = (0.01, 2.04, 5.05, 7.01)
"""Angles with pressures at Re 2e5 [deg]."""

FROM = 0.02
"""Ahead of this x/c pressures are not compared."""

TREND = (6e4, 1e5, 2e5, 3e5, 4.6e5)
"""Reynolds numbers at 5 deg."""


def compare(record: Record) -> Comparison:
    """Compare drag, lift, pressures, bubbles and the trend with the Reynolds number."""
    at = record.columns("ordinates")
    section, _ = section_from_coordinates(np.column_stack([at["x_c"], at["y_c"]]), "E387")
    flown = model(section)
    parts = [_polar(record, flown), _pressures(record, flown), _bubbles(record, flown)]
    parts.append(_trend(record, flown))
    cases = [case for found, _ in parts for case in found]
    return Comparison(record, tuple(cases), tuple(panel for _, more in parts for panel in more))


def _point(reynolds: float = REYNOLDS, mach: float = MACH) -> OperatingPoint:
    return OperatingPoint(reynolds, alpha=0.0, mach=mach)


def low_drag(cl: FloatArray, cd: FloatArray) -> BoolArray:
    """Return which points, of ascending lift, lie in the low-drag range about the least drag."""
    least = int(np.argmin(cd))
    inside = cd <= DRAG_FACTOR * cd[least]
    low, high = least, least
    while low > 0 and inside[low - 1]:
        low -= 1
    while high + 1 < len(cd) and inside[high + 1]:
        high += 1
    places = np.arange(len(cl))
    return np.asarray((places >= low) & (places <= high))


def _polar(record: Record, flown: Model) -> tuple[list[Case], list[Panel]]:
    table = record.columns("polar")
    order = np.argsort(table["cl"], kind="stable")
    cl, cd = table["cl"][order], table["cd"][order]
    wide = (cl >= POLAR[0] - 0.01) & (cl <= POLAR[1])
    computed = np.full(len(cl), np.nan)
    computed[wide] = values(flown.lifts(_point(), cl[wide]), "cd")
    cases = []
    for key, here in (("drag_low_range", low_drag(cl, cd)), ("drag_polar", wide)):
        means = float(np.mean(cd[here])), float(np.mean(computed[here]))
        cases.append(judge(record, key, *means, error=mean_error(cd[here], computed[here])))
    panel = Panel(
        "Does drag agree at equal lift, Re 2e5?", "cl", "cd",
        (Series("measured", cl, cd, 0.0003),), (Series("computed", cl[wide], computed[wide]),),
    )  # fmt: skip
    return cases, [panel]


def _pressures(record: Record, flown: Model) -> tuple[list[Case], list[Panel]]:
    table, side = record.columns("pressures"), np.array(record.words("surface", "pressures"))
    flows = flown.angles(_point(), PRESSURE_ANGLES)
    cases, panels = [], []
    for angle, flow in zip(PRESSURE_ANGLES, flows, strict=True):
        here = (table["Re"] == REYNOLDS) & (table["alpha_deg"] == angle)
        measured, computed, drawn, lines = [], [], [], []
        for name in ("upper", "lower"):
            taps = here & (side == name)
            behind = taps & (table["x_c"] >= FROM)
            measured.append(table["cp"][behind])
            computed.append(pressure(flow, name, table["x_c"][behind]))
            x, cp = table["x_c"][taps], table["cp"][taps]
            drawn.append(Series(f"measured, {name} side", x, cp, 0.02))
            lines.append(Series(f"computed, {name} side", *curve(flow, name)))
        cp, ours = np.concatenate(measured), np.concatenate(computed)
        size = float(np.mean(np.abs(ours - cp)))
        means = float(np.mean(cp)), float(np.mean(ours))
        cases.append(judge(record, "pressure", *means, error=size, of=f"{angle:g} deg"))
        panels.append(
            Panel(
                f"Do pressures agree at {angle:g} deg, Re 2e5?", "x/c", "cp",
                tuple(drawn), tuple(lines), downwards=True,
            )
        )  # fmt: skip
    return cases, panels


def _bubbles(record: Record, flown: Model) -> tuple[list[Case], list[Panel]]:
    table = record.columns("bubbles")
    ends = np.full((len(table["Re"]), 2), np.nan)
    for reynolds in np.unique(table["Re"]):
        here = np.flatnonzero(table["Re"] == reynolds)
        flows = flown.angles(_point(float(reynolds)), table["alpha_deg"][here].tolist())
        for i, flow in zip(here.tolist(), flows, strict=True):
            if flow.upper.bubble is not None:
                ends[i] = flow.upper.bubble
    cases = []
    for i, (reynolds, angle) in enumerate(zip(table["Re"], table["alpha_deg"], strict=True)):
        of = f"{angle:g} deg, Re {reynolds:.0e}".replace("e+0", "e")
        conditions = record.conditions.replace("2e5", of.rpartition(" ")[2])
        for k, key in enumerate(("bubble_start", "bubble_end")):
            column = ("x_separation", "x_reattachment")[k]
            measured, found = float(table[column][i]), float(ends[i, k])
            cases.append(judge(record, key, measured, found, of=of, conditions=conditions))
    main = table["Re"] == REYNOLDS
    alpha = table["alpha_deg"][main]
    panel = Panel(
        "Where is the bubble, Re 2e5?", "alpha deg", "x/c",
        tuple(
            Series(f"measured {name}", alpha, table[column][main], 0.03)
            for name, column in (("start", "x_separation"), ("end", "x_reattachment"))
        ),
        tuple(Series(f"computed {('start', 'end')[k]}", alpha, ends[main, k]) for k in (0, 1)),
    )  # fmt: skip
    return cases, [panel]


def _trend(record: Record, flown: Model) -> tuple[list[Case], list[Panel]]:
    """Compare drag near 5 deg from Re 6e4 to 4.6e5, lift and moment at 2e5."""
    table = record.columns("reynolds")
    cases, measured, computed = [], [], []
    for reynolds in TREND:
        here = (table["Re"] == reynolds) & (np.abs(table["alpha_deg"] - 5.0) < 0.1)
        alpha, cd = float(np.mean(table["alpha_deg"][here])), float(np.mean(table["cd"][here]))
        (flow,) = flown.angles(_point(reynolds, float(table["mach"][here][0])), [alpha])
        key, of = {6e4: ("drag_60000", ""), 1e5: ("drag_100000", "")}.get(
            reynolds, ("drag_trend", f"{reynolds:.2g}".replace("e+0", "e"))
        )
        conditions = f"Re {reynolds:.2g}, M {float(table['mach'][here][0]):g}, free, N 9"
        cases.append(
            judge(record, key, cd, flow.cd, of=of, conditions=conditions.replace("e+0", "e"))
        )
        measured.append(cd)
        computed.append(flow.cd)
        if reynolds == REYNOLDS:
            cases.append(judge(record, "lift", float(np.mean(table["cl"][here])), flow.cl))
            moment = float(np.mean(table["cm_c4"][here]))
            cases.append(judge(record, "moment", moment, flow.cm_quarter))
    at = np.array(TREND) / 1e3
    panel = Panel(
        "Does drag at 5 deg follow Re?", "Re in thousands", "cd",
        (Series("measured", at, np.array(measured), 0.0005),),
        (Series("computed", at, np.array(computed)),),
    )  # fmt: skip
    return cases, [panel]
