"""From a problem and its evaluations to what the archive takes."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping, Sequence
from dataclasses import asdict
from typing import Any

import numpy as np

from optim.archive.records import GenerationRecord, RunHeader
from optim.arrays import FloatArray
from optim.problem.evaluation import Evaluation
from optim.problem.problem import Problem
from optim.search.space import SearchState
from optim.study.schema import Study


def run_header(
    study: Study, problem: Problem, reference: FloatArray, provenance: Mapping[str, Any]
) -> RunHeader:
    """Return what is recorded before the first evaluation.

    Parameters
    ----------
    study : Study
        The study, with what the command line changed in it.
    problem : Problem
        Its problem.
    reference : (n_objectives,) array
        Reference point, minimised.
    provenance : mapping
        What computes the run.
    """
    objectives, constraints = problem.objectives, problem.constraints
    return RunHeader(
        study_name=study.study,
        study_text=study.text,
        resolved_text=study.resolved_text(),
        variable_names=problem.variable_names,
        lower=problem.lower,
        upper=problem.upper,
        objective_names=tuple(spec.name for spec in objectives),
        objective_senses=tuple(spec.sense for spec in objectives),
        objective_units=tuple(spec.unit for spec in objectives),
        reference_point=reference,
        constraint_names=tuple(spec.name for spec in constraints),
        constraint_kinds=tuple(spec.kind for spec in constraints),
        constraint_limits=np.array([spec.limit for spec in constraints]),
        constraint_units=tuple(spec.unit for spec in constraints),
        constraint_scales=np.array([spec.scale for spec in constraints]),
        condition_names=problem.condition_names,
        conditions_table=conditions_table(problem),
        condition_quantity_names=problem.condition_quantities,
        condition_quantity_units=problem.condition_quantity_units,
        section_quantity_names=problem.section_quantities,
        section_quantity_units=problem.section_quantity_units,
        algorithm=study.search.algorithm,
        seed=study.search.seed,
        provenance=provenance,
    )


def conditions_table(problem: Problem) -> str:
    """Return the resolved conditions as JSON: a list in their order, null where there is none."""
    table = [
        {key: None if _absent(value) else value for key, value in asdict(condition).items()}
        for condition in problem.conditions
    ]
    return json.dumps(table, allow_nan=False)


def _absent(value: object) -> bool:
    return isinstance(value, float) and math.isnan(value)


def generation_record(
    generation: int,
    evaluations: Sequence[Evaluation],
    hypervolume: float,
    elapsed: float,
    state: SearchState,
) -> GenerationRecord:
    """Return a generation as it is recorded.

    Parameters
    ----------
    generation : int
        Counted from 0.
    evaluations : sequence of Evaluation
        In the order in which the search asked for them, at least one.
    hypervolume : float
        With this generation.
    elapsed : float
        Working time of all sessions at its end [s].
    state : SearchState
        Of the search that has been told of it.
    """

    def column(name: str, dtype: type = np.float64) -> np.typing.NDArray[Any]:
        return np.array([getattr(one, name) for one in evaluations], dtype=dtype)

    return GenerationRecord(
        generation=generation,
        designs=column("design"),
        objectives=column("objectives"),
        constraint_values=column("constraint_values"),
        margins=column("margins"),
        violation=column("violation"),
        quantities=column("quantities"),
        section_quantities=column("section_quantities"),
        outcomes=column("outcomes", np.int8),
        design_outcomes=column("design_outcome", np.int8),
        search_objectives=column("search_objectives"),
        search_constraints=column("search_constraints"),
        points=column("points", np.int64),
        iterations=column("iterations", np.int64),
        seconds=column("seconds"),
        hypervolume=hypervolume,
        elapsed=elapsed,
        state_json=state.json,
        state_arrays=state.arrays,
    )
