"""A contour as DXF, the drawing exchange format: one spline in millimetres, edge and chord line.

Layers: CONTOUR has the spline from the upper trailing edge around the nose to the lower one, EDGE
the straight edge as built that closes it, CHORD the chord line from the leading-edge point, to be
switched off. What the drawing is of stands among the drawing's properties.

The reader here is not the library that writes: DXF is a list of pairs, a number that tells what
follows and its value, and a spline's knots and control points are taken straight from the pairs.
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import dropwhile, takewhile
from pathlib import Path

import numpy as np
from ezdxf.document import Drawing
from ezdxf.filemanagement import new

from optim.arrays import FloatArray
from optim.report.built_curve import DEGREE, MILLIMETRE, BuiltCurve, sampled
from optim.report.export_forms import Label

VERSION = "R2010"
"""Old enough for every program in use, young enough for UTF-8 and properties."""

MILLIMETRES = 4
"""Unit of the drawing, by the format's own list."""

CONTOUR, EDGE, CHORD = "CONTOUR", "EDGE", "CHORD"
"""Layers."""

BLACK_OR_WHITE, GREY = 7, 8
"""Colours by the format's own list."""

VIEW = 1.1
"""Height of the first view over the chord: wide windows then show the whole section."""

ENTITY, X, Y, KNOT, DEGREE_OF_CURVE = 0, 10, 20, 40, 71
"""Numbers that say what follows."""


def write_dxf(path: Path, curve: BuiltCurve, label: Label) -> None:
    """Write the drawing.

    Raises
    ------
    OSError
        If the file cannot be written.
    """
    drawing = new(VERSION, units=MILLIMETRES)
    for name, colour in ((CONTOUR, BLACK_OR_WHITE), (EDGE, BLACK_OR_WHITE), (CHORD, GREY)):
        drawing.layers.add(name, color=colour)
    chord = curve.chord / MILLIMETRE
    _add_lines(drawing, curve, chord)
    drawing.header.custom_vars.append("title", " ".join(label.title.split()))
    for name, value in label.facts.items():
        drawing.header.custom_vars.append(name, " ".join(value.split()))
    drawing.set_modelspace_vport(height=VIEW * chord, center=(0.5 * chord, 0.0))
    with path.open("w", encoding=drawing.output_encoding) as stream:
        drawing.write(stream)


def _add_lines(drawing: Drawing, curve: BuiltCurve, chord: float) -> None:
    space = drawing.modelspace()
    spline = space.add_spline(degree=DEGREE, dxfattribs={"layer": CONTOUR})
    spline.control_points = [(x, y, 0.0) for x, y in curve.controls.tolist()]
    spline.knots = curve.knots.tolist()
    first, last = curve.points[0].tolist(), curve.points[-1].tolist()
    if first != last:
        space.add_line(last, first, dxfattribs={"layer": EDGE})
    space.add_line((0.0, 0.0), (chord, 0.0), dxfattribs={"layer": CHORD})


def read_dxf(path: Path) -> FloatArray:
    """Return places along the spline of a drawing, (n, 2) [mm]."""
    tags = list(_spline_tags(path))
    found = {code: [float(v) for c, v in tags if c == code] for code in (X, Y, KNOT)}
    (degree,) = [int(value) for code, value in tags if code == DEGREE_OF_CURVE]
    return sampled(np.array(found[KNOT]), np.column_stack([found[X], found[Y]]), degree)


def _spline_tags(path: Path) -> Iterator[tuple[int, str]]:
    lines = path.read_text(encoding="utf-8").splitlines()
    written = zip(lines[::2], lines[1::2], strict=True)
    pairs = [(int(code), value.strip()) for code, value in written]
    start = dropwhile(lambda pair: pair != (ENTITY, "SPLINE"), pairs)
    next(start)
    return takewhile(lambda pair: pair[0] != ENTITY, start)
