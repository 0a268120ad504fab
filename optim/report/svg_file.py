"""A contour as SVG at true scale: one user unit is one millimetre, the nose is at 0, 0.

The path is cubic Bezier pieces, the same curve as the spline piece by piece, closed by the edge as
built. y points down in this format, so the ordinates are written with the other sign: a transform
would do it as well, but some programs that cut leave it out and would cut the mirror image.
"""

from __future__ import annotations

import re
from pathlib import Path
from xml.sax.saxutils import escape

import numpy as np
from scipy.interpolate import BPoly

from optim.arrays import FloatArray
from optim.report.built_curve import LOOKS, MILLIMETRE, BuiltCurve
from optim.report.export_forms import Label

MARGIN = 5.0
"""Around the contour [mm]."""

LINE = 0.1
"""Width of the contour's line, which is centred on it [mm]."""

UP = np.array([1.0, -1.0])
"""Turns y up into y down, and back."""

_CONTOUR = re.compile(r'<path id="contour" d="([^"]+)"')


def write_svg(path: Path, curve: BuiltCurve, label: Label) -> None:
    """Write the drawing.

    Raises
    ------
    OSError
        If the file cannot be written.
    """
    low, high = curve.points.min(axis=0) - MARGIN, curve.points.max(axis=0) + MARGIN
    width, height = high - low
    pieces = curve.beziers() * UP
    start = "M " + _pair(pieces[0, 0])
    curves = [f"C {' '.join(_pair(point) for point in piece[1:])}" for piece in pieces]
    chord = curve.chord / MILLIMETRE
    text = f"""\
<?xml version="1.0" encoding="UTF-8"?>
<svg xmlns="http://www.w3.org/2000/svg" width="{width:.6f}mm" height="{height:.6f}mm" \
viewBox="{low[0]:.6f} {-high[1]:.6f} {width:.6f} {height:.6f}">
<title>{escape(label.lines()[0])}</title>
<desc>{escape("; ".join(label.lines()[1:]))}</desc>
<g fill="none" stroke="black" stroke-width="{LINE}">
<path id="contour" d="{start} {" ".join(curves)} Z"/>
<path id="chord-line" d="M 0 0 L {chord:.6f} 0" stroke="gray" stroke-dasharray="8 2 2 2"/>
</g>
</svg>
"""
    path.write_text(text, encoding="utf-8")


def _pair(point: FloatArray) -> str:
    return f"{point[0] + 0.0:.7f} {point[1] + 0.0:.7f}"


def read_svg(path: Path) -> FloatArray:
    """Return places along the contour of a drawing, (n, 2) [mm]."""
    found = _CONTOUR.search(path.read_text(encoding="utf-8"))
    numbers = re.findall(r"-?\d+\.\d+", found[1] if found else "")
    points = np.array(numbers, dtype=np.float64).reshape(-1, 2) * UP
    pieces = np.stack([points[:-1:3], points[1::3], points[2::3], points[3::3]])
    share = np.arange(LOOKS) / LOOKS
    within = BPoly(pieces[:, None], [0.0, 1.0])(share)  # (looks, pieces, 2)
    return np.concatenate([within.transpose(1, 0, 2).reshape(-1, 2), points[-1:]])
