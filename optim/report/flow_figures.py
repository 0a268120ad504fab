"""Flows about sections as figures, panel above panel over one axis, a question a panel.

A few points: what the flow does along the chord. Many points, or several sections or Reynolds
numbers: what the section does over the angle of attack.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from optim.aerodynamics.operating_point import SectionFlow, Surface
from optim.arrays import BoolArray, FloatArray
from optim.errors import Fault, InputError
from optim.geometry.curve import cosine_parameters
from optim.report.analysis import Analysed
from optim.report.figures import (
    AMBER,
    GREEN,
    GREY,
    LOWER,
    STYLE,
    UPPER,
    draw_loop,
    new_figure,
    title,
)

MOST_SURFACES = 3
"""More flows than this in one picture of the chord cannot be told apart."""

LINES = ("-", "--", ":")
"""Line of each flow along the chord."""

SERIES = ((UPPER, "o", "-"), (LOWER, "s", "--"), (GREEN, "^", "-."), (AMBER, "D", ":"))
"""Colour, mark and line of each series over the angle."""

SEPARATED = 0.0
"""Skin friction at and below which the layer is separated."""

INTERVALS = 400
"""Intervals of the drawn outline."""


def analysis_figure(answers: Sequence[Analysed]) -> Figure:
    """Return the figure of an analysis.

    Parameters
    ----------
    answers : sequence of Analysed
        One a section and Reynolds number.

    Raises
    ------
    InputError
        If no point converged, or more series are asked for than can be told apart.
    """
    if not any(flow.converged for one in answers for flow in one.flows):
        raise InputError([Fault("there is nothing to draw: no point has an answer.")])
    if len(answers) > len(SERIES):
        message = f"{len(answers)} series cannot be told apart; accepted are {len(SERIES)}."
        raise InputError([Fault(message)])
    with mpl.rc_context(STYLE):
        if len(answers) == 1 and len(answers[0].flows) <= MOST_SURFACES:
            return _along_the_chord(answers[0])
        return _over_the_angle(answers)


def _along_the_chord(answer: Analysed) -> Figure:
    flows = [flow for flow in answer.flows if flow.surface is not None]
    viscous = flows[0].surface is not None and flows[0].surface.theta is not None
    figure = new_figure(8.6 if viscous else 5.2)
    rows = 4 if viscous else 2
    axes = figure.subplots(rows, 1, sharex=True, height_ratios=[0.75, 1.6, 1.0, 1.0][:rows])
    _outline(axes[0], answer, flows)
    for flow, line in zip(flows, LINES, strict=False):
        surface = flow.surface
        if surface is None:
            continue
        _load(axes[1], surface, line, shaded=len(flows) == 1)
        if viscous:
            _shape(axes[2], surface, line)
            _friction(axes[3], surface, line)
    _finish_chord(axes, flows, viscous=viscous)
    return figure


def _outline(axes: Axes, answer: Analysed, flows: list[SectionFlow]) -> None:
    points = answer.section.points(cosine_parameters(INTERVALS))
    draw_loop(axes, points, color="black", linewidth=1.0)
    if len(flows) == 1:
        _mark_places(axes, answer, flows[0])
    title(axes, f"{answer.section.name} at true scale")
    axes.set_ylabel("y/c")


def _mark_places(axes: Axes, answer: Analysed, flow: SectionFlow) -> None:
    """Mark on the outline where the flow divides, turns turbulent and separates."""
    stagnant = 0 if flow.stagnation_side == "upper" else 1
    marks = [
        ("stagnation", "o", "black", [(flow.stagnation_x, stagnant)]),
        ("transition", "v", GREEN, [(flow.upper.transition, 0), (flow.lower.transition, 1)]),
        ("separation", "X", AMBER, [(flow.upper.separation, 0), (flow.lower.separation, 1)]),
    ]
    for name, mark, colour, places in marks:
        known = [(x, side) for x, side in places if 0.0 <= x <= 1.0]
        y = [float(answer.section.upper_lower(np.array([x]))[side][0]) for x, side in known]
        if known:
            axes.plot(
                [x for x, _ in known], y, mark, color=colour, label=name, zorder=3, clip_on=False
            )
    axes.legend(loc="lower right", bbox_to_anchor=(1.0, 0.95), ncols=3)


def _on(surface: Surface, side: str) -> BoolArray:
    return np.array([name == side for name in surface.side], dtype=np.bool_)


def _load(axes: Axes, surface: Surface, line: str, *, shaded: bool) -> None:
    """Suction upwards on both sides; the area between the curves is the load."""
    for side, colour in (("upper", UPPER), ("lower", LOWER)):
        here = _on(surface, side)
        axes.plot(surface.x[here], -surface.cp[here], line, color=colour, linewidth=1.3)
    if shaded:
        x = np.linspace(0.0, 1.0, INTERVALS)
        upper, lower = (_at(x, surface, side, -surface.cp) for side in ("upper", "lower"))
        axes.fill_between(x, lower, upper, color=UPPER, alpha=0.10, linewidth=0.0)


def _at(x: FloatArray, surface: Surface, side: str, values: FloatArray) -> FloatArray:
    """Values of a side at equal stations, the part of it that runs back to the nose left out."""
    here = _on(surface, side)
    order = np.argsort(surface.x[here], kind="stable")
    return np.interp(x, surface.x[here][order], values[here][order])


def _shape(axes: Axes, surface: Surface, line: str) -> None:
    if surface.shape_factor is None:
        return
    for side, colour in (("upper", UPPER), ("lower", LOWER)):
        here = _on(surface, side)
        axes.plot(surface.x[here], surface.shape_factor[here], line, color=colour, linewidth=1.3)


def _friction(axes: Axes, surface: Surface, line: str) -> None:
    if surface.skin_friction is None:
        return
    for side, colour in (("upper", UPPER), ("lower", LOWER)):
        here = _on(surface, side)
        axes.plot(
            surface.x[here], 1e3 * surface.skin_friction[here], line, color=colour, linewidth=1.3
        )
    axes.axhline(SEPARATED, color="black", linewidth=0.8)


def _finish_chord(axes: Sequence[Axes], flows: list[SectionFlow], *, viscous: bool) -> None:
    title(axes[1], "Where is the load? Suction is up, the area between the sides is the lift")
    axes[1].set_ylabel("suction  -cp")
    axes[1].plot([], [], color=UPPER, label="upper side")
    axes[1].plot([], [], color=LOWER, label="lower side")
    for flow, line in zip(flows, LINES, strict=False):
        axes[1].plot([], [], line, color=GREY, label=_flow_label(flow))
    axes[1].legend(loc="upper right")
    if viscous:
        title(axes[2], "How close is the layer to separation? Its shape factor")
        axes[2].set_ylabel("H")
        axes[2].set_ylim(1.0, 6.0)
        title(axes[3], "What does the layer cost? Skin friction; below zero the flow is reversed")
        axes[3].set_ylabel("1000 cf")
        axes[3].set_ylim(-2.0, 12.0)
    axes[-1].set_xlabel("x/c")
    axes[-1].set_xlim(-0.02, 1.02)


def _flow_label(flow: SectionFlow) -> str:
    drag = "" if math.isnan(flow.cd) else f", cd {flow.cd:.5f}"
    return f"{math.degrees(flow.alpha):.2f} deg: cl {flow.cl:.3f}{drag}"


def _over_the_angle(answers: Sequence[Analysed]) -> Figure:
    figure = new_figure(9.4)
    axes = figure.subplots(4, 1, sharex=True, height_ratios=[1.3, 1.3, 0.9, 1.1])
    for answer, (colour, mark, line) in zip(answers, SERIES, strict=False):
        _draw_series(axes, answer, {"color": colour, "marker": mark, "linestyle": line})
    if len(answers) == 1:
        _drag_parts(axes[1], answers[0])
    _draw_gaps(axes[0], answers)
    for panel, question, name in (
        (axes[0], "How much does it lift?", "cl"),
        (axes[1], "What does the lift cost?", "10 000 cd"),
        (axes[2], "How does it turn? Nose-up about the quarter chord", "cm"),
        (axes[3], "How far is it laminar? Filled: upper side, open: lower side", "transition x/c"),
    ):
        title(panel, question)
        panel.set_ylabel(name)
    axes[3].set_ylim(-0.03, 1.03)
    axes[0].legend(loc="lower right")
    axes[3].set_xlabel("angle of attack [deg]")
    return figure


def _column(answer: Analysed, name: str) -> FloatArray:
    return np.array([getattr(flow, name) for flow in answer.flows], dtype=np.float64)


def _angles(answer: Analysed) -> FloatArray:
    """Angles of the flows; of one without an answer the angle asked for, if one was [deg]."""
    found = [
        flow.alpha if flow.converged or flow.point.alpha is None else flow.point.alpha
        for flow in answer.flows
    ]
    return np.degrees(np.array(found, dtype=np.float64))


def _draw_series(axes: Sequence[Axes], answer: Analysed, look: dict[str, Any]) -> None:
    """Draw one series; points without an answer leave a gap."""
    order = np.argsort(_angles(answer), kind="stable")
    alpha = _angles(answer)[order]
    look = look | {"markersize": 3.5, "linewidth": 1.2}
    axes[0].plot(alpha, _column(answer, "cl")[order], **look, label=_series_label(answer))
    axes[1].plot(alpha, 1e4 * _column(answer, "cd")[order], **look)
    axes[2].plot(alpha, _column(answer, "cm_quarter")[order], **look)
    for side, face in (("upper", look["color"]), ("lower", "white")):
        places = [getattr(flow, side).transition for flow in answer.flows]
        axes[3].plot(alpha, np.array(places)[order], **look, markerfacecolor=face)


def _series_label(answer: Analysed) -> str:
    reynolds = answer.flows[0].point.reynolds
    return answer.section.name + (f", Re {reynolds:g}" if math.isfinite(reynolds) else "")


def _drag_parts(axes: Axes, answer: Analysed) -> None:
    """Fill the drag by its parts: friction below, pressure above."""
    order = np.argsort(_angles(answer), kind="stable")
    alpha = _angles(answer)[order]
    friction = 1e4 * _column(answer, "cd_friction")[order]
    whole = 1e4 * _column(answer, "cd")[order]
    axes.fill_between(alpha, 0.0, friction, color=UPPER, alpha=0.12, linewidth=0, label="friction")
    axes.fill_between(
        alpha, friction, whole, color=AMBER, alpha=0.25, linewidth=0, label="pressure"
    )
    axes.set_ylim(bottom=0.0)
    axes.legend(loc="upper left", ncols=2)


def _draw_gaps(axes: Axes, answers: Sequence[Analysed]) -> None:
    """Mark at the foot of the panel the angles without an answer."""
    failed = [
        angle
        for answer in answers
        for angle, flow in zip(_angles(answer), answer.flows, strict=True)
        if not flow.converged and math.isfinite(angle)
    ]
    if failed:
        axes.plot(
            failed, np.zeros(len(failed)), "x", color=GREY, clip_on=False, label="no answer",
            transform=axes.get_xaxis_transform(),
        )  # fmt: skip
