"""The outer flow against closed forms, published velocities and displaced contours."""

import math

import numpy as np
import pytest
from scipy.interpolate import CubicSpline
from scipy.optimize import fsolve

from optim.aerodynamics.compressibility import (
    compressed_pressure,
    compressed_speed,
    critical_pressure,
    tsien_parameter,
)
from optim.aerodynamics.evaluator import SectionEvaluator
from optim.aerodynamics.outer import Outer
from optim.geometry.naca import naca_section
from optim.geometry.section import section_from_coordinates
from optim.geometry.spacing import panel_nodes
from optim.outcomes import Outcome

CASES = [
    ("joukowski_sym12", 0),
    ("joukowski_sym12", 5),
    ("kt_sym12_te12", 0),
    ("kt_sym12_te12", 5),
    ("kt_cambered13_te15", 0),
    ("kt_cambered13_te15", 6),
    ("kt_cambered10_te8", 2),
    ("kt_cambered10_te8", 8),
    ("vandevooren_sym15_te18", 0),
    ("vandevooren_sym15_te18", 5),
]
"""Section and angle of attack [deg]; maps in importable/conformal.py."""


def speeds(outer, alpha):
    """Signed inviscid speeds at all nodes."""
    return math.cos(alpha) * outer.stream[:, 0] + math.sin(alpha) * outer.stream[:, 1]


def stagnation(outer, q):
    """The point on the polygon where the linear speed changes sign."""
    j = int(np.flatnonzero((q[: outer.n - 1] < 0) & (q[1 : outer.n] >= 0))[0])
    f = -q[j] / (q[j + 1] - q[j])
    return np.array(
        [(1 - f) * outer.x[j] + f * outer.x[j + 1], (1 - f) * outer.y[j] + f * outer.y[j + 1]]
    )


@pytest.fixture(scope="module")
def solved(exact_sections):
    """(name, panels) -> evaluator on nodes even in the angle on the circle."""
    kept = {}

    def of(name, panels):
        if (name, panels) not in kept:
            kept[name, panels] = SectionEvaluator(exact_sections[name][0].nodes(panels))
        return kept[name, panels]

    return of


@pytest.fixture(scope="module")
def speed_error(exact_sections, solved):
    def of(name, panels, alpha):
        section = exact_sections[name][0]
        outer = solved(name, panels).outer
        middle = (outer.x > 0.1) & (outer.x < 0.9)
        exact = section.speed(section.angles(panels)[middle], alpha)
        return np.max(np.abs(speeds(outer, alpha)[: outer.n][middle] - exact))

    return of


@pytest.mark.parametrize(("name", "degrees"), CASES)
def test_maps_agree_with_a_separate_program(name, degrees, exact_sections, table):
    """The judge is judged: the maps written here against tables of another program."""
    section, alpha = exact_sections[name][0], math.radians(degrees)
    rows = table(f"exact_sections/{name}.csv")
    assert section.nodes(160) == pytest.approx(np.c_[rows["x"], rows["y"]], abs=1e-9)
    inner = rows[1:-1]
    found = section.speed(inner["theta_rad"], alpha)
    assert found == pytest.approx(inner[f"speed_a{degrees}"], abs=1e-7)
    names = table("exact_sections/summary.csv", None)
    row = next(r for r in names if r["case"] == name and r["alpha_deg"] == degrees)
    assert section.lift(alpha) == pytest.approx(row["cl"], abs=1e-9)
    assert section.moment(alpha) == pytest.approx(row["cm_c4"], abs=1e-9)


@pytest.mark.parametrize(("name", "degrees"), CASES)
def test_exact_sections_at_160_panels(name, degrees, exact_sections, solved, speed_error):
    section, alpha = exact_sections[name][0], math.radians(degrees)
    evaluator = solved(name, 160)
    flow = evaluator.inviscid(alpha=alpha)
    exact = section.stagnation(alpha)
    assert flow.cl == pytest.approx(section.lift(alpha), rel=3e-4, abs=1e-9)
    assert speed_error(name, 160, alpha) < 1e-3
    assert flow.cm_quarter == pytest.approx(section.moment(alpha), abs=5e-4)
    assert flow.cp_min == pytest.approx(section.suction_peak(alpha), rel=0.015)
    assert flow.stagnation_x == pytest.approx(exact[0], abs=3e-4)
    found = stagnation(evaluator.outer, speeds(evaluator.outer, alpha))
    assert np.linalg.norm(found - exact) < 3e-4


@pytest.mark.parametrize(("name", "degrees"), CASES)
def test_peak_and_stagnation_at_320_panels(name, degrees, exact_sections, solved):
    section, alpha = exact_sections[name][0], math.radians(degrees)
    evaluator = solved(name, 320)
    flow = evaluator.inviscid(alpha=alpha)
    exact = section.stagnation(alpha)
    assert flow.cp_min == pytest.approx(section.suction_peak(alpha), rel=0.0075)
    assert flow.stagnation_x == pytest.approx(exact[0], abs=1.5e-4)
    found = stagnation(evaluator.outer, speeds(evaluator.outer, alpha))
    assert np.linalg.norm(found - exact) < 1.5e-4


@pytest.mark.parametrize(("name", "degrees"), CASES)
def test_exact_sections_on_the_panels_of_the_tool(name, degrees, exact_sections):
    """The same sections as a user has them, points of a file, at the tool's own spacing."""
    exact, alpha = exact_sections[name][0], math.radians(degrees)
    section, _ = section_from_coordinates(exact.nodes(1600), name)
    flow = SectionEvaluator(panel_nodes(section, 160)).inviscid(alpha=alpha + section.rotation)
    assert flow.cl == pytest.approx(exact.lift(alpha), rel=3e-4, abs=1e-6)
    assert flow.cm_quarter == pytest.approx(exact.moment(alpha), abs=5e-4)
    assert flow.cp_min == pytest.approx(exact.suction_peak(alpha), rel=0.005)


@pytest.mark.parametrize(("name", "degrees"), CASES)
def test_observed_order_of_the_speed(name, degrees, speed_error):
    """From 80 to 320 panels, greatest error between 10 and 90 % of the chord."""
    alpha = math.radians(degrees)
    order = math.log(speed_error(name, 80, alpha) / speed_error(name, 320, alpha), 4)
    assert order >= 1.8


@pytest.mark.parametrize(("name", "degrees"), [case for case in CASES if "cambered" in case[0]])
def test_observed_order_of_the_lift(name, degrees, exact_sections, solved):
    """On the symmetric sections the error of the lift is below 3e-5 already at 80 panels."""
    section, alpha = exact_sections[name][0], math.radians(degrees)
    errors = [
        abs(solved(name, panels).inviscid(alpha=alpha).cl - section.lift(alpha))
        for panels in (80, 320)
    ]
    assert math.log(errors[0] / errors[1], 4) >= 1.8


@pytest.mark.parametrize("thickness", [0.1, 0.5, 1.0])
def test_ellipse_with_the_rear_stagnation_point_at_its_end(thickness):
    """Exact: q = (1 + t) sin(phi) / |z'| at zero angle, cl = 2 pi (1 + t) sin(alpha); t = 1 is the
    circle. Mapping of the circle, Milne-Thomson, Theoretical Aerodynamics (from memory)."""
    phi = np.linspace(0.0, 2 * np.pi, 241)
    nodes = np.c_[0.5 + 0.5 * np.cos(phi), 0.5 * thickness * np.sin(phi)]
    nodes[-1] = nodes[0]
    evaluator = SectionEvaluator(nodes)
    scale = np.hypot(np.sin(phi), thickness * np.cos(phi))
    exact = -(1 + thickness) * np.sin(phi) / scale
    found = speeds(evaluator.outer, 0.0)[:241]
    middle = (nodes[:, 0] > 0.02) & (nodes[:, 0] < 0.98)
    assert found[middle] == pytest.approx(exact[middle], abs=2e-3)
    flow = evaluator.inviscid(alpha=math.radians(3))
    assert flow.cl == pytest.approx(2 * np.pi * (1 + thickness) * math.sin(flow.alpha), rel=2e-3)


def test_thin_cambered_section_tends_to_thin_aerofoil_theory(naca):
    """NACA 24xx: alpha_0 = -2.0772 deg, cm = -0.05312, slope 2 pi (Glauert, The Elements of
    Aerofoil and Airscrew Theory; by his integrals), taken to zero thickness from 2 and 4 %."""
    zero, moment, slope = [], [], []
    for number in ("2402", "2404"):
        evaluator = naca(number)
        flow = evaluator.inviscid(cl=0.0)
        zero.append(math.degrees(flow.alpha))
        moment.append(flow.cm_quarter)
        lifts = [evaluator.inviscid(alpha=math.radians(a)).cl for a in (-1, 1)]
        slope.append((lifts[1] - lifts[0]) / math.radians(2))
    assert 2 * zero[0] - zero[1] == pytest.approx(-2.0772, abs=0.02)
    assert 2 * moment[0] - moment[1] == pytest.approx(-0.05312, abs=5e-4)
    assert 2 * slope[0] - slope[1] == pytest.approx(2 * math.pi, rel=5e-3)


TABLE_TOLERANCE = {"0006": 0.015, "0009": 0.015, "0012": 0.015, "0015": 0.025, "0021": 0.035}
"""Relative, of (v/V)^2: the hand computations of the report are off by up to 1.2 % at 12 %, 2.2 %
at 15 % and 3.4 % at 21 % against a fine panel method apart from this program."""


@pytest.mark.published
@pytest.mark.parametrize("number", list(TABLE_TOLERANCE))
def test_velocities_of_the_four_digit_thickness_forms(number, table):
    """NACA Report 824, appendix. At 0.5 % chord the table is off by 0.016 (0012) to 0.07 (0006):
    there, as everywhere ahead of the edge, a separate panel method judges. At 95 % the answer hangs
    on how the blunt base is modelled: 0012 is 1.5 % below the table, so 2 % is asked there."""
    outer = Outer(panel_nodes(naca_section(number), 320))
    upper = slice(outer.nose, None, -1)
    square = CubicSpline(outer.x[upper], speeds(outer, 0.0)[: outer.n][upper] ** 2)
    every = table("naca4_theory_velocity.csv", None)
    rows = [r for r in every if f"{r['section']:04d}" == number and 0 < r["x_percent"] < 100]
    assert len(rows) == 17
    for row in rows:
        found = float(square(row["x_percent"] / 100))
        if row["x_percent"] > 1:
            expected = row["v_over_V_squared_table"]
            rel = max(TABLE_TOLERANCE[number], 0.02 if row["x_percent"] == 95 else 0.0)
            assert found == pytest.approx(expected, rel=rel), row["x_percent"]
        if row["x_percent"] <= 70:
            computed = row["v_over_V_squared_own_panel_check"]
            assert found == pytest.approx(computed, abs=5e-3), row["x_percent"]


def test_karman_and_tsien_by_hand():
    """M = 0.5, Cp0 = -1: B = 0.8660, Cp = -1/(0.8660 - 0.25/1.8660/2) = -1.2515."""
    cp, slope = compressed_pressure(-1.0, 0.5)
    assert cp == pytest.approx(-1.2515, abs=5e-5)
    assert slope == pytest.approx(
        (compressed_pressure(-1 + 1e-6, 0.5)[0] - compressed_pressure(-1 - 1e-6, 0.5)[0]) / 2e-6,
        rel=1e-8,
    )


def test_corrected_speed_and_pressure_agree_through_the_energy_equation():
    """Isentropic pressure of the corrected speed at M = 0.5, Cp0 = -1 is -1.2394 by hand."""
    u, _ = compressed_speed(math.sqrt(2.0), tsien_parameter(0.5))
    ratio = (1 + 0.2 * 0.25 * (1 - u * u)) ** 3.5
    assert (ratio - 1) / (0.7 * 0.25) == pytest.approx(-1.2394, abs=2e-4)
    assert compressed_speed(1.0, tsien_parameter(0.5))[0] == pytest.approx(1.0, abs=1e-15)


@pytest.mark.parametrize("mach", [0.3, 0.5, 0.7])
def test_slope_of_the_corrected_speed(mach):
    k = tsien_parameter(mach)
    for q in (0.2, 0.9, 1.3):
        high, low = (math.log(compressed_speed(q * math.exp(h), k)[0]) for h in (1e-6, -1e-6))
        assert compressed_speed(q, k)[1] == pytest.approx((high - low) / 2e-6, rel=1e-7)


@pytest.mark.parametrize("mach", [0.3, 0.5, 0.676])
def test_critical_pressure_is_that_of_sonic_flow(mach):
    """p*/p0 = 0.52828 (isentropic tables, NACA Report 1135)."""
    total = (1 + 0.2 * mach**2) ** 3.5
    expected = (0.5282818 * total - 1) / (0.7 * mach**2)
    assert critical_pressure(mach) == pytest.approx(expected, rel=1e-6)
    assert critical_pressure(0.0) == -math.inf


def test_inviscid_flow_says_where_it_turns_sonic(naca):
    evaluator = naca("0012")
    assert evaluator.inviscid(alpha=0.0, mach=0.5).outcome is Outcome.CONVERGED
    sonic = evaluator.inviscid(alpha=math.radians(6), mach=0.6)
    assert sonic.outcome is Outcome.LOCAL_SONIC
    assert math.isnan(sonic.cl)
    assert sonic.surface is None


@pytest.mark.parametrize("mach", [0.0, 0.4])
def test_given_lift_is_met(mach, naca):
    flow = naca("2412").inviscid(cl=0.5, mach=mach)
    assert flow.cl == pytest.approx(0.5, abs=1e-10)
    again = naca("2412").inviscid(alpha=flow.alpha, mach=mach)
    assert again.cl == pytest.approx(0.5, abs=1e-10)
    assert naca("2412").inviscid(cl=20.0).outcome is Outcome.OUT_OF_RANGE


def test_compressed_lift_follows_prandtl_and_glauert_at_small_lift(naca):
    """Thin section, small angle: cl = cl0 / sqrt(1 - M^2) to the first order."""
    evaluator, alpha = naca("0006"), math.radians(1)
    ratio = evaluator.inviscid(alpha=alpha, mach=0.4).cl / evaluator.inviscid(alpha=alpha).cl
    assert ratio == pytest.approx(1 / math.sqrt(1 - 0.16), rel=0.015)


def test_mass_defect_displaces_the_contour():
    """Lighthill's equivalence: a source sheet d(q delta)/ds acts as a contour thicker by delta.

    The panel method on the thicker contour judges. There the speed is taken delta further out,
    where irrotational flow along a wall of curvature kappa is slower by kappa delta q.
    """
    outer = Outer(panel_nodes(naca_section("2412"), 160))
    alpha = math.radians(3)
    q = speeds(outer, alpha)
    n, length = outer.n, outer.s[-1]
    delta = 2e-4 * np.sin(np.pi * outer.s / length) ** 2
    spline = CubicSpline(outer.s, np.c_[outer.x, outer.y])
    d1, d2 = spline(outer.s, 1), spline(outer.s, 2)
    norm = np.hypot(d1[:, 0], d1[:, 1])
    outward = np.c_[d1[:, 1], -d1[:, 0]] / norm[:, None]
    kappa = (d1[:, 0] * d2[:, 1] - d1[:, 1] * d2[:, 0]) / norm**3
    thicker = Outer(np.c_[outer.x, outer.y] + delta[:, None] * outward)
    change = speeds(thicker, alpha)[:n] - q[:n]
    M = np.zeros(outer.total)
    M[:n] = q[:n] * delta
    predicted = (outer.influence @ M)[:n] - kappa * delta * q[:n]
    middle = (outer.x > 0.05) & (outer.x < 0.97)
    assert np.max(np.abs(change[middle])) > 5e-4
    worst = np.max(np.abs(predicted - change)[middle])
    assert worst < 0.02 * np.max(np.abs(change[middle]))


def test_influence_does_not_depend_on_the_stagnation_point():
    """Signed mass on one and the same matrix: the check above, at an angle with another sign."""
    outer = Outer(panel_nodes(naca_section("0012"), 160))
    flipped = Outer(np.c_[outer.x, -outer.y][::-1].copy())
    n, w = outer.n, outer.total - outer.n
    order = np.r_[np.arange(n - 1, -1, -1), np.arange(n, outer.total)]
    sign = np.r_[-np.ones(n), np.ones(w)]
    mirrored = sign[:, None] * flipped.influence[np.ix_(order, order)] * sign[None, :]
    near = slice(0, n)
    # the wake follows the streamline at +4 degrees in both cases: compare the contour's own block
    assert mirrored[near, near] == pytest.approx(outer.influence[near, near], abs=1e-6)


@pytest.mark.parametrize("name", ["kt_cambered13_te15", "joukowski_sym12"])
def test_wake_speeds_follow_the_exact_flow(name, exact_sections, solved):
    """Along the wake line, by the inverse of the map, beyond the first few steps from the edge."""
    section = exact_sections[name][0]
    outer = solved(name, 160).outer
    # the angle without lift, whose streamline the wake follows
    alpha = outer.angle_of_lift(0.0)
    a = alpha + section.turn
    x, y = outer.xw, outer.yw
    found = speeds(outer, alpha)[outer.n :]
    circulation = 4 * np.pi * section.radius * math.sin(a - section.edge_angle)
    for k in range(4, len(x) - 1):
        z = (x[k] + 1j * y[k]) * section.chord * np.exp(1j * section.turn) + section.nose

        def miss(p, z=z):
            gap = section.map(np.array([complex(*p)]))[0][0] - z
            return [gap.real, gap.imag]

        zeta = complex(*fsolve(miss, [1.0 + x[k] - 0.9, 0.0], xtol=1e-12))
        arm = zeta - section.centre
        w = np.exp(-1j * a) - section.radius**2 * np.exp(1j * a) / arm**2
        w = (w + 1j * circulation / (2 * np.pi * arm)) / section.map(np.array([zeta]))[1][0]
        velocity = np.conj(w * np.exp(1j * section.turn))
        before = np.array([x[k] - x[k - 1], y[k] - y[k - 1]])
        after = np.array([x[k + 1] - x[k], y[k + 1] - y[k]])
        along = before / np.linalg.norm(before) + after / np.linalg.norm(after)
        along /= np.linalg.norm(along)
        exact = velocity.real * along[0] + velocity.imag * along[1]
        assert found[k] == pytest.approx(exact, abs=2e-3), x[k]
        # and the line is a streamline at this angle
        assert abs(velocity.real * along[1] - velocity.imag * along[0]) < 5e-3


def test_sources_of_a_wake_behind_a_thin_section():
    """A wake that thickens evenly from a to b: u = (sigma/2 pi) ln((x - a)/(b - x)) on the axis,
    and a thin symmetric section in its plane does not answer (Katz & Plotkin, chapter 3)."""
    outer = Outer(panel_nodes(naca_section("0002"), 160))
    flat = Outer(np.c_[outer.x, outer.y])
    n, sw = flat.n, flat.sw
    M = np.zeros(flat.total)
    first, last = 6, len(sw) - 1
    M[n:] = 0.01 * np.clip(sw - sw[first], 0.0, None)
    found = (flat.influence @ M)[n:]
    a, b = sw[first], sw[last]
    for k in range(first + 2, last - 2):
        exact = 0.01 / (2 * np.pi) * math.log((sw[k] - a) / (b - sw[k]))
        assert found[k] == pytest.approx(exact, abs=4e-5), sw[k]


def test_wrong_nodes_are_refused():
    with pytest.raises(ValueError, match=r"shape \(panels \+ 1, x, y = 2\)"):
        SectionEvaluator(np.zeros((5, 3)))
    with pytest.raises(ValueError, match="finite"):
        SectionEvaluator(np.full((5, 2), np.nan))
