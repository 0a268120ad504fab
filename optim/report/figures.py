"""What all figures share: colours, marks, the true-scale outline, and how they are saved.

Colours are those of Okabe and Ito (2008, "Color universal design"; from memory), which are told
apart by nearly every eye; what matters differs in mark or line as well.
"""

from __future__ import annotations

from pathlib import Path
from typing import Any

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from optim.arrays import FloatArray
from optim.errors import Fault, InputError
from optim.report.figure_file import check_suffix

UPPER, LOWER, GREEN, AMBER = "#0072B2", "#D55E00", "#009E73", "#E69F00"
"""Blue for the upper side, vermilion for the lower one; green and amber for what else differs."""

GREY, PALE = "0.45", "0.80"
"""What is there for comparison."""

WIDTH = 8.0
"""Width of a figure [inch]."""

DOTS = 150
"""Dots an inch of a .png."""

STYLE: Any = {
    "font.size": 9.0,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.grid": True,
    "grid.color": "0.92",
    "axes.axisbelow": True,
    "legend.frameon": False,
    "svg.hashsalt": "sectionwright",
    "text.parse_math": False,  # a name with a dollar in it is no formula
}
"""How every figure looks; typed loosely, for the library lists hundreds of keys as its type."""


def new_figure(height: float) -> Figure:
    """Return an empty figure of the common width, its height in inches."""
    with mpl.rc_context(STYLE):
        return Figure(figsize=(WIDTH, height), layout="constrained")


def draw_loop(axes: Axes, points: FloatArray, **line: Any) -> None:  # noqa: ANN401
    """Draw a contour at true scale, its open edge closed by a line."""
    axes.plot(*np.vstack([points, points[:1]]).T, **line)
    axes.set_aspect("equal", adjustable="datalim")


def title(axes: Axes, question: str) -> None:
    """Write above a panel which question it answers."""
    axes.set_title(question, loc="left", fontsize="medium", fontweight="bold")


def save(figure: Figure, path: Path) -> None:
    """Write a figure in the form that the suffix tells.

    Raises
    ------
    InputError
        If the suffix is not known or the file cannot be written.
    """
    check_suffix(path)
    try:
        figure.savefig(path, dpi=DOTS)
    except OSError as error:
        message = f"the figure cannot be written ({error.strerror}); accepted is another place."
        raise InputError([Fault(message, file=str(path))]) from error
