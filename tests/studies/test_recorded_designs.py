"""Every shipped study has designs that keep all its limits: one of each, found by its own search.

The designs of feasible_designs.json were found by short searches of the studies themselves (first
population, a few generations). What is checked is that the study and the evaluator still agree
that each is feasible: a limit that nobody can meet would show here.
"""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest

from optim.outcomes import Outcome
from optim.problem.problem import Problem
from optim.study.load import load_study

STUDIES = Path(__file__).parents[2] / "studies"
DESIGNS = json.loads(Path(__file__).with_name("feasible_designs.json").read_text())


def test_every_study_has_a_feasible_design():
    assert set(DESIGNS) == {path.stem for path in STUDIES.glob("*.yaml")}


@pytest.mark.parametrize("name", sorted(DESIGNS))
def test_recorded_design_keeps_all_limits(name):
    problem = Problem.from_study(load_study(STUDIES / f"{name}.yaml"))
    design = np.array([DESIGNS[name][variable] for variable in problem.variable_names])
    assert (design >= problem.lower).all()
    assert (design <= problem.upper).all()
    found = problem.evaluate(design)
    assert found.design_outcome is Outcome.CONVERGED
    assert found.margins.min() >= 0.0
    assert found.feasible


def test_first_look_starts_from_a_feasible_baseline():
    problem = Problem.from_study(load_study(STUDIES / "first-look.yaml"))
    assert problem.evaluate(problem.baseline_design).feasible


def test_analysing_a_design_gives_what_its_evaluation_recorded():
    """The coupled flow again, with its surface, to the last bit of every recorded number."""
    problem = Problem.from_study(load_study(STUDIES / "first-look.yaml"))
    design = np.array([DESIGNS["first-look"][variable] for variable in problem.variable_names])
    found = problem.evaluate(design)
    recorded = problem.condition_quantities
    assert found.points >= len(problem.conditions)
    for k, name in enumerate(problem.condition_names):
        flow = problem.analyse(design, name)
        for quantity in ("alpha", "cl", "cd", "cd_friction", "cm_quarter", "cp_min", "residual"):
            assert getattr(flow, quantity) == found.quantities[k, recorded.index(quantity)]
        assert flow.iterations == found.quantities[k, recorded.index("iterations")]
        surface = flow.surface
        assert surface is not None
        assert {"upper", "lower", "wake"} == set(surface.side)
        assert surface.cp.min() == flow.cp_min
        again = problem.analyse(design, name).surface
        assert np.array_equal(surface.speed, again.speed)
        assert np.array_equal(surface.theta, again.theta)
