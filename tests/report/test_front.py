"""The front of a run, held to brute force over the recorded numbers."""

import json

import numpy as np
import pytest

from optim.archive.reader import open_run
from optim.cli.front_text import front_rows, front_text
from optim.errors import StudyError
from optim.outcomes import Outcome
from optim.problem.pareto import hypervolume
from optim.problem.problem import Problem
from optim.report.archived import RecordedConditions, peak_sought, picked
from optim.report.cautions import BANDS
from optim.report.fields import point_fields
from optim.report.front import ACTIVE_MARGIN, front_document
from optim.report.judgement import as_recorded
from optim.report.rejudged import rejudged
from optim.study.load import parse_study

SENSES = np.array([-1.0, 1.0])
"""Lift over drag is maximised, the moment minimised."""


def by_brute_force(objectives, violation):
    """Feasible rows that no other feasible row dominates, by comparing every pair."""
    minimised = objectives * SENSES
    feasible = [k for k in range(len(violation)) if violation[k] == 0.0]
    return {
        a
        for a in feasible
        if not any(
            np.all(minimised[b] <= minimised[a]) and np.any(minimised[b] < minimised[a])
            for b in feasible
        )
    }


def test_front_is_what_comparing_every_pair_gives(run):
    expected = by_brute_force(run.objectives, run.violation)
    document = front_document(run, as_recorded(run))
    assert expected
    assert {one["id"] for one in document["designs"]} == expected


def test_front_begins_with_the_best_in_the_first_objective(run):
    document = front_document(run, as_recorded(run))
    first = [one["objectives"]["lift_to_drag@survey+loiter"] for one in document["designs"]]
    assert first == sorted(first, reverse=True)


def test_numbers_of_a_design_are_the_recorded_ones(run):
    document = front_document(run, as_recorded(run))
    for one in [document["baseline"], *document["designs"]]:
        row = one["id"]
        assert list(one["variables"].values()) == run.designs[row].tolist()
        assert list(one["objectives"].values()) == run.objectives[row].tolist()
        for k, limit in enumerate(one["constraints"].values()):
            assert limit["value"] == run.constraint_values[row, k]
            assert limit["margin"] == run.margins[row, k]
            assert limit["active"] == (0.0 <= run.margins[row, k] < ACTIVE_MARGIN)
        assert one["generation"] == run.read("generation_of")[row]


def test_counts_add_up(run):
    document = front_document(run, as_recorded(run))
    assert document["evaluated"] == run.evaluations
    assert sum(document["outcomes"].values()) == run.evaluations
    converged = np.count_nonzero(run.design_outcomes == Outcome.CONVERGED)
    assert document["outcomes"]["converged"] == converged
    assert sum(document["failed"].values()) == run.evaluations - converged > 0
    assert document["feasible"] == np.count_nonzero(run.violation == 0.0)


def test_recorded_hypervolume_is_that_of_the_front(run):
    document = front_document(run, as_recorded(run))
    front = np.array([list(one["objectives"].values()) for one in document["designs"]]) * SENSES
    reference = np.array(list(document["reference_point"].values())) * SENSES
    np.testing.assert_allclose(reference, run.header.reference_point, rtol=1e-15)
    assert document["hypervolume"] == pytest.approx(hypervolume(front, reference), rel=1e-12)


def test_baseline_is_the_fit_of_the_study(run, closed_form):
    problem = Problem.from_study(parse_study(run.header.resolved_text), closed_form)
    baseline = front_document(run, as_recorded(run))["baseline"]
    assert list(baseline["variables"].values()) == problem.baseline_design.tolist()


def test_recorded_flow_is_the_computed_flow(run, closed_form):
    """`analyse RUN.h5#ID --condition` and the archive give the same fields, failures too."""
    study = parse_study(run.header.resolved_text)
    problem = Problem.from_study(study, closed_form)
    recorded = RecordedConditions.of_header(run.header, study.evaluator.panels)
    failed = np.flatnonzero(run.outcomes[:, 2] == Outcome.NO_PEAK)
    for row in [0, 5, int(failed[0])]:
        for k, name in enumerate(problem.condition_names):
            flow = recorded.flow(name, run.quantities[row, k], int(run.outcomes[row, k]))
            fresh = problem.analyse(run.designs[row], name)
            fresh = peak_sought(fresh) if problem.conditions[k].maximum else fresh
            np.testing.assert_equal(point_fields(flow), point_fields(fresh))


def test_empty_run_is_an_answer(tmp_path, recorder):
    path = recorder(tmp_path / "nothing.h5", generations=0)
    with open_run(path) as run:
        document = front_document(run, as_recorded(run))
    assert document["designs"] == []
    assert document["baseline"] is None
    assert document["hypervolume"] == 0.0


def test_front_without_feasible_design_is_an_answer(tmp_path, recorder, study_text):
    text = study_text.replace("min: 1.40", "min: 4.0")
    with open_run(recorder(tmp_path / "tight.h5", text, generations=1)) as run:
        judgement = as_recorded(run)
        document = front_document(run, judgement)
    assert document["designs"] == []
    assert document["baseline"]["id"] == 0
    assert judgement.kept()["cl_max@slow"] == 0.0
    assert judgement.kept()["thickness"] > 0.5


def test_equal_designs_count_once(run):
    """A design that a search asked for twice stands on the front once, under its first number."""
    judgement = as_recorded(run)
    rows = judgement.front()
    doubled = type(judgement)(
        **{
            **vars(judgement),
            "objectives": np.vstack([judgement.objectives] * 2),
            "values": np.vstack([judgement.values] * 2),
            "margins": np.vstack([judgement.margins] * 2),
            "violation": np.concatenate([judgement.violation] * 2),
        }
    )
    np.testing.assert_array_equal(doubled.front(), rows)


def test_rows_are_picked_across_blocks(run, monkeypatch):
    blocks = type(run).blocks
    monkeypatch.setattr(type(run), "blocks", lambda self, *f: blocks(self, *f, rows=7))
    rows = [13, 0, 70, 13]
    found = picked(run, rows, "designs", "outcomes")
    np.testing.assert_array_equal(found["designs"], run.designs[rows])
    np.testing.assert_array_equal(found["outcomes"], run.outcomes[rows])


class TestRejudged:
    """A run judged by another study gives what a run of that study would have recorded."""

    def test_own_study_gives_the_recorded_judgement(self, run):
        own, again = as_recorded(run), rejudged(run, parse_study(run.header.resolved_text))
        np.testing.assert_array_equal(again.objectives, own.objectives)
        np.testing.assert_array_equal(again.values, own.values)
        np.testing.assert_array_equal(again.margins, own.margins)
        np.testing.assert_array_equal(again.violation == 0.0, own.violation == 0.0)
        np.testing.assert_array_equal(again.front(), own.front())
        assert again.hypervolume == pytest.approx(own.hypervolume, rel=1e-12)

    def test_other_limits_are_those_of_a_run_with_them(self, run, tmp_path, recorder, study_text):
        text = study_text.replace("min: 1.40", "min: 1.45").replace("17 mm", "24 mm")
        with open_run(recorder(tmp_path / "other.h5", text)) as other:
            expected = as_recorded(other)
            looked_at = other.design_outcomes != Outcome.NOT_EVALUATED
            found = rejudged(run, parse_study(text))
            np.testing.assert_array_equal(found.values[looked_at], expected.values[looked_at])
            np.testing.assert_array_equal(found.margins[looked_at], expected.margins[looked_at])
            np.testing.assert_array_equal(found.front(), expected.front())

    def test_fewer_conditions_forgive_failures_elsewhere(self, run, study_text):
        """A design without a maximum lift is judged by the conditions that are asked for."""
        text = study_text.replace("  slow: {speed: 12.5 m/s, lift: maximum}\n", "")
        text = text.replace("  - {quantity: cl_max, condition: slow, min: 1.40}\n", "")
        found = rejudged(run, parse_study(text.replace("min: 10 %", "min: 8 %")))
        failed = run.outcomes[:, 2] == Outcome.NO_PEAK
        assert np.any(found.violation[failed] == 0.0)

    def test_condition_flown_otherwise_is_a_fault_with_its_place(self, run, study_text):
        study = parse_study(study_text.replace("18 m/s", "19 m/s"), "other.yaml")
        with pytest.raises(StudyError) as error:
            rejudged(run, study)
        (fault,) = error.value.faults
        assert str(fault).startswith("other.yaml:12:")
        assert "otherwise" in fault.message

    def test_unknown_condition_and_depth_are_told_together(self, run, study_text):
        text = study_text.replace("slow", "slower").replace("at: 30 %", "at: 31 %")
        with pytest.raises(StudyError) as error:
            rejudged(run, parse_study(text, "other.yaml"))
        words = str(error.value)
        assert "has not flown this condition; accepted is survey, loiter, slow" in words
        assert "depth@31% is not recorded" in words

    def test_angles_are_stated_in_degrees(self, run, study_text):
        text = study_text.replace(
            "{quantity: thickness, min: 10 %}", "{quantity: trailing_edge_angle, max: 18 deg}"
        )
        document = front_document(run, rejudged(run, parse_study(text)))
        stated = document["constraints"][0]
        assert (stated["limit"], stated["unit"]) == (pytest.approx(18.0, rel=1e-12), "deg")
        column = run.header.section_quantity_names.index("trailing_edge_angle")
        value = document["baseline"]["constraints"]["trailing_edge_angle"]["value"]
        expected = np.degrees(run.section_quantities[0, column])
        assert value == pytest.approx(expected, rel=1e-12)


def test_document_is_plain_data(run):
    """Everything but not-a-number, which the edge turns into null, is JSON."""
    text = json.dumps(front_document(run, as_recorded(run)))
    assert "paper-plane" in text


def test_bands_stand_beside_objectives_and_limits(run):
    """Of one condition the band of its flow; of several the widest share; sections have none."""
    document = front_document(run, as_recorded(run))
    for one in [document["baseline"], *document["designs"]]:
        points = one["conditions"]
        assert set(one["band"]) == {
            "lift_to_drag@survey+loiter", "nose_down_moment@survey", "cl_max@slow",
        }  # fmt: skip
        assert one["band"]["cl_max@slow"] == points["slow"]["band"]["cl"]
        assert one["band"]["nose_down_moment@survey"] == points["survey"]["band"]["cm_quarter"]
        shares = [
            points[name]["band"]["lift_to_drag"] / points[name]["lift_to_drag"]
            for name in ("survey", "loiter")
        ]
        value = one["objectives"]["lift_to_drag@survey+loiter"]
        width = one["band"]["lift_to_drag@survey+loiter"]
        assert width == pytest.approx(value * max(shares))
        assert points["slow"]["band"]["cl"] < 0.1 * points["slow"]["cl"]


def test_text_shows_the_bands(run, run_file):
    document = front_document(run, as_recorded(run))
    text = front_text(document, {}, run_file)
    width = document["baseline"]["band"]["cl_max@slow"]
    assert f"±{width:.2g} " in text
    assert BANDS in text
    row = front_rows(document)[0]
    assert row["band:nose_down_moment@survey"] == row["survey:band_cm_quarter"]
