"""A source as a figure: measured points with their scatter beside what is computed."""

from __future__ import annotations

import math
from pathlib import Path

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from optim.errors import Fault, InputError
from optim.report.figures import AMBER, GREY, LOWER, STYLE, UPPER, new_figure, save, title
from optim.validation.case import Comparison, Panel

COLOURS = (UPPER, LOWER, AMBER)
"""Of the series of one panel: the measured points and the line computed for them share one."""

MARKS = ("o", "s", "^")

FEW = 30
"""Computed values up to this number are marked on their line, so that gaps are seen."""

HEIGHT = 2.9
"""Of a row of panels [inch]."""

ACROSS = 2
"""Panels beside each other."""


def draw_all(comparisons: list[Comparison], folder: Path) -> list[Path]:
    """Write one figure a source into a folder, which is made if need be.

    Raises
    ------
    InputError
        If the folder cannot be made or written.
    """
    make_folder(folder)
    paths = []
    for comparison in comparisons:
        path = folder / f"{comparison.record.name}.png"
        save(source_figure(comparison), path)
        paths.append(path)
    return paths


def make_folder(folder: Path) -> None:
    """Make a folder for figures; InputError if that is not possible."""
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        message = f"the folder cannot be made ({error.strerror}); accepted is another place."
        raise InputError([Fault(message, file=str(folder))]) from error


def source_figure(comparison: Comparison) -> Figure:
    """Return the figure of a source."""
    record, panels = comparison.record, comparison.panels
    across = min(ACROSS, len(panels))
    rows = math.ceil(len(panels) / across)
    with mpl.rc_context(STYLE):
        figure = new_figure(0.7 + HEIGHT * rows)
        axes = figure.subplots(rows, across, squeeze=False).ravel()
        for here, panel in zip(axes, panels, strict=False):
            _draw(here, panel)
        for empty in axes[len(panels) :]:
            empty.set_axis_off()
        figure.suptitle(
            f"{record.title}\n{record.report}\n{record.conditions}", fontsize="medium", x=0.01,
            ha="left",
        )  # fmt: skip
    return figure


def _draw(axes: Axes, panel: Panel) -> None:
    for series, colour, mark in zip(panel.measured, COLOURS, MARKS, strict=False):
        axes.errorbar(
            series.x, series.y, yerr=series.error or None, fmt=mark, color=colour, ms=3.5,
            mfc="none", ecolor=GREY, elinewidth=0.8, label=series.label,
        )  # fmt: skip
    for series, colour in zip(panel.computed, COLOURS, strict=False):
        order = np.argsort(series.x, kind="stable")
        axes.plot(
            series.x[order], series.y[order], color=colour, lw=0.0 if panel.names else 1.2,
            marker="x" if panel.names else "." if len(order) <= FEW else "", label=series.label,
        )  # fmt: skip
    if panel.names:
        axes.set_xticks(range(len(panel.names)), panel.names, rotation=90)
    if panel.downwards:
        axes.invert_yaxis()
    title(axes, panel.title)
    axes.set_xlabel(panel.x)
    axes.set_ylabel(panel.y)
    axes.legend(fontsize="small")
