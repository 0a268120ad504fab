"""Exported files, read by the tool's own reader of sections and measured by shapely."""

import numpy as np
import pytest
from shapely import LineString, Point

from optim.errors import InputError
from optim.geometry.cst import Cst
from optim.geometry.curve import cosine_parameters
from optim.geometry.fitting import fit
from optim.geometry.naca import naca_section
from optim.report.export import CLOSE_ENOUGH, ENOUGH, Sheet, write_section
from optim.study.coordinate_file import read_coordinates

CHORD = 0.212
GAP = 0.0008 / CHORD
SHEET = Sheet("paper-plane, design 7", ("chord 212 mm",))


@pytest.fixture(scope="module")
def section():
    parameterisation = Cst(upper=6, lower=6, gap=GAP)
    design = fit(parameterisation, naca_section("2412")).design
    return parameterisation.section(design)


def test_csv_has_millimetres_at_the_chord_with_a_header(section, tmp_path):
    path = tmp_path / "section.csv"
    write_section(section, CHORD, path, SHEET)
    assert path.read_text().splitlines()[0] == "x_mm,y_mm"
    points = np.loadtxt(path, delimiter=",", skiprows=1)
    assert points[0] == pytest.approx([212.0, 0.4], abs=1e-6)
    assert points[-1] == pytest.approx([212.0, -0.4], abs=1e-6)
    assert points[:, 0].min() == pytest.approx(0.0, abs=1e-6)


def test_txt_has_chords_and_says_what_it_is(section, tmp_path):
    path = tmp_path / "section.txt"
    write_section(section, CHORD, path, SHEET)
    lines = path.read_text().splitlines()
    assert lines[:2] == ["# paper-plane, design 7", "# chord 212 mm"]
    assert np.loadtxt(path)[0] == pytest.approx([1.0, GAP / 2.0], abs=1e-9)


@pytest.mark.parametrize("suffix", [".csv", ".txt"])
def test_stated_deviation_bounds_the_distance_that_shapely_finds(section, tmp_path, suffix):
    path = tmp_path / f"section{suffix}"
    written = write_section(section, CHORD, path, SHEET)
    skip, delimiter = (1, ",") if suffix == ".csv" else (0, None)
    points = np.loadtxt(path, delimiter=delimiter, skiprows=skip)
    scale = 1e-3 if suffix == ".csv" else CHORD
    line = LineString(points * scale)
    curve = section.points(cosine_parameters(5003)) * CHORD
    found = max(line.distance(Point(*point)) for point in curve)
    assert len(points) == written.points
    assert 0.5 * written.deviation < found <= written.deviation * 1.001
    assert written.deviation <= CLOSE_ENOUGH


def test_points_are_dense_at_the_nose(section, tmp_path):
    path = tmp_path / "section.csv"
    write_section(section, CHORD, path, SHEET)
    points = np.loadtxt(path, delimiter=",", skiprows=1)
    steps = np.hypot(*np.diff(points, axis=0).T)
    nose = int(np.argmin(points[:, 0]))
    radius = 1e3 * CHORD * section.nose_radius
    assert steps[nose - 1 : nose + 1].max() < 0.15 * radius
    assert steps[nose] < 0.5 * steps.max()


def test_file_reads_back_as_a_section_file(section, tmp_path):
    path = tmp_path / "section.txt"
    write_section(section, CHORD, path, SHEET)
    read = read_coordinates(path)
    assert read.notes == ()
    np.testing.assert_allclose(read.points[0], [1.0, GAP / 2.0], atol=1e-9)


def test_long_chord_gets_more_points_up_to_a_limit(section, tmp_path):
    short = write_section(section, 0.1, tmp_path / "short.csv", SHEET)
    long = write_section(section, 10.0, tmp_path / "long.csv", SHEET)
    assert short.points < long.points == ENOUGH + 1
    assert long.deviation > CLOSE_ENOUGH


@pytest.mark.parametrize("name", ["section.dxf", "section", "no/such/folder/section.csv"])
def test_refusals_are_one_line(section, tmp_path, name):
    with pytest.raises(InputError) as error:
        write_section(section, CHORD, tmp_path / name, SHEET)
    assert "accepted is" in str(error.value)
    assert "\n" not in str(error.value)
