"""Comparisons: volumes by shapely's union of boxes, residuals by hand, archived numbers as such."""

import math
from dataclasses import replace

import numpy as np
import pytest
from shapely import box, union_all

from optim.archive.reader import open_run
from optim.errors import InputError
from optim.geometry.naca import naca_section
from optim.geometry.spacing import panel_nodes
from optim.report.comparison import Compared, compare
from optim.report.comparison_figure import LOOKS, comparison_figure
from optim.report.design_record import design_record
from optim.report.figures import save
from optim.report.fronts import run_front, volumes
from optim.report.residuals import residuals
from optim.study.polar_file import MeasuredPolar

SENSES = np.array([-1.0, 1.0])
"""Lift over drag is maximised, the moment minimised."""


def grounded(_nodes):
    raise AssertionError("nothing has to be flown for this")


def named(path):
    with open_run(path) as run:
        return Compared(str(path), run=run_front(run))


@pytest.fixture(scope="module")
def narrow_file(recorder, study_text, tmp_path_factory):
    """A run of the same wishes about another section."""
    path = tmp_path_factory.mktemp("other") / "narrow.h5"
    text = study_text.replace("naca:2412", "naca:3413").replace("freedom: 0.12", "freedom: 0.05")
    return recorder(path, text)


@pytest.fixture(autouse=True)
def _swept(monkeypatch):
    """Let sweeps fly closed-form flows."""

    def sweep(evaluator, point, angles):
        return evaluator.flows([replace(point, alpha=a, cl=None) for a in angles]), None

    monkeypatch.setattr("optim.validation.flight.sweep", sweep)


def polar(**changes):
    alpha = np.array([0.0, 4.0, 2.0, 2.0])
    measured = {
        "name": "tunnel.csv", "reynolds": 2e5, "mach": 0.0, "n_factor": 9.0, "trip_upper": 1.0,
        "trip_lower": 1.0, "alpha_deg": alpha, "cl": 0.2 + 0.1 * alpha,
        "cd": np.full(4, 0.01), "cm_quarter": np.array([-0.05, np.nan, -0.05, np.nan]),
    }  # fmt: skip
    return MeasuredPolar(**(measured | changes))


def by_shapely(fronts, reference):
    """Return the area that points dominate, as the union of one box a point."""
    corner = reference * SENSES
    points = np.concatenate([one.judgement.objectives[one.rows] for one in fronts]) * SENSES
    better = points[np.all(points < corner, axis=1)]
    return union_all([box(*point, *corner) for point in better]).area


def test_hypervolumes_are_the_areas_that_shapely_finds(run_file, narrow_file):
    fronts = [named(path).run for path in (run_file, narrow_file)]
    found = volumes(fronts)
    for front, value in zip(fronts, found.each, strict=True):
        assert value == pytest.approx(by_shapely([front], found.reference), rel=1e-9)
    assert found.union == pytest.approx(by_shapely(fronts, found.reference), rel=1e-9)
    assert max(found.each) < found.union < sum(found.each)


def test_one_run_has_its_recorded_hypervolume(run_file, run):
    found = volumes([named(run_file).run])
    assert found.each == [found.union]
    assert found.union == pytest.approx(run.read("hypervolume")[-1], rel=1e-12)


def test_runs_with_other_objectives_are_refused(run_file, recorder, study_text, tmp_path):
    text = study_text.replace("- minimise: nose_down_moment", "- minimise: cd")
    other = recorder(tmp_path / "drag.h5", text, generations=1)
    with pytest.raises(InputError) as error:
        compare([named(run_file), named(other)], [], grounded)
    (fault,) = error.value.faults
    assert fault.file == str(other)
    assert "minimise nose_down_moment@survey" in fault.message


def test_what_makes_fronts_unlike_is_said(run_file, recorder, study_text, tmp_path):
    text = study_text.replace("speed: 18 m/s", "speed: 19 m/s").replace("0.7", "0.6")
    text = text.replace("0.3}", "0.4}").replace("min: 10 %", "min: 9 %")
    other = recorder(tmp_path / "faster.h5", text, generations=1)
    notes = compare([named(run_file), named(other)], [], grounded).notes
    assert any("flies survey otherwise" in note for note in notes)
    assert any("other weights" in note for note in notes)
    assert any("other limits" in note for note in notes)
    assert compare([named(run_file), named(run_file)], [], grounded).notes == []


def test_archived_flows_of_designs_are_shown_and_nothing_is_flown(run):
    records = [design_record(run, row) for row in (0, 5)]
    columns = [Compared(one.name, section=one.section, record=one) for one in records]
    found = compare(columns, [records[0].problem], grounded)
    drag = next(
        row for row in found.rows if (row["quantity"], row["condition"]) == ("cd", "survey")
    )
    names = run.header.condition_quantity_names
    assert drag["values"] == run.quantities[[0, 5], 0, names.index("cd")].tolist()
    conditions = {row["condition"] for row in found.rows}
    assert conditions == {None, "survey", "loiter", "slow"}


def test_section_is_flown_at_the_conditions_of_the_run(run, closed_form):
    record = design_record(run, 0)
    section = naca_section("2412")
    columns = [
        Compared(record.name, section=record.section, record=record),
        Compared("naca:2412", section=section),
    ]
    found = compare(columns, [record.problem], closed_form)
    lift = next(
        row for row in found.rows if (row["quantity"], row["condition"]) == ("cl", "survey")
    )
    assert lift["values"] == pytest.approx([record.conditions["survey"]["cl"]] * 2)
    thickness = next(row for row in found.rows if row["quantity"] == "thickness")
    assert thickness["values"] == [record.section.thickness, section.thickness]


def test_residuals_are_computed_less_measured(closed_form):
    """The closed form lifts 2 pi (alpha + 2 camber), has its moment from the camber alone."""
    section = naca_section("2412")
    lift, drag, moment = residuals(section, polar(), 160, closed_form)
    camber = closed_form(panel_nodes(section, 160)).camber
    expected = 2.0 * math.pi * (np.radians(polar().alpha_deg) + 2.0 * camber) - polar().cl
    fields = lift.fields()
    assert fields["compared"] == 4
    assert fields["mean"] == pytest.approx(expected.mean())
    assert fields["rms"] == pytest.approx(np.sqrt((expected**2).mean()))
    assert fields["largest"] == pytest.approx(np.abs(expected).max())
    assert moment.fields()["compared"] == 2
    assert moment.fields()["mean"] == pytest.approx(0.05 - 2.5 * camber)
    np.testing.assert_array_equal(drag.at, polar().cl)
    assert drag.computed[2] == drag.computed[3]


def test_points_without_an_answer_are_counted_and_not_compared(closed_form):
    """The closed form has no answer beyond a lift of 1.4."""
    high = polar(cl=np.array([0.2, 1.6, 0.4, 0.4]))
    _, drag, _ = residuals(naca_section("2412"), high, 160, closed_form)
    assert (drag.fields()["compared"], drag.fields()["without_answer"]) == (3, 1)
    none = polar(cl=np.full(4, 1.6), alpha_deg=np.full(4, 40.0))
    for one in residuals(naca_section("2412"), none, 160, closed_form):
        assert one.fields()["compared"] == 0
        assert math.isnan(one.fields()["mean"])


def test_polar_without_angles_or_without_lift_twice_is_compared_as_far_as_it_goes(closed_form):
    blind = polar(alpha_deg=np.full(4, np.nan), cm_quarter=np.full(4, np.nan))
    found = residuals(naca_section("2412"), blind, 160, closed_form)
    assert [one.quantity for one in found] == ["cd"]


def test_everything_at_once_is_drawn(run, run_file, narrow_file, closed_form, tmp_path):
    record = design_record(run, 5)
    columns = [
        named(run_file),
        named(narrow_file),
        Compared(record.name, section=record.section, record=record),
        Compared("naca:2412", section=naca_section("2412")),
        Compared("tunnel.csv", polar=polar()),
    ]
    found = compare(columns, [record.problem], closed_form)
    figure = comparison_figure(found)
    assert [axes.get_ylabel().partition(",")[0] for axes in figure.axes] == [
        "nose_down_moment@survey", "y/c", "cl", "10 000 cd", "cm about c/4",
    ]  # fmt: skip
    (measured,) = [line for line in figure.axes[3].lines if "measured" in str(line.get_label())]
    np.testing.assert_allclose(measured.get_ydata(), 100.0)
    assert len(columns) <= len(LOOKS)
    save(figure, tmp_path / "all.png")
    assert all(len(row["values"]) == len(columns) for row in found.rows)
    document = found.document()
    assert {one["kind"] for one in document["columns"]} == {
        "run", "design", "section", "measurement",
    }  # fmt: skip
    assert len(document["residuals"]) == 6


def test_run_without_a_front_is_compared(recorder, study_text, tmp_path, run_file):
    text = study_text.replace("min: 1.40", "min: 4.0")
    tight = recorder(tmp_path / "tight.h5", text, generations=1)
    found = compare([named(tight), named(run_file)], [], grounded)
    assert found.volumes.each[0] == 0.0
    assert found.rows[0]["values"][0] == 0
    save(comparison_figure(found), tmp_path / "tight.svg")
