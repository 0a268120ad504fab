"""NLF(1)-0416 with free transition: NASA TP-1861."""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow
from optim.arrays import BoolArray, FloatArray
from optim.validation.case import Case, Comparison, Panel, Series, judge
from optim.validation.flight import Model, mean_error, model, values
from optim.validation.record import Record

POINT = OperatingPoint(4e6, alpha=0.0, mach=0.10)

LIFTS = (-0.4, 1.2)
"""Lifts over which drag is compared."""

STRAIGHT = 8.0
"""Range of angles of the lift slope [deg]."""

WIDER = 0.05
"""Each bracket of transition is widened by this: one pitch of the orifices [x/c]."""


def compare(record: Record) -> Comparison:
    """Compare drag and lift at Re 4e6, and transition at Re 1e6 to 4e6."""
    section = model(record.sides())
    drag = record.columns("drag")
    here = (drag["cl"] >= LIFTS[0]) & (drag["cl"] <= LIFTS[1])
    cl, cd = drag["cl"][here], drag["cd"][here]
    computed = values(section.lifts(POINT, cl), "cd")
    means = float(np.mean(cd)), float(np.mean(computed))
    panel = Panel(
        "Does drag agree at equal lift, Re 4e6?", "cl", "cd",
        (Series("measured", drag["cl"], drag["cd"], 0.0003),), (Series("computed", cl, computed),),
    )  # fmt: skip
    turning, panels = _transition(record, section)
    cases = [judge(record, "drag", *means, error=mean_error(cd, computed))]
    return Comparison(record, (*cases, *_lift(record, section), *turning), (panel, *panels))


def _lift(record: Record, section: Model) -> list[Case]:
    lift = record.columns("lift")
    inside = np.abs(lift["alpha_deg"]) < STRAIGHT
    slope, offset = np.polyfit(lift["alpha_deg"][inside], lift["cl"][inside], 1)
    angles = np.arange(-7.0, 8.0)
    flows = section.angles(POINT, angles.tolist())
    ours, at_zero = np.polyfit(angles, values(flows, "cl"), 1)
    return [
        judge(record, "slope", float(slope), float(ours)),
        judge(record, "alpha_zero", float(-offset / slope), float(-at_zero / ours)),
    ]


def _transition(record: Record, section: Model) -> tuple[list[Case], list[Panel]]:
    table = record.columns("transition")
    side = np.array(record.words("surface", "transition"))
    found = np.full(len(side), math.nan)
    for reynolds in np.unique(table["Re"]):
        here = np.flatnonzero(table["Re"] == reynolds)
        point = OperatingPoint(float(reynolds), alpha=0.0, mach=0.10)
        flows = section.lifts(point, table["cl"][here])
        found[here] = [_turned(flow, side[i]) for i, flow in zip(here, flows, strict=True)]
    inside = _inside(table, found)
    cases = [judge(record, "transition", 1.0, float(np.mean(inside)), conditions=_span("1 to 4e6"))]
    panels = []
    for reynolds in np.unique(table["Re"]):
        of = f"{reynolds:.0e}".replace("e+0", "e")
        here = table["Re"] == reynolds
        share = float(np.mean(inside[here]))
        cases.append(judge(record, "transition_each", 1.0, share, of=of, conditions=_span(of)))
        panels.append(_panel(of, table, here, side, found))
    return cases, panels


def _span(of: str) -> str:
    return f"Re {of}, M 0.10, free transition, N 9"


def _turned(flow: SectionFlow, side: str) -> float:
    """Return where a side turns turbulent; one laminar to its edge turns there."""
    state = flow.upper if side == "upper" else flow.lower
    if flow.converged and state.transition_kind == "none":
        return 1.0
    return state.transition


def _inside(table: dict[str, FloatArray], found: FloatArray) -> BoolArray:
    """Return which places lie in their widened bracket; a missing end leaves it open."""
    low = np.nan_to_num(table["x_last_laminar"] - WIDER, nan=-1.0)
    high = np.nan_to_num(table["x_first_turbulent"] + WIDER, nan=2.0)
    return np.asarray((found >= low) & (found <= high))


def _panel(
    of: str, table: dict[str, FloatArray], here: BoolArray, side: np.ndarray, found: FloatArray
) -> Panel:
    middle = 0.5 * (table["x_last_laminar"] + table["x_first_turbulent"])
    measured, lines = [], []
    for name in ("upper", "lower"):
        rows = np.flatnonzero(here & (side == name))
        rows = rows[np.argsort(table["cl"][rows], kind="stable")]
        measured.append(Series(f"measured, {name} side", table["cl"][rows], middle[rows], 0.025))
        lines.append(Series(f"computed, {name} side", table["cl"][rows], found[rows]))
    return Panel(
        f"Where does the layer turn turbulent, Re {of}?", "cl", "x/c",
        tuple(measured), tuple(lines),
    )  # fmt: skip
