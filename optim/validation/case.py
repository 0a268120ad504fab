"""One quantity, measured and computed, and what is to be said of the difference."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Literal

from optim.arrays import FloatArray

if TYPE_CHECKING:
    from optim.validation.record import Record

Verdict = Literal["reproduced", "not reproduced", "shown"]
"""Within the tolerance; outside it; from memory or for comparison only, deciding nothing."""

Measure = Literal["difference", "relative"]
"""Whether an error is computed - measured or (computed - measured)/measured."""

Half = Literal["calibration", "judged"]
"""Sections of the first half may choose constants; those of the other are only judged."""

CALIBRATION = ("NACA 0012", "NACA 2412", "E387")
"""Sections whose measurements may choose constants, whatever the condition."""

FROM_MEMORY = "FROM MEMORY"
"""Status of what was recalled: shown, and decides nothing."""

STATUSES = ("READ", "READ (secondary)", FROM_MEMORY)
"""Read in the report or a file of its publisher; read in another's copy; recalled."""

NO_REASON = "No reason is known yet."


@dataclass(frozen=True)
class Allowance:
    """The error allowed to a quantity of a source, and why.

    Attributes
    ----------
    key : str
        Its name in the record.
    quantity, unit : str
        What is compared, in words.
    measure : str
        Whether the errors below are differences or relative.
    scatter, reading, method : float
        Scatter of the measurements, error of reading them off, and the error that the method is
        granted: independent of each other, so that the tolerance is the root of their squares.
    reason : str
        Where the three are from.
    gates : bool
        Whether the quantity decides anything.
    """

    key: str
    quantity: str
    unit: str
    measure: Measure
    scatter: float
    reading: float
    method: float
    reason: str
    gates: bool = True

    @property
    def tolerance(self) -> float:
        """Greatest error with which the quantity counts as reproduced."""
        return math.sqrt(self.scatter**2 + self.reading**2 + self.method**2)


@dataclass(frozen=True)
class Case:
    """A quantity of a section at one condition.

    Attributes
    ----------
    source, section, conditions, quantity, unit, half, status : str
        Which; see `optim.validation.record.Record`.
    measured, computed : float
        Not-a-number where there is no answer.
    error : float
        Computed - measured or relative to the measured value (`measure`); of several points the
        mean or largest size, as the quantity says.
    measure : str
        "difference" or "relative", of error, scatter and tolerance.
    scatter, tolerance : float
        Scatter of the measurements with the error of reading them; greatest error to pass.
    verdict, reason : str
        And, where it is not reproduced, why; else where the tolerance is from.
    """

    source: str
    section: str
    conditions: str
    quantity: str
    unit: str
    half: str
    status: str
    measured: float
    computed: float
    error: float
    measure: Measure
    scatter: float
    tolerance: float
    verdict: Verdict
    reason: str


@dataclass(frozen=True)
class Series:
    """Points or a line of a panel; `error` is the half-width of the measured bars, 0 for none."""

    label: str
    x: FloatArray
    y: FloatArray
    error: float = 0.0


@dataclass(frozen=True)
class Panel:
    """What is drawn over one pair of axes: measured points, computed lines.

    With `names` the places along x are single sections, and the computed values are points, too.
    """

    title: str
    x: str
    y: str
    measured: tuple[Series, ...]
    computed: tuple[Series, ...]
    downwards: bool = False
    names: tuple[str, ...] = ()


@dataclass(frozen=True)
class Comparison:
    """All that was compared with a source."""

    record: Record
    cases: tuple[Case, ...]
    panels: tuple[Panel, ...] = field(default=())


def half_of(section: str) -> Half:
    """Return which half a section belongs to.

    >>> half_of("NACA 2412"), half_of("NACA 4412")
    ('calibration', 'judged')
    """
    return "calibration" if section in CALIBRATION else "judged"


def judge(
    record: Record,
    key: str,
    measured: float,
    computed: float,
    *,
    error: float | None = None,
    of: str = "",
    section: str | None = None,
    conditions: str | None = None,
    status: str | None = None,
    shown: bool = False,
) -> Case:
    """Return the case of a quantity.

    Parameters
    ----------
    record : Record
        Of the source.
    key : str
        Of the error allowed.
    measured, computed : float
        Values in the unit of the quantity; of several points their means.
    error : float
        Where it is not that between the two values.
    of : str
        Which of several alike, such as an angle; told after the quantity, and in the key of the
        reason why it is not reproduced.
    section, conditions, status : str
        Where they differ from those of the record.
    shown : bool
        Whether it decides nothing although the record's quantity does.
    """
    allowed = record.allowances[key]
    if error is None:
        error = computed - measured
        if allowed.measure == "relative":
            error /= abs(measured)
    section, status = section or record.section, status or record.status
    gates = allowed.gates and not shown and status != FROM_MEMORY
    verdict: Verdict = "shown"
    if gates:
        verdict = "reproduced" if abs(error) <= allowed.tolerance else "not reproduced"
    reason = allowed.reason
    if verdict == "not reproduced":
        reason = record.reasons.get(f"{key} {of}".strip(), record.reasons.get(key, NO_REASON))
    return Case(
        record.name, section, conditions or record.conditions,
        f"{allowed.quantity} {of}".strip(), allowed.unit, half_of(section), status,
        measured, computed, error, allowed.measure,
        math.hypot(allowed.scatter, allowed.reading), allowed.tolerance, verdict, reason,
    )  # fmt: skip
