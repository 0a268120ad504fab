"""Measures of the exact curve against closed forms, scipy and shapely."""

import pickle

import numpy as np
import pytest
import shapely
from scipy.optimize import brentq, minimize_scalar
from scipy.special import ellipe

from optim.geometry.bezier import Bezier
from optim.geometry.cst import Cst
from optim.geometry.naca import naca_section
from optim.geometry.section import Section, section_from_coordinates
from optim.geometry.spacing import NOSE_DENSITY, panel_nodes

CST = np.array([0.19, 0.2, 0.18, 0.2, 0.18, 0.2, -0.15, -0.1, -0.12, -0.08, 0.1, 0.05])
BEZIER = np.array([0.18, 0.06, 0.07, 0.06, 0.04, 0.02, -0.04, -0.05, -0.04, -0.03, -0.02])


@pytest.fixture(params=["0012", "2412", "23112", "0015-64", "cst", "bezier", "e387", "s809"])
def section(request, ordinates):
    made = {
        "cst": lambda: Cst(6, 6, gap=0.003).section(CST),
        "bezier": lambda: Bezier(6, 6, gap=0.002).section(BEZIER),
    }
    if request.param in made:
        return made[request.param]()
    if request.param in ("e387", "s809"):
        return section_from_coordinates(ordinates(request.param), request.param)[0]
    return naca_section(request.param)


def test_ellipse_has_its_closed_forms(ellipse):
    b = 0.06
    section = ellipse(b)
    assert section.thickness == pytest.approx(2 * b, rel=1e-13)
    assert section.thickness_x == pytest.approx(0.5, abs=1e-9)
    assert section.area == pytest.approx(np.pi * b / 2, rel=1e-12)
    assert section.nose_radius == pytest.approx(2 * b**2, rel=1e-8)
    assert section.perimeter == pytest.approx(2 * ellipe(1 - 4 * b**2), rel=1e-8)
    assert section.depth(0.1) == pytest.approx(4 * b * np.sqrt(0.1 * 0.9), rel=1e-12)
    assert section.camber == 0.0
    assert np.isnan(section.camber_x)
    assert section.curvature_sign_changes().size == 0


def test_joukowski_thickness_is_that_of_the_map(joukowski):
    """The symmetric section whose e gives 12 % (e = 0.102019), by scipy on the map itself."""
    section = joukowski(0.102019)
    phi = minimize_scalar(
        lambda p: -section.curve.point(np.array([p]))[0, 1],
        bounds=(-0.9, -0.3),
        method="bounded",
        options={"xatol": 1e-12},
    ).x
    top = section.curve.point(np.array([phi]))[0]
    assert section.thickness == pytest.approx(2 * top[1], rel=1e-10)
    assert section.thickness == pytest.approx(0.12, abs=1e-6)
    assert section.thickness_x == pytest.approx(top[0], abs=1e-6)


def test_points_of_a_joukowski_section_give_it_back(joukowski):
    exact = joukowski(0.09, 0.05)
    points = exact.points(-np.cos(np.linspace(0, np.pi, 161)))
    section, _ = section_from_coordinates(points, "points")
    assert section.thickness == pytest.approx(exact.thickness, abs=2e-6)
    assert section.camber == pytest.approx(exact.camber, abs=2e-6)
    assert section.area == pytest.approx(exact.area, abs=1e-6)
    radius = 1 / exact.curvature(np.array([exact.foremost]))[0]
    assert section.nose_radius == pytest.approx(radius, rel=5e-3)


def test_area_and_length_are_those_of_a_fine_polygon(section, polygon):
    judged = polygon(section)
    base = np.hypot(*np.diff(section.points(np.array([-1.0, 1.0])), axis=0)[0])
    assert section.area == pytest.approx(judged.area, abs=1e-6)
    assert section.perimeter == pytest.approx(judged.length - base, abs=2e-6)
    assert judged.is_valid


def test_depth_and_sides_lie_on_the_contour(section, polygon):
    judged = polygon(section).exterior
    x = np.array([0.01, 0.05, 0.3, 0.5, 0.77, 0.95])
    upper, lower = section.upper_lower(x)
    for y in (upper, lower):
        assert max(judged.distance(shapely.Point(p)) for p in zip(x, y, strict=True)) < 1e-6
    assert np.all(upper > lower)
    assert section.depth(0.3) == pytest.approx(upper[2] - lower[2])


def test_thickness_and_camber_are_extremes_over_the_chord(section):
    x = np.linspace(0.0005, 0.9995, 4001)
    upper, lower = section.upper_lower(x)
    depth, mean = upper - lower, 0.5 * (upper + lower)
    assert section.thickness == pytest.approx(depth.max(), abs=1e-7)
    assert section.thickness >= depth.max() - 1e-13
    assert section.thickness_x == pytest.approx(x[np.argmax(depth)], abs=5e-4)
    assert abs(section.camber) == pytest.approx(np.abs(mean).max(), abs=1e-7)
    if abs(section.camber) > 1e-6:
        assert section.camber_x == pytest.approx(x[np.argmax(np.abs(mean))], abs=2e-3)


def test_edge_angle_is_that_of_the_last_hundred_thousandth(section):
    t = np.array([-1.0, -1.0 + 1e-6, 1.0 - 1e-6, 1.0])
    a, b, c, d = section.points(t)
    upper, lower = a - b, d - c
    turned = upper[0] * lower[1] - upper[1] * lower[0]
    assert section.trailing_edge_angle == pytest.approx(np.arctan2(turned, upper @ lower), abs=1e-4)
    assert section.trailing_edge_gap == pytest.approx(np.hypot(*(a - d)), abs=1e-15)


def test_curvature_is_that_of_the_circle_through_three_points(section):
    t = np.array([-0.7, -0.2, 0.15, 0.6])
    h = 1e-4
    a, b, c = (section.points(t + k * h) for k in (-1, 0, 1))
    sides = [np.hypot(*(p - q).T) for p, q in ((a, b), (b, c), (c, a))]
    area = 0.5 * ((b - a)[:, 0] * (c - a)[:, 1] - (b - a)[:, 1] * (c - a)[:, 0])
    assert section.curvature(t) == pytest.approx(
        4 * area / np.prod(sides, axis=0), rel=2e-3, abs=1e-3
    )


def test_curvature_changes_sign_where_the_side_turns_hollow():
    """A hollow aft lower side, located by scipy on the curvature of the polynomial side itself."""
    section = Cst(6, 6).section(CST)

    def bend(t):
        # y = t (1 - t**2) S(t**2) on x = t**2, by numpy's polynomials in t
        x = np.polynomial.Polynomial([0, 0, 1])
        w = 1 - x
        weights = [1, 5, 10, 10, 5, 1]
        s = sum(
            a * k * x**i * w ** (5 - i)
            for i, (a, k) in enumerate(zip(CST[6:], weights, strict=True))
        )
        y = np.polynomial.Polynomial([0, 1]) * w * s
        return 2 * t * y.deriv(2)(t) - 2 * y.deriv(1)(t)

    changes = [t for t in section.curvature_sign_changes() if t > 0]
    assert len(changes) == 2
    for changed, before in zip(changes, (1, -1), strict=True):
        around = np.array([changed - 0.01, changed + 0.01])
        assert changed == pytest.approx(brentq(bend, *around), abs=1e-12)
        assert np.sign(section.curvature(around)).tolist() == [before, -before]


def test_stations_outside_the_chord_are_misuse(section):
    for x in (-0.01, 1.01, np.nan):
        with pytest.raises(ValueError, match="must"):
            section.depth(x)


def test_panel_nodes_lie_on_the_curve(section):
    nodes = panel_nodes(section, 160)
    assert nodes.shape == (161, 2)
    assert nodes[[0, 80, 160]] == pytest.approx(section.points(np.array([-1.0, 0.0, 1.0])), abs=0)
    lengths = np.hypot(*np.diff(nodes, axis=0).T)
    assert lengths[0] < lengths[39] / 10
    assert lengths[79] < lengths[39]
    assert np.all(panel_nodes(section, 320)[::2] == pytest.approx(nodes, abs=1e-15))
    with pytest.raises(ValueError, match="at least 10 panels"):
        panel_nodes(section, 9)


def test_nodes_are_those_of_cosine_spacing_at_the_edges_and_denser_at_the_nose():
    """t = sign sqrt(x) of a thin section, against t = -cos(phi/2), phi even over 0 to 2 pi."""
    nodes = panel_nodes(naca_section("0002"), 400)
    t = np.sqrt(np.maximum(nodes[:, 0], 0.0)) * np.sign(np.arange(401) - 200)
    even = -np.cos(np.linspace(0.0, np.pi, 401))
    ratio = np.diff(t) / np.diff(even)
    assert ratio[[0, -1]] == pytest.approx(1.0, abs=0.01)
    assert ratio[[199, 200]] == pytest.approx(1 / NOSE_DENSITY, abs=0.01)
    longest, usual = (np.abs(np.diff(np.square(x))).max() for x in (t, even))
    assert longest / usual == pytest.approx(1.3, abs=0.05)
    assert np.array_equal(nodes[:, 0], nodes[::-1, 0])


def test_nodes_are_the_callers_own(section):
    nodes = panel_nodes(section, 40)
    nodes[:] = 0.0
    assert np.any(panel_nodes(section, 40) != 0.0)


def test_section_survives_the_way_to_a_worker(section):
    again = pickle.loads(pickle.dumps(section))  # noqa: S301 - our own bytes
    assert again.thickness == section.thickness
    assert np.array_equal(panel_nodes(again, 60), panel_nodes(section, 60))


def test_measures_do_not_depend_on_their_order(section):
    fresh = Section(section.name, section.curve)
    late = (fresh.area, fresh.camber, fresh.thickness)
    again = Section(section.name, section.curve)
    assert (again.thickness, again.camber, again.area) == late[::-1]
