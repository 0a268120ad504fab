"""Exported files, each read by a library that has not written it, and measured by shapely.

DXF is read and its spline evaluated by ezdxf (the tool reads the pairs of the format itself and
evaluates by scipy), SVG by fontTools, the spline of JSON is evaluated by ezdxf, points are read by
numpy and by the tool's own reader of section files. The exact curve is a line through 20 000 of its
points, which is true to 1e-8 chords.
"""

import json
from itertools import pairwise
from xml.etree import ElementTree as ET

import ezdxf
import numpy as np
import pytest
from ezdxf.math import BSpline
from fontTools.pens.recordingPen import RecordingPen
from fontTools.svgLib import SVGPath
from shapely import LineString, distance, points, prepare

from optim.errors import InputError
from optim.geometry.bezier import Bezier
from optim.geometry.cst import Cst
from optim.geometry.curve import cosine_parameters
from optim.geometry.fitting import fit
from optim.geometry.naca import naca_section
from optim.report.built_curve import distances
from optim.report.export import CLOSE_ENOUGH, ENOUGH, Density, write_section
from optim.report.export_forms import FORMS, Label
from optim.study.coordinate_file import read_coordinates

CHORD = 0.212
GAP = 0.0008 / CHORD
LABEL = Label("paper-plane, design 7", {"chord": "212 mm"}, {"study": {"name": "<paper & plane>"}})
PROMISED = 1e-6
"""A micrometre at a chord of 1 m: largest distance of a spline from the exact curve."""

SHAPES = {
    "cst": Cst(upper=6, lower=6, gap=GAP),
    "unequal orders": Cst(upper=4, lower=9, gap=GAP),
    "leading-edge term": Cst(upper=6, lower=6, gap=GAP, leading_edge_term=True),
    "sharp edge": Cst(upper=6, lower=6, gap=0.0),
    "cusped edge": Cst(upper=6, lower=6, gap=GAP, exponents=(0.5, 1.6)),
    "pointed nose": Cst(upper=6, lower=6, gap=GAP, exponents=(0.7, 1.0)),
    "bezier": Bezier(upper=7, lower=5, gap=GAP),
}


def fitted(parameterisation):
    design = fit(parameterisation, naca_section("23012")).design
    return parameterisation.section(design)


@pytest.fixture(scope="module")
def section():
    return fitted(SHAPES["cst"])


def from_exact(section, found, chord):
    """Return the largest distance of points [mm] from the exact curve, by shapely [m]."""
    line = LineString(section.points(cosine_parameters(20_000)) * chord * 1e3)
    prepare(line)
    return float(distance(line, points(found)).max()) * 1e-3


def by_ezdxf(path):
    """Return the spline of a drawing as ezdxf evaluates it, and the drawing."""
    drawing = ezdxf.readfile(path)
    (spline,) = drawing.modelspace().query("SPLINE")
    return along(spline.construction_tool()), drawing


def along(spline):
    knots = np.unique(spline.knots())
    at = np.concatenate([np.linspace(a, b, 11) for a, b in pairwise(knots)])
    return np.array([(p.x, p.y) for p in spline.points(at)])


def by_fonttools(path):
    """Return places along the contour of a drawing [mm], y up."""
    pen = RecordingPen()
    SVGPath(path).draw(pen)
    places, here = [], None
    for kind, given in pen.value:
        if kind == "moveTo" and here is not None:
            break  # the chord line
        if kind == "curveTo":
            u = np.linspace(0.0, 1.0, 11)[:, None]
            a, b, c, d = (np.array(p) for p in (here, *given))
            places.append(
                a * (1 - u) ** 3 + 3 * b * u * (1 - u) ** 2 + 3 * c * u**2 * (1 - u) + d * u**3
            )
        here = given[-1] if given else here
    return np.concatenate(places) * [1.0, -1.0]


@pytest.mark.parametrize("shape", SHAPES)
def test_dxf_read_by_ezdxf_is_within_a_micrometre_a_metre(tmp_path, shape):
    section, path = fitted(SHAPES[shape]), tmp_path / "section.dxf"
    written = write_section(section, 1.0, path, LABEL)
    found, drawing = by_ezdxf(path)
    assert from_exact(section, found, 1.0) <= min(PROMISED, 1.02 * written.deviation + 1e-8)
    assert written.deviation <= PROMISED
    assert written.points < 200, "a spline, not a chain of short lines"
    assert drawing.audit().errors == []


def test_dxf_is_in_millimetres_with_the_edge_as_built(section, tmp_path):
    write_section(section, CHORD, tmp_path / "section.dxf", LABEL)
    found, drawing = by_ezdxf(tmp_path / "section.dxf")
    assert drawing.units == ezdxf.units.MM
    np.testing.assert_allclose(found[[0, -1]], [[212.0, 0.4], [212.0, -0.4]], atol=1e-9)
    space = drawing.modelspace()
    (edge,) = space.query('LINE[layer=="EDGE"]')
    ends = [edge.dxf.start, edge.dxf.end]
    np.testing.assert_allclose(ends, [[212.0, -0.4, 0.0], [212.0, 0.4, 0.0]], atol=1e-9)
    (chord_line,) = space.query('LINE[layer=="CHORD"]')
    assert [tuple(chord_line.dxf.start), tuple(chord_line.dxf.end)] == [(0, 0, 0), (212, 0, 0)]
    assert dict(drawing.header.custom_vars.properties)["chord"] == "212 mm"


def test_sharp_edge_has_no_line_of_no_length(tmp_path):
    write_section(fitted(SHAPES["sharp edge"]), CHORD, tmp_path / "sharp.dxf", LABEL)
    _, drawing = by_ezdxf(tmp_path / "sharp.dxf")
    assert len(drawing.modelspace().query('LINE[layer=="EDGE"]')) == 0


def test_spline_has_continuous_tangent_through_the_nose(section, tmp_path):
    """No knot of full multiplicity, at which programs that draw would break the curve."""
    write_section(section, CHORD, tmp_path / "section.dxf", LABEL)
    (spline,) = ezdxf.readfile(tmp_path / "section.dxf").modelspace().query("SPLINE")
    _, count = np.unique(spline.knots, return_counts=True)
    assert count[[0, -1]].tolist() == [4, 4]
    assert sorted(count[1:-1].tolist())[-2:] == [1, 2]


def test_svg_read_by_fonttools_is_within_a_micrometre_a_metre(section, tmp_path):
    path = tmp_path / "section.svg"
    written = write_section(section, 1.0, path, LABEL)
    assert from_exact(section, by_fonttools(path), 1.0) <= PROMISED
    assert written.deviation <= PROMISED


def test_svg_is_at_scale_and_shows_all_of_the_contour(section, tmp_path):
    path = tmp_path / "section.svg"
    write_section(section, CHORD, path, LABEL)
    drawing = ET.parse(path).getroot()  # noqa: S314  our own file
    left, top, width, height = (float(word) for word in drawing.get("viewBox").split())
    assert drawing.get("width") == f"{width:.6f}mm"
    assert drawing.get("height") == f"{height:.6f}mm"
    x, y = by_fonttools(path).T
    assert left < x.min() < x.max() < left + width
    assert top < -y.max() < -y.min() < top + height
    assert x.max() - x.min() == pytest.approx(212.0, abs=1e-6)


def test_hostile_names_stay_text_in_a_drawing(section, tmp_path):
    label = Label("</title><script>alert(1)</script>", {"design": "a\nb <&> c"})
    for suffix in (".svg", ".dxf", ".txt"):
        write_section(section, CHORD, tmp_path / f"section{suffix}", label)
    assert "<script>" not in (tmp_path / "section.svg").read_text()
    by_fonttools(tmp_path / "section.svg")
    _, drawing = by_ezdxf(tmp_path / "section.dxf")
    assert dict(drawing.header.custom_vars.properties)["design"] == "a b <&> c"
    assert np.loadtxt(tmp_path / "section.txt").shape[1] == 2


def test_json_has_the_spline_and_the_document(section, tmp_path):
    path = tmp_path / "section.json"
    written = write_section(section, 1.0, path, LABEL)
    document = json.loads(path.read_text(), parse_constant=pytest.fail)
    spline = document["built"]["spline"]
    found = along(
        BSpline(spline["control_points_mm"], spline["degree"] + 1, knots=spline["knots_mm"])
    )
    assert document["study"] == {"name": "<paper & plane>"}
    assert from_exact(section, found, 1.0) <= PROMISED
    assert from_exact(section, document["built"]["points_mm"], 1.0) < 1e-8
    assert len(document["built"]["points_mm"]) == written.points


def test_csv_has_millimetres_at_the_chord_with_a_header(section, tmp_path):
    path = tmp_path / "section.csv"
    write_section(section, CHORD, path, LABEL)
    assert path.read_text().splitlines()[0] == "x_mm,y_mm"
    found = np.loadtxt(path, delimiter=",", skiprows=1)
    assert found[0] == pytest.approx([212.0, 0.4], abs=1e-6)
    assert found[-1] == pytest.approx([212.0, -0.4], abs=1e-6)
    assert found[:, 0].min() == pytest.approx(0.0, abs=1e-6)


def test_txt_has_chords_and_says_what_it_is(section, tmp_path):
    path = tmp_path / "section.txt"
    write_section(section, CHORD, path, LABEL)
    lines = path.read_text().splitlines()
    assert lines[:2] == ["# paper-plane, design 7", "# chord: 212 mm"]
    assert np.loadtxt(path)[0] == pytest.approx([1.0, GAP / 2.0], abs=1e-9)


@pytest.mark.parametrize("suffix", [".csv", ".txt"])
def test_stated_deviation_bounds_the_distance_that_shapely_finds(section, tmp_path, suffix):
    path = tmp_path / f"section{suffix}"
    written = write_section(section, CHORD, path, LABEL)
    skip, delimiter = (1, ",") if suffix == ".csv" else (0, None)
    found = np.loadtxt(path, delimiter=delimiter, skiprows=skip)
    line = LineString(found * (1e-3 if suffix == ".csv" else CHORD))
    curve = section.points(cosine_parameters(5003)) * CHORD
    off = float(distance(line, points(curve)).max())
    assert len(found) == written.points
    assert 0.5 * written.deviation < off <= written.deviation * 1.001
    assert written.deviation <= CLOSE_ENOUGH
    assert written.of_points < 2e-9


def test_distance_from_the_curve_is_the_one_that_shapely_finds():
    """Points off the contour by up to 2 mm a metre, at the pointed nose and beyond the edge too."""
    section = fitted(SHAPES["pointed nose"])
    rng = np.random.default_rng(4)
    near = section.points(cosine_parameters(300)) + rng.uniform(-2e-3, 2e-3, (301, 2))
    line = LineString(section.points(cosine_parameters(100_000)))
    expected = distance(line, points(near))
    np.testing.assert_allclose(distances(section, near), expected, atol=1e-8)


@pytest.mark.parametrize(("spacing", "rank"), [("even", 0), ("cosine", 1), ("nose", 2)])
def test_number_and_spacing_of_points_are_those_asked_for(section, tmp_path, spacing, rank):
    """The more a spacing is about the nose, the shorter the step there."""
    path = tmp_path / "section.csv"
    written = write_section(section, CHORD, path, LABEL, Density(51, spacing))
    found = np.loadtxt(path, delimiter=",", skiprows=1)
    steps = np.hypot(*np.diff(found, axis=0).T)
    at_nose = steps[49:51].max() / steps.mean()
    assert written.points == len(found) == 101
    np.testing.assert_allclose(found[50], [0.0, 0.0], atol=1e-6)
    assert [0.95, 0.3, 0.1][rank] < at_nose < [1.05, 0.7, 0.3][rank]


def test_few_points_make_a_poor_spline_and_that_is_stated(section, tmp_path):
    path = tmp_path / "section.dxf"
    written = write_section(section, 1.0, path, LABEL, Density(20))
    assert written.points == 39
    assert written.deviation > PROMISED
    found = from_exact(section, by_ezdxf(path)[0], 1.0)
    assert found == pytest.approx(written.deviation, rel=0.02)


def test_points_are_dense_at_the_nose(section, tmp_path):
    path = tmp_path / "section.csv"
    write_section(section, CHORD, path, LABEL)
    found = np.loadtxt(path, delimiter=",", skiprows=1)
    steps = np.hypot(*np.diff(found, axis=0).T)
    nose = int(np.argmin(found[:, 0]))
    radius = 1e3 * CHORD * section.nose_radius
    assert steps[nose - 1 : nose + 1].max() < 0.15 * radius
    assert steps[nose] < 0.5 * steps.max()


def test_file_reads_back_as_a_section_file(section, tmp_path):
    path = tmp_path / "section.txt"
    write_section(section, CHORD, path, LABEL)
    read = read_coordinates(path)
    assert read.notes == ()
    np.testing.assert_allclose(read.points[0], [1.0, GAP / 2.0], atol=1e-9)


def test_long_chord_gets_more_points_up_to_a_limit(section, tmp_path):
    short = write_section(section, 0.1, tmp_path / "short.csv", LABEL)
    long = write_section(section, 10.0, tmp_path / "long.csv", LABEL)
    assert short.points < long.points == ENOUGH + 1
    assert long.deviation > CLOSE_ENOUGH


@pytest.mark.parametrize("name", ["section.stp", "section"])
def test_unknown_form_is_refused_in_one_line(section, tmp_path, name):
    with pytest.raises(InputError) as error:
        write_section(section, CHORD, tmp_path / name, LABEL)
    assert str(error.value).endswith("accepted is .csv, .txt, .dxf, .svg, .json.")


@pytest.mark.parametrize("suffix", FORMS)
def test_place_that_cannot_be_written_is_refused_in_one_line(section, tmp_path, suffix):
    with pytest.raises(InputError) as error:
        write_section(section, CHORD, tmp_path / f"no/such/section{suffix}", LABEL)
    assert "accepted is another place" in str(error.value)
    assert "\n" not in str(error.value)
