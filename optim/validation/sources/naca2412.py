"""NACA 2412 at three Reynolds numbers with free transition: NACA Report 824."""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow
from optim.validation.case import Case, Comparison, Panel, Series, judge
from optim.validation.flight import Model, mean_error, naca, values
from optim.validation.record import Record

REYNOLDS = (3e6, 6e6, 9e6)
"""Reynolds numbers of the test."""

LIFTS = np.linspace(-0.4, 1.0, 15)
"""Lifts among which the least drag is looked for."""

STRAIGHT = (-0.6, 1.0)
"""Lifts of the slope."""

MOMENT_ANGLES = (-6.0, 8.0)
"""Range of the moment's mean [deg]."""


def compare(record: Record) -> Comparison:
    """Compare drag and maximum lift at each Reynolds number, slope and moment at the highest."""
    section = naca("2412")
    drag, lift = record.columns("drag"), record.columns("lift")
    cases: list[Case] = []
    panels = []
    least: dict[float, float] = {}
    for reynolds in REYNOLDS:
        point = OperatingPoint(reynolds, alpha=0.0)
        of = f"{reynolds:.0e}".replace("e+0", "e")
        conditions = record.conditions.replace("9e6", of)
        here = drag["re"] == reynolds
        low = here & (drag["cl"] <= 1.0)
        cl, cd = drag["cl"][low], drag["cd"][low]
        computed = values(section.lifts(point, cl), "cd")
        means = float(np.mean(cd)), float(np.mean(computed))
        error = mean_error(cd, computed)
        cases.append(judge(record, "drag", *means, error=error, of=of, conditions=conditions))
        line = values(section.lifts(point, LIFTS), "cd")
        least[reynolds] = float(line.min())
        top = float(lift["cl"][lift["re"] == reynolds].max())
        peak = section.evaluator.maximum_lift(point).cl
        cases.append(judge(record, "cl_max", top, peak, of=of, conditions=conditions))
        panels.append(
            Panel(
                f"Does drag agree at Re {of}?", "cl", "cd",
                (Series("measured", drag["cl"][here], drag["cd"][here], 0.0003),),
                (Series("computed", LIFTS, line),),
            )
        )  # fmt: skip
    lows = [float(drag["cd"][drag["re"] == reynolds].min()) for reynolds in REYNOLDS]
    cases.append(judge(record, "trend", lows[2] / lows[0], least[9e6] / least[3e6]))
    return Comparison(record, (*cases, *_straight(record, section)), tuple(panels))


def _straight(record: Record, section: Model) -> list[Case]:
    """Compare slope, zero-lift angle and moment at Re 9e6."""
    lift, moment = record.columns("lift"), record.columns("moment")
    here = (lift["re"] == 9e6) & (lift["cl"] > STRAIGHT[0]) & (lift["cl"] < STRAIGHT[1])
    slope, offset = np.polyfit(lift["alpha_deg"][here], lift["cl"][here], 1)
    taken = (moment["re"] == 9e6) & (moment["alpha_deg"] > MOMENT_ANGLES[0])
    taken &= moment["alpha_deg"] < MOMENT_ANGLES[1]
    at = np.sort(moment["alpha_deg"][taken])
    point = OperatingPoint(9e6, alpha=0.0)
    flows, derived = section.swept(point, np.arange(-7.0, 9.0).tolist())
    ours = _slope(flows)
    moments = values(section.angles(point, at.tolist()), "cm_quarter")
    return [
        judge(record, "slope", float(slope), ours),
        judge(record, "alpha_zero", float(-offset / slope), math.degrees(derived.alpha_zero_lift)),
        judge(record, "moment", float(np.mean(moment["cm_c4"][taken])), float(np.mean(moments))),
    ]


def _slope(flows: list[SectionFlow]) -> float:
    """Return the computed slope over the same lifts [1/deg]."""
    cl, alpha = values(flows, "cl"), np.degrees(values(flows, "alpha"))
    here = (cl > STRAIGHT[0]) & (cl < STRAIGHT[1])
    return float(np.polyfit(alpha[here], cl[here], 1)[0])
