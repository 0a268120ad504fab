"""The outline of a design on paper, to a stated scale, with its dimensions in millimetres."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np
from matplotlib.axes import Axes

from optim.arrays import FloatArray
from optim.geometry.curve import cosine_parameters
from optim.geometry.section import Section
from optim.report.built_curve import MILLIMETRE
from optim.report.figures import GREY, UPPER
from optim.report.paper import BODY, MARGIN, WIDTH, Page, spread

TALLEST = 45.0
"""Height of the outline at the most [mm]."""

ABOVE, BELOW = 13.0, 15.0
"""Room above the outline for the depths, and below for the other dimensions [mm]."""

ROOM = WIDTH - 2.0 * MARGIN
"""Width of the drawing [mm]."""

SCALES = (
    5.0, 2.0, 1.0, 0.5, 0.4, 0.2, 0.1, 0.05, 0.04, 0.02, 0.01, 0.005, 0.004, 0.002, 0.001,
)  # fmt: skip
"""Usual scales of drawings; the largest that fits is taken (ISO 5455, from memory, with 1 : 2.5 and
its tenths)."""

USUAL_DEPTHS = (0.15, 0.30, 0.45, 0.60, 0.75)
"""Where spars stand, unless the study names a place near by [x/c]; rule of thumb."""

NEAR = 0.05
"""A usual place this close to one of the study is left out [x/c]."""

LABEL = 16.0
"""Room for the label of a depth [mm]."""

MOST_DEPTHS = int(ROOM / LABEL)
"""Labels for which there is room."""

INTERVALS = 400
"""Intervals of the drawn outline."""


def draw_outline(page: Page, y: float, section: Section, chord: float, asked: list[float]) -> float:
    """Draw the outline with its dimensions below y and return where they end [mm].

    Parameters
    ----------
    page : Page
        To draw on.
    y : float
        Where the drawing begins [mm].
    section : Section
        A contour without faults.
    chord : float
        As built [m].
    asked : list of float
        Places of the depths that the study asks for [x/c].
    """
    size = chord / MILLIMETRE
    built = section.points(cosine_parameters(INTERVALS)) * size
    low, high = built.min(axis=0), built.max(axis=0)
    fits = min(ROOM / (high[0] - low[0]), TALLEST / (high[1] - low[1]))
    scale = next((one for one in SCALES if one <= fits), fits)
    height = ABOVE + BELOW + scale * float(high[1] - low[1])
    axes = page.axes(MARGIN, y, ROOM, height)
    axes.set_xlim(0.0, ROOM)
    axes.set_ylim(-height, 0.0)
    axes.set_axis_off()  # one unit of the axes is a millimetre of paper
    drawn = _Drawn(
        axes, section, size, scale, 0.5 * (ROOM - scale * size), -ABOVE - scale * float(high[1])
    )
    outline = drawn.on_paper(built)
    axes.plot(*np.vstack([outline, outline[:1]]).T, color="black", linewidth=0.9)
    line = drawn.on_paper(np.array([[0.0, 0.0], [size, 0.0]]))
    axes.plot(*line.T, "-.", color=GREY, linewidth=0.5)
    _depths(drawn, places_of_depths(asked))
    _dimensions(drawn, float(outline[:, 1].min()))
    return y + height


def places_of_depths(asked: list[float]) -> list[float]:
    """Return where depths are stated, rising [x/c]: where the study asks, and usual places."""
    kept = sorted(set(asked))[:MOST_DEPTHS]
    usual = [x for x in USUAL_DEPTHS if all(abs(x - one) > NEAR for one in kept)]
    return sorted(kept + usual[: MOST_DEPTHS - len(kept)])


@dataclass(frozen=True)
class _Drawn:
    """An outline on paper: its scale, and where its nose is in the drawing [mm]."""

    axes: Axes
    section: Section
    size: float
    scale: float
    left: float
    level: float

    def on_paper(self, points: FloatArray) -> FloatArray:
        """Return where points of the built section [mm] are in the drawing [mm]."""
        placed: FloatArray = points * self.scale + np.array([self.left, self.level])
        return placed

    def write(self, x: float, y: float, text: str, **look: Any) -> None:  # noqa: ANN401
        """Write a line whose base is at x, y of the drawing."""
        self.axes.text(x, y, text, size=BODY, parse_math=False, **look)


def _depths(drawn: _Drawn, places: list[float]) -> None:
    """Draw a line across the section at each place, with its depth above."""
    x = np.array(places)
    upper, lower = (drawn.size * y for y in drawn.section.upper_lower(x))
    tops = drawn.on_paper(np.column_stack([x * drawn.size, upper]))
    feet = drawn.on_paper(np.column_stack([x * drawn.size, lower]))
    labels = spread(tops[:, 0].tolist(), LABEL, 0.5 * LABEL, ROOM - 0.5 * LABEL)
    base = float(tops[:, 1].max()) + 5.0
    for k, at in enumerate(labels):
        drawn.axes.plot(*np.array([feet[k], tops[k]]).T, color=UPPER, linewidth=0.8)
        drawn.axes.plot([tops[k, 0], at], [tops[k, 1], base - 1.0], color=GREY, linewidth=0.4)
        drawn.write(at, base + 3.2, f"{100.0 * x[k]:.4g} %", ha="center", color=GREY)
        drawn.write(at, base, f"{upper[k] - lower[k]:.2f}", ha="center", weight="bold")


def _dimensions(drawn: _Drawn, lowest: float) -> None:
    """Draw the chord below the section; nose, thickness, camber and edge beneath it."""
    section, size = drawn.section, drawn.size
    start, end = drawn.left, drawn.left + drawn.scale * size
    level = lowest - 4.0
    for x, foot in ((start, drawn.level), (end, drawn.level)):
        drawn.axes.plot([x, x], [foot - 1.0, level - 1.0], color=GREY, linewidth=0.4)
    drawn.axes.annotate(
        "", (start, level), (end, level), arrowprops={"arrowstyle": "<->", "linewidth": 0.6}
    )
    camber = (
        "no camber" if math.isnan(section.camber_x)
        else f"camber {size * section.camber:.2f} at {size * section.camber_x:.1f}"
    )  # fmt: skip
    words = (
        f"chord {size:g}",
        f"thickness {size * section.thickness:.2f} at {size * section.thickness_x:.1f}",
        camber,
        f"nose radius {size * section.nose_radius:.2f}",
        f"edge {size * section.trailing_edge_gap:.2f}",
    )
    drawn.write(0.5 * ROOM, level - 4.5, "      ".join(words), ha="center")
    measures = (
        f"scale {_ratio(drawn.scale)}",
        f"area {1e-2 * size**2 * section.area:.1f} cm2",
        f"length around {size * section.perimeter:.1f}",
        f"angle of the edge {math.degrees(section.trailing_edge_angle):.1f} deg",
    )
    drawn.write(0.5 * ROOM, level - 9.0, "      ".join(measures), ha="center", color=GREY)


def _ratio(scale: float) -> str:
    return f"{scale:g} : 1" if scale > 1.0 else f"1 : {1.0 / scale:.4g}"
