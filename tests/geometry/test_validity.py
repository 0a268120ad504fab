"""Faults of a contour, with the right place."""

from dataclasses import dataclass

import numpy as np
import pytest
import shapely
from scipy.optimize import brentq

from optim.geometry import polygon
from optim.geometry.cst import Cst
from optim.geometry.curve import Curve
from optim.geometry.naca import naca_section
from optim.geometry.section import Section
from optim.geometry.validity import faults

HALF = np.array([0.17, 0.16, 0.15, 0.14, 0.14, 0.14])


@dataclass(frozen=True)
class PolynomialCurve(Curve):
    """x and y polynomials of t: any fault can be written down."""

    x: tuple[float, ...]
    y: tuple[float, ...]

    def derivatives(self, t, order):
        parts = [np.polynomial.Polynomial(c) for c in (self.x, self.y)]
        return tuple(
            np.stack([p.deriv(k)(t) if k else p(t) for p in parts], axis=-1)
            for k in range(order + 1)
        )


def kinds(section):
    return [fault.kind for fault in faults(section)]


@pytest.mark.parametrize("digits", ["0006", "0012", "2412", "4424", "23012", "23112", "0012-34"])
def test_published_sections_have_no_faults(digits):
    assert faults(naca_section(digits)) == ()


def test_exact_sections_have_no_faults(ellipse, joukowski):
    assert faults(joukowski(0.102019)) == ()
    assert faults(joukowski(0.03, 0.06)) == ()
    assert faults(ellipse(0.06)) == ()


@pytest.mark.parametrize("place", [0.03, 0.31, 0.77, 0.985])
def test_crossing_is_named_where_the_sides_meet(place):
    """The depth is t (place - t**2) by construction."""
    a = 0.05
    section = Section("crossing", PolynomialCurve((0, 0, 1), (0, -a * place, 0, a)))
    (fault,) = [found for found in faults(section) if found.kind == "crossing"]
    assert fault.x == pytest.approx(place, abs=2e-4)
    assert f"x = {fault.x:.4f}" in fault.sentence
    # shapely: the contour is not simple, and its own crossing lies there
    t = -np.cos(np.linspace(0, np.pi, 2001))
    noded = shapely.node(shapely.LineString(section.points(t)))
    assert not shapely.LineString(section.points(t)).is_simple
    assert min(abs(p - place) for line in noded.geoms for p in (line.coords[0][0],)) < 1e-4


def test_two_crossings_are_both_named():
    lower = np.array([-0.15, -0.12, 0.35, 0.42, -0.05, -0.12])
    section = Cst(6, 6).section(np.concatenate([HALF, lower]))
    found = faults(section)
    places = [brentq(section.depth, low, high) for low, high in ((0.05, 0.4), (0.4, 0.95))]
    assert [f.kind for f in found] == ["crossing", "crossing"]
    assert [f.x for f in found] == pytest.approx(places, abs=2e-3)


def test_sides_that_change_places_are_inside_out():
    assert kinds(Cst(6, 6).section(np.concatenate([-HALF, HALF]))) == ["inside_out"]


@pytest.mark.parametrize("factor", [0.0, 1e-3])
def test_plate_has_no_thickness(factor):
    found = kinds(Cst(6, 6).section(factor * np.concatenate([HALF, -HALF])))
    assert found[0] == "no_thickness"


def test_sides_that_touch_are_named_where():
    """Depth 0.4 t ((t**2 - 0.5)**2 + 2e-4) is least at x = 0.5, 6e-5 chords."""
    section = Section("touching", PolynomialCurve((0, 0, 1), (0, -0.05004, 0, 0.2, 0, -0.2)))
    (fault,) = faults(section)
    assert fault.kind == "no_thickness"
    assert fault.x == pytest.approx(0.5, abs=0.01)


def test_knife_edge_nose_is_a_spike():
    sharp = np.concatenate([[0.0], HALF[1:], [0.0], -HALF[1:]])
    (fault,) = faults(Cst(6, 6).section(sharp))
    assert fault.kind == "spike"
    assert fault.x == pytest.approx(0.0, abs=1e-3)


def test_cusp_of_a_side_is_a_spike():
    """dx/dt and dy/dt vanish together on the lower side at t = 0.6: x = 0.36, a cusp."""
    # x' = 2 t (t - 0.6)**2 scaled, y' = -(t - 0.6)(...) with both roots at 0.6
    t = np.polynomial.Polynomial([0, 1])
    x = (t * (t - 0.6) ** 2).integ()
    y = ((t - 0.6) * (t + 2)).integ()
    size = x(1.0)
    section = Section("cusp", PolynomialCurve(tuple((x / size).coef), tuple((0.1 * y).coef)))
    spikes = [fault for fault in faults(section) if fault.kind == "spike"]
    assert [s.x for s in spikes] == pytest.approx([x(0.6) / size], abs=2e-3)


def test_side_that_runs_back_is_a_fold():
    """x turns back between t = 0.5 and 0.8, where dx/dt, t (t - 0.5)(t - 0.8), is negative."""
    t = np.polynomial.Polynomial([0, 1])
    x = (t * (t - 0.5) * (t - 0.8)).integ()
    section = Section("fold", PolynomialCurve(tuple((x / x(1.0)).coef), (0, -0.1, 0, 0.05)))
    folds = [fault for fault in faults(section) if fault.kind == "fold"]
    assert len(folds) == 1
    assert "lower" in folds[0].sentence
    assert folds[0].x == pytest.approx(x(0.5) / x(1.0), abs=1e-3)


def test_contour_that_is_not_finite_is_named():
    section = Section("nan", PolynomialCurve((0, 0, 1), (0, np.nan)))
    assert kinds(section) == ["not_finite"]


def test_crossings_of_a_chain_are_those_that_shapely_finds():
    rng = np.random.default_rng(11)
    for _ in range(40):
        chain = rng.random((25, 2))
        found = polygon.crossings(chain)
        pieces = [shapely.LineString(chain[[i, i + 1]]) for i in range(24)]
        wanted = [
            pieces[i].intersection(pieces[j])
            for i in range(24)
            for j in range(i + 2, 24)
            if pieces[i].crosses(pieces[j])
        ]
        assert len(found) == len(wanted)
        wanted = np.array([[p.x, p.y] for p in wanted])
        assert found[np.lexsort(found.T)] == pytest.approx(wanted[np.lexsort(wanted.T)], abs=1e-12)
