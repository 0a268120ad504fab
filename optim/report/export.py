"""A section as it is built: points at the real chord, written, read back and compared.

Full cosine spacing puts many points where the contour bends: at the nose a step is some
hundred-thousandths of the chord. The number of points is doubled until straight lines between the
points as written stay within some micrometres or `ENOUGH` points are reached; how far they stray is
said either way.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path
from types import MappingProxyType

import numpy as np

from optim.arrays import FloatArray
from optim.errors import Fault, InputError
from optim.geometry.curve import cosine_parameters
from optim.geometry.section import Section

FEWEST, ENOUGH = 240, 960
"""Intervals around the contour: at the least, and where doubling ends."""

CLOSE_ENOUGH = 5e-6
"""Largest distance of the straight lines between the points from the curve [m]: a tenth of what a
good mould keeps (rule of thumb)."""

LOOKS = 8
"""Places between two points at which the distance from the curve is looked at."""

MILLIMETRE = 1e-3
"""[m]"""


@dataclass(frozen=True)
class Sheet:
    """What is written beside the points.

    Attributes
    ----------
    title : str
        Which section it is.
    remarks : tuple of str
        Further lines, such as the chord and the edge.
    """

    title: str
    remarks: tuple[str, ...]


@dataclass(frozen=True)
class Written:
    """A file as it was read back.

    Attributes
    ----------
    points : int
        How many it holds.
    deviation : float
        Largest distance of the straight lines between its points from the exact curve [m].
    """

    points: int
    deviation: float


def write_section(section: Section, chord: float, path: Path, sheet: Sheet) -> Written:
    """Write the points of a section, read the file back and compare it with the curve.

    Parameters
    ----------
    section : Section
        A contour without faults.
    chord : float
        As built [m].
    path : Path
        Its suffix says the form: .csv in millimetres, .txt in chords.
    sheet : Sheet
        What is written beside the points.

    Returns
    -------
    Written
        What the file holds.

    Raises
    ------
    InputError
        If the suffix is not known or the file cannot be written.
    """
    form = FORMS.get(path.suffix.lower())
    if form is None:
        message = f"the form is told by the suffix; accepted is {' or '.join(FORMS)}."
        raise InputError([Fault(message, file=str(path))])
    intervals = FEWEST
    while True:
        t = cosine_parameters(intervals)
        _write(path, form.text(section.points(t), chord, sheet))
        found = _deviation(section, t, form.read(path, chord)) * chord
        if found <= CLOSE_ENOUGH or intervals >= ENOUGH:
            return Written(len(t), found)
        intervals *= 2


def _write(path: Path, text: str) -> None:
    try:
        path.write_text(text, encoding="utf-8")
    except OSError as error:
        message = f"the file cannot be written ({error.strerror}); accepted is another place."
        raise InputError([Fault(message, file=str(path))]) from error


def _deviation(section: Section, t: FloatArray, points: FloatArray) -> float:
    """Return the largest distance of the curve from the straight lines between points [chords].

    The points are those read back, so it holds their rounding too.
    """
    share = np.linspace(0.0, 1.0, LOOKS + 1)
    between = t[:-1, None] + np.diff(t)[:, None] * share
    curve = section.points(between.reshape(-1)).reshape(*between.shape, 2)
    start, step = points[:-1, None, :], np.diff(points, axis=0)[:, None, :]
    length = np.hypot(step[..., 0], step[..., 1])
    off = curve - start
    across = np.abs(off[..., 0] * step[..., 1] - off[..., 1] * step[..., 0]) / length
    return float(across.max())


def _csv_text(points: FloatArray, chord: float, _sheet: Sheet) -> str:
    rows = points * chord / MILLIMETRE
    return "x_mm,y_mm\n" + "".join(f"{x:.6f},{y:.6f}\n" for x, y in rows + 0.0)


def _read_csv(path: Path, chord: float) -> FloatArray:
    return np.loadtxt(path, delimiter=",", skiprows=1) * MILLIMETRE / chord


def _txt_text(points: FloatArray, _chord: float, sheet: Sheet) -> str:
    head = "".join(f"# {line}\n" for line in (sheet.title, *sheet.remarks))
    return head + "".join(f"{x:.9f} {y:.9f}\n" for x, y in points + 0.0)


def _read_txt(path: Path, _chord: float) -> FloatArray:
    return np.loadtxt(path, comments="#")


@dataclass(frozen=True)
class Form:
    """How a kind of file is written and read back."""

    text: Callable[[FloatArray, float, Sheet], str]
    read: Callable[[Path, float], FloatArray]


FORMS: Mapping[str, Form] = MappingProxyType(
    {".csv": Form(_csv_text, _read_csv), ".txt": Form(_txt_text, _read_txt)}
)
"""Suffix -> form: .csv in millimetres at the real chord, .txt in chords."""
