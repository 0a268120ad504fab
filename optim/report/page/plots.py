"""The plots of the page, empty: the browser fills them from the document.

A design that is chosen in one plot is chosen in all, for they share one source; the designs to
be seen are one filter. No name from a study reaches a plot from here.
"""

from __future__ import annotations

from bokeh.document import Document
from bokeh.embed import json_item
from bokeh.events import DocumentReady
from bokeh.layouts import layout
from bokeh.models import (
    BooleanFilter,
    CDSView,
    ColorBar,
    ColumnDataSource,
    CustomJS,
    CustomJSTickFormatter,
    FixedTicker,
    HoverTool,
    LinearColorMapper,
    MultiLine,
    Scatter,
    Span,
    Text,
    UIElement,
)
from bokeh.palettes import cividis
from bokeh.plotting import figure
from bokeh.themes import Theme

INK, PALE, ACCENT = "#1b2430", "#c9ced6", "#8a3ffc"
"""Text, grid, and the ring of a chosen design."""

EMPTY_DESIGNS = ("x", "y", "c", "id", "marker", "size")
"""Columns of the designs' source, beside a margin and its level for each limit."""

LINES = ("xs", "ys", "color", "dash", "width")
"""Columns of lines, one line a design."""

POINTS = ("x", "y", "color", "marker")
"""Columns of the marks on lines."""

SIDES = ("upper", "lower")

OFF_DESIGN = {
    "lift": ("angle of attack [deg]", "lift coefficient"),
    "drag": ("lift coefficient", "drag coefficient"),
    "moment": ("lift coefficient", "moment coefficient at x/c 0.25"),
    "centre": ("lift coefficient", "centre of pressure, x/c"),
}
"""Plots of the sweeps: what is across and what is up."""

RANGES = {"centre": {"y_range": (-0.2, 1.0)}, "drag": {"y_range": (0.0, 0.04)}}
"""Where an axis is not left to the data: the centre of pressure runs far off near zero lift, and
the browser ends the axis of the drag before the stall takes all of it."""

THEME = Theme(
    json={
        "attrs": {
            "Plot": {"outline_line_color": None, "background_fill_color": "#ffffff"},
            "Axis": {
                "axis_label_text_font_style": "normal",
                "axis_label_text_font_size": "13px",
                "major_label_text_font_size": "12px",
                "axis_label_text_color": INK,
                "major_label_text_color": INK,
                "minor_tick_line_color": None,
            },
            "Grid": {"grid_line_color": "#e4e7ec"},
        }
    }
)


def plots(limits: int) -> Document:
    """Return the two plots of the trade, which share their designs, as a document of named roots.

    Parameters
    ----------
    limits : int
        How many limits the study has.
    """
    of_limits = [f"{kind}_{k}" for k in range(limits) for kind in ("margin", "level")]
    designs = ColumnDataSource({name: [] for name in (*EMPTY_DESIGNS, *of_limits)}, name="designs")
    view = CDSView(filter=BooleanFilter(booleans=[], name="visible"))
    page = Document(theme=THEME)
    for plot in (_trade(designs, view), _margins(designs, view, limits)):
        page.add_root(plot)
    page.js_on_event(DocumentReady, CustomJS(code="window.sectionwright.begin()"))
    return page


def _figure(name: str, height: int, tools: str, **options: object) -> figure:
    return figure(
        name=name, height=height, sizing_mode="stretch_width", tools=tools,
        toolbar_location="above" if tools else None, output_backend="canvas", min_border_right=12,
        **options,
    )  # fmt: skip


def _progress() -> figure:
    plot = _figure("progress", 240, "")
    source = ColumnDataSource({"x": [], "y": []}, name="progress_source")
    plot.line("x", "y", source=source, color=INK, line_width=2)
    plot.scatter("x", "y", source=source, color=INK, size=5)
    plot.xaxis.axis_label = "designs evaluated"
    plot.yaxis.axis_label = "hypervolume, % of the last"
    plot.x_range.start = 0
    plot.y_range.start, plot.y_range.end = 0, 105
    return plot


def _trade(designs: ColumnDataSource, view: CDSView) -> figure:
    plot = _figure(
        "trade", 470, "box_select,lasso_select,tap,pan,box_zoom,wheel_zoom,reset",
        active_drag="box_select",
    )  # fmt: skip
    plot.toolbar.logo = None
    colour = LinearColorMapper(cividis(256), name="colour", nan_color=PALE)
    drawn = plot.scatter(
        "x", "y", source=designs, view=view, marker="marker", size="size",
        fill_color={"field": "c", "transform": colour}, line_color=INK, line_width=0.8,
        selection_line_width=2.6, selection_line_color=ACCENT, nonselection_alpha=0.22,
    )  # fmt: skip
    plot.add_tools(
        HoverTool(
            renderers=[drawn],
            tooltips=[("design", "#@id"), ("across", "@x"), ("up", "@y"), ("colour", "@c")],
        )
    )
    baseline = ColumnDataSource({"x": [], "y": []}, name="baseline_mark")
    plot.scatter(
        "x", "y", source=baseline, marker="diamond", size=20, fill_color=None,
        line_color="#d55e00", line_width=2.5,
    )  # fmt: skip
    tray = ColumnDataSource({"x": [], "y": [], "text": []}, name="tray_marks")
    plot.add_glyph(
        tray,
        Text(
            x="x", y="y", text="text", x_offset=9, y_offset=-6, text_font_size="13px",
            text_font_style="bold", text_color=INK, background_fill_color="#ffffff",
            background_fill_alpha=0.85,
        ),
    )  # fmt: skip
    plot.add_layout(
        ColorBar(color_mapper=colour, name="colour_bar", width=12, title_text_font_size="12px",
                 title_text_font_style="normal", title=" "),
        "right",
    )  # fmt: skip
    return plot


def _margins(designs: ColumnDataSource, view: CDSView, limits: int) -> figure:
    plot = _figure(
        "margins", 90 + 34 * max(limits, 1), "box_select,tap,reset", active_drag="box_select",
        y_range=(-0.6, max(limits, 1) - 0.4), x_range=(-0.34, 1.04),
    )  # fmt: skip
    plot.toolbar.logo = None
    for k in range(limits):
        plot.scatter(
            f"margin_{k}", f"level_{k}", source=designs, view=view, marker="marker", size=9,
            fill_color="#4d7ea8", fill_alpha=0.35, line_color=INK, line_width=0.6,
            selection_line_width=2.4, selection_line_color=ACCENT, nonselection_alpha=0.15,
        )  # fmt: skip
    plot.add_layout(Span(location=0.0, dimension="height", line_color=INK, line_width=1.5))
    plot.xaxis.axis_label = "margin over the scale of the limit: 0 is at the limit, left is missed"
    plot.xaxis.formatter = CustomJSTickFormatter(code="return Number(tick.toFixed(2)).toString()")
    plot.yaxis.ticker = FixedTicker(ticks=list(range(limits)))
    plot.ygrid.grid_line_color = None
    return plot


def later_plots() -> dict[str, dict[str, object]]:
    """Return the plots of the run and of the tray, by the element that takes them.

    They are set up after the rest of the page can be used, which halves the wait.
    """
    outline = _lines("outline", 300, match_aspect=True)
    outline.xaxis.axis_label = "x [mm]"
    outline.yaxis.axis_label = "y [mm]"
    parts = {
        "progress": _progress(),
        "outline": outline,
        "sides": _grid(_sides()),
        "off-design": _grid(_off_design()),
    }
    return {name: json_item(part, theme=THEME) for name, part in parts.items()}


def _grid(plots: list[figure]) -> UIElement:
    """Return plots two in a row."""
    pairs = [plots[k : k + 2] for k in range(0, len(plots), 2)]
    return layout(pairs, sizing_mode="stretch_width", spacing=12)


def _sides() -> list[figure]:
    """Return pressure and layer of the upper and of the lower side, on one scale each."""
    sides = []
    for quantity, label in (("pressure", "pressure coefficient"), ("layer", " ")):
        pair = [_lines(f"{quantity}_{side}", 290, x_range=(-0.02, 1.02)) for side in SIDES]
        for plot, side in zip(pair, SIDES, strict=True):
            plot.xaxis.axis_label = f"x/c, {side} side"
            plot.yaxis.axis_label = label
            plot.y_range = pair[0].y_range
        pair[0].y_range.flipped = quantity == "pressure"
        sides += pair
    return sides


def _off_design() -> list[figure]:
    plots = []
    for name, (across, up) in OFF_DESIGN.items():
        plot = _lines(name, 290, **RANGES.get(name, {}))
        plot.xaxis.axis_label = across
        plot.yaxis.axis_label = up
        plots.append(plot)
    return plots


def _lines(name: str, height: int, **options: object) -> figure:
    """Return a plot of one line a design, with marks on them."""
    plot = _figure(name, height, "pan,box_zoom,wheel_zoom,reset", active_drag="box_zoom", **options)
    plot.toolbar.logo = None
    plot.toolbar.autohide = True
    lines = ColumnDataSource({column: [] for column in LINES}, name=f"{name}_lines")
    marks = ColumnDataSource({column: [] for column in POINTS}, name=f"{name}_marks")
    plot.add_glyph(
        lines,
        MultiLine(xs="xs", ys="ys", line_color="color", line_dash="dash", line_width="width"),
    )
    plot.add_glyph(
        marks,
        Scatter(
            x="x", y="y", marker="marker", size=10, fill_color="#ffffff", line_color="color",
            line_width=2,
        ),
    )  # fmt: skip
    return plot
