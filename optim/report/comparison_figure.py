"""What is compared as one figure: fronts on the same axes, outlines, measured beside computed."""

from __future__ import annotations

from itertools import combinations

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from optim.geometry.curve import cosine_parameters
from optim.report.comparison import Compared, Comparison
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
from optim.report.units import factor_and_sign

LOOKS = (
    (UPPER, "o", "-"), (LOWER, "s", "--"), (GREEN, "^", "-."), (AMBER, "D", ":"),
    ("black", "v", (0, (5, 1, 1, 1, 1, 1))), (GREY, "P", (0, (1, 1))),
)  # fmt: skip
"""Colour, mark and line of each thing compared: as many as can be told apart."""

FRONT, OUTLINE, POLAR = 3.8, 2.2, 2.6
"""Heights of the panels [inch]."""

INTERVALS = 400
"""Intervals of a drawn outline."""

LABELS = {
    "cl": ("angle of attack [deg]", "cl"),
    "cd": ("cl", "10 000 cd"),
    "cm_quarter": ("cl", "cm about c/4"),
}


WORDS = {"cl": "Lift", "cd": "Drag", "cm_quarter": "Moment"}
"""What each panel of a measurement is about."""


def comparison_figure(found: Comparison) -> Figure:
    """Return the figure of a comparison."""
    fronts = [one for one in found.columns if one.run is not None]
    outlines = [one for one in found.columns if one.section is not None]
    pairs: list[tuple[int, int]] = []
    if fronts and fronts[0].run is not None:
        pairs = list(combinations(range(len(fronts[0].run.judgement.aims)), 2))
    coefficients = sorted({one.quantity for _, _, one in found.residuals}, key=list(LABELS).index)
    heights = [FRONT] * len(pairs) + [OUTLINE] * bool(outlines) + [POLAR] * len(coefficients)
    with mpl.rc_context(STYLE):
        figure = new_figure(sum(heights))
        panels = list(figure.subplots(len(heights), 1, squeeze=False, height_ratios=heights)[:, 0])
        for across, up in pairs:
            _fronts(panels.pop(0), found, across, up)
        if outlines:
            _outlines(panels.pop(0), found)
        for axes, quantity in zip(panels, coefficients, strict=True):
            _polar(axes, found, quantity)
    return figure


def _fronts(axes: Axes, found: Comparison, across: int, up: int) -> None:
    """Draw every front, and where the designs named lie."""
    title(axes, "What does each run reach?")
    volumes = iter(found.volumes.each if found.volumes is not None else ())
    for column, (colour, mark, _) in zip(found.columns, LOOKS, strict=False):
        if column.run is not None:
            aims = [column.run.judgement.aims[k] for k in (across, up)]
            scale = np.array([factor_and_sign(aim.unit)[0] for aim in aims])
            place = column.run.judgement.objectives[column.run.rows][:, [across, up]] * scale
            label = f"{column.name}: {len(place)} designs, hypervolume {next(volumes):.6g}"
            axes.plot(*place.T, mark, color=colour, markersize=4.5, label=label)
            axes.set_xlabel(f"{aims[0].name}, {aims[0].sense}d")
            axes.set_ylabel(f"{aims[1].name}, {aims[1].sense}d")
    known = next(one.run for one in found.columns if one.run is not None)
    for column, (colour, mark, _) in zip(found.columns, LOOKS, strict=False):
        names = [known.judgement.aims[k] for k in (across, up)]
        if column.record is not None and all(
            aim.name in column.record.entry["objectives"] for aim in names
        ):
            values = [
                column.record.entry["objectives"][aim.name] * factor_and_sign(aim.unit)[0]
                for aim in names
            ]
            axes.plot(
                *[[value] for value in values], mark, color=colour, markersize=11,
                markerfacecolor="none", markeredgewidth=1.8, label=column.name,
            )  # fmt: skip
    if found.volumes is not None:
        axes.plot([], [], " ", label=f"all fronts together: hypervolume {found.volumes.union:.6g}")
    _legend(axes)


def _outlines(axes: Axes, found: Comparison) -> None:
    title(axes, "How do the sections differ? At true scale")
    for column, (colour, _, line) in zip(found.columns, LOOKS, strict=False):
        if column.section is not None:
            points = column.section.points(cosine_parameters(INTERVALS))
            draw_loop(axes, points, color=colour, linestyle=line, linewidth=1.1, label=column.name)
    axes.set_xlabel("x/c")
    axes.set_ylabel("y/c")
    _legend(axes)


def _polar(axes: Axes, found: Comparison, quantity: str) -> None:
    """Draw measured marks and computed lines; a point without an answer leaves a gap."""
    across, up = LABELS[quantity]
    title(axes, f"{WORDS[quantity]}: how far is computed from measured?")
    factor = 1e4 if quantity == "cd" else 1.0
    drawn: set[int] = set()
    for k, m, one in found.residuals:
        if one.quantity != quantity:
            continue
        if m not in drawn:
            drawn.add(m)
            colour, mark, _ = LOOKS[m]
            axes.plot(
                one.at, factor * one.measured, mark, color=colour, markersize=5,
                markerfacecolor="none", label=f"{found.columns[m].name}, measured",
            )  # fmt: skip
        order = np.argsort(one.at, kind="stable")
        colour, _, line = LOOKS[k]
        label = _computed(found.columns[k])
        axes.plot(
            one.at[order], factor * one.computed[order], color=colour, linestyle=line, label=label,
        )  # fmt: skip
    axes.set_xlabel(across)
    axes.set_ylabel(up)
    _legend(axes)


def _computed(column: Compared) -> str:
    return f"{column.name}, computed"


def _legend(axes: Axes) -> None:
    """Set the key beside the panel's upper edge, where names of any length have room."""
    axes.legend(loc="upper left", bbox_to_anchor=(0.0, -0.22), fontsize="small", ncols=1)
