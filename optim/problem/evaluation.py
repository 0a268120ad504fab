"""What is known of one design once it has been evaluated."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from optim.arrays import FloatArray
from optim.outcomes import Outcome


@dataclass(frozen=True, slots=True)
class Evaluation:
    """One design: the truth about it, and what a search is told instead.

    Arrays are read-only.

    Attributes
    ----------
    design : (n_variables,) array
        Design variables.
    objectives : (n_objectives,) array
        In their true sense; not-a-number where absent.
    constraint_values : (n_constraints,) array
        In the units of the limits; not-a-number where absent.
    margins : (n_constraints,) array
        Scaled; negative is violated, not-a-number is absent.
    violation : float
        Sum of the positive `search_constraints`: 0 is feasible, always finite.
    quantities : (n_conditions, n_condition_quantities) array
        What is recorded of each condition; not-a-number where absent.
    section_quantities : (n_section_quantities,) array
        What is recorded of the section; not-a-number if the design is no section.
    outcomes : (n_conditions,) array of int8
        How each condition ended.
    design_outcome : Outcome
        CONVERGED if all conditions are; NOT_A_SECTION; NOT_EVALUATED if limits on the shape were
        missed too far to look at the flow; else how the first failed condition ended.
    search_objectives : (n_objectives,) array
        Minimised, always finite; an absent objective is worse than the reference point.
    search_constraints : (n_constraints + 1,) array
        Kept at or below zero, always finite; the last one is how incomplete the evaluation is.
    points : int
        Coupled solutions attempted: more than conditions, for a peak takes many and a difficult
        condition several.
    iterations : int
        Newton iterations of all of them.
    seconds : float
        What it took on the clock [s].
    """

    design: FloatArray
    objectives: FloatArray
    constraint_values: FloatArray
    margins: FloatArray
    violation: float
    quantities: FloatArray
    section_quantities: FloatArray
    outcomes: NDArray[np.int8]
    design_outcome: Outcome
    search_objectives: FloatArray
    search_constraints: FloatArray
    points: int
    iterations: int
    seconds: float

    def __post_init__(self) -> None:
        for field in fields(self):
            value = getattr(self, field.name)
            if isinstance(value, np.ndarray):
                value.flags.writeable = False

    @property
    def feasible(self) -> bool:
        """Whether every condition has an answer and every limit is kept."""
        return self.violation == 0.0
