"""A run judged by another study: other objectives, weights and limits, and no new flow.

The other study may name any condition of the run, and any quantity that is recorded. A condition
that it describes otherwise than it was flown is a fault, and so is a depth at a place that was not
recorded: neither can be told from the archive.
"""

from __future__ import annotations

import json
import math

import numpy as np

from optim.archive.reader import Run
from optim.archive.records import RunHeader
from optim.arrays import BoolArray, FloatArray
from optim.errors import Fault, StudyError
from optim.outcomes import Outcome
from optim.problem import judge
from optim.problem.conditions import Condition, resolve
from optim.problem.constraints import ConstraintSpec
from optim.problem.objectives import ObjectiveSpec
from optim.problem.pareto import hypervolume
from optim.problem.specs import constraint_specs, objective_specs
from optim.report.judgement import Aim, Judgement, Limit
from optim.study.schema import Study

SAME = 1e-9
"""Relative difference up to which two numbers of a condition are the same: rounding of units."""

FLOWN = ("reynolds", "mach", "cl", "alpha", "n_factor", "trip_upper", "trip_lower", "maximum")
"""What of a condition its flow depends on."""


def rejudged(run: Run, study: Study) -> Judgement:
    """Return what the evaluations of a run are worth by another study.

    Parameters
    ----------
    run : Run
        Open.
    study : Study
        The other study. Its section, search and evaluator are not looked at.

    Returns
    -------
    Judgement
        A design is feasible if it has an answer at every condition of the other study and keeps
        its limits. Angles are in degrees.

    Raises
    ------
    StudyError
        With everything that the archive does not hold, each with its path in the study.
    """
    conditions = resolve(study)
    objectives, constraints = objective_specs(study), constraint_specs(study)
    faults = _unlike(run.header, conditions)
    faults += _unrecorded(run.header, objectives, constraints)
    if faults:
        raise StudyError([study.located(fault) for fault in faults])
    names = tuple(condition.name for condition in conditions)
    tables = _tables(run, names)
    values = [[judge.constraint_value(c, t, study.chord) for c in constraints] for t in tables]
    aims = [[judge.objective_value(spec, table) for spec in objectives] for table in tables]
    margins = [
        [spec.margin(value) for spec, value in zip(constraints, row, strict=True)] for row in values
    ]
    shape = len(tables), len(constraints)
    judged = np.array(aims).reshape(len(tables), len(objectives))
    violation = _violation(np.array(margins).reshape(shape), judged, _answered(run, names))
    reference = _reference(study, objectives, judged)
    signs = [-1.0 if spec.sense == "maximise" else 1.0 for spec in objectives]
    return Judgement(
        study=study.study,
        aims=tuple(Aim(spec.name, spec.sense, spec.unit) for spec in objectives),
        limits=tuple(Limit(spec.name, spec.kind, spec.limit, spec.unit) for spec in constraints),
        conditions=names,
        objectives=judged,
        values=np.array(values).reshape(shape),
        margins=np.array(margins).reshape(shape),
        violation=violation,
        reference_point=reference,
        hypervolume=hypervolume((judged * signs)[violation == 0.0], reference),
    ).in_degrees()


def _unlike(header: RunHeader, conditions: tuple[Condition, ...]) -> list[Fault]:
    """Return a fault for each condition that the run has not flown like this."""
    flown = {row["name"]: row for row in json.loads(header.conditions_table)}
    faults = []
    for condition in conditions:
        stated, path = condition.stated(), ("conditions", condition.name)
        if condition.name not in flown:
            known = ", ".join(flown)
            said = f"the run has not flown this condition; accepted is {known}."
            faults.append(Fault(said, path))
            continue
        row = flown[condition.name]
        unlike = [key for key in FLOWN if not same(stated[key], row[key])]
        if unlike:
            words = ", ".join(f"{key} {_word(row[key])} not {_word(stated[key])}" for key in unlike)
            said = f"the run has flown this condition otherwise ({words}); accepted is the same."
            faults.append(Fault(said, path))
    return faults


def same(a: object, b: object) -> bool:
    """Return whether two values of a condition are the same but for rounding."""
    if isinstance(a, float) and isinstance(b, float):
        return math.isclose(a, b, rel_tol=SAME, abs_tol=SAME)
    return a == b


def _word(value: object) -> str:
    return "none" if value is None else f"{value:.6g}" if isinstance(value, float) else str(value)


def _unrecorded(
    header: RunHeader,
    objectives: tuple[ObjectiveSpec, ...],
    constraints: tuple[ConstraintSpec, ...],
) -> list[Fault]:
    """Return a fault for each quantity of the section that the run has not recorded."""
    asked = [(s.quantity, s.at, "objectives") for s in objectives if not s.shares]
    asked += [(s.quantity, s.at, "constraints") for s in constraints if s.condition is None]
    known = header.section_quantity_names
    return [
        Fault(
            f"{judge.recorded_name(quantity, at)} is not recorded in the run; recorded are "
            f"{', '.join(known)}.",
            (where,),
        )
        for quantity, at, where in asked
        if judge.recorded_name(quantity, at) not in known
    ]


def _tables(run: Run, conditions: tuple[str, ...]) -> list[judge.Table]:
    """Return the recorded numbers of every evaluation, by name."""
    columns = {name: run.header.condition_names.index(name) for name in conditions}
    names = run.header.section_quantity_names
    return [
        judge.Table(
            section=dict(zip(names, section.tolist(), strict=True)),
            conditions={name: flows[k] for name, k in columns.items()},
            converged={name: codes[k] == Outcome.CONVERGED for name, k in columns.items()},
        )
        for block in run.blocks("section_quantities", "quantities", "outcomes")
        for section, flows, codes in zip(
            block["section_quantities"], block["quantities"], block["outcomes"], strict=True
        )
    ]


def _answered(run: Run, conditions: tuple[str, ...]) -> BoolArray:
    columns = [run.header.condition_names.index(name) for name in conditions]
    return np.asarray(np.all(run.outcomes[:, columns] == Outcome.CONVERGED, axis=1))


def _violation(margins: FloatArray, objectives: FloatArray, answered: BoolArray) -> FloatArray:
    """Sum of what is missed; infinite for a design that cannot be judged."""
    known = answered & np.isfinite(objectives).all(axis=1) & np.isfinite(margins).all(axis=1)
    missed = np.maximum(-np.nan_to_num(margins), 0.0).sum(axis=1)
    return np.where(known, missed, np.inf)


def _reference(
    study: Study, objectives: tuple[ObjectiveSpec, ...], judged: FloatArray
) -> FloatArray:
    """Return the reference point: the study's, or what follows from the recorded baseline."""
    declared = study.search.reference_point
    if declared is not None:
        pairs = zip(objectives, declared, strict=True)
        return np.array([spec.minimised(value) for spec, value in pairs])
    if len(judged) and np.isfinite(judged[0]).all():
        return judge.reference_point(objectives, judged[0])
    message = (
        "the baseline of the run has no value to deduce the reference point from; accepted is "
        "search: {reference_point: ...} with a value for each objective."
    )
    raise StudyError([study.located(Fault(message, ("search",)))])
