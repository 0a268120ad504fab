"""Facts of the trade: what everybody who works with sections takes for granted.

Common practice, no source: none of the figures here is measured. Where a fact does not hold, the
section stands in a list with the bounds between which it misses, and the test fails as well once
it holds, so that the entry goes.
"""

import math
from dataclasses import replace
from functools import cache

import numpy as np
import pytest
from scipy.integrate import quad

from optim.aerodynamics.medium import air
from optim.aerodynamics.operating_point import OperatingPoint
from optim.aerodynamics.sweep import sweep
from optim.geometry.naca import naca_section
from optim.problem.conditions import resolve
from optim.problem.problem import Problem
from optim.study.load import parse_study

REYNOLDS = 6e6

FORCES = ("cl", "cd", "cd_friction", "cd_pressure", "cm_quarter")

STALL_SWEEP = np.arange(2.0, 22.0)
"""Through the stall [deg]."""

NORMAL_RANGE = np.arange(-4.0, 8.5, 2.0)
"""Attached flow [deg]."""


def at(degrees, **more):
    return OperatingPoint(REYNOLDS, alpha=math.radians(degrees), **more)


@pytest.fixture(scope="module")
def swept(naca):
    """Return flows and derived quantities of a section, swept once a module."""

    @cache
    def found(number, *degrees, mach=0.0):
        return sweep(naca(number), at(0.0, mach=mach), np.radians(degrees).tolist())

    return found


# equal numbers, equal coefficients


STUDY = """\
study: equal-numbers
section:
  shape: cst
  coefficients: {{upper: 5, lower: 5}}
  baseline: naca:2412
  freedom: 0.1
  trailing_edge: 0.3 %
chord: {chord!r} m
air: {{altitude: {altitude!r} m, warmer_than_standard: {warmer!r} K}}
craft: {{mass: {mass!r} kg, wing_area: 1.5 m^2}}
conditions:
  cruise: {{speed: {speed!r} m/s}}
objectives:
  - {{maximise: lift_to_drag, at: cruise}}
  - {{minimise: nose_down_moment, at: cruise}}
constraints:
  - {{quantity: thickness, min: 10 %}}
"""


def test_equal_numbers_have_equal_coefficients_and_forces_in_the_ratio_of_q_c():
    """Two states of equal Re, M and cl, but of other speed, air and chord."""
    low, high = air(0.0, 0.0), air(3000.0, 12.0)
    speeds = (40.0, 40.0 * high.speed_of_sound / low.speed_of_sound)
    reynolds = 40.0 * 0.5 / low.kinematic_viscosity
    chords = (0.5, reynolds * high.kinematic_viscosity / speeds[1])
    masses = (60.0, 60.0 * high.density * speeds[1] ** 2 / (low.density * speeds[0] ** 2))
    flows, pressures = [], []
    for k, (altitude, warmer) in enumerate(((0.0, 0.0), (3000.0, 12.0))):
        text = STUDY.format(
            chord=chords[k], altitude=altitude, warmer=warmer, mass=masses[k], speed=speeds[k]
        )
        study = parse_study(text, "equal.yaml")
        problem = Problem.from_study(study)
        (state,) = resolve(study)
        flows.append(problem.analyse(problem.baseline_design, "cruise"))
        pressures.append(0.5 * state.density * state.speed**2)
        # level flight: the lift carries the weight
        assert pressures[k] * 1.5 * flows[k].cl == pytest.approx(masses[k] * 9.80665, rel=1e-6)
    one, other = flows
    assert one.converged
    assert chords[1] / chords[0] > 1.2
    assert other.point.reynolds == pytest.approx(one.point.reynolds, rel=1e-9)
    assert other.point.mach == pytest.approx(one.point.mach, rel=1e-9)
    for name in FORCES:
        assert getattr(other, name) == pytest.approx(getattr(one, name), rel=1e-6)
    q_c = [q * chord for q, chord in zip(pressures, chords, strict=True)]
    for name in ("cl", "cd"):
        force = [getattr(flow, name) * own for flow, own in zip(flows, q_c, strict=True)]
        assert force[1] / force[0] == pytest.approx(q_c[1] / q_c[0], rel=1e-6)


# the stagnation point


def at_stagnation(surface):
    """Pressure coefficient where the sides meet, by a parabola through two stations of each."""
    side = np.array(surface.side)
    near = np.concatenate([np.flatnonzero(side == name)[:2] for name in ("upper", "lower")])
    along = np.where(side[near] == "upper", -surface.s[near], surface.s[near])
    return float(np.polyfit(along, surface.cp[near], 2)[-1])


@pytest.mark.parametrize("number", ["0012", "2412", "4412", "23012"])
@pytest.mark.parametrize("degrees", [-3.0, 2.0, 8.0])
def test_the_pressure_coefficient_is_one_where_the_flow_stops(number, degrees, naca):
    flow = naca(number).flow(at(degrees))
    assert flow.converged
    assert flow.surface.cp.max() <= 1.0 + 1e-9
    assert at_stagnation(flow.surface) == pytest.approx(1.0, abs=3e-3)


def ideal_angle(number):
    """Angle at which a thin section has no suction at its nose: the mean slope [deg]."""
    if number.startswith("00"):
        return 0.0
    line = naca_section(number).curve.mean_line

    def slope(phi):
        return line.derivatives(np.array([0.5 * (1 - np.cos(phi))]), 1)[1][0]

    kink = np.arccos(1 - 2 * line.place)
    return math.degrees(quad(slope, 0, np.pi, points=[kink], epsabs=1e-10)[0] / np.pi)


NOSE_WITHIN = 0.7
"""Between the ideal angle and the one at which the flow stops at the nose [deg]."""

NOSE_MISSED = {"23012": (0.7, 1.0)}
"""Section -> least and greatest such angle today [deg]. The flow without a layer about 23012 stops
at the point farthest from the edge at 0.7 deg, too, where thin-section theory has 1.64: not an
error of the layers."""


@pytest.mark.parametrize("number", ["0012", "2412", "4412", "6412", "23012"])
def test_the_flow_stops_at_the_nose_at_the_ideal_angle(number, naca):
    """On the upper side at angles below, on the lower side at angles above."""
    ideal = ideal_angle(number)
    degrees = ideal + np.arange(-3.0, 3.05, 0.1)
    sides = [flow.stagnation_side for flow in naca(number).flows([at(d) for d in degrees])]
    above = sides.index("lower")
    assert sides == ["upper"] * above + ["lower"] * (len(sides) - above)
    away = abs(0.5 * (degrees[above - 1] + degrees[above]) - ideal)
    least, greatest = NOSE_MISSED.get(number, (0.0, NOSE_WITHIN))
    assert least <= away <= greatest


# lift and stall


def test_lift_of_4412(naca, swept):
    """Zero lift at -4 deg within 1, stall near 16 deg within 2.5."""
    _, derived = swept("4412", *NORMAL_RANGE)
    assert math.degrees(derived.alpha_zero_lift) == pytest.approx(-4.0, abs=1.0)
    peak = naca("4412").maximum_lift(at(0.0))
    assert peak.converged
    assert math.degrees(peak.alpha) == pytest.approx(16.0, abs=2.5)


@pytest.mark.parametrize("number", ["0012", "2412", "4412"])
def test_the_suction_peak_grows_and_moves_forward(number, swept):
    """From where it is a peak at the nose to the stall; its place is a node."""
    flows, derived = swept(number, *STALL_SWEEP)
    rising = [flow for flow in flows if flow.alpha <= derived.alpha_cl_max]
    assert len(rising) >= 12
    assert np.all(np.diff([flow.cp_min for flow in rising]) < 0.0)
    assert np.all(np.diff([flow.cp_min_x for flow in rising]) <= 0.0)
    assert rising[-1].cp_min_x < 0.1 * rising[0].cp_min_x


LATE = math.radians(4.0)
"""Angle past the peak of the lift within which the centre of pressure must have turned [rad]."""


@pytest.mark.parametrize("number", ["2412", "4412"])
def test_the_centre_of_pressure_moves_forward_to_the_stall_and_back_after_it(number, swept):
    """It turns after the peak of the lift: these sections stall gently from the edge, and lift
    falls before the loss of suction at the nose does."""
    flows, derived = swept(number, *STALL_SWEEP)
    assert all(flow.converged for flow in flows)
    place = np.array([flow.x_cp for flow in flows])
    alpha = np.array([flow.alpha for flow in flows])
    before = alpha <= derived.alpha_cl_max
    assert np.all(np.diff(place[before]) < 0.0)
    turn = int(np.argmin(place))
    assert alpha[turn] < derived.alpha_cl_max + LATE
    assert len(place) - turn > 2
    assert np.all(np.diff(place[turn:]) > 0.0)


# the aerodynamic centre


CENTRE, CENTRE_WITHIN = 0.25, 0.015

MOMENT_WITHIN = 0.005
"""What a constant moment may move: the scatter of tables of moments [-]."""

SECTIONS = ("0006", "0012", "0021", "2412", "4412", "4421", "6412", "23012")

MACHS = (0.0, 0.35)
"""Free-stream Mach numbers below 0.4. Thin sections turn sonic at the highest angle at 0.35; those
angles have no answer and are left out."""

CENTRE_MISSED = {
    ("0021", 0.0): (0.015, 0.022),
    ("0021", 0.35): (0.015, 0.033),
    ("4421", 0.0): (0.015, 0.024),
    ("4421", 0.35): (0.015, 0.032),
}
"""(section, Mach number) -> least and greatest distance of the centre from 25 % today [c]. At 21 %
thickness it comes out at 0.219 to 0.230; measured for 4421 is 0.238 (test of the handbook's rows):
the layers take too much off at the edge of thick sections. Not settled."""

MOMENT_MISSED = {
    ("0021", 0.35): (0.005, 0.006),
    ("2412", 0.35): (0.005, 0.008),
    ("4412", 0.0): (0.005, 0.009),
    ("4412", 0.35): (0.005, 0.018),
    ("4421", 0.0): (0.005, 0.008),
    ("4421", 0.35): (0.005, 0.010),
    ("6412", 0.0): (0.005, 0.020),
    ("6412", 0.35): (0.005, 0.032),
}
"""(section, Mach number) -> least and greatest departure of the moment from its mean today [-]. It
falls off at the upper end, where transition goes forward on the upper side."""


@pytest.mark.parametrize("mach", MACHS)
@pytest.mark.parametrize("number", SECTIONS)
def test_the_aerodynamic_centre_is_at_the_quarter_chord(number, mach, swept):
    _, derived = swept(number, *NORMAL_RANGE, mach=mach)
    away = abs(derived.aerodynamic_centre_x - CENTRE)
    least, greatest = CENTRE_MISSED.get((number, mach), (0.0, CENTRE_WITHIN))
    assert least <= away <= greatest


@pytest.mark.parametrize("mach", MACHS)
@pytest.mark.parametrize("number", SECTIONS)
def test_the_moment_about_the_aerodynamic_centre_is_constant(number, mach, swept):
    """Nose-down for positive camber, zero for a symmetric section."""
    flows, derived = swept(number, *NORMAL_RANGE, mach=mach)
    kept = [flow for flow in flows if flow.converged]
    assert len(kept) >= 4
    arm = derived.aerodynamic_centre_x - CENTRE
    moments = np.array([flow.cm_quarter + arm * flow.cl for flow in kept])
    away = float(np.max(np.abs(moments - moments.mean())))
    least, greatest = MOMENT_MISSED.get((number, mach), (0.0, MOMENT_WITHIN))
    assert least <= away <= greatest
    if number.startswith("00"):
        assert derived.cm_aerodynamic_centre == pytest.approx(0.0, abs=1e-3)
    else:
        assert derived.cm_aerodynamic_centre < -5e-3


@pytest.mark.parametrize("number", ["0006", "0012", "0021"])
def test_the_centre_of_pressure_of_a_symmetric_section_stays_put(number, swept):
    flows, _ = swept(number, *NORMAL_RANGE)
    places = [flow.x_cp for flow in flows if not math.isnan(flow.x_cp)]
    assert len(places) >= 5
    assert np.ptp(places) < 0.01


# what a trip costs


@pytest.mark.parametrize("cl", [0.2, 0.5, 0.8])
@pytest.mark.parametrize("number", ["0012", "2412", "4412"])
def test_a_trip_at_the_nose_costs_more_than_at_30_percent(number, cl, naca):
    free = OperatingPoint(3e6, cl=cl)
    smooth = naca(number).flow(free)
    for side in ("trip_upper", "trip_lower"):
        nose = naca(number).flow(replace(free, **{side: 0.02}))
        back = naca(number).flow(replace(free, **{side: 0.30}))
        assert nose.cd > 1.01 * back.cd
        assert back.cd >= smooth.cd * (1.0 - 1e-5)
