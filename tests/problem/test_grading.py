"""Grading: of two failures, the one that came nearer is told to be less bad."""

from __future__ import annotations

import math

import numpy as np
import pytest

from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow
from optim.geometry.cst import Cst
from optim.outcomes import Outcome
from optim.problem.grading import (
    FAILED,
    NOT_A_SECTION,
    condition_shortfall,
    contour_violation,
    incompleteness,
    lift_reached,
)


def ended(outcome, cl=1.2, residual=1e-3):
    return SectionFlow(OperatingPoint(reynolds=2e5, cl=cl), outcome, 160, residual=residual)


def test_the_order_of_endings():
    """Converged, not converged, never looked at."""
    shortfalls = [
        condition_shortfall(ended(outcome), 0.9)
        for outcome in (Outcome.CONVERGED, Outcome.NOT_CONVERGED, Outcome.NOT_EVALUATED)
    ]
    assert shortfalls[0] == 0.0
    assert 0.25 <= shortfalls[1] < shortfalls[2] == 1.0


@pytest.mark.parametrize("outcome", [Outcome.OUT_OF_RANGE, Outcome.CLAMP_ACTIVE, Outcome.NO_PEAK])
def test_nearer_to_the_lift_and_to_a_solution_is_less_bad(outcome):
    far, near = (condition_shortfall(ended(outcome), reached) for reached in (0.6, 1.1))
    rough, fine = (condition_shortfall(ended(outcome, residual=r), 0.9) for r in (1.0, 1e-6))
    assert near < far
    assert fine < rough


@pytest.mark.parametrize("residual", [math.nan, math.inf, 0.0, 1e300, 1e-300])
@pytest.mark.parametrize("cl", [-0.5, 0.0, 1.2])
def test_every_ending_has_a_finite_grade(residual, cl):
    grade = condition_shortfall(ended(Outcome.NOT_CONVERGED, cl, residual), 0.0)
    assert 0.25 <= grade <= 1.0


def test_lift_reached_looks_at_answers_only():
    flows = (ended(Outcome.NOT_CONVERGED), ended(Outcome.OUT_OF_RANGE))
    assert lift_reached(flows) == 0.0


def test_a_missing_condition_weighs_more_than_its_shortfall():
    assert incompleteness([0.0, 0.0]) == 0.0
    assert incompleteness([0.0, 0.5]) == pytest.approx(FAILED + 0.25)
    assert incompleteness([1.0, 1.0]) == NOT_A_SECTION


def test_a_deeper_crossing_is_worse():
    """The lower side is pushed through the upper one, farther and farther."""
    shape = Cst(upper=4, lower=4)
    violations = [
        contour_violation(shape.section(np.array([0.17, 0.15, 0.15, 0.15, *[low] * 4])), 0.2)
        for low in (0.2, 0.3, 0.5)
    ]
    assert NOT_A_SECTION < violations[0] < violations[1] < violations[2] <= NOT_A_SECTION + 2.0


def test_designs_without_a_crossing_are_told_apart_by_distance():
    section = Cst(upper=4, lower=4).section(np.array([0.17] * 4 + [-0.15] * 4))
    near, far = (contour_violation(section, distance) for distance in (0.1, 0.4))
    assert NOT_A_SECTION < near < far
