"""Every evaluation of a run, judged: by the limits it was run with, or by those of another study.

Nothing is flown for it. What a design is worth follows from its recorded quantities alone.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from optim.archive.reader import Run
from optim.arrays import FloatArray, IntArray
from optim.problem.pareto import feasible_front

MAXIMISE = "maximise"

RADIAN, DEGREE = "rad", "deg"
"""Angles are recorded in radians and stated in degrees."""


@dataclass(frozen=True)
class Aim:
    """An objective: its unique name, maximise or minimise, its unit."""

    name: str
    sense: str
    unit: str


@dataclass(frozen=True)
class Limit:
    """A constraint: its unique name, min or max, the limit and its unit."""

    name: str
    kind: str
    limit: float
    unit: str


@dataclass(frozen=True)
class Judgement:
    """What n evaluations of a run are worth.

    Attributes
    ----------
    study : str
        Name of the study that judges.
    aims : tuple of Aim
        Objectives.
    limits : tuple of Limit
        Constraints.
    conditions : tuple of str
        The conditions that the study looks at.
    objectives : (n, n_objectives) array
        In their true sense; not-a-number where absent.
    values, margins : (n, n_constraints) array
        The constrained quantity, and its scaled margin, negative if violated.
    violation : (n,) array
        0 is feasible.
    reference_point : (n_objectives,) array
        Of the hypervolume, minimised.
    hypervolume : float
        Of all feasible evaluations; 0 without one.
    """

    study: str
    aims: tuple[Aim, ...]
    limits: tuple[Limit, ...]
    conditions: tuple[str, ...]
    objectives: FloatArray
    values: FloatArray
    margins: FloatArray
    violation: FloatArray
    reference_point: FloatArray
    hypervolume: float

    @property
    def signs(self) -> FloatArray:
        """Factor that turns each objective into one to be minimised, (n_objectives,)."""
        return np.array([-1.0 if aim.sense == MAXIMISE else 1.0 for aim in self.aims])

    @property
    def minimised(self) -> FloatArray:
        """Objectives, minimised, (n, n_objectives)."""
        return self.objectives * self.signs

    def front(self) -> IntArray:
        """Return the feasible non-dominated evaluations, the best in the first objective first.

        Designs that were evaluated twice, equal in every objective and limit, count once.
        """
        minimised = self.minimised
        rows = feasible_front(minimised, self.violation)
        _, first = np.unique(
            np.hstack([minimised[rows], self.values[rows]]), axis=0, return_index=True
        )
        rows = rows[np.sort(first)]
        return rows[np.lexsort(minimised[rows].T[::-1])]

    def kept(self) -> dict[str, float]:
        """Return the share of the evaluations that keep each limit; without an answer, not."""
        shares = np.mean(self.margins >= 0.0, axis=0) if len(self.margins) else []
        return {limit.name: float(s) for limit, s in zip(self.limits, shares, strict=False)}

    def in_degrees(self) -> Judgement:
        """Return the same with angles in degrees."""
        of_aims = _factors([aim.unit for aim in self.aims])
        of_limits = _factors([limit.unit for limit in self.limits])
        return replace(
            self,
            aims=tuple(replace(aim, unit=_surface_unit(aim.unit)) for aim in self.aims),
            limits=tuple(
                replace(one, limit=float(one.limit * factor), unit=_surface_unit(one.unit))
                for one, factor in zip(self.limits, of_limits, strict=True)
            ),
            objectives=self.objectives * of_aims,
            values=self.values * of_limits,
            reference_point=self.reference_point * of_aims,
            hypervolume=float(self.hypervolume * np.prod(of_aims)),
        )

    def better_in_everything(self, rows: IntArray, than: int) -> IntArray:
        """Return which of `rows` are better than the evaluation `than` in every objective."""
        minimised = self.minimised
        return rows[np.all(minimised[rows] < minimised[than], axis=1)]


def _surface_unit(unit: str) -> str:
    return DEGREE if unit == RADIAN else unit


def _factors(units: list[str]) -> FloatArray:
    return np.array([math.degrees(1.0) if unit == RADIAN else 1.0 for unit in units])


def as_recorded(run: Run) -> Judgement:
    """Return a run's own judgement, as it is archived; angles in degrees."""
    header = run.header
    # An empty run has lost the length of its rows.
    n, n_aims = run.evaluations, len(header.objective_names)
    n_limits = len(header.constraint_names)
    return Judgement(
        study=header.study_name,
        aims=tuple(
            Aim(*row)
            for row in zip(
                header.objective_names,
                header.objective_senses,
                header.objective_units,
                strict=True,
            )
        ),
        limits=tuple(
            Limit(name, kind, float(limit), unit)
            for name, kind, limit, unit in zip(
                header.constraint_names,
                header.constraint_kinds,
                header.constraint_limits,
                header.constraint_units,
                strict=True,
            )
        ),
        conditions=header.condition_names,
        objectives=run.objectives.reshape(n, n_aims),
        values=run.constraint_values.reshape(n, n_limits),
        margins=run.margins.reshape(n, n_limits),
        violation=run.violation,
        reference_point=header.reference_point,
        hypervolume=float(run.read("hypervolume")[-1]) if run.generations else 0.0,
    ).in_degrees()
