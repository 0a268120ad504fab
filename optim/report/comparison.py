"""Runs, designs, sections and measured polars side by side: one document, columns and rows.

Designs and sections are set beside each other at the conditions of all runs that are named; what
is archived of a design is taken from there, and only the rest is flown. Runs are compared by their
fronts, measurements by what each design and section computes to at the same angles and lifts.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

from optim.arrays import FloatArray
from optim.geometry.section import Section
from optim.geometry.spacing import panel_nodes
from optim.problem.flying import fly
from optim.problem.problem import Problem
from optim.report.archived import peak_sought
from optim.report.fields import Document, point_fields, section_fields
from optim.report.fronts import RunFront, Volumes, differences, volumes
from optim.report.rejudged import FLOWN, same
from optim.report.residuals import Residual, residuals

if TYPE_CHECKING:
    from optim.aerodynamics.evaluator import SectionEvaluator
    from optim.report.design_record import DesignRecord
    from optim.study.polar_file import MeasuredPolar

Kind = Literal["run", "design", "section", "measurement"]

MEASURES = {
    "thickness": "chord", "thickness_x": "chord", "camber": "chord", "camber_x": "chord",
    "area": "chord^2", "nose_radius": "chord", "trailing_edge_gap": "chord",
    "trailing_edge_angle_deg": "deg",
}  # fmt: skip
"""Measures of a section that are compared, with their units."""

AT_A_CONDITION = {
    "alpha_deg": "deg", "cl": "1", "cd": "1", "lift_to_drag": "1", "cm_quarter": "1",
    "x_cp": "chord", "cp_min": "1", "transition_upper": "chord", "transition_lower": "chord",
}  # fmt: skip
"""What of a flow is compared, with its unit."""

NO_BAND = (
    "Beside what is computed no error is stated; how far it errs on published measurements: "
    "sectionwright validate."
)

PANELS = 160
"""Panels of what is flown beside a measurement alone: the number of the studies."""


@dataclass(frozen=True)
class Compared:
    """One of the things compared; what it is not is None.

    Attributes
    ----------
    name : str
        As it was named.
    run : RunFront or None
        The front of a run.
    section : Section or None
        Of a section, or of a design.
    record : DesignRecord or None
        A design.
    polar : MeasuredPolar or None
        A measurement.
    """

    name: str
    run: RunFront | None = None
    section: Section | None = None
    record: DesignRecord | None = None
    polar: MeasuredPolar | None = None

    @property
    def kind(self) -> Kind:
        """What it is."""
        if self.run is not None:
            return "run"
        if self.polar is not None:
            return "measurement"
        return "section" if self.record is None else "design"


@dataclass(frozen=True)
class Comparison:
    """What was found.

    Attributes
    ----------
    columns : tuple of Compared
        In the order named.
    rows : list of dict
        quantity, condition (None for the section itself), unit and one value a column.
    volumes : Volumes or None
        Of the runs.
    residuals : list of (int, int, Residual)
        Column of the section, column of the measurement, and one coefficient of it.
    notes : list of str
        What has to be known beside the numbers.
    """

    columns: tuple[Compared, ...]
    rows: list[Document]
    volumes: Volumes | None
    residuals: list[tuple[int, int, Residual]]
    notes: list[str]

    def document(self) -> Document:
        """Return the document of ``compare --json``."""
        runs = [one for one in self.columns if one.run is not None]
        found: Document = {
            "columns": [{"name": one.name, "kind": one.kind} for one in self.columns],
            "rows": self.rows,
            "notes": self.notes,
        }
        if self.volumes is not None and runs[0].run is not None:
            aims = [aim.name for aim in runs[0].run.judgement.aims]
            found["hypervolume"] = {
                "reference_point": dict(
                    zip(aims, self.volumes.reference.tolist(), strict=True)
                ),
                "each": [
                    {"name": one.name, "value": value}
                    for one, value in zip(runs, self.volumes.each, strict=True)
                ],
                "union": self.volumes.union,
            }  # fmt: skip
        if self.residuals:
            found["residuals"] = [
                {
                    "computed": self.columns[k].name,
                    "measured": self.columns[m].name,
                    "quantity": one.quantity,
                    **one.fields(),
                    "at": one.at.tolist(),
                    "measured_values": one.measured.tolist(),
                    "computed_values": one.computed.tolist(),
                }
                for k, m, one in self.residuals
            ]
        return found


Make = Callable[[FloatArray], "SectionEvaluator"]


def compare(columns: Sequence[Compared], problems: Sequence[Problem], make: Make) -> Comparison:
    """Return everything side by side.

    Parameters
    ----------
    columns : sequence of Compared
        Two or more.
    problems : sequence of Problem
        Of the runs that are named, whose conditions are compared, each study once.
    make : callable
        Makes the evaluator of a section from its nodes; called only where something is flown.

    Raises
    ------
    InputError
        If runs have other objectives.
    """
    runs = [one.run for one in columns if one.run is not None]
    found = volumes(runs) if runs else None
    rows = _run_rows(columns, found) + _measure_rows(columns)
    if any(one.section is not None for one in columns):
        rows += _condition_rows(columns, problems, make)
    off = [
        (k, m, one)
        for m, measured in enumerate(columns)
        for k, column in enumerate(columns)
        if measured.polar is not None and column.section is not None
        for one in residuals(column.section, measured.polar, PANELS, make)
    ]
    notes = differences(runs) if runs else []
    if off:
        notes.append(NO_BAND)
    return Comparison(tuple(columns), rows + _residual_rows(columns, off), found, off, notes)


def flown_alike(a: Problem, b: Problem) -> bool:
    """Return whether two problems fly the same conditions on as many panels."""
    stated = [[condition.stated() for condition in one.conditions] for one in (a, b)]
    return a.panels == b.panels and stated[0] == stated[1]


def _row(quantity: str, condition: str | None, unit: str, values: list[Any]) -> Document:
    return {"quantity": quantity, "condition": condition, "unit": unit, "values": values}


def _run_rows(columns: Sequence[Compared], found: Volumes | None) -> list[Document]:
    """Return the size of the fronts, their hypervolumes, and objectives; of a run the best."""
    known = [one.run for one in columns if one.run is not None]
    if found is None:
        return []
    each = iter(found.each)
    volume = [math.nan if one.run is None else next(each) for one in columns]
    sizes = [None if one.run is None else len(one.run.rows) for one in columns]
    rows = [_row("front", None, "designs", sizes), _row("hypervolume", None, "-", volume)]
    for k, aim in enumerate(known[0].judgement.aims):
        values = [_objective(one, k, aim.name) for one in columns]
        rows.append(_row(f"best {aim.name}", None, aim.unit, values))
    return rows


def _objective(column: Compared, k: int, name: str) -> float:
    if column.record is not None:
        return float(column.record.entry["objectives"].get(name, math.nan))
    if column.run is None or not len(column.run.rows):
        return math.nan
    best = column.run.minimised[:, k].min() * column.run.judgement.signs[k]
    return float(best)


def _measure_rows(columns: Sequence[Compared]) -> list[Document]:
    fields = [None if one.section is None else section_fields(one.section) for one in columns]
    if not any(fields):
        return []
    return [
        _row(name, None, unit, [math.nan if one is None else one[name] for one in fields])
        for name, unit in MEASURES.items()
    ]


def _condition_rows(
    columns: Sequence[Compared], problems: Sequence[Problem], make: Make
) -> list[Document]:
    """Return the flows at the conditions of every run, each state of flight once."""
    rows: list[Document] = []
    seen: list[tuple[int, Document]] = []
    for problem in problems:
        fresh = [
            condition
            for condition in problem.conditions
            if not any(
                panels == problem.panels and all(same(condition.stated()[k], one[k]) for k in FLOWN)
                for panels, one in seen
            )
        ]
        if not fresh:
            continue
        taken = {str(one["condition"]) for one in rows}
        flows = [_flows(one, problem, make) for one in columns]
        for condition in fresh:
            name = condition.name
            title = f"{name} ({problem.name})" if name in taken else name
            for quantity, unit in AT_A_CONDITION.items():
                values = [math.nan if one is None else one[name][quantity] for one in flows]
                rows.append(_row(quantity, title, unit, values))
            endings = [None if one is None else one[name]["outcome"] for one in flows]
            rows.append(_row("outcome", title, "", endings))
            seen.append((problem.panels, condition.stated()))
    return rows


def _flows(column: Compared, problem: Problem, make: Make) -> dict[str, Document] | None:
    """Return the flows at the conditions of a problem: archived if they are, else flown."""
    if column.section is None:
        return None
    record = column.record
    if record is not None and flown_alike(record.problem, problem):
        return dict(record.entry["conditions"])
    evaluator = make(panel_nodes(column.section, problem.panels))
    return {
        one.name: point_fields(peak_sought(flow) if one.maximum else flow)
        for one, flow in zip(
            problem.conditions, fly(evaluator, problem.conditions), strict=True
        )
    }  # fmt: skip


def _residual_rows(
    columns: Sequence[Compared], off: Sequence[tuple[int, int, Residual]]
) -> list[Document]:
    """Return one row a figure, a measurement and a coefficient; computed less measured."""
    rows: dict[tuple[int, str, str], list[Any]] = {}
    for k, m, one in off:
        for figure, value in one.fields().items():
            key = (m, one.quantity, figure)
            rows.setdefault(key, [None] * len(columns))[k] = value
    return [
        _row(f"{quantity} less measured: {figure}", columns[m].name, "1", values)
        for (m, quantity, figure), values in rows.items()
    ]
