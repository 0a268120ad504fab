"""The objectives and constraints that a study asks for, with unique names, units and scales."""

from __future__ import annotations

from optim.problem.constraints import ConstraintSpec, Kind, scale_of
from optim.problem.judge import unit_size
from optim.problem.objectives import ObjectiveSpec
from optim.study.schema import Constraint, Study
from optim.study.vocabulary import QUANTITIES


def objective_specs(study: Study) -> tuple[ObjectiveSpec, ...]:
    """Return the objectives of a study in its order, named ``lift_to_drag@survey+loiter``."""
    return tuple(
        ObjectiveSpec(
            name=wanted.name,
            sense=wanted.sense,
            unit=QUANTITIES[wanted.quantity].unit,
            quantity=wanted.quantity,
            shares=tuple(wanted.weights.items()),
            at=wanted.place,
        )
        for wanted in study.objectives
    )


def constraint_specs(study: Study) -> tuple[ConstraintSpec, ...]:
    """Return the limits of a study in its order, one for each `min` and each `max`.

    Names are such as ``cl_max@slow`` and ``depth@30%``; a constraint with both ends makes
    ``thickness:min`` and ``thickness:max``.
    """
    return tuple(
        _spec(study, constraint, kind, limit)
        for constraint in study.constraints
        for kind, limit in _limits(constraint)
    )


def _limits(constraint: Constraint) -> list[tuple[Kind, float]]:
    both: list[tuple[Kind, float | None]] = [("min", constraint.min), ("max", constraint.max)]
    return [(kind, limit) for kind, limit in both if limit is not None]


def _spec(study: Study, constraint: Constraint, kind: Kind, limit: float) -> ConstraintSpec:
    size = unit_size(constraint.unit, study.chord)
    two_sided = constraint.min is not None and constraint.max is not None
    return ConstraintSpec(
        name=f"{constraint.name}:{kind}" if two_sided else constraint.name,
        limit=limit,
        unit=constraint.unit,
        kind=kind,
        scale=scale_of(constraint.quantity, limit, constraint.scale, size),
        quantity=constraint.quantity,
        condition=constraint.condition,
        at=constraint.at,
    )
