"""Fits, with deviations judged by shapely on fine polygons."""

import numpy as np
import pytest
import shapely
import shapely.affinity
from scipy.optimize import minimize_scalar

from optim.geometry.bezier import Bezier
from optim.geometry.cst import Cst
from optim.geometry.fitting import fit
from optim.geometry.naca import naca_section
from optim.geometry.section import section_from_coordinates
from optim.geometry.validity import faults


@pytest.mark.parametrize("digits", ["0012", "2412", "23012"])
@pytest.mark.parametrize("shape", [Cst, Bezier])
def test_deviations_are_distances_between_the_contours(digits, shape, polygon):
    section = naca_section(digits)
    found = fit(shape(6, 6, gap=section.trailing_edge_gap), section)
    outline = polygon(found.parameterisation.section(found.design), 20000).exterior
    points = section.points(-np.cos(np.linspace(0, np.pi, 2001)))
    # onto the chord line, by scipy and the library's own transformations
    edge = points[[0, -1]].mean(axis=0)
    at = minimize_scalar(
        lambda t: -np.hypot(*(section.points(np.array([t]))[0] - edge)),
        bounds=(-0.2, 0.2),
        method="bounded",
        options={"xatol": 1e-12},
    ).x
    nose = section.points(np.array([at]))[0]
    placed = shapely.affinity.translate(shapely.LineString(points), -nose[0], -nose[1])
    placed = shapely.affinity.rotate(placed, found.rotation, origin=(0, 0), use_radians=True)
    placed = shapely.affinity.scale(placed, found.scale, found.scale, origin=(0, 0))
    distances = [outline.distance(shapely.Point(p)) for p in placed.coords]
    assert found.largest_deviation == pytest.approx(max(distances), abs=2e-6)
    assert found.rms_deviation < found.largest_deviation
    assert np.hypot(*(np.array(placed.coords[int(np.argmax(distances))]) - found.where)) < 0.01 or (
        digits == "0012"  # as far off below as above
    )


@pytest.mark.parametrize(
    ("shape", "largest"),
    [
        (Cst(6, 6, 0.00252), 3.5e-4),
        (Cst(7, 7, 0.00252), 2.8e-4),
        (Cst(9, 9, 0.00252), 1.6e-4),
        (Cst(6, 6, 0.00252, leading_edge_term=True), 1.6e-4),
        (Cst(9, 9, 0.00252, leading_edge_term=True), 0.9e-4),
        (Bezier(6, 6, 0.00252), 1.4e-4),
        (Bezier(8, 8, 0.00252), 0.9e-4),
    ],
)
def test_2412_is_fitted_within(shape, largest):
    """What was measured when the fit was made, rounded up; models are built to 2e-4 (TM-4074)."""
    found = fit(shape, naca_section("2412"))
    assert found.largest_deviation < largest
    assert np.degrees(found.rotation) == pytest.approx(0.0908, abs=1e-3)
    assert found.scale == pytest.approx(1 / 1.00008, abs=1e-5)


@pytest.mark.parametrize("shape", [Cst(6, 6), Cst(8, 8, leading_edge_term=True), Bezier(7, 7)])
def test_no_other_design_nearby_is_closer(shape):
    """The sum of squared distances at cosine-spaced points has its minimum at the fit."""
    section = naca_section("0012")
    found = fit(shape, section)
    points = section.points(-np.cos(np.linspace(0, np.pi, 241)))

    def squares(design):
        t = -np.cos(np.linspace(0, np.pi, 20001))
        outline = shapely.LineString(shape.section(design).points(t))
        return sum(outline.distance(shapely.Point(p)) ** 2 for p in points)

    least = squares(found.design)
    rng = np.random.default_rng(5)
    for _ in range(4):
        step = 2e-3 * shape.reach * rng.standard_normal(found.design.size)
        assert squares(found.design + step) > least
        assert squares(found.design - step) > least


def test_frame_of_the_section_does_not_matter():
    section = naca_section("4412")
    points = section.points(-np.cos(np.linspace(0, np.pi, 301)))
    c, s = np.cos(0.1), np.sin(0.1)
    turned, _ = section_from_coordinates(3 * points @ np.array([[c, s], [-s, c]]) + 7, "turned")
    shape = Cst(8, 8, section.trailing_edge_gap, leading_edge_term=True)
    t = np.linspace(-1, 1, 201)
    contours = [shape.section(fit(shape, s).design).points(t) for s in (turned, section)]
    assert contours[0] == pytest.approx(contours[1], abs=2e-5)


@pytest.mark.parametrize("name", ["naca63_415", "e387", "s809", "nlf0416"])
def test_tabulated_sections_are_fitted_more_closely_by_more_coefficients(name, ordinates):
    section, _ = section_from_coordinates(ordinates(name), name)
    gap = section.trailing_edge_gap
    for shape in (Cst, Bezier):
        few, many = (fit(shape(n, n, gap), section) for n in (6, 12))
        assert many.rms_deviation < few.rms_deviation / 2
        assert few.largest_deviation < 0.003
        assert faults(shape(12, 12, gap).section(many.design)) == ()


def test_design_of_a_fit_is_read_only():
    found = fit(Cst(), naca_section("0012"))
    with pytest.raises(ValueError, match="read-only"):
        found.design[0] = 1.0
