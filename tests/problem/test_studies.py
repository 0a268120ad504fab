"""The studies that ship with the tool: sound, without warnings, and as their comments say."""

from __future__ import annotations

from pathlib import Path

import pytest

from optim.problem.problem import Problem
from optim.problem.reachable import reachable
from optim.study.load import load_study

STUDIES = Path(__file__).parents[2] / "studies"
NAMES = ("first-look", "tollgate-6-wing", "wickerham-15-wing", "quillfin-2-wing")


@pytest.fixture
def shipped(thin_section):
    """Return the problem of a shipped study, flown by the stand-in."""

    def make(name):
        return Problem.from_study(load_study(STUDIES / f"{name}.yaml"), thin_section)

    return make


def test_every_study_in_the_folder_is_tested():
    assert {path.stem for path in STUDIES.glob("*.yaml")} == set(NAMES)


@pytest.mark.parametrize("name", NAMES)
def test_a_study_has_its_file_name_and_no_warnings(name):
    study = load_study(STUDIES / f"{name}.yaml")
    assert study.study == name
    assert study.warnings == ()


@pytest.mark.parametrize("name", NAMES)
def test_bounds_hold_sections_that_keep_each_limit_on_the_shape(shipped, name):
    found = reachable(shipped(name), designs=200)
    assert found.warnings == ()
    assert found.share > 0.75


@pytest.mark.parametrize(
    ("name", "condition", "cl", "reynolds"),
    [
        ("tollgate-6-wing", "survey", 0.59, 2.36e5),
        ("tollgate-6-wing", "loiter", 0.90, 1.90e5),
        ("tollgate-6-wing", "dash", 0.30, 3.28e5),
        ("wickerham-15-wing", "thermal", 1.05, 1.27e6),
        ("wickerham-15-wing", "cruise", 0.36, 1.90e6),
        ("quillfin-2-wing", "cruise", 0.48, 2.59e5),
        ("quillfin-2-wing", "dash", 0.24, 3.68e5),
    ],
)
def test_flight_states_are_those_worked_by_hand(shipped, name, condition, cl, reynolds):
    problem = shipped(name)
    found = problem.conditions[problem.condition_names.index(condition)]
    assert found.cl == pytest.approx(cl, abs=6e-3)
    assert found.reynolds == pytest.approx(reynolds, rel=5e-3)
