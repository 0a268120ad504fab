"""A measured polar: comma-separated columns of cl, cd, cm and the angle, with its conditions.

Lines ``# key: value`` at the top say at which conditions it was measured; a column of that name
with one value in it does as well, so that what ``analyse --csv`` writes is a polar, too. An empty
cell is not measured. All that is wrong is told at once, each with its line and column.
"""

from __future__ import annotations

import csv
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from types import MappingProxyType

import numpy as np

from optim.arrays import FloatArray
from optim.errors import Fault, InputError
from optim.study.schema import DEFAULT_N_FACTOR, N_FACTOR
from optim.study.units import FRACTION, UnitError, shown
from optim.study.values import Measure, Value, did_you_mean

MOST_BYTES = 1 << 20
"""Room for some ten thousand rows; a polar has some dozens."""

FEWEST_ROWS = 2
"""One point is no polar."""

MOST_FAULTS = 20
"""More lines than this help nobody."""

CONDITIONS: Mapping[str, Value] = MappingProxyType(
    {
        "reynolds": Measure(at_least=1e4, at_most=1e8),
        "mach": Measure(at_least=0.0, at_most=0.9),
        "n_factor": N_FACTOR,
        "trip_upper": Measure(FRACTION, more_than=0.0, at_most=1.0),
        "trip_lower": Measure(FRACTION, more_than=0.0, at_most=1.0),
    }
)
"""What a polar is measured at; only the Reynolds number has no default."""

DEFAULTS = MappingProxyType(
    {"mach": 0.0, "n_factor": DEFAULT_N_FACTOR, "trip_upper": 1.0, "trip_lower": 1.0}
)

REMARKS = ("section", "source", "note")
"""Keys whose values are only read by people."""

COLUMNS = MappingProxyType(
    {
        "alpha_deg": (-90.0, 90.0),
        "cl": (-5.0, 5.0),
        "cd": (0.0, 2.0),
        "cm_quarter": (-2.0, 2.0),
    }
)
"""Column -> range of its values: coefficients, not counts."""

ALSO = MappingProxyType({"alpha": "alpha_deg", "cm": "cm_quarter"})
"""Other names of columns."""

ACCEPTED = (
    "accepted is a header line such as alpha,cl,cd,cm with cl and at least one other of them, "
    "after lines such as # reynolds: 2e5"
)


@dataclass(frozen=True)
class MeasuredPolar:
    """A polar as it was measured.

    Attributes
    ----------
    name : str
        Of its file.
    reynolds, mach, n_factor, trip_upper, trip_lower : float
        Conditions [-]; transition is forced at x/c, 1 is free.
    alpha_deg, cl, cd, cm_quarter : (n,) array
        Angle [deg] and coefficients [-]; not-a-number where nothing was measured.
    """

    name: str
    reynolds: float
    mach: float
    n_factor: float
    trip_upper: float
    trip_lower: float
    alpha_deg: FloatArray
    cl: FloatArray
    cd: FloatArray
    cm_quarter: FloatArray


def is_polar(path: Path) -> bool:
    """Return whether a file is a table with a column cl, and not the points of a section."""
    try:
        lines = _lines(path) if path.suffix.lower() == ".csv" else []
    except InputError:
        return False
    return "cl" in _header(lines)[1]


def read_polar(path: Path) -> MeasuredPolar:
    """Read a measured polar.

    Raises
    ------
    InputError
        With all that is wrong, each with its place in the file.
    """
    reader = _Reader(str(path))
    found = reader.read(_lines(path))
    if reader.faults:
        raise InputError(reader.faults[:MOST_FAULTS])
    conditions = DEFAULTS | reader.conditions
    return MeasuredPolar(
        name=str(path),
        reynolds=conditions["reynolds"],
        mach=conditions["mach"],
        n_factor=conditions["n_factor"],
        trip_upper=conditions["trip_upper"],
        trip_lower=conditions["trip_lower"],
        alpha_deg=np.array(found["alpha_deg"]),
        cl=np.array(found["cl"]),
        cd=np.array(found["cd"]),
        cm_quarter=np.array(found["cm_quarter"]),
    )


def _lines(path: Path) -> list[str]:
    file = str(path)
    try:
        with path.open("rb") as stream:
            data = stream.read(MOST_BYTES + 1)
    except OSError as error:
        message = f"the file cannot be read ({error.strerror}); {ACCEPTED}."
        raise InputError([Fault(message, file=file)]) from error
    if len(data) > MOST_BYTES or b"\0" in data:
        message = f"the file is binary or larger than {MOST_BYTES >> 20} MB; {ACCEPTED}."
        raise InputError([Fault(message, file=file)])
    return data.decode("utf-8-sig", errors="replace").splitlines()


def _header(lines: Sequence[str]) -> tuple[int, list[str]]:
    """Return the index of the header line and its names."""
    for k, line in enumerate(lines):
        if line.strip() and not line.lstrip().startswith("#"):
            words = [word.strip().lower() for word in next(csv.reader([line]))]
            return k, [ALSO.get(word, word) for word in words]
    return len(lines), []


class _Reader:
    """One file on its way to a polar; what is wrong goes to `faults`."""

    def __init__(self, file: str) -> None:
        self.file = file
        self.faults: list[Fault] = []
        self.conditions: dict[str, float] = {}

    def _fault(self, message: str, line: int | None = None, column: int | None = None) -> None:
        self.faults.append(Fault(message, (), self.file, line, column))

    def read(self, lines: Sequence[str]) -> dict[str, list[float]]:
        """Return the columns of numbers."""
        start, names = _header(lines)
        for number, line in enumerate(lines[:start], start=1):
            self._remark(line.strip().lstrip("#").strip(), number)
        if "cl" not in names or not set(COLUMNS) - {"cl"} & set(names):
            self._fault(f"there is no table of a polar; {ACCEPTED}.", start + 1 if names else None)
            return {}
        rows = [
            (number, next(csv.reader([line])))
            for number, line in enumerate(lines[start + 1 :], start=start + 2)
            if line.strip() and not line.lstrip().startswith("#")
        ]
        if len(rows) < FEWEST_ROWS:
            self._fault(f"the table has {len(rows)} rows; accepted are {FEWEST_ROWS} or more.")
        cells = {name: self._column(rows, names, name) for name in (*COLUMNS, *CONDITIONS)}
        for name in CONDITIONS:
            self._one_value(name, cells.pop(name), start + 2)
        if "reynolds" not in self.conditions and not self.faults:
            self._fault("its Reynolds number is missing; accepted is a line # reynolds: 2e5.")
        return cells

    def _remark(self, line: str, number: int) -> None:
        key, colon, value = line.partition(":")
        key = key.strip().lower()
        if not colon or key in REMARKS or " " in key:
            return
        if key not in CONDITIONS:
            near = did_you_mean(key, list(CONDITIONS)) or "."
            known = ", ".join((*CONDITIONS, *REMARKS))
            self._fault(f"{shown(key)} is no key of a polar; accepted is {known}{near}", number)
            return
        try:
            self.conditions[key] = float(CONDITIONS[key].read(value.strip()))
        except UnitError as error:
            self._fault(f"{key}: {error}", number)

    def _column(
        self, rows: Sequence[tuple[int, list[str]]], names: list[str], name: str
    ) -> list[float]:
        if name not in names:
            return [math.nan] * len(rows)
        k = names.index(name)
        return [
            self._cell(name, row[k] if k < len(row) else "", (line, k + 1)) for line, row in rows
        ]

    def _cell(self, name: str, text: str, place: tuple[int, int]) -> float:
        if not text.strip():
            return math.nan
        low, high = COLUMNS.get(name, (-math.inf, math.inf))
        try:
            value = float(text)
        except ValueError:
            value = math.inf
        if math.isfinite(value) and low <= value <= high:
            return value
        span = f"a number from {low:g} to {high:g}" if name in COLUMNS else "a number"
        self._fault(
            f"{name}: {shown(text)} is not accepted; accepted is {span} or nothing.", *place
        )
        return math.nan

    def _one_value(self, name: str, column: Sequence[float], line: int) -> None:
        """Take a condition from a column, in which it must have one value."""
        known = sorted({value for value in column if not math.isnan(value)})
        if len(known) > 1:
            self._fault(
                f"the column {name} has {len(known)} values, from {known[0]:g} to {known[-1]:g}; "
                f"accepted is one, so one file a polar.",
                line,
            )
        elif known:
            self._remark(f"{name}: {known[0]!r}", line)
