"""A section as it is built: written at the real chord, read back and compared with its curve.

Two kinds of file. Points, .csv and .txt: full cosine spacing puts many where the contour bends,
and their number is doubled until straight lines between them stay within some micrometres or
`ENOUGH` are reached. A curve, .dxf, .svg and .json: the spline of `built_curve`. How far either
strays from the exact curve is measured on the file as it is read back, by a reader that knows
nothing of how it was written.
"""

from __future__ import annotations

import json
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path
from types import MappingProxyType

import numpy as np

from optim.arrays import FloatArray
from optim.errors import Fault, InputError
from optim.geometry.section import Section
from optim.report.built_curve import (
    DEGREE,
    LOOKS,
    MILLIMETRE,
    BuiltCurve,
    Spacing,
    built_curve,
    distances,
    sampled,
    spaced,
)
from optim.report.dxf_file import read_dxf, write_dxf
from optim.report.export_forms import Label, check_form
from optim.report.plain import plain
from optim.report.svg_file import read_svg, write_svg

FEWEST, ENOUGH = 240, 960
"""Intervals around the contour: at the least, and where doubling ends."""

CLOSE_ENOUGH = 5e-6
"""Largest distance of the straight lines between the points from the curve [m]: a tenth of what a
good mould keeps (rule of thumb)."""

SPLINE_START = 60
"""Intervals from which a spline is refined."""


@dataclass(frozen=True)
class Density:
    """How many points, and where.

    Attributes
    ----------
    points : int or None
        On each side, nose and edge included; None for as many as the curve needs.
    spacing : str
        How they are spread.
    """

    points: int | None = None
    spacing: Spacing = "cosine"


@dataclass(frozen=True)
class Written:
    """A file as it was read back.

    Attributes
    ----------
    points : int
        How many it holds, or through how many its spline passes.
    deviation : float
        Largest normal distance from the exact curve: of the spline, or of the straight lines
        between the points [m].
    of_points : float
        The same of the points alone [m].
    smooth : bool
        Whether it holds a spline.
    """

    points: int
    deviation: float
    of_points: float
    smooth: bool


@dataclass(frozen=True)
class _Form:
    """How a kind of file is written, and read back as points in mm, `LOOKS` an interval."""

    write: Callable[[Path, BuiltCurve, Label], None]
    read: Callable[[Path, float], FloatArray]
    smooth: bool


def write_section(
    section: Section, chord: float, path: Path, label: Label, density: Density | None = None
) -> Written:
    """Write a section, read the file back and compare it with the exact curve.

    Parameters
    ----------
    section : Section
        A contour without faults.
    chord : float
        As built [m].
    path : Path
        Its suffix says the form.
    label : Label
        What is written beside the contour.
    density : Density, optional
        How many points and where; as many as needed unless given.

    Returns
    -------
    Written
        What the file holds.

    Raises
    ------
    InputError
        If the suffix is not known or the file cannot be written.
    """
    check_form(path)
    form, asked = _FORMS[path.suffix.lower()], density or Density()
    free = asked.points is None
    intervals = 2 * (asked.points - 1) if asked.points else SPLINE_START if form.smooth else FEWEST
    while True:
        t = spaced(section, intervals, asked.spacing)
        curve = built_curve(section, chord, t, refine=free and form.smooth)
        try:
            form.write(path, curve, label)
        except OSError as error:
            message = f"the file cannot be written ({error.strerror}); accepted is another place."
            raise InputError([Fault(message, file=str(path))]) from error
        written = _compared(section, chord, form.read(path, chord), smooth=form.smooth)
        done = form.smooth or not free or written.deviation <= CLOSE_ENOUGH
        if done or intervals >= ENOUGH:
            return written
        intervals *= 2


def _compared(section: Section, chord: float, read: FloatArray, *, smooth: bool) -> Written:
    """Return how far what was read is from the exact curve, its ends from those of the curve."""
    size = chord / MILLIMETRE
    off = distances(section, read / size) * chord
    ends = np.linalg.norm(read[[0, -1]] / size - section.points(np.array([-1.0, 1.0])), axis=1)
    largest = float(max(off.max(), ends.max() * chord))
    return Written(len(off[::LOOKS]), largest, float(off[::LOOKS].max()), smooth)


def _between(points: FloatArray) -> FloatArray:
    """Return places along the straight lines between points."""
    share = np.arange(LOOKS)[:, None] / LOOKS
    lines = points[:-1, None, :] + np.diff(points, axis=0)[:, None, :] * share
    return np.concatenate([lines.reshape(-1, 2), points[-1:]])


def _write_csv(path: Path, curve: BuiltCurve, _label: Label) -> None:
    rows = "".join(f"{x:.6f},{y:.6f}\n" for x, y in curve.points + 0.0)
    path.write_text(f"x_mm,y_mm\n{rows}", encoding="utf-8")


def _read_csv(path: Path, _chord: float) -> FloatArray:
    return _between(np.loadtxt(path, delimiter=",", skiprows=1))


def _write_txt(path: Path, curve: BuiltCurve, label: Label) -> None:
    points = curve.points * (MILLIMETRE / curve.chord) + 0.0
    head = "".join(f"# {line}\n" for line in label.lines())
    rows = "".join(f"{x:.9f} {y:.9f}\n" for x, y in points)
    path.write_text(head + rows, encoding="utf-8")


def _read_txt(path: Path, chord: float) -> FloatArray:
    return _between(np.loadtxt(path, comments="#") * (chord / MILLIMETRE))


def _write_json(path: Path, curve: BuiltCurve, label: Label) -> None:
    built = {
        "chord_mm": curve.chord / MILLIMETRE,
        "points_mm": curve.points.tolist(),
        "spline": {
            "degree": DEGREE,
            "knots_mm": curve.knots.tolist(),
            "control_points_mm": curve.controls.tolist(),
        },
    }
    document = {"title": label.title, "facts": dict(label.facts), **label.document, "built": built}
    text = json.dumps(plain(document), indent=1, allow_nan=False, ensure_ascii=False)
    path.write_text(f"{text}\n", encoding="utf-8")


def _read_json(path: Path, _chord: float) -> FloatArray:
    spline = json.loads(path.read_text(encoding="utf-8"))["built"]["spline"]
    knots, controls = np.array(spline["knots_mm"]), np.array(spline["control_points_mm"])
    return sampled(knots, controls, spline["degree"])


_FORMS: Mapping[str, _Form] = MappingProxyType(
    {
        ".csv": _Form(_write_csv, _read_csv, smooth=False),
        ".txt": _Form(_write_txt, _read_txt, smooth=False),
        ".dxf": _Form(write_dxf, lambda path, _: read_dxf(path), smooth=True),
        ".svg": _Form(write_svg, lambda path, _: read_svg(path), smooth=True),
        ".json": _Form(_write_json, _read_json, smooth=True),
    }
)
