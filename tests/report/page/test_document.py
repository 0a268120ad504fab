"""What the page states, held to the archive and to brute force."""

import json
import math

import numpy as np
import pytest
from scipy.spatial.distance import cdist
from shapely.geometry import LineString, Polygon

from optim.archive.reader import open_run
from optim.errors import InputError
from optim.geometry.cst import Cst
from optim.geometry.fitting import fit
from optim.geometry.naca import naca_section
from optim.problem.pareto import hypervolume
from optim.problem.problem import Problem
from optim.report.judgement import Aim, Judgement, Limit, as_recorded
from optim.report.page.choice import choice
from optim.report.page.document import plain_data
from optim.report.page.flown import LAYER, SWEPT, sweep_angles
from optim.report.page.health import limit_fields, verdict_of
from optim.report.page.outlines import INTERVALS, outlines
from optim.report.page.packing import packed, unpacked
from optim.report.page.shown import BEATEN, FRONT, MISSED, MOST, shown
from optim.report.page.spread import spread_out
from optim.report.page.words import plain, readable
from optim.study.load import parse_study


def made_up(objectives, margins, *, study="made-up"):
    """Judgement of two minimised objectives and one limit per column of margins."""
    objectives, margins = np.asarray(objectives, float), np.asarray(margins, float)
    violation = np.maximum(-margins, 0.0).sum(axis=1)
    reference = np.array([2.0, 2.0])
    return Judgement(
        study=study,
        aims=(Aim("a", "minimise", "1"), Aim("b", "minimise", "1")),
        limits=tuple(Limit(f"l{k}", "min", 0.0, "1") for k in range(margins.shape[1])),
        conditions=("cruise",),
        objectives=objectives,
        values=margins,
        margins=margins,
        violation=violation,
        reference_point=reference,
        hypervolume=hypervolume(objectives[violation == 0.0], reference),
    )


def column(document, key):
    (found,) = [one for one in document["columns"] if one["key"] == key]
    return unpacked(found["values"])


def test_document_is_json_without_a_number_that_json_lacks(document):
    text = json.dumps(plain_data(document), allow_nan=False)
    assert json.loads(text)["study"] == "paper-plane"


def test_counts_are_those_of_the_archive(document, run):
    assert document["evaluated"] == run.evaluations
    assert document["feasible"] == np.count_nonzero(run.violation == 0.0)
    assert sum(one["count"] for one in document["endings"]) == run.evaluations
    assert document["progress"]["hypervolume"] == run.read("hypervolume").tolist()
    assert document["progress"]["evaluations"] == [24, 48, 72]


def test_columns_hold_the_recorded_numbers(document, run):
    rows = document["designs"]["id"]
    lift = column(document, "objective:lift_to_drag@survey+loiter")
    np.testing.assert_allclose(lift, run.objectives[rows, 0], rtol=1e-6)
    thickness = column(document, "limit:thickness")
    np.testing.assert_allclose(thickness, 100.0 * run.constraint_values[rows, 0], rtol=1e-6)
    angle = run.header.condition_quantity_names.index("alpha")
    np.testing.assert_allclose(
        column(document, "loiter:alpha"),
        np.degrees(run.quantities[rows, 1, angle]),
        rtol=1e-5,
        atol=1e-6,
    )


def test_baseline_comes_first_and_each_design_once(document, run):
    rows = document["designs"]["id"]
    assert rows[0] == 0
    assert len(set(rows)) == len(rows) <= MOST
    front = {int(row) for row in as_recorded(run).front()}
    assert {r for r, k in zip(rows, document["designs"]["kind"], strict=True) if k == FRONT} == (
        front
    )


def test_outlines_are_the_contours_of_the_designs(document, run, closed_form):
    problem = Problem.from_study(parse_study(run.header.resolved_text), closed_form)
    contours = unpacked(document["outlines"])
    assert contours.shape == (len(document["designs"]["id"]), INTERVALS + 1, 2)
    for k in (0, 5):
        section = problem.section(run.designs[document["designs"]["id"][k]])
        exact = Polygon(section.points(np.linspace(-1.0, 1.0, 4001)))
        assert Polygon(contours[k]).area == pytest.approx(exact.area, rel=2e-3)


def test_outlines_stray_by_less_than_a_pixel():
    """Distance of the exact contour from the drawn one, by shapely; a screen has 2000 pixels."""
    parameterisation = Cst(upper=6, lower=6, gap=0.002)
    design = fit(parameterisation, naca_section("2412")).design
    drawn = LineString(outlines(parameterisation, design[None])[0])
    exact = LineString(parameterisation.section(design).points(np.linspace(-1.0, 1.0, 4001)))
    assert drawn.hausdorff_distance(exact) < 5e-4


def test_finalists_carry_the_recorded_flow_and_their_layer(document, run):
    rows, conditions = document["designs"]["id"], run.header.condition_names
    drag = run.header.condition_quantity_names.index("cd")
    assert len(document["flown"]) > 2
    for position, flown in document["flown"].items():
        for c, name in enumerate(conditions):
            point = flown[name]["point"]
            recorded = run.quantities[rows[int(position)], c, drag]
            assert point["cd"] == (None if math.isnan(recorded) else recorded)
            sides = [unpacked(flown[name][side]) for side in ("upper", "lower")]
            assert all(side.shape[0] == len(LAYER) for side in sides)
            assert sum(side.shape[1] for side in sides) == 161


def test_sweeps_hold_gaps_where_there_is_no_answer(document):
    swept = unpacked(document["flown"]["0"]["survey"]["clean"])
    assert swept.shape == (len(SWEPT), len(sweep_angles()))
    np.testing.assert_allclose(swept[0], sweep_angles(), rtol=1e-6)
    lift = swept[1]
    assert np.isfinite(lift).any()
    assert np.isnan(lift[-1])
    assert np.nanmax(lift) <= 1.4 + 1e-6


def test_finalists_asked_for_are_flown(documented, run_file, document):
    beaten = [
        row
        for row, kind in zip(document["designs"]["id"], document["designs"]["kind"], strict=True)
        if kind == BEATEN and row
    ][:2]
    found = documented(run_file, finalists=tuple(beaten))
    places = {str(found["designs"]["id"].index(row)) for row in beaten}
    assert set(found["flown"]) == places | {"0"}
    assert found["designs"]["rule"] == "asked"


def test_finalist_that_is_not_on_the_page_is_refused(documented, run_file):
    with pytest.raises(InputError, match="does not hold #9999"):
        documented(run_file, finalists=(9999,))


def test_nothing_feasible_says_why_and_shows_the_least_violated(tight_document):
    assert tight_document["front_size"] == 0
    assert tight_document["reason"] == "No design keeps: cl max, slow."
    assert tight_document["progress"]["verdict"] == "nothing feasible"
    kinds = tight_document["designs"]["kind"]
    assert set(kinds) == {MISSED}
    np.testing.assert_allclose(
        column(tight_document, "violation"), tight_document["designs"]["violation"], rtol=1e-6
    )
    violation = tight_document["designs"]["violation"][1:]
    assert violation == sorted(violation)
    assert tight_document["designs"]["rule"] == "nothing"
    assert len(tight_document["flown"]) == 4


def test_empty_run_is_an_answer(documented, recorder, tmp_path):
    document = documented(recorder(tmp_path / "nothing.h5", generations=0))
    assert document["designs"]["id"] == []
    assert document["flown"] == {}
    assert document["reason"] == "Nothing has been evaluated yet."


class TestShown:
    """Which designs a page holds."""

    rng = np.random.default_rng(3)
    objectives = rng.uniform(size=(3000, 2))
    judgement = made_up(objectives, np.ones((3000, 1)))

    def test_room_is_filled_with_the_least_beaten(self):
        found = shown(self.judgement, np.ones(3000, dtype=bool))
        assert len(found.rows) == MOST
        front = self.judgement.front()
        low, high = self.objectives[front].min(axis=0), self.objectives[front].max(axis=0)
        scaled = (self.objectives - low) / (high - low)
        # The least common step that frees a design of each member, by hand.
        behind = [max(min(d[0] - f[0], d[1] - f[1]) for f in scaled[front]) for d in scaled[1:]]
        order = np.argsort(behind, kind="stable")[: MOST - 1] + 1
        assert set(found.rows[1:].tolist()) == set(order.tolist())

    def test_large_front_is_thinned_and_keeps_its_ends(self):
        t = np.linspace(0.0, 1.0, 900)
        circle = made_up(1.0 - np.column_stack([np.sin(t), np.cos(t)]), np.ones((900, 1)))
        found = shown(circle, np.ones(900, dtype=bool))
        assert found.front_size == 900
        assert found.rows.tolist().count(0) == 1
        assert {0, 899} <= set(found.rows.tolist())
        assert len(found.of_kind(FRONT)) in (300, 301)
        gaps = np.sort(np.diff(np.sort(found.rows)))
        assert gaps.max() < 10


class TestChoice:
    """Knee and extremes."""

    def chosen(self, objectives):
        judgement = made_up(objectives, np.ones((len(objectives), 1)))
        designs = shown(judgement, np.ones(len(objectives), dtype=bool))
        found = choice(judgement, designs)
        knee = None if found.knee is None else int(designs.rows[found.knee])
        return [int(designs.rows[k]) for k in found.extremes], knee, found, designs

    def test_knee_is_farthest_below_the_line_through_the_extremes(self):
        front = np.array([[1.0, 1.0], [0.0, 1.0], [0.1, 0.5], [0.35, 0.3], [0.7, 0.2], [1.0, 0.0]])
        extremes, knee, *_ = self.chosen(front)
        assert extremes == [1, 5]
        # Distance below the line x + y = 1, by hand: 0.4, 0.35 and 0.1 over sqrt 2.
        assert knee == 2

    def test_front_of_two_has_no_knee(self):
        extremes, knee, *_ = self.chosen([[1.0, 1.0], [0.0, 0.5], [0.5, 0.0]])
        assert extremes == [1, 2]
        assert knee is None

    def test_front_of_one_is_both_extremes(self):
        extremes, knee, found, _ = self.chosen([[1.0, 1.0], [0.0, 0.0]])
        assert extremes == [1, 1]
        assert knee is None
        assert len(found.finalists) == 1

    def test_picks_lie_far_from_each_other(self):
        places = np.random.default_rng(8).uniform(size=(40, 2))
        picked = spread_out(places, 6, (3, 17))
        assert picked[:2].tolist() == [3, 17]
        for k in range(2, 6):
            nearest = cdist(places, places[picked[:k]]).min(axis=1)
            assert nearest[picked[k]] == nearest.max()


class TestHealth:
    """The verdict on a run, and what its limits cost."""

    def test_verdict(self):
        rising = [0.1 * k for k in range(1, 21)]
        flat = [*rising[:10], *[1.0 + 1e-3 * k for k in range(20)]]
        assert verdict_of(rising)[0] == "still rising"
        assert verdict_of(rising)[2] == pytest.approx(0.25)
        assert verdict_of(flat)[0] == "settled"
        assert verdict_of(rising[:5])[0] == "too short to tell"
        assert verdict_of([0.0] * 20)[0] == "nothing feasible"

    def test_cost_of_a_limit_is_what_its_loss_would_gain(self):
        # A unit square is dominated; without the second limit, 1.5 x 1.5.
        judgement = made_up([[1.0, 1.0], [0.5, 0.5], [0.1, 0.1]], [[1, 1], [1, -1], [-1, -1]])
        first, second = sorted(limit_fields(judgement), key=lambda one: one["name"])
        assert second["cost"] == pytest.approx(1.25)
        assert second["alone"] == 1
        assert first["cost"] == pytest.approx(0.0)
        assert first["alone"] == 0
        assert first["kept"] == pytest.approx(2.0 / 3.0)


def test_packed_numbers_come_back():
    values = np.random.default_rng(2).normal(size=(3, 4, 2))
    values[1, 1, 1] = math.nan
    np.testing.assert_allclose(unpacked(packed(values)), values, rtol=1e-7)


def test_names_are_read():
    assert readable("cl_max@slow:min") == "cl max, slow:min"
    assert readable("depth@30%:max") == "depth at 30 %:max"
    assert "$$" not in plain("a$$b$$$c")
    assert plain(r"\(x") == r"\ (x"


def test_sections_alone_are_shown(run):
    judgement = as_recorded(run)
    sound = np.ones(run.evaluations, dtype=bool)
    sound[judgement.violation > 0.0] = False
    assert not len(shown(judgement, sound).of_kind(MISSED))


def test_running_run_has_a_page(documented, recorder, tmp_path):
    path = recorder(tmp_path / "killed.h5", finished=False)
    document = documented(path)
    with open_run(path) as run:
        assert document["state"] == run.state == "interrupted"
