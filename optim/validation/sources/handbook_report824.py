"""Four- and five-digit sections at Re 9e6: NACA Report 824, as the handbook tabulates them."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from optim.aerodynamics.operating_point import OperatingPoint
from optim.arrays import FloatArray
from optim.validation.case import Case, Comparison, Panel, Series, half_of, judge
from optim.validation.flight import mean_error, naca
from optim.validation.record import Record

POINT = OperatingPoint(9e6, alpha=0.0)

ANGLES = tuple(np.arange(-6.0, 9.0).tolist())
"""Angles of the lift slope and the aerodynamic centre [deg]."""

THICKNESSES = (0.09, 0.21)
"""Thinner and thicker rows are shown and decide nothing."""

COLUMNS = {
    "alpha_zero": "alpha_zero_lift_deg",
    "cm": "cm_ac",
    "slope": "cl_alpha_per_deg",
    "centre": "x_ac",
    "cl_max": "clmax",
}
"""Key of a quantity -> column."""


@dataclass(frozen=True)
class Row:
    """A section of the table: what is measured and what is computed, by quantity."""

    section: str
    within: bool
    measured: dict[str, float]
    computed: dict[str, float]

    @property
    def judged(self) -> bool:
        """Whether the row counts in the means."""
        return self.within and half_of(self.section) == "judged"


def compare(record: Record) -> Comparison:
    """Compare five characteristics row by row, and their means over the judged rows."""
    table = record.columns()
    rows = []
    for i, digits in enumerate(record.words("section")):
        measured = {key: float(table[column][i]) for key, column in COLUMNS.items()}
        within = THICKNESSES[0] <= table["t_c"][i] <= THICKNESSES[1]
        rows.append(Row(f"NACA {digits}", bool(within), measured, _computed(digits)))
    cases = [
        judge(
            record, key, row.measured[key], row.computed[key], of=f"of {row.section[5:]}",
            section=row.section, shown=not row.within,
        )
        for row in rows
        for key in COLUMNS
    ]  # fmt: skip
    return Comparison(record, (*_means(record, rows), *cases), _panels(record, rows))


def _computed(digits: str) -> dict[str, float]:
    section = naca(digits)
    _, derived = section.swept(POINT, ANGLES)
    peak = section.evaluator.maximum_lift(POINT)
    return {
        "alpha_zero": math.degrees(derived.alpha_zero_lift),
        "cm": derived.cm_aerodynamic_centre,
        "slope": math.radians(derived.lift_slope),
        "centre": derived.aerodynamic_centre_x,
        "cl_max": peak.cl,
    }


def _means(record: Record, rows: list[Row]) -> list[Case]:
    """Return the mean sizes of the errors over the judged rows, and the order of maximum lifts."""
    judged = [row for row in rows if row.judged]
    cases = []
    for key in COLUMNS:
        measured, computed = _pair(judged, key)
        errors = np.abs(computed - measured)
        if record.allowances[f"{key}_mean"].measure == "relative":
            errors = errors / np.abs(measured)
        means = float(np.mean(measured)), float(np.mean(computed))
        cases.append(judge(record, f"{key}_mean", *means, error=float(np.mean(errors))))
    cases.append(judge(record, "cl_max_rank", 1.0, _rank_correlation(*_pair(judged, "cl_max"))))
    return [*cases, *_answered(record, judged)]


def _answered(record: Record, judged: list[Row]) -> list[Case]:
    """Return the same of maximum lift over the rows that have a computed peak, for show."""
    measured, computed = _pair(judged, "cl_max")
    known = ~np.isnan(computed)
    measured, computed = measured[known], computed[known]
    means = float(np.mean(measured)), float(np.mean(computed))
    error = mean_error(measured, computed)
    rank = _rank_correlation(measured, computed)
    return [
        judge(record, "cl_max_answered", *means, error=error),
        judge(record, "cl_max_rank_answered", 1.0, rank),
    ]


def _pair(rows: list[Row], key: str) -> tuple[FloatArray, FloatArray]:
    measured = np.array([row.measured[key] for row in rows])
    return measured, np.array([row.computed[key] for row in rows])


def _rank_correlation(a: FloatArray, b: FloatArray) -> float:
    """Return Spearman's rank correlation; not-a-number if an answer is missing."""
    if np.isnan(a + b).any():
        return math.nan
    ranks = [np.array([np.mean(np.flatnonzero(np.sort(v) == x)) for x in v]) for v in (a, b)]
    return float(np.corrcoef(ranks[0], ranks[1])[0, 1])


def _panels(record: Record, rows: list[Row]) -> tuple[Panel, ...]:
    places = np.arange(len(rows), dtype=np.float64)
    names = tuple(row.section[5:] for row in rows)
    panels = []
    for key in COLUMNS:
        measured, computed = _pair(rows, key)
        allowed = record.allowances[key]
        bar = allowed.scatter * (float(np.mean(measured)) if allowed.measure == "relative" else 1)
        panels.append(
            Panel(
                "Does it agree, section by section?", "section",
                f"{allowed.quantity} {allowed.unit}".removesuffix(" -"),
                (Series("measured", places, measured, bar),),
                (Series("computed", places, computed),), names=names,
            )
        )  # fmt: skip
    return tuple(panels)
