"""Problem: a design in, the truth and what a search is told out."""

from __future__ import annotations

import math
import subprocess
import sys

import numpy as np
import pytest

from optim.errors import StudyError
from optim.outcomes import Outcome
from optim.problem.problem import GIVE_UP_AT, Problem
from optim.study.load import parse_study


def random_designs(problem, count, seed=1):
    rng = np.random.default_rng(seed)
    return rng.uniform(problem.lower, problem.upper, (count, len(problem.lower)))


def column(problem, name):
    return problem.condition_quantities.index(name)


def test_names_are_unique_and_tell_where(make_problem):
    problem = make_problem()
    assert [spec.name for spec in problem.objectives] == [
        "lift_to_drag@survey+loiter",
        "nose_down_moment@survey",
    ]
    assert [spec.name for spec in problem.constraints] == [
        "thickness",
        "depth@30%",
        "cl_max@slow",
    ]
    assert problem.condition_names == ("slow", "survey", "loiter")
    assert problem.section_quantities[-1] == "depth@30%"
    assert len(problem.section_quantity_units) == len(problem.section_quantities)
    assert len(problem.condition_quantity_units) == len(problem.condition_quantities)


def test_a_limit_with_two_ends_is_two_constraints(make_problem, study_text):
    text = study_text.replace("thickness, min: 10 %", "thickness, min: 10 %, max: 14 %")
    problem = make_problem(text)
    assert [(s.name, s.kind, s.limit) for s in problem.constraints[:2]] == [
        ("thickness:min", "min", 0.10),
        ("thickness:max", "max", 0.14),
    ]


def test_the_baseline_is_the_fit_of_the_section_named(make_problem):
    """NACA 2412: 12 % thick with 2 % camber, its edge opened to 0.8 mm on 212 mm."""
    problem = make_problem()
    found = problem.evaluate(problem.baseline_design)
    values = dict(zip(problem.section_quantities, found.section_quantities, strict=True))
    assert values["thickness"] == pytest.approx(0.12, abs=2e-3)
    assert values["camber"] == pytest.approx(0.02, abs=1e-3)
    assert values["trailing_edge_gap"] == pytest.approx(0.8 / 212.0, rel=1e-9)


def test_depth_is_judged_in_the_unit_of_its_limit(make_problem):
    """The depth at 30 % in metres is its share of the chord times 0.212 m."""
    problem = make_problem()
    found = problem.evaluate(problem.baseline_design)
    values = dict(zip(problem.section_quantities, found.section_quantities, strict=True))
    assert problem.constraints[1].unit == "m"
    assert found.constraint_values[1] == pytest.approx(0.212 * values["depth@30%"], rel=1e-12)
    assert found.margins[1] == pytest.approx(found.constraint_values[1] / 0.017 - 1.0)


def test_objectives_follow_from_the_recorded_quantities(make_problem):
    problem = make_problem()
    found = problem.evaluate(problem.baseline_design)
    _, survey, loiter = found.quantities
    ratio = column(problem, "lift_to_drag")
    drag_per_lift = 0.7 / survey[ratio] + 0.3 / loiter[ratio]
    assert found.objectives[0] == pytest.approx(1.0 / drag_per_lift, rel=1e-14)
    assert found.objectives[1] == survey[column(problem, "nose_down_moment")]
    assert found.search_objectives.tolist() == [-found.objectives[0], found.objectives[1]]
    assert found.points == 2 + 9  # what the stand-in says of two given lifts and a peak
    assert found.design_outcome is Outcome.CONVERGED
    assert found.quantities[0, column(problem, "cl_max")] == found.constraint_values[2]
    assert np.isnan(found.quantities[1:, column(problem, "cl_max")]).all()


def test_an_evaluation_is_a_function_of_the_design_alone(make_problem):
    """Whatever was evaluated before, and in another instance of the problem."""
    first, second = make_problem(), make_problem()
    designs = random_designs(first, 12)
    forward = [first.evaluate(design) for design in designs]
    backward = [second.evaluate(design) for design in designs[::-1]][::-1]
    for one, other in zip(forward, backward, strict=True):
        for field in ("objectives", "quantities", "margins", "search_constraints", "outcomes"):
            assert np.array_equal(getattr(one, field), getattr(other, field), equal_nan=True)


def test_a_problem_survives_its_resolved_study(make_problem, study_text):
    """What a worker rebuilds from the archived text is the same problem."""
    problem = make_problem()
    text = parse_study(study_text).resolved_text()
    again = make_problem(text)
    assert np.array_equal(problem.lower, again.lower)
    assert np.array_equal(problem.baseline_design, again.baseline_design)
    assert problem.conditions == again.conditions
    assert problem.constraints == again.constraints


def test_conditions_are_flown_in_a_fixed_order(make_problem, thin_section):
    """Given lifts in the study's order, then the peaks; nothing from another design."""
    made = []

    def remember(nodes):
        made.append(thin_section(nodes))
        return made[-1]

    problem = make_problem(solver=remember)
    problem.evaluate(problem.baseline_design)
    slow, survey, loiter = (c.point for c in problem.conditions)
    expected = [("flows", (survey, loiter)), ("maximum_lift", slow)]
    assert all(solver.asked == expected for solver in made)


def test_analysing_gives_the_recorded_numbers(make_problem):
    problem = make_problem()
    for design in random_designs(problem, 6):
        found = problem.evaluate(design)
        for k, name in enumerate(problem.condition_names):
            flow = problem.analyse(design, name)
            assert flow.outcome == found.outcomes[k]
            recorded = found.quantities[k, column(problem, "cd")]
            assert flow.cd == recorded or (math.isnan(flow.cd) and math.isnan(recorded))


def test_an_unknown_condition_is_refused(make_problem):
    problem = make_problem()
    with pytest.raises(ValueError, match="no condition is called fast"):
        problem.analyse(problem.baseline_design, "fast")


def test_what_a_search_is_told_is_finite_and_the_record_is_true(make_problem, study_text):
    """Wide bounds: sections, crossings and stalls; feasible designs rank above all others."""
    problem = make_problem(study_text.replace("freedom: 0.12", "freedom: 0.4"))
    found = [problem.evaluate(design) for design in random_designs(problem, 150)]
    outcomes = {evaluation.design_outcome for evaluation in found}
    assert {Outcome.CONVERGED, Outcome.NOT_A_SECTION, Outcome.NOT_EVALUATED} <= outcomes
    for evaluation in found:
        assert np.isfinite(evaluation.search_objectives).all()
        assert np.isfinite(evaluation.search_constraints).all()
        assert evaluation.search_constraints.size == problem.n_search_constraints
        complete = evaluation.design_outcome is Outcome.CONVERGED
        assert complete == np.isfinite(evaluation.objectives).all()
        assert (evaluation.violation == 0.0) == (complete and bool(np.all(evaluation.margins >= 0)))
        assert evaluation.violation == np.maximum(evaluation.search_constraints, 0.0).sum()


def test_failures_are_graded_and_never_constant(make_problem, study_text):
    problem = make_problem(study_text.replace("freedom: 0.12", "freedom: 0.4"))
    found = [problem.evaluate(design) for design in random_designs(problem, 150)]
    for outcome in (Outcome.NOT_A_SECTION, Outcome.NOT_EVALUATED):
        graded = [e.violation for e in found if e.design_outcome is outcome]
        assert len(graded) > 3
        assert len(set(graded)) == len(graded)


def stalling(thin_section, peak):
    """Return a maker of sections that cannot carry more than `peak`."""

    class Stalling(thin_section):
        @property
        def peak(self):
            return peak

    return Stalling


def test_a_stall_nearer_to_the_wanted_lift_is_less_bad(make_problem, thin_section, study_text):
    """Loiter needs 0.9: peaks of 0.7 and 0.85 both fail, the second one by less."""
    violations = []
    for peak in (0.7, 0.85):
        problem = make_problem(solver=stalling(thin_section, peak))
        with pytest.raises(StudyError, match="reference point"):
            _ = problem.reference_point
        text = study_text + "search: {reference_point: [20, 0.1]}\n"
        problem = make_problem(text, solver=stalling(thin_section, peak))
        found = problem.evaluate(problem.baseline_design)
        assert found.design_outcome is Outcome.OUT_OF_RANGE
        assert np.isnan(found.objectives[0])
        assert found.objectives[1] > 0.0  # survey was flown
        assert found.search_objectives[0] > problem.reference_point[0]
        violations.append(found.search_constraints[-1])
    assert violations[0] > violations[1] > 1.0


def test_a_hopeless_shape_is_not_flown(make_problem, study_text):
    """Limits on the shape that the baseline misses by a third: given up, told apart."""
    text = study_text.replace("thickness, min: 10 %", "thickness, min: 18 %")
    text += "search: {reference_point: [20, 0.1]}\n"
    found = make_problem(text).evaluate(make_problem(text).baseline_design)
    assert found.design_outcome is Outcome.NOT_EVALUATED
    assert found.points == 0
    assert (found.outcomes == Outcome.NOT_EVALUATED).all()
    assert found.margins[0] == pytest.approx(0.12 / 0.18 - 1.0, abs=0.02)
    assert -found.margins[0] > GIVE_UP_AT
    assert np.isnan(found.margins[2])


def test_the_reference_point_is_half_as_bad_again_as_the_baseline(make_problem):
    problem = make_problem()
    found = problem.evaluate(problem.baseline_design)
    expected = found.search_objectives + 0.5 * np.abs(found.search_objectives)
    assert problem.reference_point == pytest.approx(expected)


def test_a_declared_reference_point_is_taken_as_it_is(make_problem, study_text):
    problem = make_problem(study_text + "search: {reference_point: [25, 0.08]}\n")
    assert problem.reference_point.tolist() == [-25.0, 0.08]


def test_an_edge_that_never_turns_turbulent_counts_as_laminar_to_the_end(make_problem, study_text):
    """The stand-in's lower side has no transition: recorded as absent, judged as 100 %."""
    text = study_text + "  - {quantity: transition_lower, condition: survey, min: 60 %}\n"
    problem = make_problem(text)
    found = problem.evaluate(problem.baseline_design)
    assert np.isnan(found.quantities[1, column(problem, "transition_lower")])
    assert found.constraint_values[3] == 1.0


def test_faults_of_conditions_and_bounds_are_told_together(make_problem, study_text):
    text = study_text.replace("survey: {speed: 18 m/s}", "survey: {speed: 18 m/s, reynolds: 3e5}")
    text = text.replace("  freedom: 0.12\n", "  freedom: 0.12\n  bounds: {upper_1: [0.5, 0.6]}\n")
    with pytest.raises(StudyError) as caught:
        make_problem(text)
    assert [fault.path for fault in caught.value.faults] == [
        ("conditions", "survey", "reynolds"),
        ("section", "bounds", "upper_1"),
    ]


def test_bounds_given_one_by_one_take_the_place_of_freedom(make_problem, study_text):
    text = study_text.replace(
        "  freedom: 0.12\n", "  freedom: 0.12\n  bounds: {upper_1: [0.1, 0.3]}\n"
    )
    problem = make_problem(text)
    assert (problem.lower[0], problem.upper[0]) == (0.1, 0.3)
    assert problem.upper[1] - problem.lower[1] == pytest.approx(0.24)


@pytest.mark.parametrize("shape", ["cst", "bezier"])
def test_both_shapes_make_a_problem(make_problem, study_text, shape):
    problem = make_problem(study_text.replace("shape: cst", f"shape: {shape}"))
    found = problem.evaluate(problem.baseline_design)
    assert found.design_outcome is Outcome.CONVERGED
    assert problem.space.fit.largest_deviation < 2e-3


def test_results_cannot_be_changed_by_their_reader(make_problem):
    problem = make_problem()
    found = problem.evaluate(problem.baseline_design)
    with pytest.raises(ValueError, match="read-only"):
        found.objectives[0] = 1.0


def test_a_design_of_another_length_is_refused(make_problem):
    with pytest.raises(ValueError, match="design must have the shape"):
        make_problem().evaluate(np.zeros(3))


def test_a_problem_is_made_without_flying(study_text):
    """Rebuilding a problem in a worker costs a fit, no flow."""

    def never(_nodes):
        raise AssertionError("flown")

    problem = Problem.from_study(parse_study(study_text), never)
    assert problem.baseline_design.shape == (10,)


def test_reading_a_study_into_a_problem_waits_for_no_heavy_library():
    """Neither the compiled kernels nor the search are loaded by making a problem."""
    code = (
        "import sys; from optim.problem.problem import Problem; import optim.problem.reachable; "
        "print(sorted({'numba', 'pymoo', 'h5py', 'matplotlib'} & set(sys.modules)))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


def test_a_study_without_limits_still_tells_a_search_what_failed(make_problem, study_text):
    """No constraint: one column is left, how incomplete a design is."""
    problem = make_problem(study_text[: study_text.index("constraints:")])
    found = problem.evaluate(problem.baseline_design)
    assert problem.n_search_constraints == 1
    assert found.search_constraints.tolist() == [0.0]
    assert found.margins.shape == (0,)
    assert found.feasible
