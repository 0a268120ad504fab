"""From recorded numbers to objectives, margins and what a search is told.

No flow is computed here: a design is judged by its table of quantities alone, so that one that
has been recorded can be judged again by other limits.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optim.arrays import FloatArray
from optim.outcomes import Outcome
from optim.problem.constraints import LEAST_SCALE, LEAST_SCALES, ConstraintSpec
from optim.problem.grading import NOTHING_REACHED, incompleteness
from optim.problem.objectives import ObjectiveSpec
from optim.problem.quantities import RECORDED_OF_A_CONDITION, judged

REFERENCE_STEP = 0.5
"""How much worse than the baseline the reference point is, as a share of the baseline's own value
(or of the quantity's least scale, if that is larger): far enough that the baseline and a front
that gives up some of one objective for another both count, near enough that gains are seen."""

CONVERGED = int(Outcome.CONVERGED)


@dataclass(frozen=True, slots=True)
class Table:
    """What is recorded of a design, by name.

    Attributes
    ----------
    section : mapping of str to float
        Quantities of the section under their recorded names; empty if it is no section.
    conditions : mapping of str to (n_condition_quantities,) array
        Quantities of each condition.
    converged : mapping of str to bool
        Whether each condition has an answer.
    """

    section: Mapping[str, float]
    conditions: Mapping[str, FloatArray]
    converged: Mapping[str, bool]

    def of_section(self, recorded: str) -> float:
        """Return a quantity of the section, not-a-number if it is no section."""
        return self.section.get(recorded, math.nan)

    def of_condition(self, condition: str, quantity: str) -> float:
        """Return a quantity of a condition as limits read it."""
        value = self.conditions[condition][RECORDED_OF_A_CONDITION.index(quantity)]
        return judged(quantity, float(value), converged=self.converged[condition])


def recorded_name(quantity: str, at: float | None) -> str:
    """Return the name under which a quantity of the section is recorded: ``depth@30%``."""
    return quantity if at is None else f"{quantity}@{round(100.0 * at, 6):g}%"


def objective_value(spec: ObjectiveSpec, table: Table) -> float:
    """Return an objective in its true sense, not-a-number if a part of it is absent."""
    if not spec.shares:
        return table.of_section(recorded_name(spec.quantity, spec.at))
    return spec.value({c: table.of_condition(c, spec.quantity) for c, _ in spec.shares})


def constraint_value(spec: ConstraintSpec, table: Table, chord: float) -> float:
    """Return the value that a limit is compared with, in the unit of the limit.

    Parameters
    ----------
    spec : ConstraintSpec
        The constraint.
    table : Table
        What is recorded of the design.
    chord : float
        Chord [m], for limits in metres and square metres.
    """
    if spec.condition is not None:
        return table.of_condition(spec.condition, spec.quantity)
    return table.of_section(recorded_name(spec.quantity, spec.at)) * unit_size(spec.unit, chord)


def unit_size(unit: str, chord: float) -> float:
    """Return how much a quantity of one chord, or square chord, is in a unit of limits."""
    return {"m": chord, "m^2": chord**2}.get(unit, 1.0)


def search_objectives(
    specs: Sequence[ObjectiveSpec], values: FloatArray, reference: FloatArray
) -> FloatArray:
    """Return the objectives as a search sees them.

    Parameters
    ----------
    specs : sequence of ObjectiveSpec
        The objectives.
    values : (n_objectives,) array
        In their true sense, not-a-number where absent.
    reference : (n_objectives,) array
        Reference point, minimised.

    Returns
    -------
    (n_objectives,) array
        Minimised and finite: an absent one is worse than the reference point.
    """
    minimised = np.array([s.minimised(float(v)) for s, v in zip(specs, values, strict=True)])
    scales = [_size(spec.quantity, float(r)) for spec, r in zip(specs, reference, strict=True)]
    return np.where(np.isfinite(minimised), minimised, reference + np.array(scales))


def reference_point(specs: Sequence[ObjectiveSpec], baseline: FloatArray) -> FloatArray:
    """Return the reference point that follows from the baseline, minimised.

    Parameters
    ----------
    specs : sequence of ObjectiveSpec
        The objectives.
    baseline : (n_objectives,) array
        The fitted baseline's objectives in their true sense, all present.

    Returns
    -------
    (n_objectives,) array
        Each one `REFERENCE_STEP` of its own size worse than the baseline.
    """
    minimised = [spec.minimised(float(v)) for spec, v in zip(specs, baseline, strict=True)]
    steps = [_size(spec.quantity, v) for spec, v in zip(specs, minimised, strict=True)]
    return np.array(minimised) + REFERENCE_STEP * np.array(steps)


def _size(quantity: str, value: float) -> float:
    """Size of a value, but no less than its quantity's least scale."""
    return max(abs(value), LEAST_SCALES.get(quantity, LEAST_SCALE))


def search_constraints(
    margins: FloatArray, shortfalls: Sequence[float], objectives: FloatArray
) -> FloatArray:
    """Return the constraints as a search sees them, and how incomplete the evaluation is.

    Parameters
    ----------
    margins : (n_constraints,) array
        Scaled, negative if violated, not-a-number if absent.
    shortfalls : sequence of float
        How far each condition stayed from an answer, 0 to 1.
    objectives : (n_objectives,) array
        Not-a-number where absent.

    Returns
    -------
    (n_constraints + 1,) array
        Finite; kept at or below zero. A limit that cannot be judged is violated by its whole
        scale, an objective that is missing counts like a condition never looked at.
    """
    missing = [NOTHING_REACHED if math.isnan(value) else 0.0 for value in objectives]
    parts = list(shortfalls) if any(shortfalls) else missing
    told = np.where(np.isnan(margins), NOTHING_REACHED, -margins)
    return np.append(told, incompleteness(parts))


def violation_of(constraints: FloatArray) -> float:
    """Return the sum of what is violated [-]; 0 is feasible."""
    return float(np.maximum(constraints, 0.0).sum())


def design_outcome(outcomes: NDArray[np.int8]) -> Outcome:
    """Return how a design ended: by its first condition without an answer."""
    failed = outcomes[outcomes != CONVERGED]
    return Outcome(int(failed[0])) if failed.size else Outcome.CONVERGED
