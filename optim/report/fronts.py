"""Fronts of several runs over the same objectives: what each gains, and all of them together.

The hypervolumes are measured from one reference point, in each objective the worse one of the runs,
so that they can be compared; with runs of one study it is their own.
"""

from __future__ import annotations

import json
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from optim.archive.reader import Run
from optim.arrays import FloatArray, IntArray
from optim.errors import Fault, InputError
from optim.problem.pareto import hypervolume
from optim.report.judgement import Judgement, as_recorded
from optim.report.rejudged import FLOWN, same
from optim.study.load import parse_study
from optim.study.schema import Study


@dataclass(frozen=True)
class RunFront:
    """The front of a run.

    Attributes
    ----------
    path : Path
        RUN.h5.
    judgement : Judgement
        Of its evaluations, by its own limits.
    rows : (n,) array
        The evaluations on the front.
    study : Study
        Resolved.
    conditions : dict
        Condition -> what was flown.
    """

    path: Path
    judgement: Judgement
    rows: IntArray
    study: Study
    conditions: dict[str, dict[str, Any]]

    @property
    def minimised(self) -> FloatArray:
        """Objectives of the front, minimised."""
        return self.judgement.minimised[self.rows]


def run_front(run: Run) -> RunFront:
    """Return the front of an open run."""
    judgement = as_recorded(run)
    stated = {one["name"]: one for one in json.loads(run.header.conditions_table)}
    study = parse_study(run.header.resolved_text)
    return RunFront(run.path, judgement, judgement.front(), study, stated)


@dataclass(frozen=True)
class Volumes:
    """Hypervolumes from one reference point.

    Attributes
    ----------
    reference : (n_objectives,) array
        In the true senses.
    each : list of float
        One a run.
    union : float
        Of all fronts together.
    """

    reference: FloatArray
    each: list[float]
    union: float


def volumes(fronts: Sequence[RunFront]) -> Volumes:
    """Return what each front gains, and their union.

    Raises
    ------
    InputError
        If the runs have other objectives.
    """
    first = fronts[0].judgement
    faults = [
        Fault(
            f"its objectives are {_aims(one.judgement)}; accepted are those of {fronts[0].path}: "
            f"{_aims(first)}.",
            file=str(one.path),
        )
        for one in fronts[1:]
        if one.judgement.aims != first.aims
    ]
    if faults:
        raise InputError(faults)
    reference = np.max([one.judgement.reference_point for one in fronts], axis=0)
    each = [hypervolume(one.minimised, reference) for one in fronts]
    union = hypervolume(np.concatenate([one.minimised for one in fronts]), reference)
    return Volumes(reference * first.signs, each, union)


def _aims(judgement: Judgement) -> str:
    return ", ".join(f"{aim.sense} {aim.name}" for aim in judgement.aims)


def differences(fronts: Sequence[RunFront]) -> list[str]:
    """Return in what runs differ that have objectives of one name, a sentence each."""
    notes, first = [], fronts[0]
    for other in fronts[1:]:
        shared = [name for name in first.conditions if name in other.conditions]
        unlike = [
            name
            for name in shared
            if not all(same(first.conditions[name][k], other.conditions[name][k]) for k in FLOWN)
        ]
        if unlike:
            notes.append(f"{other.path} flies {', '.join(unlike)} otherwise than {first.path}.")
        for what, of in (
            ("weights", _weights), ("limits", _limits), ("panels", lambda one: one.evaluator.panels)
        ):  # fmt: skip
            if of(first.study) != of(other.study):
                notes.append(f"{other.path} has other {what} than {first.path}.")
    return notes


def _weights(study: Study) -> list[dict[str, float]]:
    return [one.weights for one in study.objectives]


def _limits(study: Study) -> list[dict[str, Any]]:
    return sorted((one.model_dump() for one in study.constraints), key=str)
