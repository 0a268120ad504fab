"""Designs that are asked for again are not evaluated again."""

import numpy as np
import pytest

from optim.runner.cache import EvaluationCache


@pytest.fixture
def evaluated(analytic):
    """Return an evaluator that notes what it evaluates; designs above 0.3 are lost."""
    problem = analytic.build(analytic.STUDY)
    asked = []

    def evaluate(designs):
        asked.append(len(designs))
        return [None if design[0] > 0.3 else problem.evaluate(design) for design in designs]

    return problem, evaluate, asked


def near(problem, *shifts):
    return np.array([problem.baseline_design + shift for shift in shifts])


def values(evaluation):
    """Everything but the time."""
    return evaluation.design.tobytes() + evaluation.quantities.tobytes(), evaluation.points


def test_every_design_is_evaluated_once(evaluated):
    problem, evaluate, asked = evaluated
    cache = EvaluationCache(evaluate)
    designs = near(problem, 0.0, 0.01, 0.0, 0.02)
    first = cache.evaluate(designs)
    again = cache.evaluate(designs[::-1])
    assert asked == [3]
    for design, one, other in zip(designs, first, again[::-1], strict=True):
        assert values(one) == values(other) == values(problem.evaluate(design))
    assert [one.seconds > 0.0 for one in first] == [True, True, False, True]
    assert [one.seconds for one in again] == [0.0] * 4


def test_designs_that_differ_in_the_last_bit_are_different(evaluated):
    problem, evaluate, asked = evaluated
    design = problem.baseline_design
    EvaluationCache(evaluate).evaluate(np.array([design, np.nextafter(design, 1.0)]))
    assert asked == [2]


def test_lost_designs_are_tried_again(evaluated):
    problem, evaluate, asked = evaluated
    cache = EvaluationCache(evaluate)
    designs = near(problem, 0.0, 0.14, 0.14)
    assert [one is None for one in cache.evaluate(designs)] == [False, True, True]
    assert [one is None for one in cache.evaluate(designs)] == [False, True, True]
    assert asked == [2, 1]


def test_memory_is_bounded(evaluated):
    problem, evaluate, asked = evaluated
    cache = EvaluationCache(evaluate, kept=3)
    for shift in range(6):
        cache.evaluate(near(problem, 0.001 * shift))
    cache.evaluate(near(problem, 0.005, 0.004, 0.003))
    assert len(asked) == 6
    cache.evaluate(near(problem, 0.0))
    assert len(asked) == 7
