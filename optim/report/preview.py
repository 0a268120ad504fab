"""What a study comes to before it is run: conditions, bounds, shapes in reach, time."""

from __future__ import annotations

import math

from optim.problem.conditions import Condition
from optim.problem.problem import Problem
from optim.problem.reachable import PERCENTILES, Estimate, Reachable, estimate, reachable
from optim.report.fields import Document
from optim.study.schema import Study

POINTS_A_SECOND = 60.0
"""Coupled solutions that a process is reckoned to attempt in a second of its own, at 160 panels.
Measured on random designs of the shipped studies, half-way within their bounds: 100 at Re 2e6
attached, 50 in searches for a peak, whose failures take longest."""


def preview_document(study: Study, problem: Problem, workers: int) -> Document:
    """Return what ``check --json`` states; nothing is flown.

    Parameters
    ----------
    study : Study
        A valid study.
    problem : Problem
        Its problem.
    workers : int
        Processes that the run would have.
    """
    shapes = reachable(problem)
    cost = estimate(problem, study.search, POINTS_A_SECOND * workers)
    return {
        "study": study.study,
        "conditions": {
            condition.name: _condition_fields(condition) for condition in problem.conditions
        },
        "variables": [
            {"name": name, "low": low, "high": high, "unit": "1"}
            for name, low, high in zip(
                problem.variable_names,
                problem.lower.tolist(),
                problem.upper.tolist(),
                strict=True,
            )
        ],
        "reachable": _reachable_fields(shapes),
        "estimate": _estimate_fields(cost),
        "warnings": [str(fault) for fault in study.warnings] + list(shapes.warnings),
    }


def _condition_fields(condition: Condition) -> Document:
    stated: Document = {k: v for k, v in condition.stated().items() if k != "name"}
    alpha = stated.pop("alpha")
    return stated | {"alpha_deg": None if alpha is None else math.degrees(alpha)}


def _reachable_fields(shapes: Reachable) -> Document:
    keys = [f"p{percent:.0f}" for percent in PERCENTILES]
    return {
        "designs": shapes.designs,
        "share": shapes.share,
        **{
            name: dict(zip(keys, values, strict=True))
            for name, values in shapes.percentiles.items()
        },
        "kept": dict(shapes.kept),
    }


def _estimate_fields(cost: Estimate) -> Document:
    return {
        "evaluations": cost.evaluations,
        "points": cost.points,
        "seconds": cost.seconds,
    }
