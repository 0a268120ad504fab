"""A front as a figure: what is traded for what, and which limit holds each design where it is."""

from __future__ import annotations

from itertools import combinations

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from optim.arrays import FloatArray, IntArray
from optim.report.figures import (
    AMBER,
    GREEN,
    GREY,
    LOWER,
    PALE,
    STYLE,
    UPPER,
    new_figure,
    title,
)
from optim.report.front import ACTIVE_MARGIN, BASELINE
from optim.report.judgement import Aim, Judgement
from optim.report.units import as_read, factor_and_sign

TRADE_HEIGHT, LIMIT_HEIGHT = 4.6, 0.42
"""Height of a panel of two objectives, and of a line of one limit [inch]."""

MARGIN_TICKS = (-1.0, -0.5, -0.2, -0.1, -0.05, 0.0, 0.05, 0.1, 0.2, 0.5, 1.0, 2.0)

MOST_GREY = 4000
"""Dominated designs that are drawn at most, evenly picked."""


def front_figure(judgement: Judgement) -> Figure:
    """Return the figure of a front.

    Parameters
    ----------
    judgement : Judgement
        Of the evaluations of a run.
    """
    rows = judgement.front()
    pairs = list(combinations(range(len(judgement.aims)), 2))
    limits = len(judgement.limits)
    heights = [TRADE_HEIGHT] * len(pairs) + [0.8 + LIMIT_HEIGHT * limits] * (limits > 0)
    with mpl.rc_context(STYLE):
        figure = new_figure(sum(heights))
        panels = figure.subplots(len(heights), 1, squeeze=False, height_ratios=heights)[:, 0]
        for axes, (across, up) in zip(panels, pairs, strict=False):
            _trade(axes, judgement, rows, across, up)
        title(panels[0], f"{judgement.study}: what is traded for what")
        panels[0].legend(loc="best")
        if limits:
            _held(panels[-1], judgement, rows)
    return figure


def _trade(axes: Axes, judgement: Judgement, rows: IntArray, across: int, up: int) -> None:
    aims = judgement.aims[across], judgement.aims[up]
    scale = np.array([factor_and_sign(aim.unit)[0] for aim in aims])
    values = judgement.objectives[:, [across, up]] * scale
    feasible = np.flatnonzero(judgement.violation == 0.0)
    beaten = np.setdiff1d(feasible, rows)
    better = judgement.better_in_everything(rows, BASELINE) if len(values) else rows
    for here, mark, colour, size, name in [
        (beaten[:: 1 + len(beaten) // MOST_GREY], ".", PALE, 3, f"feasible, beaten: {len(beaten)}"),
        (np.setdiff1d(rows, better), "o", UPPER, 5, f"front: {len(rows)}"),
        (better, "^", GREEN, 6, f"of it better than the baseline in all: {len(better)}"),
    ][: 3 if len(better) else 2]:
        axes.plot(
            *values[here].T, mark, color=colour, markersize=size, label=name,
            markeredgecolor="white" if size > 3 else colour, markeredgewidth=0.5,
        )  # fmt: skip
    if len(values):
        _baseline(axes, judgement, values[BASELINE], judgement.signs[[across, up]])
    axes.set_xlabel(_label(aims[0]))
    axes.set_ylabel(_label(aims[1]))
    _look_at_the_front(axes, np.vstack([values[rows], values[:1]]))


def _label(aim: Aim) -> str:
    sign = factor_and_sign(aim.unit)[1].strip()
    return f"{aim.name}{f' [{sign}]' if sign else ''}, {aim.sense}d"


def _baseline(axes: Axes, judgement: Judgement, place: FloatArray, signs: FloatArray) -> None:
    """Draw the baseline, and tint what is better than it in both objectives."""
    if not np.isfinite(place).all():
        return
    feasible = judgement.violation[BASELINE] == 0.0
    axes.plot(
        *place, "D", color=LOWER, markersize=8, zorder=4,
        markerfacecolor=LOWER if feasible else "white",
        label="baseline" if feasible else "baseline, misses a limit",
    )  # fmt: skip
    x, y = place
    far_x, far_y = place - signs * 1e3 * (np.abs(place) + 1.0)
    axes.fill_between(
        sorted([x, far_x]), *sorted([y, far_y]), color=LOWER, alpha=0.06, linewidth=0,
        label="better than the baseline in both",
    )  # fmt: skip


def _look_at_the_front(axes: Axes, shown: FloatArray) -> None:
    """Set the window around the front and the baseline: the beaten ones may lie far off."""
    shown = shown[np.isfinite(shown).all(axis=1)]
    if not len(shown):
        return
    low, high = shown.min(axis=0), shown.max(axis=0)
    room = 0.12 * np.where(high > low, high - low, np.abs(high) + 1e-3)
    axes.set_xlim(low[0] - room[0], high[0] + room[0])
    axes.set_ylim(low[1] - room[1], high[1] + room[1])


def _held(axes: Axes, judgement: Judgement, rows: IntArray) -> None:
    """One line a limit, one mark a design of the front: how much of the limit is left."""
    count = len(judgement.limits)
    for k, limit in enumerate(judgement.limits):
        height = count - 1 - k
        margins = judgement.margins[rows, k]
        active = margins < ACTIVE_MARGIN
        for here, colour, width in ((~active, UPPER, 1), (active, AMBER, 3)):
            level = np.full(int(here.sum()), height)
            axes.plot(margins[here], level, "|", color=colour, markersize=12, mew=width)
        if len(judgement.margins):
            axes.plot(
                judgement.margins[BASELINE, k], height, "D", color=LOWER, markersize=5,
                markerfacecolor="white", zorder=3,
            )  # fmt: skip
        axes.text(
            0.995, height + 0.3, f"{limit.name}  {limit.kind} {as_read(limit.limit, limit.unit)}",
            transform=axes.get_yaxis_transform(), color=GREY, fontsize="small",
            ha="right", bbox={"facecolor": "white", "edgecolor": "none", "pad": 1.0},
        )  # fmt: skip
    axes.axvline(0.0, color="black", linewidth=1.0)
    axes.set_yticks(range(count), [""] * count)
    axes.set_ylim(-0.6, count - 0.25)
    axes.set_xscale("symlog", linthresh=0.1)
    axes.set_xticks(MARGIN_TICKS, [f"{tick:g}" for tick in MARGIN_TICKS])
    shown = np.append(judgement.margins[rows], judgement.margins[:1])
    shown = shown[np.isfinite(shown)]
    axes.set_xlim(min(-0.02, *shown, 0.0) * 1.1, max(*shown, 0.1, 0.0) * 1.1)
    axes.set_xlabel("margin over the scale of the limit; 0 is at the limit, broad marks are active")
    title(axes, "Which limit holds the front?")
