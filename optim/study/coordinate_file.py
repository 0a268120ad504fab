"""Coordinate text of a section: two columns x, y, in any of the usual arrangements.

Accepted are title and comment lines (``#``, ``!``, ``;`` or ``%`` first), blanks, tabs, commas or
semicolons between the two numbers, x and y in either order, one loop from the trailing edge around
the nose and back, in either direction, or two blocks, each from the nose to the edge or from the
edge to the nose, with or without a line of their point counts; the edge closed or open. Returned is
one loop from the upper side of the edge; what was changed is said. Whether the points make a
section is for `geometry`.
"""

from __future__ import annotations

import math
import re
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np

from optim.arrays import FloatArray
from optim.errors import Fault, SectionError
from optim.study.units import UnitError, legible, shown
from optim.study.values import Value

FEWEST_POINTS = 10
"""Fewer points do not describe a nose; rule of thumb."""

MOST_POINTS = 10_000
"""More points than any section needs; a denser scan is to be thinned."""

MOST_BYTES = 1 << 20
"""Room for `MOST_POINTS` lines of two numbers in full precision, and for comments."""

LARGEST = 1e9
"""No section has a coordinate beyond this, in whatever unit; products of two stay finite."""

JUMP = 0.5
"""A step in x larger than this part of the chord leads from one block to the next."""

ACCEPTED = "accepted are lines of two numbers x y, from the trailing edge around the nose and back"

_COMMENT = ("#", "!", ";", "%")
_SEPARATOR = re.compile(r"[,;\s]+")


class Coordinates(NamedTuple):
    """The points of a section as read.

    Attributes
    ----------
    points : (n, 2) array
        x and y in the file's own unit, one loop from the upper side of the trailing edge around
        the nose to the lower side of the edge.
    title : str
        First line that is no comment and no point, made legible; empty if there is none.
    notes : tuple of str
        What was changed, a sentence each.
    """

    points: FloatArray
    title: str
    notes: tuple[str, ...]


def read_coordinates(path: str | Path) -> Coordinates:
    """Read a coordinate file.

    Parameters
    ----------
    path : str or Path
        The file.

    Returns
    -------
    Coordinates
        Its points, title and what was changed.

    Raises
    ------
    SectionError
        If the file cannot be read or holds no section's points; one line, with its place.
    """
    file = str(path)
    return parse_coordinates(_file_text(Path(path), file), file)


def parse_coordinates(text: str, file: str = "coordinates") -> Coordinates:
    """Return the points that a coordinate text holds.

    Parameters
    ----------
    text : str
        The text.
    file : str
        What it is called in faults.

    Raises
    ------
    SectionError
        If it does not hold the points of a section; one line, with its place.
    """
    title, rows = _rows(text, file)
    rows, notes = _without_counts(rows)
    if len(rows) < FEWEST_POINTS:
        found = {0: "no points", 1: "only one point"}.get(len(rows), f"only {len(rows)} points")
        message = f"the file holds {found}; {ACCEPTED}, at least {FEWEST_POINTS}."
        raise SectionError([Fault(message, file=file)])
    points = np.array(rows, dtype=np.float64)
    if np.abs(points).max() > LARGEST:
        raise _refuse(file, f"a coordinate is beyond {LARGEST:g}")
    for arrange in (_columns, _loop, _upper_first, _distinct):
        points = arrange(points, notes, file)
    points.flags.writeable = False
    return Coordinates(points, title, tuple(notes))


def coordinate_text(points: Sequence[tuple[float, float]]) -> str:
    """Return points as a coordinate text that reads back to the same floats."""
    return "".join(f"{x!r} {y!r}\n" for x, y in points)


def _refuse(file: str, what: str, line: int | None = None) -> SectionError:
    return SectionError([Fault(f"{what}; {ACCEPTED}.", (), file, line)])


def _file_text(path: Path, file: str) -> str:
    try:
        if path.exists() and not path.is_file():
            raise _refuse(file, "this is no file")
        with path.open("rb") as stream:
            data = stream.read(MOST_BYTES + 1)
    except FileNotFoundError as error:
        raise _refuse(file, "there is no such file") from error
    except OSError as error:
        raise _refuse(file, f"the file cannot be read ({error.strerror})") from error
    if len(data) > MOST_BYTES:
        raise _refuse(
            file, f"the file is larger than {MOST_BYTES >> 20} MB, so holds more than "
            f"{MOST_POINTS} points or is no coordinate file"
        )  # fmt: skip
    if not data.strip():
        raise _refuse(file, "the file is empty")
    if b"\0" in data:
        raise _refuse(file, "the file is binary, or text in an encoding other than UTF-8")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError:
        return data.decode("latin-1")  # older files: only the title can differ


def _rows(text: str, file: str) -> tuple[str, list[tuple[float, float]]]:
    """Title and pairs of numbers; lines before the first pair are headings."""
    title = ""
    rows: list[tuple[float, float]] = []
    for number, raw in enumerate(text.splitlines(), start=1):
        line = raw.strip()
        if not line or line.startswith(_COMMENT):
            continue
        pair = _pair(line)
        if pair is None and not rows:
            title = title or legible(line)
            continue
        if pair is None or not all(map(math.isfinite, pair)):
            raise _refuse(file, f"the line {shown(line)} is no pair of finite numbers", number)
        rows.append(pair)
        if len(rows) > MOST_POINTS:
            raise _refuse(file, f"the file holds more than {MOST_POINTS} points", number)
    return title, rows


def _pair(line: str) -> tuple[float, float] | None:
    """Return the two numbers of a line, None if it holds anything else."""
    words = _SEPARATOR.split(line)
    try:
        numbers = [float(word) for word in words]
    except ValueError:
        return None
    return (numbers[0], numbers[1]) if len(numbers) == 2 else None


def _without_counts(
    rows: list[tuple[float, float]],
) -> tuple[list[tuple[float, float]], list[str]]:
    """Drop a first line that states how many points each side has."""
    if rows and rows[0][0] > 1.0 and sum(rows[0]) == len(rows) - 1:
        return rows[1:], ["the first line was taken as the numbers of points of the two sides"]
    return rows, []


def _columns(points: FloatArray, notes: list[str], file: str) -> FloatArray:
    """Put the coordinate along the chord first."""
    width, height = np.ptp(points, axis=0)
    if max(width, height) == 0.0:
        raise _refuse(file, "all points are the same")
    if height <= width:
        return points
    notes.append("the two columns were exchanged: the chord lies along the second one")
    return points[:, ::-1].copy()


def _loop(points: FloatArray, notes: list[str], file: str) -> FloatArray:
    """Join two blocks into one loop that starts at the trailing edge."""
    x = (points[:, 0] - points[:, 0].min()) / np.ptp(points[:, 0])
    jumps = np.flatnonzero(np.abs(np.diff(x)) > JUMP)
    if jumps.size > 1:
        raise _refuse(file, f"the points jump along the chord {jumps.size} times")
    if jumps.size == 0 and x[0] < JUMP:
        raise _refuse(file, "the points start at the nose and are not two blocks")
    if jumps.size == 0:
        return points
    notes.append("the two blocks were joined into one loop")
    first, second = points[: jumps[0] + 1], points[jumps[0] + 1 :]
    if x[0] < JUMP:
        return np.concatenate([first[::-1], second])
    return np.concatenate([first, second[::-1]])


def _upper_first(points: FloatArray, notes: list[str], file: str) -> FloatArray:
    """Turn a loop that runs along the lower side first; the area's sign tells (Gauss)."""
    x, y = points.T
    twice_area = float(np.sum(x * np.roll(y, -1) - np.roll(x, -1) * y))
    if twice_area == 0.0:
        raise _refuse(file, "the points enclose no area")
    if twice_area > 0.0:
        return points
    notes.append("the direction was turned: the file runs along the lower side first")
    return points[::-1].copy()


def _distinct(points: FloatArray, notes: list[str], file: str) -> FloatArray:
    """Drop points that repeat the one before."""
    keep = np.concatenate([[True], np.any(np.diff(points, axis=0) != 0.0, axis=1)])
    dropped = int(np.count_nonzero(~keep))
    if len(points) - dropped < FEWEST_POINTS:
        raise _refuse(file, "almost all points are the same")
    if dropped:
        notes.append(f"{dropped} repeated point{'s were' if dropped > 1 else ' was'} left out")
    distinct: FloatArray = points[keep]
    return distinct


@dataclass(frozen=True)
class CoordinateText(Value):
    """The text of a coordinate file as a value of a study."""

    @property
    def accepted(self) -> str:
        """The form."""
        return "lines of two numbers x y, as in a coordinate file"

    def read(self, value: object) -> tuple[tuple[float, float], ...]:
        """Return the points as one loop."""
        if not isinstance(value, str):
            raise UnitError(f"{shown(value)} is not accepted; accepted are {self.accepted}.")
        try:
            points = parse_coordinates(value).points
        except SectionError as error:
            fault = error.faults[0]
            line = "" if fault.line is None else f"line {fault.line} of the text: "
            raise UnitError(f"{line}{fault.message}") from error
        return tuple((float(x), float(y)) for x, y in points)

    def write(self, value: tuple[tuple[float, float], ...] | None) -> str | None:
        """Return the points as text."""
        return None if value is None else coordinate_text(value)

    def json_schema(self) -> dict[str, Any]:
        """Accept a text of several lines."""
        return {"type": "string"}
