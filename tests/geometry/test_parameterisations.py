"""The contract of every parameterisation, and what is particular to each."""

import pickle

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.special import comb

from optim.geometry.bezier import Bezier
from optim.geometry.cst import Cst
from optim.geometry.fitting import fit
from optim.geometry.naca import naca_section
from optim.geometry.validity import faults

EVERY = {
    "cst": Cst(6, 6, gap=0.002),
    "cst, leading-edge term": Cst(6, 6, gap=0.002, leading_edge_term=True),
    "cst, uneven": Cst(4, 13, gap=0.0),
    "cst, uneven, leading-edge term": Cst(9, 5, gap=0.001, leading_edge_term=True),
    "cst, other exponents": Cst(7, 6, gap=0.0, exponents=(0.6, 1.3)),
    "bezier": Bezier(6, 6, gap=0.002),
    "bezier, uneven": Bezier(13, 4, gap=0.0),
}


@pytest.fixture(params=list(EVERY))
def shape(request):
    return EVERY[request.param]


@pytest.fixture
def design(shape):
    return fit(shape, naca_section("2412")).design


def test_names_are_unique_and_one_for_each_variable(shape, design):
    assert len(set(shape.names)) == len(shape.names) == design.size
    shared = "nose" in shape.names
    extra = "leading_edge" in shape.names
    assert len(shape.names) == shape.upper + shape.lower - shared + extra


def test_fit_of_a_section_of_its_own_gives_the_design_back(shape, design):
    rng = np.random.default_rng(3)
    moved = design + 0.05 * shape.reach * rng.uniform(-1, 1, design.size)
    found = fit(shape, shape.section(moved))
    assert found.largest_deviation < 1e-9
    assert found.design == pytest.approx(moved, abs=1e-5)
    assert (found.rotation, found.scale) == pytest.approx((0.0, 1.0), abs=1e-9)


def test_derivatives_agree_with_differences(shape, design, differentiated):
    curve = shape.section(design).curve
    t = np.concatenate([np.linspace(-0.97, -0.03, 90), np.linspace(0.03, 0.97, 90)])
    first, second = differentiated(curve, t)
    assert np.abs(curve.first(t) - first).max() < 1e-8
    assert np.abs(curve.second(t) - second).max() < 1e-6


def test_basis_is_the_curve(shape, design):
    t = np.linspace(-1, 1, 101)
    offset, matrix = shape.basis(t)
    assert shape.section(design).points(t) == pytest.approx(
        np.column_stack([t**2, offset + matrix @ design]), abs=1e-13
    )


def test_edge_gap_is_as_given(shape, design):
    section = shape.section(design)
    assert section.trailing_edge_gap == pytest.approx(shape.gap, abs=1e-12)
    ends = section.points(np.array([-1.0, 1.0]))
    wanted = np.array([[1, shape.gap / 2], [1, -shape.gap / 2]])
    assert ends == pytest.approx(wanted, abs=1e-12)


def test_tangent_at_the_nose_is_vertical(shape, design):
    curve = shape.section(design).curve
    assert curve.point(np.array([0.0])) == pytest.approx(np.zeros((1, 2)), abs=1e-9)
    assert np.all(curve.first(np.array([-1e-12, 0.0, 1e-12]))[:, 0] == pytest.approx(0, abs=1e-11))


def test_bounds_lie_about_the_design(shape, design):
    lower, upper = shape.bounds(design, 0.12)
    assert 0.5 * (lower + upper) == pytest.approx(design)
    assert upper - lower == pytest.approx(0.24 * shape.reach)
    assert np.all(shape.reach > 0)
    for freedom in (0.0, -0.1, np.nan):
        with pytest.raises(ValueError, match="freedom"):
            shape.bounds(design, freedom)


def test_freedom_moves_the_contour_alike(shape):
    """A unit of freedom of any shape moves its side by 2 to 30 % of the chord somewhere."""
    t = np.linspace(-1, 1, 401)
    _, matrix = shape.basis(t)
    moved = np.abs(matrix * shape.reach).max(axis=0)
    assert np.all((moved > 0.02) & (moved < 0.30))


def test_misuse_raises(shape, design):
    with pytest.raises(ValueError, match="design must have the shape"):
        shape.section(design[:-1])
    spoilt = design.copy()
    spoilt[2] = np.inf
    with pytest.raises(ValueError, match="design must be finite"):
        shape.section(spoilt)


def test_inputs_are_left_alone(shape, design):
    kept = design.copy()
    section = shape.section(kept)
    _ = (section.thickness, section.area, faults(section))
    shape.bounds(kept, 0.1)
    fit(shape, section)
    assert np.array_equal(kept, design)
    assert hash(shape) == hash(pickle.loads(pickle.dumps(shape)))  # noqa: S301 - our own bytes


def test_equal_designs_make_equal_sections(shape, design):
    one, other = shape.section(design), shape.section(design.copy())
    t = np.linspace(-1, 1, 33)
    assert np.array_equal(one.points(t), other.points(t))
    assert one.thickness == other.thickness


@settings(max_examples=60, deadline=None)
@given(
    name=st.sampled_from(list(EVERY)), seed=st.integers(0, 2**32 - 1), freedom=st.floats(0.02, 0.6)
)
def test_any_design_in_bounds_is_a_section_or_has_a_named_fault(name, seed, freedom):
    """Shapely judges: a contour without faults is a simple polygon, one that it calls crossing has
    a fault. Only crossings smaller than the polygon resolves may differ."""
    shape = EVERY[name]
    lower, upper = shape.bounds(fit(shape, naca_section("2412")).design, freedom)
    section = shape.section(np.random.default_rng(seed).uniform(lower, upper))
    found = faults(section)
    t = -np.cos(np.linspace(0, np.pi, 481))
    # a closed edge is left out by a hair: touching there is no crossing
    judged = shapely.Polygon(section.points(t[1:-1]))
    if found:
        assert all(fault.sentence.endswith(".") and 0 <= fault.x <= 1 for fault in found)
    else:
        assert judged.is_valid
        assert section.area == pytest.approx(judged.area, abs=2e-4)
        assert 0 < section.thickness_x < 1
        assert section.thickness > 0
        assert section.nose_radius > 0
        assert np.isfinite([section.camber, section.perimeter, section.trailing_edge_angle]).all()
    if not judged.is_valid:
        assert found


def test_cst_is_the_published_formula():
    """Kulfan, J. Aircraft 45 (1), 2008: y = x**0.5 (1 - x) sum A_i B_i(x) + x gap / 2."""
    a = np.array([0.17, 0.16, 0.15, 0.14, 0.13])
    b = np.array([-0.15, -0.1, -0.11, -0.12])
    section = Cst(5, 4, gap=0.004).section(np.concatenate([a, b]))
    x = np.linspace(0.001, 1, 41)
    upper, lower = section.upper_lower(x)
    for y, c, side in ((upper, a, 1), (lower, b, -1)):
        n = c.size - 1
        s = sum(c[i] * comb(n, i) * x**i * (1 - x) ** (n - i) for i in range(n + 1))
        assert y == pytest.approx(np.sqrt(x) * (1 - x) * s + side * x * 0.002, abs=1e-14)


def test_cst_first_and_last_coefficients_mean_what_they_should():
    """Kulfan 2008: nose radius A0**2 / 2; edge slope -A_n, so the edge angle follows."""
    a = np.array([0.18, 0.16, 0.15, 0.14])
    section = Cst(4, 4).section(np.concatenate([a, -a]))
    assert section.nose_radius == pytest.approx(0.18**2 / 2, rel=1e-6)
    assert section.trailing_edge_angle == pytest.approx(2 * np.arctan(0.14), rel=1e-12)


def test_plain_cst_states_the_smaller_nose_radius():
    a = np.array([0.2, 0.16, 0.15, 0.14, -0.1, -0.1, -0.1, -0.1])
    assert Cst(4, 4).section(a).nose_radius == pytest.approx(0.1**2 / 2, rel=1e-6)


@pytest.mark.parametrize("shape", [Cst(6, 7, leading_edge_term=True), Bezier(6, 7)])
def test_shared_nose_has_no_step_in_curvature(shape):
    design = fit(shape, naca_section("4412")).design
    section = shape.section(design)
    beside = section.curvature(np.array([-1e-9, 1e-9]))
    assert beside[0] == pytest.approx(beside[1], rel=1e-6)
    assert section.nose_radius == pytest.approx(design[0] ** 2 / 2, rel=1e-6)


def test_bezier_is_its_control_polygon():
    """De Casteljau's construction of the upper side gives the same points."""
    design = np.array([0.18, 0.06, 0.07, 0.06, 0.05, -0.04, -0.05, -0.04, -0.03])
    section = Bezier(5, 5, gap=0.002).section(design)
    n = 6
    i = np.arange(n + 1)
    polygon = np.column_stack([i * (i - 1) / (n * (n - 1)), [0, 0.18 / n, *design[1:5], 0.001]])
    for u in (0.0, 0.1, 0.5, 0.9, 1.0):
        points = polygon
        while len(points) > 1:
            points = (1 - u) * points[:-1] + u * points[1:]
        assert section.points(np.array([-u if u else -0.0])) == pytest.approx(points, abs=1e-14)


@pytest.mark.parametrize(
    ("shape", "settings", "what"),
    [
        (Cst, {"upper": 3}, "upper coefficients"),
        (Cst, {"lower": 14}, "lower coefficients"),
        (Cst, {"gap": -0.001}, "edge gap"),
        (Cst, {"exponents": (0.4, 1.0)}, "nose exponent"),
        (Cst, {"exponents": (0.5, 0.5)}, "edge exponent"),
        (Bezier, {"upper": 3}, "upper coefficients"),
        (Bezier, {"lower": 14}, "lower coefficients"),
        (Bezier, {"gap": 0.2}, "edge gap"),
    ],
)
def test_settings_out_of_range_raise(shape, settings, what):
    with pytest.raises(ValueError, match=what):
        shape(**settings)
