"""Figures are drawn from whatever an archive or an analysis holds, and refuse what cannot be."""

import math
from dataclasses import replace

import numpy as np
import pytest

from optim.aerodynamics.operating_point import OperatingPoint
from optim.archive.reader import open_run
from optim.errors import InputError
from optim.geometry.cst import Cst
from optim.geometry.fitting import fit
from optim.geometry.naca import naca_section
from optim.geometry.spacing import panel_nodes
from optim.outcomes import Outcome
from optim.report.analysis import Analysed
from optim.report.figures import save
from optim.report.fit_figure import fit_figure
from optim.report.flow_figures import SERIES, analysis_figure
from optim.report.front_figure import front_figure
from optim.report.judgement import as_recorded
from optim.report.rejudged import rejudged
from optim.study.load import parse_study


def shown(axes, label):
    """Return the data of the line with a label, (n, 2)."""
    (line,) = [one for one in axes.lines if str(one.get_label()).startswith(label)]
    return np.column_stack(line.get_data())


@pytest.fixture
def answer(closed_form):
    """NACA 2412 at seven angles, the last two without an answer."""
    section = naca_section("2412")
    angles = np.radians([-4.0, -2.0, 0.0, 4.0, 8.0, 12.0, 16.0])
    evaluator = closed_form(panel_nodes(section, 160))
    return Analysed(section, tuple(evaluator.flows([OperatingPoint(1e6, alpha=a) for a in angles])))


def test_front_figure_shows_the_front_and_the_baseline(run):
    judgement = as_recorded(run)
    axes = front_figure(judgement).axes[0]
    rows = judgement.front()
    better = judgement.better_in_everything(rows, 0)
    drawn = shown(axes, "front:")
    expected = judgement.objectives[np.setdiff1d(rows, better)]
    np.testing.assert_array_equal(np.sort(drawn, axis=0), np.sort(expected, axis=0))
    np.testing.assert_array_equal(shown(axes, "baseline"), judgement.objectives[:1])


def test_front_figure_looks_where_the_front_and_the_baseline_are(run):
    judgement = as_recorded(run)
    axes = front_figure(judgement).axes[0]
    inside = np.vstack([judgement.objectives[judgement.front()], judgement.objectives[:1]])
    for k, (low, high) in enumerate((axes.get_xlim(), axes.get_ylim())):
        assert low < inside[:, k].min()
        assert inside[:, k].max() < high


def test_three_objectives_are_three_panels_of_pairs(run, study_text, tmp_path):
    text = study_text.replace("constraints:", "  - maximise: thickness\nconstraints:")
    figure = front_figure(rejudged(run, parse_study(text)))
    assert [axes.get_ylabel().partition(",")[0] for axes in figure.axes[:3]] == [
        "nose_down_moment@survey", "thickness [%]", "thickness [%]",
    ]  # fmt: skip
    save(figure, tmp_path / "front.png")


@pytest.mark.parametrize("generations", [0, 1])
def test_front_figure_of_nothing_feasible_is_drawn(tmp_path, recorder, study_text, generations):
    text = study_text.replace("min: 1.40", "min: 4.0")
    with open_run(recorder(tmp_path / "tight.h5", text, generations=generations)) as run:
        save(front_figure(as_recorded(run)), tmp_path / "front.svg")
    assert (tmp_path / "front.svg").stat().st_size > 1000


def test_flow_over_the_angle_has_gaps_where_there_is_no_answer(answer, tmp_path):
    figure = analysis_figure([answer])
    lift = shown(figure.axes[0], "NACA 2412")
    assert np.isnan(lift[-2:, 1]).all()
    assert np.isfinite(lift[:-2, 1]).all()
    np.testing.assert_allclose(shown(figure.axes[0], "no answer")[:, 0], [12.0, 16.0])
    save(figure, tmp_path / "flow.pdf")


def test_single_flow_shades_its_lift(answer):
    """The closed form has cp = -cl (1 - x) above and cl (1 - x) / 2 below: a load of 3/4 cl."""
    flow = answer.flows[3]
    axes = analysis_figure([Analysed(answer.section, (flow,))]).axes[1]
    (shade,) = axes.collections
    outline = shade.get_paths()[0].vertices
    x, y = outline.T
    area = 0.5 * abs(np.dot(x, np.roll(y, 1)) - np.dot(y, np.roll(x, 1)))
    assert area == pytest.approx(0.75 * flow.cl, rel=0.01)


def test_nothing_to_draw_is_said(answer):
    failed = replace(answer.flows[-1], outcome=Outcome.NOT_CONVERGED)
    with pytest.raises(InputError, match="nothing to draw"):
        analysis_figure([Analysed(answer.section, (failed,))])


def test_more_series_than_can_be_told_apart_are_refused(answer):
    with pytest.raises(InputError, match="cannot be told apart"):
        analysis_figure([answer] * (len(SERIES) + 1))


def test_drawn_distance_of_a_fit_is_the_stated_one():
    section = naca_section("23012")
    found = fit(Cst(upper=6, lower=6, gap=section.trailing_edge_gap), section)
    axes = fit_figure(section, found).axes[1]
    sides = [shown(axes, f"{side} side")[:, 1] for side in ("upper", "lower")]
    drawn = 1e-4 * np.abs(np.concatenate(sides)).max()
    assert drawn == pytest.approx(found.largest_deviation, rel=0.02)
    assert math.isfinite(drawn)
