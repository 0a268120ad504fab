"""The curves of a design away from its conditions, four small panels on paper."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes

from optim.arrays import FloatArray
from optim.report.fields import Document
from optim.report.figures import AMBER, GREEN, LOWER, UPPER
from optim.report.off_design import Series
from optim.report.paper import BODY, MARGIN, SMALL, WIDTH, Page, wrapped

LOOKS = ((UPPER, "o", "-"), (LOWER, "s", "--"), (GREEN, "^", "-."), (AMBER, "D", ":"))
"""Colour, mark and line of each sweep."""

LABELS, BETWEEN = 13.0, 18.0
"""Room for the labels of an axis, and between two panels side by side [mm]."""

KEY = 5.0
"""Height of the line that tells the sweeps apart [mm]."""

DRAG_SHOWN = 5.0
"""Drag up to this many times the least is shown: beyond is the stall."""

DRAG_COUNT = 1e4
"""Drag coefficients are drawn in these."""


def draw_curves(
    page: Page,
    box: tuple[float, float],
    series: Sequence[Series],
    recorded: Sequence[Document],
) -> None:
    """Draw the curves.

    Parameters
    ----------
    page : Page
        To draw on.
    box : (float, float)
        Where they begin and how high they may be [mm].
    series : sequence of Series
        Sweeps, four at most.
    recorded : sequence of dict
        Fields of the flows that are archived, marked beside the curves.
    """
    y, height = box
    _key(page, y, series)
    tall = 0.5 * (height - KEY) - LABELS
    wide = 0.5 * (WIDTH - 2.0 * MARGIN - BETWEEN) - 6.0
    across = (MARGIN + 12.0, MARGIN + 12.0 + wide + BETWEEN)
    down = (y + KEY + 4.0, y + KEY + 4.0 + tall + LABELS)
    panels = [page.axes(x, top, wide, tall) for top in down for x in across]
    for axes, (name, over) in zip(
        panels,
        (("cl", "alpha"), ("cd", "cl"), ("cm_quarter", "cl"), ("x_cp", "cl")),
        strict=True,
    ):
        for one, (colour, mark, line) in zip(series, LOOKS, strict=False):
            axes.plot(
                _column(one, over), _column(one, name), color=colour, marker=mark, linestyle=line,
                markersize=2.2, linewidth=0.9,
            )  # fmt: skip
        known = [one for one in recorded if one["outcome"] == "converged"]
        axes.plot(
            [_recorded(one, over) for one in known], [_recorded(one, name) for one in known], "+",
            color="black", markersize=7.0, zorder=4,
        )  # fmt: skip
        axes.set_xlabel({"alpha": "angle of attack [deg]", "cl": "lift coefficient"}[over])
        axes.tick_params(labelsize=SMALL)
    _frames(panels, series)


def _frames(panels: Sequence[Axes], series: Sequence[Series]) -> None:
    words = (
        "lift coefficient",
        "drag, 10 000 cd",
        "moment about c/4, cm",
        "centre of pressure, x/c",
    )
    for axes, word in zip(panels, words, strict=True):
        axes.set_ylabel(word)
    drag = np.concatenate([_column(one, "cd") for one in series])
    if np.isfinite(drag).any():
        panels[1].set_ylim(0.0, min(DRAG_SHOWN * np.nanmin(drag), 1.05 * np.nanmax(drag)))
    panels[3].set_ylim(0.0, 1.0)


def _column(series: Series, name: str) -> FloatArray:
    """Return a figure of every flow; a flow without an answer leaves a gap."""
    factor = _factor(name)
    return np.array([factor * getattr(flow, name) for flow in series.flows])


def _recorded(flow: Document, name: str) -> float:
    return float(flow["alpha_deg"]) if name == "alpha" else _factor(name) * float(flow[name])


def _factor(name: str) -> float:
    return {"alpha": math.degrees(1.0), "cd": DRAG_COUNT}.get(name, 1.0)


def _key(page: Page, y: float, series: Sequence[Series]) -> None:
    """Draw which line is which sweep, side by side over the width."""
    share = (WIDTH - 2.0 * MARGIN) / (len(series) + 0.5)
    axes = page.axes(MARGIN, y, WIDTH - 2.0 * MARGIN, KEY)
    axes.set_xlim(0.0, WIDTH - 2.0 * MARGIN)
    axes.set_ylim(-KEY, 0.0)
    axes.set_axis_off()
    for k, (one, (colour, mark, line)) in enumerate(zip(series, LOOKS, strict=False)):
        x = k * share
        axes.plot(
            [x + 1.0, x + 3.5, x + 6.0], [-2.5] * 3, color=colour, marker=mark, linestyle=line,
            markersize=3.0, linewidth=0.9,
        )  # fmt: skip
        for row, words in enumerate(wrapped(one.name, share - 9.0, SMALL)[:2]):
            page.text(MARGIN + x + 7.5, y + 2.4 + 2.6 * row, words, SMALL)
    x = len(series) * share
    axes.plot([x + 2.0], [-2.5], "+", color="black", markersize=7.0)
    page.text(MARGIN + x + 5.0, y + 3.3, "recorded", BODY)
