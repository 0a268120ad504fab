"""What is recorded of a design whose process died twice: nothing but that."""

from __future__ import annotations

import numpy as np

from optim.arrays import FloatArray
from optim.outcomes import Outcome
from optim.problem import judge
from optim.problem.evaluation import Evaluation
from optim.problem.grading import NOTHING_REACHED
from optim.problem.problem import Problem


def lost_evaluation(problem: Problem, reference: FloatArray, design: FloatArray) -> Evaluation:
    """Return the evaluation of a lost design.

    Parameters
    ----------
    problem : Problem
        What it was to be judged by.
    reference : (n_objectives,) array
        Reference point of the run, minimised.
    design : (n_variables,) array
        The design.

    Returns
    -------
    Evaluation
        Every number absent, every outcome WORKER_LOST; the search is told the same as of a
        design without a single flow.
    """
    n_conditions = len(problem.condition_names)
    objectives = np.full(len(problem.objectives), np.nan)
    margins = np.full(len(problem.constraints), np.nan)
    told = judge.search_constraints(margins, [NOTHING_REACHED] * n_conditions, objectives)
    return Evaluation(
        design=np.array(design),
        objectives=objectives,
        constraint_values=margins.copy(),
        margins=margins,
        violation=judge.violation_of(told),
        quantities=np.full((n_conditions, len(problem.condition_quantities)), np.nan),
        section_quantities=np.full(len(problem.section_quantities), np.nan),
        outcomes=np.full(n_conditions, Outcome.WORKER_LOST, dtype=np.int8),
        design_outcome=Outcome.WORKER_LOST,
        search_objectives=judge.search_objectives(problem.objectives, objectives, reference),
        search_constraints=told,
        points=0,
        iterations=0,
        seconds=0.0,
    )
