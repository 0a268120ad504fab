"""How far a fit is from its section: both outlines at true scale, and the distance along them."""

from __future__ import annotations

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from optim.arrays import BoolArray, FloatArray
from optim.geometry.chordline import chord_line
from optim.geometry.curve import cosine_parameters
from optim.geometry.fitting import Fit
from optim.geometry.section import Section
from optim.report.figures import GREY, LOWER, STYLE, UPPER, draw_loop, new_figure, title

INTERVALS = 480
"""Intervals around the contour at which section and fit are compared."""


def fit_figure(section: Section, fit: Fit) -> Figure:
    """Return the figure of a fit.

    Parameters
    ----------
    section : Section
        What was fitted.
    fit : Fit
        Its fit.
    """
    line = chord_line(section.curve, 0.0)
    t = cosine_parameters(INTERVALS)
    placed = line.placed(section.points(t))
    with mpl.rc_context(STYLE):
        figure = new_figure(5.0)
        outline, off = figure.subplots(2, 1, sharex=True, height_ratios=[1.0, 1.4])
        draw_loop(outline, placed, color=GREY, linewidth=3.0, alpha=0.5, label=section.name)
        fitted = fit.parameterisation.section(fit.design)
        draw_loop(outline, fitted.points(t), color="black", linewidth=0.8, label="fit")
        outline.legend(loc="upper right", ncols=2)
        outline.set_ylabel("y/c")
        title(outline, "Outline at true scale")
        _draw_distance(off, placed, t < line.t, fit)
        off.set_xlabel("x/c")
        off.set_ylabel("outward distance [1e-4 chords]")
        off.legend(loc="upper right", ncols=3)
        title(off, f"Where the section is outside the fit: at most {fit.largest_deviation:.1e}")
        off.set_xlim(-0.02, 1.02)
    return figure


def _draw_distance(axes: Axes, placed: FloatArray, upper: BoolArray, fit: Fit) -> None:
    """Draw the distance along the normal of the fit at the same station, to first order."""
    root = np.sqrt(np.clip(placed[:, 0], 0.0, 1.0))
    foot = np.where(upper, -root, root)
    point, first = fit.parameterisation.section(fit.design).curve.derivatives(foot, 1)
    normal = np.column_stack([first[:, 1], -first[:, 0]])
    off = ((placed - point) * normal).sum(axis=1) / np.hypot(*normal.T)
    for name, here, colour, mark in (
        ("upper side", upper, UPPER, "-"),
        ("lower side", ~upper, LOWER, "--"),
    ):
        axes.plot(placed[here, 0], 1e4 * off[here], mark, color=colour, label=name)
    axes.axhline(0.0, color="black", linewidth=0.6)
    axes.axvline(fit.where[0], color=GREY, linewidth=0.8, linestyle=":", label="farthest")
